package quantity

import (
	"math"
	"strconv"
	"strings"
)

// digitsUnknown is how many significant digits are printed of a value whose
// uncertainty is unknown, and digitsExact of one that is exact.
const (
	digitsUnknown = 6
	digitsExact   = 12
)

// String returns q in the short form of GUM 7.2.2 in engineering notation, the
// standard uncertainty rounded to two digits: "125.0342(11) kHz" stands for
// 125.0342 kHz with u = 0.0011 kHz. Where the two digits straddle the decimal
// point the uncertainty is written out, "12.3(1.5) kHz". A value of unknown or
// of no uncertainty carries no parenthesis; an unknown value is "unknown".
func (q Quantity) String() string {
	if !q.Known() {
		return "unknown"
	}
	if !q.hasDigits() {
		return q.plain()
	}
	l := layoutFor(q.Value, q.U, q.Unit)
	return l.fixed(q.Value) + "(" + l.paren(q.U) + ")" + l.suffix()
}

// Columns is a quantity for a table for people.
type Columns struct {
	// Value is the value with its unit, rounded to the expanded uncertainty: "125.0342 kHz".
	Value string
	// Expanded is the expanded uncertainty (k = 2) with its unit: "± 0.0022 kHz";
	// "exact", or "" when unknown.
	Expanded string
	// Relative is the relative standard uncertainty: "0.00088 %", or "" when unknown.
	Relative string
}

// Columns returns q as the cells of a table.
func (q Quantity) Columns() Columns {
	switch {
	case !q.Known():
		return Columns{Value: "unknown"}
	case q.U == 0:
		return Columns{Value: q.plain(), Expanded: "exact"}
	case !q.hasDigits():
		return Columns{Value: q.plain()}
	}
	u2 := 2 * q.U
	l := layoutFor(q.Value, u2, q.Unit)
	c := Columns{Value: l.fixed(q.Value) + l.suffix(), Expanded: "± " + l.fixed(u2) + l.suffix(), Relative: Percent(q.Relative())}
	if l.exp != 0 {
		c.Expanded = "± " + withUnit(trimExponent(strconv.FormatFloat(u2, 'e', 1, 64)), "", q.Unit)
	}
	return c
}

// Percent returns a ratio with two significant digits, in percent or, below
// 0.001 %, in parts per million; "" when it is not finite. Beyond 1000 % the
// figure says no more than that.
func Percent(ratio float64) string {
	switch r := math.Abs(ratio); {
	case !finite(ratio):
		return ""
	case r == 0:
		return "0 %"
	case r > 10:
		return "over 1000 %"
	case r < 1e-8:
		return trimExponent(strconv.FormatFloat(ratio, 'e', 1, 64))
	case r < 1e-5:
		return significant(ratio*1e6, 2) + " ppm"
	default:
		return significant(ratio*100, 2) + " %"
	}
}

// Format returns x in engineering notation, rounded to digits significant
// digits with trailing zeros dropped: Format(47e-9, "F", 3) is "47 nF".
// Units that take no prefix get none. A number that is not finite is "unknown".
func Format(x float64, unit string, digits int) string {
	if !finite(x) {
		return "unknown"
	}
	if x == 0 {
		return withUnit("0", "", unit)
	}
	digits = max(digits, 1)
	power := exponent(x, digits)
	p := prefixFor(power, unit)
	if outside(power - p.power) {
		mantissa, exp, _ := strings.Cut(strconv.FormatFloat(x, 'e', digits-1, 64), "e")
		return withUnit(trimExponent(trimZeros(mantissa)+"e"+exp), "", unit)
	}
	s := strconv.FormatFloat(round(scale(x, p.power), digits), 'f', max(0, digits-1-(power-p.power)), 64)
	return withUnit(trimZeros(s), p.symbol, unit)
}

// Count returns a whole number with a gap between groups of three digits from five
// digits up: "10 000".
func Count(n int) string {
	s := strconv.Itoa(n)
	if len(s) < 5 {
		return s
	}
	for i := len(s) - 3; i > 0; i -= 3 {
		s = s[:i] + " " + s[i:]
	}
	return s
}

