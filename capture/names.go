package capture

import (
	"slices"
	"strings"
	"unicode"
)

// A heading is what stands above the columns: their names and units.
type heading struct {
	namesLine, unitsLine int // 0: none
	names                []string
	units                []unit // base "" where none is given
}

// findNames looks for the names row and the units row in the preamble, from
// the samples upwards: the nearest line that can name the columns.
func findNames(h *head, p *preamble) heading {
	hd := heading{names: make([]string, len(h.kinds)), units: make([]unit, len(h.kinds))}
	adjacent := true // only blank lines and the units row lie between
	for i := h.first - 1; i >= 0; i-- {
		cells := h.headingCells(p, h.lines[i].text)
		switch {
		case allBlank(cells):
		case h.unitsRow(cells):
			if hd.unitsLine == 0 && adjacent {
				hd.unitsLine = h.lines[i].number
				h.place(cells, func(col int, text string) { hd.units[col], _ = parseUnit(text) })
			}
		case h.namesRow(cells, adjacent):
			hd.namesLine = h.lines[i].number
			h.place(cells, func(col int, text string) {
				name, u, ok := splitUnit(text)
				if !ok {
					u, ok = unitAsName(text)
				}
				if hd.names[col] = name; ok {
					hd.units[col] = u
				}
			})
			p.readBelow(h, i, cells)
			return hd
		default:
			adjacent = false
		}
	}
	return hd
}

// headingCells cuts a line that may be a heading. In a file separated by
// blanks a name may hold single blanks, or its unit in brackets stand apart.
func (h *head) headingCells(p *preamble, text []byte) []cell {
	if h.delim != ' ' {
		return p.cellsOf(text)
	}
	words := h.split(stripComment(text), nil)
	var cells []cell
	for _, w := range words {
		if n := len(cells); n > 0 && len(w.text) > 1 && (w.text[0] == '(' || w.text[0] == '[') {
			joined := append(append(append([]byte{}, cells[n-1].text...), ' '), w.text...)
			cells[n-1] = cell{text: joined}
			continue
		}
		cells = append(cells, w)
	}
	if len(cells) != len(h.kinds) {
		if other := p.cellsOf(text); len(other) == len(h.kinds) {
			return other
		}
	}
	return cells
}

// unitsRow reports a line that holds units, and at least one, above columns of
// numbers. A word or a number beside it may be metadata.
func (h *head) unitsRow(cells []cell) bool {
	found := 0
	for col, c := range cells {
		if c.blank() || col >= len(h.kinds) || !h.kinds[col].numeric() {
			continue
		}
		if isUnit(toUTF8(c.text)) {
			found++
		} else if !indexWord(toUTF8(c.text)) {
			return false
		}
	}
	return found > 0
}

// indexWord reports a name of a column that counts the samples.
func indexWord(name string) bool {
	switch fold(name) {
	case "sequence", "seq", "index", "idx", "sample", "samples", "point", "points", "no", "nr", "n", "number", "count", "samplenumber", "":
		return true
	}
	return false
}

// namesRow reports a line that can name the columns: words, no values, one for
// each channel at least. It is believed when it stands next to the samples,
// when it says time, or when its corner is blank as a table's may be.
func (h *head) namesRow(cells []cell, adjacent bool) bool {
	words, numbers := 0, 0
	says := false
	for _, c := range cells {
		if c.blank() {
			continue
		}
		text := toUTF8(c.text)
		if strings.HasSuffix(text, ":") || strings.ContainsRune(text, '=') || len(text) > 60 {
			return false
		}
		switch k := h.kindOf(c); {
		case k == kindNumber && strings.IndexByte(text, '.') < 0 && len(text) < 4:
			numbers++ // a channel that is called 1
		case k == kindMissing && unicode.IsLetter(rune(text[0])):
			numbers++ // one that is called out
		case k != kindText:
			return false
		default:
			words++
			says = says || saysTime(text)
		}
	}
	if words == 0 || words+numbers < h.fewestNames() || h.entryLine(cells) || words == 1 && numbers == 0 && sectionWord(cells) {
		return false
	}
	return adjacent || says || cells[0].blank()
}

