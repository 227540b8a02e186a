package capture

import (
	"encoding/binary"
	"math"
	"math/bits"
	"strconv"
)

// A decimal is a number as it is printed: (-1)^sign * mant * 10^exp.
type decimal struct {
	mant uint64
	exp  int
	sign uint64 // 0 or 1
	// long is true when there were more digits than mant can hold; mant is
	// then of no use and the text itself must be converted.
	long bool
}

// Powers of ten that a float64 holds exactly.
var exactPow10 = [...]float64{
	1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11,
	1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22,
}

// scanDecimal reads the number that starts at b[i] and returns it with the
// index behind it; the index is -1 when no number starts there. b must end in
// a byte that no number holds. The grammar is
//
//	[+-] (digits [mark [digits]] | mark digits) [(e|E) [+-] digits]
func scanDecimal(b []byte, i int, mark byte) (d decimal, end int) {
	switch b[i] {
	case '-':
		d.sign = 1
		i++
	case '+':
		i++
	}
	first := i
	m := uint64(0)
	c := b[i] - '0'
	for c <= 9 {
		m = m*10 + uint64(c)
		i++
		c = b[i] - '0'
	}
	digits := i - first
	if b[i] == mark {
		i++
		point := i
		for i+8 <= len(b) {
			w := binary.LittleEndian.Uint64(b[i:])
			if !eightDigits(w) {
				break
			}
			m = m*100000000 + eightValue(w)
			i += 8
		}
		c = b[i] - '0'
		for c <= 9 {
			m = m*10 + uint64(c)
			i++
			c = b[i] - '0'
		}
		d.exp = point - i
		digits += i - point
	}
	if digits == 0 {
		return d, -1
	}
	d.mant = m
	// 19 digits always fit in 64 bits; leading zeros may make fewer count.
	d.long = digits > 19 && significant(b[first:i]) > 19
	if b[i]|0x20 == 'e' {
		e, j := scanExponent(b, i+1)
		if j < 0 {
			return d, -1
		}
		d.exp += e
		i = j
	}
	return d, i
}

// scanExponent reads [+-]digits; values beyond any float64 saturate.
func scanExponent(b []byte, i int) (e, end int) {
	neg := b[i] == '-'
	if neg || b[i] == '+' {
		i++
	}
	first := i
	for c := b[i] - '0'; c <= 9; c = b[i] - '0' {
		if e < 1e6 {
			e = e*10 + int(c)
		}
		i++
	}
	if i == first {
		return 0, -1
	}
	if neg {
		e = -e
	}
	return e, i
}

// significant counts the digits from the first that is not zero.
func significant(text []byte) int {
	n := 0
	for _, c := range text {
		if c -= '0'; c <= 9 && (c > 0 || n > 0) {
			n++
		}
	}
	return n
}

// eightDigits reports whether all eight bytes of w are ASCII digits: adding 6
// carries a digit's low nibble out of the row '0'..'?' only above '9'.
func eightDigits(w uint64) bool {
	return (w&0xF0F0F0F0F0F0F0F0)|((w+0x0606060606060606)&0xF0F0F0F0F0F0F0F0)>>4 == 0x3333333333333333
}

// eightValue is the value of eight ASCII digits, the first in the lowest byte:
// neighbours are joined to pairs, fours and the eight.
func eightValue(w uint64) uint64 {
	w -= 0x3030303030303030
	w = w*10 + w>>8
	const mask = 0x000000FF000000FF
	return ((w&mask)*(100+1000000<<32) + (w>>16&mask)*(1+10000<<32)) >> 32
}

// float is the float64 nearest to d * 10^shift, correctly rounded; text is the
// number as printed. Beyond the range it is ±Inf.
func (d decimal) float(shift int, text []byte, mark byte) float64 {
	if f, exact := d.quick(shift); exact {
		return f
	}
	return d.slowFloat(d.exp+shift, text, mark)
}

