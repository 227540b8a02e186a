package capture

import (
	"bytes"
	"strings"
)

// Numbers in spellings that number.go does not know: a minus sign of
// typesetters, the exponent D of Fortran, thousands in groups. They are respelt,
// one cell at a time: files that have them throughout are few.

// respell gives the number of a cell in the plain spelling; false when there is
// nothing to respell.
func (d dialect) respell(c cell) ([]byte, bool) {
	if c.blank() || c.text[0]-'0' > 9 && strings.IndexByte("+-.,", c.text[0]) < 0 && !foreignMinus(c.text) {
		return nil, false
	}
	text, minus, exponent, groups := c.text, false, false, false
	if !ascii(text) {
		text, minus = plainMinus(text)
	}
	text, exponent = plainExponent(text, d.mark)
	text, groups = d.dropThousands(text, c.quoted)
	return text, minus || exponent || groups
}

func ascii(text []byte) bool {
	for _, b := range text {
		if b >= 0x80 {
			return false
		}
	}
	return true
}

// minuses of Unicode and of the code page of Western Europe.
var minuses = []string{"\u2212", "\u2013", "\x96"}

func foreignMinus(text []byte) bool {
	for _, m := range minuses {
		if bytes.HasPrefix(text, []byte(m)) {
			return true
		}
	}
	return false
}

func plainMinus(text []byte) ([]byte, bool) {
	plain := text
	for _, m := range minuses {
		plain = bytes.ReplaceAll(plain, []byte(m), []byte("-"))
	}
	return plain, !bytes.Equal(plain, text)
}

// plainExponent writes 1.25D-03 with an e. The decimal mark tells it from a
// number in hexadecimal.
func plainExponent(text []byte, mark byte) ([]byte, bool) {
	i := bytes.IndexByte(text, 'D')
	if i < 0 {
		i = bytes.IndexByte(text, 'd')
	}
	if i < 0 || bytes.IndexByte(text[:i], mark) < 0 {
		return text, false
	}
	plain := bytes.Clone(text)
	plain[i] = 'e'
	return plain, true
}

// groupers are the blanks and apostrophes that stand between groups of digits.
var groupers = []string{" ", "'", "\u00a0", "\u202f", "\u2009", "\u2019", "\xa0"}

// dropThousands takes the separators out of 1,234,567.8 or 1 234,5. A single
// 1,234 may be a decimal comma where no quotes keep it together.
func (d dialect) dropThousands(text []byte, quoted bool) ([]byte, bool) {
	sep := "."
	if d.mark == '.' {
		sep = ","
	}
	if plain, groups := dropGroups(text, sep); groups > 1 && (d.mark == ',' || quoted || groups > 2 || bytes.IndexByte(plain, '.') >= 0) {
		return plain, true
	}
	for _, sep := range groupers {
		if plain, groups := dropGroups(text, sep); groups > 1 {
			return plain, true
		}
	}
	return text, false
}

// dropGroups takes sep out of between groups of three digits, after a first group
// without leading zero, and says how many groups there were.
func dropGroups(text []byte, sep string) ([]byte, int) {
	i := 0
	if i < len(text) && (text[i] == '-' || text[i] == '+') {
		i++
	}
	first := i
	i += digitsAt(text, i)
	if i == first || i > first+3 || text[first] == '0' {
		return text, 0
	}
	groups, end := 1, i
	for bytes.HasPrefix(text[end:], []byte(sep)) && digitsAt(text, end+len(sep)) == 3 {
		end += len(sep) + 3
		groups++
	}
	if groups == 1 || bytes.HasPrefix(text[end:], []byte(sep)) {
		return text, groups
	}
	return append(bytes.ReplaceAll(text[:end], []byte(sep), nil), text[end:]...), groups
}

// digitsAt counts the digits from text[i] on.
func digitsAt(text []byte, i int) int {
	n := 0
	for i+n < len(text) && text[i+n]-'0' <= 9 {
		n++
	}
	return n
}
