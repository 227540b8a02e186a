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
		if ruled(cells) || h.numericColumns() == 1 && isEntry(h.lines[i].text) {
			continue
		}
		if h.unitsRow(cells) {
			if hd.unitsLine == 0 && below < nearby {
				hd.takeUnits(h, p, i)
				below = 0
			}
			continue
		}
		if e := h.evidence(cells, below); e > found {
			best, found = i, e
		}
		below++
	}
	if best >= 0 && found <= unsaid && h.listed(p, best, found) {
		best = -1
	}
	if best >= 0 {
		hd.name(h, p, best)
		if hd.unitsLine == 0 && best > 0 && !slices.ContainsFunc(hd.units, func(u unit) bool { return u.base != "" }) {
			hd.takeUnits(h, p, best-1)
		}
	}
	return hd
}

// listed reports a line like the one above it, and both above a column that
// rises as time does, which no heading fails to say: the last entry of a list.
func (h *head) listed(p *preamble, i, evidence int) bool {
	first := slices.IndexFunc(h.kinds, kind.numeric)
	if i == 0 || first < 0 || h.numericColumns() < 2 {
		return false
	}
	if cells := h.headingCells(p, h.lines[i].text); first < len(cells) && !cells[first].blank() && indexWord(toUTF8(cells[first].text)) {
		return false // it says that the column counts
	}
	c := h.look(first)
	rising, even := c.rises()
	return rising && even && !c.counts() && h.evidence(h.headingCells(p, h.lines[i-1].text), 0) >= evidence
}

// takeUnits takes line i as the units row, if it is one.
func (hd *heading) takeUnits(h *head, p *preamble, i int) {
	if cells := h.headingCells(p, h.lines[i].text); h.unitsRow(cells) {
		hd.unitsLine = h.lines[i].number
		h.place(cells, func(col int, text string) { hd.units[col], _ = unitBeside("time", text) })
	}
}

// name takes the names, and the units that stand beside them, from line i.
func (hd *heading) name(h *head, p *preamble, i int) {
	cells := h.headingCells(p, h.lines[i].text)
	hd.namesLine = h.lines[i].number
	p.entries = slices.DeleteFunc(p.entries, func(e entry) bool { return e.line == hd.namesLine && !e.weak }) // names, not keys
	h.place(cells, func(col int, text string) {
		name, u, ok := splitUnit(text)
		if !ok {
			u, ok = unitAsName(text)
		}
		if hd.names[col] = name; ok {
			hd.units[col] = u
		}
	})
	p.readBelowNames(h, i, cells)
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

// unitsRow reports a line that holds units, and at least one, above columns of
// numbers. A word or a number beside it may be metadata.
func (h *head) unitsRow(cells []cell) bool {
	found := 0
	for col, c := range cells {
		if c.blank() || col >= len(h.kinds) || !h.kinds[col].numeric() {
			continue
		}
		if text := toUTF8(c.text); isUnit(text) {
			found++
		} else if _, long := parseTimeUnit(text); !long && !indexWord(text) {
			return false
		}
	}
	return found > 0
}

// indexWord reports a name of a column that counts the samples.
func indexWord(name string) bool {
	switch fold(name) {
	case "sequence", "seq", "index", "idx", "sample", "samples", "point", "points", "no", "nr", "n", "number", "count", "row", "rows",
		"samplenumber", "sampleno", "samplenr", "sampleindex", "pointnumber", "pointno", "rownumber", "":
		return true
	}
	return false
}

// How much speaks for a line as the heading.
const (
	nearby   = 3 // lines of words with as many between them and the samples do not stand next to them
	believed = 3 // next to the samples and nothing else
	unsaid   = 6 // neither time nor units nor a blank corner
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
	says, units, sentence, filled, times := false, false, false, 0, 0
	over := false // a name over a column that holds nothing
	for col, c := range cells {
		if c.blank() {
			continue
		}
		text := toUTF8(c.text)
		name, u, ok := splitUnit(text)
		filled++
		over = over || col >= len(h.kinds) || h.kinds[col] == kindBlank
		if len(strings.Fields(name)) > 3 {
			sentence = true
			continue
		}
		if col > 0 && timeName(name) {
			times++
		}
		says = says || saysTime(text) && (below < nearby || u.base == "s" || exactTimeName(name))
		units = units || ok
	}
	if times > 1 && times == filled-1 {
		return 0 // a kind of axis, and that of each channel
	}
	if below >= nearby && !says && !cells[0].blank() || filled > 1 && h.numericColumns() == 1 && over {
		return 0
	}
	for _, v := range []struct {
		is     bool
		weight int
	}{
		{says, 4}, {cells[0].blank(), 3}, {units, 2}, {filled == h.numericColumns(), 1}, {!sentence, 1}, {!over, 1},
	} {
		if v.is {
			e += v.weight
		}
	}
	return e
}

// namesRow reports a line that can name the columns.
func (h *head) namesRow(cells []cell) bool {
	words, numbers, says := 0, 0, false
	for i, c := range cells {
		text := toUTF8(c.text)
		if _, _, rate := per(text); i > 0 && h.kindOf(cells[i-1]) == kindNumber && (rate || isUnit(text)) {
			return false // so many of a unit
		}
		if c.blank() || h.delim != ' ' && i < len(h.kinds) && len(cells) >= len(h.kinds) && h.kinds[i] == kindBlank && h.numericColumns() > 1 {
			continue // what stands above nothing names nothing
		}
		says = says || saysTime(text)
		if _, value, _ := strings.Cut(text, ":"); strings.HasSuffix(text, ":") || strings.ContainsRune(text, '=') || len(text) > 60 ||
			h.kindOf(cell{text: []byte(strings.TrimSpace(value))}).numeric() {
			return false
		}
		switch k := h.kindOf(c); {
		case k == kindNumber && strings.IndexByte(text, '.') < 0 && len(text) < 3:
			numbers++ // a channel that is called 1
		case k == kindMissing && unicode.IsLetter(rune(text[0])):
			words++ // one that is called out
		case k != kindText:
			return false
		default:
			words++
		}
	}
	return words > 0 && (numbers == 0 || says || cells[0].blank()) && words+numbers >= h.fewestNames() && !h.entryLine(cells) && (words > 1 || numbers > 0 || !sectionWord(cells))
}

// unitAsName reads a name that is a unit itself: seconds, Volt, V. A single A
// is the first of several channels rather than a current.
func unitAsName(text string) (unit, bool) {
	u, ok := parseUnit(text)
	if !ok && len(text) > 3 { // min may be the least of something
		u, ok = parseTimeUnit(text)
	}
	return u, ok && (u.base == "V" || len(text) > 2 || u.base == "s" && len(text) > 1)
}

// saysTime reports a heading that says time by its name or unit.
func saysTime(text string) bool {
	if u, ok := parseUnit(text); ok {
		return u.base == "s"
	}
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
