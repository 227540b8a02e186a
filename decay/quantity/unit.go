package quantity

import (
	"math"
	"strings"
)

// A prefix is an SI prefix and its power of ten.
type prefix struct {
	symbol string
	power  int
}

// printed are the prefixes that results are printed with, in rising order.
var printed = []prefix{{"p", -12}, {"n", -9}, {"µ", -6}, {"m", -3}, {"", 0}, {"k", 3}, {"M", 6}, {"G", 9}}

// readable are the prefixes that are understood in input. The two signs for
// micro are U+00B5 and U+03BC; K for kilo is common in component values.
var readable = []prefix{{"f", -15}, {"p", -12}, {"n", -9}, {"u", -6}, {"µ", -6}, {"μ", -6}, {"m", -3},
	{"k", 3}, {"K", 3}, {"M", 6}, {"G", 9}, {"T", 12}}

// spellings lists, for each unit that is told apart in input, how it may be written;
// ohm has two code points, U+03A9 and U+2126.
var spellings = map[string][]string{
	"Hz":  {"Hz", "hz", "HZ"},
	"s":   {"s", "sec"},
	"ohm": {"ohm", "Ohm", "ohms", "Ω", "Ω", "R"},
	"H":   {"H"},
	"F":   {"F"},
	"V":   {"V"},
	"A":   {"A"},
	"W":   {"W"},
	"m":   {"m"},
	"rad": {"rad"},
	"deg": {"deg", "°"},
	"dB":  {"dB"},
}

// canonical returns the key of spellings for unit, or unit itself.
func canonical(unit string) string {
	for name, all := range spellings {
		for _, s := range all {
			if s == unit {
				return name
			}
		}
	}
	return unit
}

// symbol returns what is printed for unit.
func symbol(unit string) string {
	if unit == "ohm" {
		return "Ω"
	}
	return unit
}

// takesPrefix reports whether an SI prefix may stand before the unit.
func takesPrefix(unit string) bool {
	switch unit {
	case "", "%", "ppm", "dB", "rad", "deg", "°", "counts":
		return false
	}
	return !strings.HasPrefix(unit, "1/")
}

// prefixFor returns the printed prefix for a number whose first digit has the
// given power of ten. Long times stay in seconds.
func prefixFor(power int, unit string) prefix {
	none := prefix{"", 0}
	if !takesPrefix(unit) {
		return none
	}
	best := printed[0]
	for _, p := range printed {
		if p.power <= power {
			best = p
		}
	}
	if best.power > 0 && unit == "s" {
		return none
	}
	return best
}

// scale returns x / 10^power with a single rounding.
func scale(x float64, power int) float64 {
	if power < 0 {
		return x * math.Pow10(-power)
	}
	return x / math.Pow10(power)
}
