package capture

import (
	"bytes"
	"strings"
)

// A dialect is how a line is cut into cells and how a number is printed.
type dialect struct {
	// delim separates cells; ' ' stands for runs of blanks and tabs.
	delim byte
	// mark is the decimal mark.
	mark byte
}

// dialects are tried in this order; the first of equals is taken.
var dialects = []dialect{
	{';', '.'}, {';', ','}, {'\t', '.'}, {'\t', ','}, {',', '.'},
	{' ', '.'}, {' ', ','}, {'|', '.'}, {'|', ','}, {',', ','},
}

// name is the separator in words.
func (d dialect) name() string {
	switch d.delim {
	case ';':
		return "semicolon"
	case '\t':
		return "tab"
	case ' ':
		return "runs of blanks"
	case '|':
		return "vertical bar"
	}
	return "comma"
}

// A cell is one field of a line, without padding and without its quotes.
type cell struct {
	text   []byte
	quoted bool
}

func (c cell) blank() bool { return len(c.text) == 0 }

// split appends the cells of a line to cells.
func (d dialect) split(line []byte, cells []cell) []cell {
	i := 0
	if d.delim == ' ' {
		line = bytes.Trim(line, " \t\r")
		if len(line) == 0 {
			return cells
		}
	}
	for {
		c, next := d.cut(line, i)
		cells = append(cells, c)
		if next < 0 {
			return cells
		}
		i = next
	}
}

// cut returns the cell that starts at line[i] and where the next one starts,
// -1 after the last.
func (d dialect) cut(line []byte, i int) (cell, int) {
	for i < len(line) && (line[i] == ' ' || line[i] == '\t' && d.delim != '\t') {
		i++
	}
	if i < len(line) && line[i] == '"' {
		if end := closingQuote(line, i+1); end >= 0 {
			c := cell{text: bytes.TrimSpace(unquote(line[i+1 : end])), quoted: true}
			_, next := d.cutPlain(line, end+1)
			return c, next
		}
	}
	return d.cutPlain(line, i)
}

func (d dialect) cutPlain(line []byte, i int) (cell, int) {
	end := i
	for end < len(line) && line[end] != d.delim && (d.delim != ' ' || line[end] != '\t') {
		end++
	}
	c := cell{text: bytes.TrimSpace(line[i:end])}
	if end == len(line) {
		return c, -1
	}
	end++
	if d.delim == ' ' {
		for end < len(line) && (line[end] == ' ' || line[end] == '\t') {
			end++
		}
	}
	return c, end
}

// closingQuote is the index of the quote that ends a quoted cell, -1 if none.
func closingQuote(line []byte, i int) int {
	for ; i < len(line); i++ {
		if line[i] != '"' {
			continue
		}
		if i+1 < len(line) && line[i+1] == '"' {
			i++
			continue
		}
		return i
	}
	return -1
}

func unquote(b []byte) []byte {
	if bytes.IndexByte(b, '"') < 0 {
		return b
	}
	return bytes.ReplaceAll(b, []byte(`""`), []byte(`"`))
}

// A kind is what a single cell looks like.
type kind uint8

const (
	kindBlank    kind = iota
	kindNumber        // 1.25E-06
	kindQuantity      // 4.000us
	kindStamp         // 5/7/2021 12:00:47.056
	kindMissing       // ---, inf
	kindText
)

// numeric reports a kind that has a value.
func (k kind) numeric() bool { return k == kindNumber || k == kindQuantity || k == kindStamp }

// kindOf classifies a cell.
func (d dialect) kindOf(c cell) kind {
	if c.blank() {
		return kindBlank
	}
	if _, _, ok := d.number(c); ok {
		return kindNumber
	}
	switch b := c.text[0]; {
	case missingMark(c.text):
		return kindMissing
	case b-'0' > 9 && b != '-' && b != '+' && b != '.' && b != d.mark:
		return kindText
	}
	if _, ok := parseStamp(c.text, false); ok {
		return kindStamp
	}
	if _, _, _, ok := d.quantity(c); ok {
		return kindQuantity
	}
	return kindText
}

