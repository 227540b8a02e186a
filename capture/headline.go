package capture

import (
	"bytes"
	"slices"
	"strings"
)

// How a line above the samples is cut, and which text belongs to which column.

// headingCells cuts a line that may be a heading. It need not be separated as
// the samples are.
func (h *head) headingCells(p *preamble, text []byte) []cell {
	cells := p.cellsOf(text)
	if h.delim != ' ' && len(cells) > 1 {
		return cells
	}
	byWords := wordCells(stripComment(text))
	if h.delim != ' ' {
		if len(byWords) == len(h.kinds) && saysTime(toUTF8(byWords[0].text)) {
			return byWords
		}
		return cells
	}
	if len(byWords) == len(h.kinds) {
		return byWords
	}
	if wide := splitWide(stripComment(text)); len(wide) == len(h.kinds) {
		return wide
	}
	if len(cells) == len(h.kinds) {
		return cells
	}
	return byWords
}

// wordCells cuts a line at blanks; a unit in brackets goes with the name before it.
func wordCells(text []byte) []cell {
	var cells []cell
	for _, w := range (dialect{' ', '.'}).split(text, nil) {
		if n := len(cells); n > 0 && len(w.text) > 1 && (w.text[0] == '(' || w.text[0] == '[') {
			joined := append(append(append([]byte{}, cells[n-1].text...), ' '), w.text...)
			cells[n-1] = cell{text: joined}
			continue
		}
		cells = append(cells, w)
	}
	return cells
}

// splitWide cuts a line where two blanks or more stand together, or a tab.
func splitWide(text []byte) []cell {
	var cells []cell
	for _, part := range bytes.FieldsFunc(bytes.ReplaceAll(text, []byte("  "), []byte("\t")), func(r rune) bool { return r == '\t' || r == '\r' }) {
		if part = bytes.TrimSpace(part); len(part) > 0 {
			cells = append(cells, cell{text: part})
		}
	}
	return cells
}

// place gives each text of a heading its column: by position; but where the
// cells are fewer than the columns, and the texts as many as the columns of
// numbers or as the channels, they name the last of these in order. Between
// blanks, where a blank cell is none, other texts have no place.
func (h *head) place(cells []cell, set func(col int, text string)) {
	var numeric []int
	for col, k := range h.kinds {
		if k.numeric() || k == kindMissing {
			numeric = append(numeric, col)
		}
	}
	var texts []string
	width := 0
	for col, c := range cells {
		if !c.blank() {
			texts, width = append(texts, toUTF8(c.text)), col+1
		}
	}
	if len(numeric) == 0 {
		return
	}
	short := width <= numeric[len(numeric)-1] && len(texts) >= len(numeric)-1 && len(texts) <= len(numeric)
	if short && (len(texts) == len(numeric) || !saysTime(texts[0]) || h.countsRows(numeric[0])) && (h.delim == ' ' || len(cells) < len(h.kinds)) {
		for i, text := range texts {
			set(numeric[len(numeric)-len(texts)+i], text)
		}
		return
	}
	if h.delim == ' ' && len(texts) < len(h.kinds) {
		return
	}
	for col, c := range cells {
		if !c.blank() && col < len(h.kinds) {
			set(col, toUTF8(c.text))
		}
	}
}

// countsRows reports a column that counts the rows.
func (h *head) countsRows(col int) bool {
	return h.look(col).counts()
}

// readBelowNames reads entries whose key stands in the names row and whose value
// stands below it, in the units row or the first row of samples.
func (p *preamble) readBelowNames(h *head, names int, header []cell) {
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
