package quantity

import (
	"errors"
	"fmt"
	"math"
	"strings"
)

// Parse reads a value as engineers write it, in the given SI unit ("" for a
// pure number). It understands
//
//	12k  47n  1e-3          a prefix, or none, and no unit
//	125kHz  10 mH  2.2 us   prefix and unit; u, µ and μ are micro, M is mega, m is milli
//	4k7  4R7  R47           a prefix or R in the place of the point (IEC 60062)
//	30 ppm  1 %             for pure numbers
//
// each of them alone or with its standard uncertainty (k = 1):
//
//	1.62 mH +- 1 %  1.62 mH ± 0.02 mH  1.62(2) mH  12.3(1.5) kHz
//
// U is NaN when no uncertainty is given. An error tells what was found and what
// was expected.
func Parse(s, unit string) (Quantity, error) {
	unit = canonical(unit)
	value, spread, given := cutSpread(s)
	t, err := scanTerm(value, unit)
	if err != nil {
		return Quantity{}, fmt.Errorf("expected %s, found %q%w", wanted(unit), s, err)
	}
	q := Quantity{Value: t.value(), U: t.uncertainty(), Unit: unit}
	if !finite(q.Value) || q.Value == 0 && strings.ContainsAny(t.number, "123456789") {
		return Quantity{}, fmt.Errorf("expected %s, found %q, which is out of range", wanted(unit), s)
	}
	if given {
		if q.U, err = t.spread(spread, q); err != nil {
			example := strings.TrimSpace("+- 0.02 " + t.suffix)
			return Quantity{}, fmt.Errorf("expected an uncertainty such as \"+- 1 %%\" or %q, found %q%w", example, s, err)
		}
	}
	return q, nil
}

// cutSpread splits a value from the uncertainty behind +-, +/- or ±.
func cutSpread(s string) (value, spread string, given bool) {
	for _, sign := range []string{"+-", "+/-", "±"} {
		if v, u, ok := strings.Cut(s, sign); ok {
			return v, u, true
		}
	}
	return s, "", false
}

// wanted says in words what a value in unit looks like.
func wanted(unit string) string {
	examples := map[string]string{"Hz": "125 kHz", "s": "2.2 us", "ohm": "4k7", "H": "10 mH", "F": "47 nF", "V": "1.5 V"}
	switch example, ok := examples[unit]; {
	case unit == "":
		return `a number such as "12k"`
	case ok:
		return fmt.Sprintf("a value in %s such as %q", unit, example)
	default:
		return "a value in " + unit
	}
}

// spread returns the standard uncertainty of q, the value of t, that stands
// behind the sign: relative in % or ppm, or in the unit of the value.
func (t term) spread(s string, q Quantity) (float64, error) {
	if t.paren != "" {
		return 0, errors.New(", whose value has an uncertainty in parentheses already")
	}
	u, err := scanTerm(s, "")
	if relative := err == nil && isRatio(u.suffix); relative {
		if isRatio(t.suffix) {
			return 0, errors.New(", which may mean a share of the value or an amount: write both without % and ppm")
		}
		return positive(u, math.Abs(q.Value))
	}
	if u, err = scanTerm(s, q.Unit); err != nil {
		return 0, err
	}
	if u.suffix == "" && t.suffix != "" {
		return 0, errors.New(", whose uncertainty has no unit")
	}
	return positive(u, 1)
}

// positive returns u times scale, which has to be an uncertainty.
func positive(u term, scale float64) (float64, error) {
	x := u.value() * scale
	if u.paren != "" || !finite(x) || math.Signbit(x) {
		return 0, errors.New(", whose uncertainty is not a positive number")
	}
	return x, nil
}

func isRatio(suffix string) bool { return suffix == "%" || suffix == "ppm" || suffix == "ppb" }

// powerOf returns the power of ten that the suffix of a number in unit stands for.
func powerOf(suffix, unit string) (int, error) {
	if power, ok := match(suffix, unit); ok {
		return power, nil
	}
	for name := range spellings {
		if _, ok := match(suffix, name); ok && !isPrefix(suffix) {
			return 0, fmt.Errorf(", which is in %s", name)
		}
	}
	if isRatio(suffix) {
		return 0, fmt.Errorf(", which is a ratio in %s", suffix)
	}
	return 0, fmt.Errorf(", whose ending %q is no unit or prefix known here", suffix)
}

func isPrefix(s string) bool {
	for _, p := range readable {
		if p.symbol == s {
			return true
		}
	}
	return false
}

// match takes suffix for a prefix and unit, either of which may be left out, and
// returns the power of ten.
func match(suffix, unit string) (power int, ok bool) {
	ratios := map[string]int{"%": -2, "ppm": -6, "ppb": -9}
	if p, ok := ratios[suffix]; ok && unit == "" {
		return p, true
	}
	for _, name := range append([]string{"", unit}, spellings[unit]...) {
		p, ok := strings.CutSuffix(suffix, name)
		if ok && p == "" {
			return 0, true
		}
		for _, r := range readable {
			if ok && p == r.symbol && (unit == "" || takesPrefix(unit)) {
				return r.power, true
			}
		}
	}
	return 0, false
}
