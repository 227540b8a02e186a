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
// the samples upwards: of the lines that can name the columns, the one with the
// most evidence, and of equals the nearest.
func findNames(h *head, p *preamble) heading {
	hd := heading{names: make([]string, len(h.kinds)), units: make([]unit, len(h.kinds))}
	best, found := -1, believed-1
	below := 0 // lines of words between this one and the samples
	for i := h.first - 1; i >= 0 && found < certain; i-- {
		cells := h.headingCells(p, h.lines[i].text)
		if ruled(cells) {
			continue
		}
		if h.unitsRow(cells) {
			if hd.unitsLine == 0 && below < nearby {
				hd.unitsLine = h.lines[i].number
				h.place(cells, func(col int, text string) { hd.units[col], _ = parseUnit(text) })
				below = 0
			}
			continue
		}
		if e := h.evidence(cells, below); e > found {
			best, found = i, e
		}
		below++
	}
	if best >= 0 {
		hd.name(h, p, best)
	}
	return hd
}

// name takes the names, and the units that stand beside them, from line i.
func (hd *heading) name(h *head, p *preamble, i int) {
	cells := h.headingCells(p, h.lines[i].text)
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
}

// ruled reports a line of blank cells and strokes, as below a heading.
func ruled(cells []cell) bool {
	for _, c := range cells {
		if !c.blank() && !isRule(c.text) {
			return false
		}
	}
	return true
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

// How much speaks for a line as the heading.
const (
	nearby   = 3 // lines of words with as many between them and the samples do not stand next to them
	believed = 3 // next to the samples and nothing else
	certain  = 9 // no other line will have more
)

// evidence says how much speaks for a line as the names of the columns: that it
// stands next to the samples, says time, gives units, has a blank corner as a
// table's may be, has a cell for each column and no sentence in any. It is 0 for
// a line that cannot name them: words, no values, one for each channel at least.
func (h *head) evidence(cells []cell, below int) int {
	if !h.namesRow(cells) {
		return 0
	}
	e := max(0, nearby-below)
	says, units, sentence, filled := false, false, false, 0
	for _, c := range cells {
		if c.blank() {
			continue
		}
		text := toUTF8(c.text)
		name, u, ok := splitUnit(text)
		filled++
		if len(strings.Fields(name)) > 3 {
			sentence = true
			continue
		}
		says = says || saysTime(text) && (below < nearby || u.base == "s" || exactTimeName(name))
		units = units || ok
	}
	if below >= nearby && !says && !cells[0].blank() {
		return 0
	}
	for _, v := range []struct {
		is     bool
		weight int
	}{
		{says, 4}, {cells[0].blank(), 3}, {units, 2}, {filled == h.numericColumns(), 1}, {!sentence, 1},
	} {
		if v.is {
			e += v.weight
		}
	}
	return e
}

// namesRow reports a line that can name the columns.
func (h *head) namesRow(cells []cell) bool {
	words, numbers := 0, 0
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
		}
	}
	return words > 0 && words+numbers >= h.fewestNames() && !h.entryLine(cells) && (words > 1 || numbers > 0 || !sectionWord(cells))
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