// unitAsName reads a name that is a unit itself: seconds, Volt, V. A single A
// is the first of several channels rather than a current.
func unitAsName(text string) (unit, bool) {
	u, ok := parseUnit(text)
	return u, ok && (u.base == "V" || len(text) > 2 || u.base == "s" && len(text) > 1)
}

// saysTime reports a heading that says time by its name or unit.
func saysTime(text string) bool {
	name, u, _ := splitUnit(text)
	return timeName(name) || u.base == "s"
}

// sectionWord reports a line that only announces the samples.
func sectionWord(cells []cell) bool {
	for _, c := range cells {
		switch fold(toUTF8(c.text)) {
		case "data", "values", "samples", "begin", "waveform", "waveformdata", "curve", "rawdata":
			return true
		}
	}
	return false
}

// entryLine reports a line that is an entry of the preamble rather than a
// heading: it starts with a known key, and no column of samples can be meant.
func (h *head) entryLine(cells []cell) bool {
	for _, c := range cells {
		if c.blank() {
			continue
		}
		e, rest, ok := readKey(toUTF8(c.text))
		return ok && (rest != "" || e.means != meansSource && e.means != meansInterval && e.means != meansCount)
	}
	return false
}

// fewestNames is the number of names below which a line is prose: all numeric
// columns but the first, which may be a time column without a name.
func (h *head) fewestNames() int {
	n := h.numericColumns()
	if n > 1 {
		n--
	}
	return n
}

func (h *head) numericColumns() int {
	n := 0
	for _, k := range h.kinds {
		if k.numeric() || k == kindMissing {
			n++
		}
	}
	return n
}

// place gives each text of a heading its column: by position; but where the
// positions miss a column of numbers and the texts are as many as the channels,
// they name the last columns in order.
func (h *head) place(cells []cell, set func(col int, text string)) {
	var numeric []int
	missed := false
	for col, k := range h.kinds {
		if k.numeric() || k == kindMissing {
			numeric = append(numeric, col)
			missed = missed || len(numeric) > 1 && (col >= len(cells) || cells[col].blank())
		}
	}
	var texts []string
	for _, c := range cells {
		if !c.blank() {
			texts = append(texts, toUTF8(c.text))
		}
	}
	if missed && len(texts) >= len(numeric)-1 && len(texts) <= len(numeric) && !saysTime(texts[0]) {
		for i, text := range texts {
			set(numeric[len(numeric)-len(texts)+i], text)
		}
		return
	}
	for col, c := range cells {
		if !c.blank() && col < len(h.kinds) {
			set(col, toUTF8(c.text))
		}
	}
}

// readBelow reads entries whose key stands in the names row and whose value
// stands below it, in the units row or the first row of samples.
func (p *preamble) readBelow(h *head, names int, header []cell) {
	for col, c := range header {
		if c.blank() || isDelta(toUTF8(c.text), header) {
			continue
		}
		e, rest, ok := readKey(toUTF8(c.text))
		if !ok || rest != "" || e.means == meansSource || !h.aside(col) {
			continue
		}
		for _, l := range h.lines[names+1 : min(h.first+2, len(h.lines))] {
			cells := h.split(l.text, nil)
			if col < len(cells) && h.kindOf(cells[col]).numeric() {
				e.line, e.column = l.number, col
				e.values = []located{{toUTF8(cells[col].text), col}}
				p.entries = append(p.entries, e)
				break
			}
		}
	}
}

// isDelta reports a heading dt beside a heading t: a deviation, no interval.
func isDelta(text string, header []cell) bool {
	rest, ok := strings.CutPrefix(text, "d")
	return ok && slices.ContainsFunc(header, func(c cell) bool { return string(c.text) == rest })
}

// aside reports a column that is none of samples: it holds a number in the
// first rows only, or the same number in all of them.
func (h *head) aside(col int) bool {
	if col >= len(h.kinds) || !h.kinds[col].numeric() {
		return true
	}
	first, same := "", true
	h.eachRow(func(_ line, cells []cell) {
		if col >= len(cells) {
			return
		}
		if first == "" {
			first = string(cells[col].text)
		}
		same = same && first == string(cells[col].text)
	})
	return same
}