// quick is float where one operation gives it: a mantissa below 2^53 and a
// power of ten up to 10^22 are both exact as float64, so that their product or
// quotient is rounded once (Clinger 1990).
func (d decimal) quick(shift int) (f float64, exact bool) {
	e := d.exp + shift
	if d.mant >= 1<<53 || d.long {
		return 0, false
	}
	f = float64(int64(d.mant))
	if uint(-e) < uint(len(exactPow10)) {
		f /= exactPow10[-e]
	} else if uint(e) < uint(len(exactPow10)) {
		f *= exactPow10[e]
	} else {
		return 0, false
	}
	return math.Float64frombits(math.Float64bits(f) | d.sign<<63), true
}

// slowFloat is float for a mantissa of up to 64 bits and any power of ten, or
// for more digits than 64 bits hold: then strconv rounds.
func (d decimal) slowFloat(e int, text []byte, mark byte) float64 {
	if !d.long && -len(pow5) < e && e < len(pow5) {
		return d.ratio(e)
	}
	var room [64]byte
	s := room[:0]
	if d.sign != 0 {
		s = append(s, '-')
	}
	if d.long {
		s, e = appendDigits(s, text, mark, e-d.exp)
	} else {
		s = strconv.AppendUint(s, d.mant, 10)
	}
	s = append(s, 'e')
	s = strconv.AppendInt(s, int64(e), 10)
	f, _ := strconv.ParseFloat(string(s), 64) // the only error left is of range: ±Inf
	return f
}

// pow5 are the powers of five that fit in 63 bits.
var pow5 = func() (p [28]uint64) {
	p[0] = 1
	for i := range p[1:] {
		p[i+1] = 5 * p[i]
	}
	return p
}()

// ratio is mant * 10^e for |e| < 28, correctly rounded: 10^e = 5^e * 2^e, and
// the product or quotient of mant and the power of five is taken to 62 bits or
// more in whole numbers. Bit 0, far below the last bit of a float64, collects
// whether anything was cut off, so that the conversion rounds once.
func (d decimal) ratio(e int) float64 {
	if d.mant == 0 {
		return math.Float64frombits(d.sign << 63)
	}
	var q uint64
	var shift int // the result is q * 2^shift
	lead := bits.LeadingZeros64(d.mant)
	m := d.mant << lead
	p := pow5[max(e, -e)]
	by := bits.LeadingZeros64(p)
	p <<= by
	if e >= 0 {
		hi, lo := bits.Mul64(m, p)
		q, shift = hi, 64+e-lead-by
		if lo != 0 {
			q |= 1
		}
	} else {
		var rest uint64
		q, rest = bits.Div64(m>>1, m<<63, p)
		shift = by - 63 + e - lead
		if rest != 0 {
			q |= 1
		}
	}
	f := float64(q) * math.Float64frombits(uint64(1023+shift)<<52)
	return math.Float64frombits(math.Float64bits(f) | d.sign<<63)
}

// appendDigits appends the digits of a printed number without its mark, and
// returns its power of ten, shift added.
func appendDigits(s, text []byte, mark byte, shift int) ([]byte, int) {
	fraction, e := 0, shift
	after := false
	for i, c := range text {
		switch {
		case c == mark:
			after = true
		case c|0x20 == 'e':
			var room [64]byte
			x, _ := scanExponent(append(append(room[:0], text[i+1:]...), 0), 0)
			return s, e + x - fraction
		case c-'0' <= 9:
			s = append(s, c)
			if after {
				fraction++
			}
		}
	}
	return s, e - fraction
}

// parseDecimal reads a whole cell as one number.
func parseDecimal(cell []byte, mark byte) (decimal, bool) {
	d, end := scanCell(cell, mark)
	return d, end == len(cell)
}

// scanCell is scanDecimal for a cell by itself.
func scanCell(cell []byte, mark byte) (decimal, int) {
	var room [64]byte
	return scanDecimal(append(append(room[:0], cell...), 0), 0, mark)
}

// tooLong reports a mantissa that integer cannot give.
func (d decimal) tooLong() bool { return d.long || d.mant>>63 != 0 }

// integer is the mantissa with its sign, where it is less than 2^63.
func (d decimal) integer() int64 {
	return (int64(d.mant) ^ -int64(d.sign)) + int64(d.sign)
}