// number reads a cell as a plain number; a quoted cell may hold thousands
// separators. It returns the text the number was read from. A decimal comma has
// digits behind it: the comma of "208," parts cells.
func (d dialect) number(c cell) (decimal, []byte, bool) {
	n, ok := parseDecimal(c.text, d.mark)
	if ok && d.mark == ',' && c.text[len(c.text)-1] == ',' {
		return n, nil, false
	}
	if ok || !c.quoted {
		return n, c.text, ok
	}
	text, ok := dropThousands(c.text, d.mark)
	if !ok {
		return n, nil, false
	}
	n, ok = parseDecimal(text, d.mark)
	return n, text, ok
}

// dropThousands takes the separators out of 1,234,567.8 or 1 234,5; it says no
// to anything but groups of three after a first group without leading zero.
func dropThousands(text []byte, mark byte) ([]byte, bool) {
	whole := text
	if i := bytes.IndexByte(text, mark); i >= 0 {
		whole = text[:i]
	}
	sep := byte(',')
	if mark == ',' {
		sep = '.'
	}
	for _, s := range []byte{sep, ' ', '\''} {
		if groups := bytes.Split(bytes.TrimLeft(whole, "+-"), []byte{s}); properGroups(groups) {
			return append(bytes.ReplaceAll(whole, []byte{s}, nil), text[len(whole):]...), true
		}
	}
	return nil, false
}

func properGroups(groups [][]byte) bool {
	if len(groups) < 2 || len(groups[0]) == 0 || len(groups[0]) > 3 || groups[0][0] == '0' {
		return false
	}
	for _, g := range groups[1:] {
		if len(g) != 3 {
			return false
		}
	}
	return true
}

// quantity reads a cell as a number with a unit attached, 4.000us or 10 mV.
func (d dialect) quantity(c cell) (decimal, unit, []byte, bool) {
	n, end := scanCell(c.text, d.mark)
	if end < 0 || end == len(c.text) {
		return n, unit{}, nil, false
	}
	rest := bytes.TrimSpace(c.text[end:])
	if len(rest) == 0 || bytes.IndexByte([]byte(",;|.:/-+"), rest[0]) >= 0 {
		return n, unit{}, nil, false
	}
	u, ok := parseUnit(toUTF8(rest))
	return n, u, c.text[:end], ok
}

// missingMark reports a cell that stands for a sample that is missing or
// beyond the converter's range.
func missingMark(text []byte) bool {
	if strings.IndexByte("-*#<>+._iInNoOcCuUmM1\xe2", text[0]) < 0 {
		return false
	}
	switch word := bytes.ToLower(bytes.TrimLeft(text, "+-<>=")); string(bytes.TrimRight(word, "0")) {
	case "inf", "infinity", "∞", "nan", "na", "n/a", "#n/a", "null", "none", "nil",
		"over", "overrange", "overflow", "ovl", "ovr", "ol", "ovld", "under", "underrange", "underflow",
		"out", "clip", "clipped", "missing", "invalid", "1.#inf", "1.#ind", "1.#qnan":
		return true
	}
	switch last := text[len(text)-1]; text[0] {
	case '#': // the error of a spreadsheet's formula: #DIV/0!, #NAME?
		return last == '!' || last == '?' || isRule(text)
	case '<', '>': // a limit in place of a value: >5.00
		rest := bytes.TrimLeft(text, "<>= ")
		return len(rest) > 0 && strings.IndexByte("0123456789.-+", rest[0]) >= 0 || isRule(text)
	}
	return isRule(text)
}

// isRule reports nothing but strokes, stars and dots: ---, ****, -.
func isRule(text []byte) bool {
	return len(bytes.Trim(text, "-*#.<>_= ")) == 0 && (len(text) > 1 || text[0] == '-' || text[0] == '*')
}
