package capture

import (
	"bytes"
	"strings"
)

// A kind is what a single cell looks like.
type kind uint8

const (
	kindBlank    kind = iota
	kindNumber        // 1.25E-06
	kindQuantity      // 4.000us
	kindStamp         // 5/7/2021 12:00:47.056
	kindZero          // 0, with or without a unit; while the kind of a column is looked for
	kindMissing       // ---, inf
	kindText
)

// numeric reports a kind that has a value.
func (k kind) numeric() bool {
	return k == kindNumber || k == kindQuantity || k == kindStamp || k == kindZero
}

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
	case b-'0' > 9 && b != '-' && b != '+' && b != '.' && b != d.mark && !foreignMinus(c.text):
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

// number reads a cell as a plain number, or one in another spelling. It returns
// the text the number was read from. A decimal comma has digits behind it: the
// comma of "208," parts cells.
func (d dialect) number(c cell) (decimal, []byte, bool) {
	n, ok := parseDecimal(c.text, d.mark)
	if ok && d.mark == ',' && c.text[len(c.text)-1] == ',' {
		return n, nil, false
	}
	if ok {
		return n, c.text, true
	}
	text, ok := d.respell(c)
	if !ok {
		return n, nil, false
	}
	n, ok = parseDecimal(text, d.mark)
	return n, text, ok
}

// quantity reads a cell as a number with a unit attached, 4.000us or 10 mV.
func (d dialect) quantity(c cell) (decimal, unit, []byte, bool) {
	text := c.text
	if foreignMinus(text) {
		text, _ = plainMinus(text)
	}
	n, end := scanCell(text, d.mark)
	if end < 0 || end == len(text) {
		return n, unit{}, nil, false
	}
	rest := bytes.TrimSpace(text[end:])
	if len(rest) == 0 || strings.IndexByte(",;|.:/-+", rest[0]) >= 0 {
		return n, unit{}, nil, false
	}
	u, ok := parseUnit(toUTF8(rest))
	if !ok {
		u, ok = parsePrefix(toUTF8(rest))
	}
	return n, u, text[:end], ok
}

// isZero reports a cell of nothing but zeros: no unit makes a difference to it.
func isZero(c cell) bool {
	zero := false
	for _, b := range c.text {
		switch b {
		case '0':
			zero = true
		case '+', '-', '.', ',':
		default:
			return false
		}
	}
	return zero
}

// ofKind reads a number with a unit that is one only where it must be a time or a
// rate: 2 min, 2.5 M.
func (d dialect) ofKind(c cell, base string) (n decimal, u unit, digits []byte, ok bool) {
	n, end := scanCell(c.text, d.mark)
	if end < 0 {
		return n, u, nil, false
	}
	switch rest := toUTF8(bytes.TrimSpace(c.text[end:])); {
	case base == "s":
		u, ok = longTimes[strings.ToLower(rest)]
	case base == "Sa/s" && (rest == "M" || rest == "G"):
		u, ok = parseUnit(rest + base)
	}
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
