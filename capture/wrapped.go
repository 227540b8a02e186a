package capture

import (
	"bytes"
	"slices"
)

// Some programs take a whole line for one text and put it in quotes: "0.001,0.5".
// Such lines are unwrapped before they are cut into cells.

// unwrap takes the quotes off a line that is one quoted cell; separators may stand
// behind it.
func unwrap(text []byte) ([]byte, bool) {
	bare := bytes.TrimRight(text, " \t\r,;")
	if n := len(bare); n > 1 && bare[0] == '"' && closingQuote(bare, 1) == n-1 {
		return unquote(bare[1 : n-1]), true
	}
	return text, false
}

// wrapped reports lines of which nearly all at the end are in quotes each, with
// separators within.
func wrapped(lines []line) bool {
	count, filled := 0, 0
	for _, l := range lines[max(0, len(lines)-blockLines):] {
		if len(l.text) == 0 {
			continue
		}
		filled++
		if text, ok := unwrap(l.text); ok && bytes.ContainsAny(text, ",;\t| ") {
			count++
		}
	}
	return filled > 0 && 4*count >= 3*filled
}

// unwrap looks at the text without quotes around its lines, and keeps it so where
// it is a table then: the quoted lines are no numbers, or stand below as many
// quoted names.
func (h *head) unwrap() {
	if !wrapped(h.lines) {
		return
	}
	lines := slices.Clone(h.lines)
	for i := range lines {
		lines[i].text, _ = unwrap(lines[i].text)
	}
	s := findShape(lines)
	if s.rows == 0 || h.rows > 0 && !s.named(lines) {
		return
	}
	h.shape, h.lines, h.wrapped = s, lines, true
}

// named reports a line of as many words as the table has columns, two at least.
func (s *shape) named(lines []line) bool {
	for _, l := range lines {
		cells := s.split(l.text, nil)
		words := 0
		for _, c := range cells {
			if s.kindOf(c) == kindText {
				words++
			}
		}
		if len(cells) > 1 && words == len(cells) && len(cells) == len(s.kinds) {
			return true
		}
	}
	return false
}