// Scale returns what to multiply numbers up to x with so that they read well in
// engineering notation, and the unit they are in then: 2e-5 s are Scale's 1e6
// and "µs". For axes and tables whose numbers share a unit.
func Scale(x float64, unit string) (factor float64, scaled string) {
	if !finite(x) || x == 0 {
		return 1, symbol(unit)
	}
	p := prefixFor(exponent(x, 3), unit)
	if p.power > 0 {
		return 1 / math.Pow10(p.power), p.symbol + symbol(unit)
	}
	return math.Pow10(-p.power), p.symbol + symbol(unit)
}

// plain returns the value alone, with as many digits as it deserves.
func (q Quantity) plain() string {
	if q.U == 0 {
		return Format(q.Value, q.Unit, digitsExact)
	}
	return Format(q.Value, q.Unit, digitsUnknown)
}

// hasDigits reports whether u is one that decides the digits of the value: known,
// not zero, and not below what is left of a float64 behind a propagation.
func (q Quantity) hasDigits() bool {
	return q.knownU() && q.U > 0 && q.U >= 1e-12*math.Abs(q.Value) && q.U > 1e-300
}

// A layout says how a value and its uncertainty are laid out together.
type layout struct {
	prefix prefix
	unit   string
	place  int // power of ten of the last digit shown, relative to the prefix
	exp    int // power of ten written as an exponent, where no prefix serves
}

// layoutFor chooses the prefix by the larger of |value| and u, and the last
// digit by the second digit of u.
func layoutFor(value, u float64, unit string) layout {
	last := exponent(u, 2) - 1
	big := math.Max(math.Abs(value), u)
	power := exponent(big, max(1, exponent(big, 17)-last+1))
	l := layout{prefix: prefixFor(power, unit), unit: unit}
	top, place := power-l.prefix.power, last-l.prefix.power
	// Without a prefix a short run of zeros behind the point still reads better than an exponent.
	if top >= 7 || top < -3 && (takesPrefix(unit) || place < -6) || place > 2 && !takesPrefix(unit) && top > 3 {
		l.prefix, l.exp = prefix{"", 0}, power
	}
	l.place = last - l.prefix.power - l.exp
	return l
}

// fixed returns x with the last digit of the layout.
func (l layout) fixed(x float64) string {
	x = scale(scale(x, l.prefix.power), l.exp)
	if l.place > 0 {
		unit := math.Pow10(l.place)
		x = math.Round(x/unit) * unit
	}
	s := strconv.FormatFloat(x, 'f', max(0, -l.place), 64)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-") // no minus sign before a rounded zero
	}
	return s
}

// paren returns what stands in the parenthesis: the digits of u in the place of
// the last digits of the value, or u in full where it straddles the point.
func (l layout) paren(u float64) string {
	s := l.fixed(u)
	if l.place >= -1 {
		return s
	}
	return strings.TrimLeft(strings.TrimPrefix(s, "0."), "0")
}

// suffix returns exponent and unit.
func (l layout) suffix() string {
	e := ""
	if l.exp != 0 {
		e = "e" + strconv.Itoa(l.exp)
	}
	return e + withUnit("", l.prefix.symbol, l.unit)
}

// outside reports whether a number with that power of ten is too long to write
// without an exponent.
func outside(power int) bool { return power >= 7 || power < -3 }

// exponent returns the power of ten of the first digit of x rounded to digits
// significant digits: 9.96 has 0 with three digits and 1 with two. Zero has 0.
func exponent(x float64, digits int) int {
	s := strconv.FormatFloat(x, 'e', max(digits, 1)-1, 64)
	e, _ := strconv.Atoi(s[strings.IndexByte(s, 'e')+1:])
	return e
}

// round returns x rounded to digits significant digits.
func round(x float64, digits int) float64 {
	y, _ := strconv.ParseFloat(strconv.FormatFloat(x, 'e', digits-1, 64), 64)
	return y
}

// significant returns x with digits significant digits, trailing zeros kept.
func significant(x float64, digits int) string {
	return strconv.FormatFloat(round(x, digits), 'f', max(0, digits-1-exponent(x, digits)), 64)
}

func trimZeros(s string) string {
	if strings.ContainsRune(s, '.') {
		s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	}
	return s
}

// trimExponent turns "1.5e-05" into "1.5e-5".
func trimExponent(s string) string {
	mantissa, exp, _ := strings.Cut(s, "e")
	n, _ := strconv.Atoi(exp)
	return mantissa + "e" + strconv.Itoa(n)
}

func withUnit(number, prefix, unit string) string {
	if unit == "" {
		return number
	}
	return number + " " + prefix + symbol(unit)
}
