package capture

import (
	"bytes"
	"slices"
)

// What the shape that explains the most numbers may have got wrong.

// mixed finds columns in which a quarter of the cells or more are words, and
// others numbers, as in remarks or in hexadecimal; nil where there is none. A
// few words are no such column but cells that are broken.
func (s *shape) mixed(lines []line) []bool {
	lines = lines[max(0, len(lines)-blockLines):]
	if s.rows == 0 || s.rows >= len(lines)/2 {
		return nil
	}
	texts, rows := make([]int, len(s.kinds)), 0
	var cells []cell
	for _, l := range lines {
		if cells = s.split(l.text, cells[:0]); len(cells) != len(s.kinds) {
			continue
		}
		rows++
		for i, c := range cells {
			if s.kindOf(c) == kindText {
				texts[i]++
			}
		}
	}
	loose, firm := make([]bool, len(s.kinds)), 0
	for i, n := range texts {
		if loose[i] = s.kinds[i].numeric() && 4*n >= rows && rows >= 8; !loose[i] && s.kinds[i].numeric() {
			firm++
		}
	}
	if firm == 0 || !slices.Contains(loose, true) {
		return nil
	}
	return loose
}

// quotesFractions reports quoted cells that all hold one comma and three digits
// behind it: of thousands some would have none.
func (s *shape) quotesFractions(lines []line) bool {
	if s.delim != ',' || s.mark != '.' {
		return false
	}
	found := false
	var cells []cell
	for _, l := range lines[max(0, len(lines)-blockLines):] {
		if cells = s.split(l.text, cells[:0]); !s.fits(cells) {
			continue
		}
		for i, c := range cells {
			if i < len(s.kinds) && s.kinds[i] == kindNumber && !c.blank() {
				if found = c.quoted && bytes.Count(c.text, []byte(",")) == 1 && bytes.IndexByte(c.text, '.') < 0; !found {
					return false
				}
			}
		}
	}
	return found
}

// partsFractions reports commas that part not only cells but whole numbers and
// fractions too: numbers in pairs without a decimal point, of which the first
// ones say -0, or the second ones begin with a zero or have an exponent as no
// whole number does.
func (s *shape) partsFractions(lines []line) bool {
	n := len(s.kinds)
	if s.delim != ',' || s.mark != '.' || n < 2 || n%2 != 0 || slices.ContainsFunc(s.kinds, func(k kind) bool { return k != kindNumber }) {
		return false
	}
	signs := 0
	counts := make([]int, n)
	rising, last := true, ""
	var cells []cell
	for _, l := range lines[max(0, len(lines)-blockLines):] {
		if cells = s.split(l.text, cells[:0]); len(cells) != n || !s.fits(cells) {
			continue
		}
		rising = rising && (len(cells[0].text) > len(last) || string(cells[0].text) > last)
		last = string(cells[0].text)
		for i, c := range cells {
			if c.quoted || bytes.IndexByte(c.text, '.') >= 0 {
				return false
			}
			digits := bytes.TrimLeft(c.text, "+-")
			switch signed := len(digits) < len(c.text); {
			case i%2 == 1 && signed:
				return false
			case i%2 == 0 && signed && string(digits) == "0":
				signs++
			case len(digits) > 1 && digits[0] == '0' || bytes.ContainsAny(digits, "eE"):
				counts[i]++
			}
		}
	}
	for i := 0; i < n; i += 2 {
		if counts[i] > 0 || counts[i+1] == 0 && signs == 0 {
			return false
		}
	}
	return signs > 0 || n == 2 && !rising // padded codes beside a count
}
