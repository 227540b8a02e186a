package capture

import (
	"math"
	"slices"
	"strings"
)

// Complex responses: pairs of columns with real and imaginary part.

// A complexPair are two columns, from 0, and what their names have in common.
type complexPair struct {
	re, im int
	name   string
}

// letterPairs are names that mean real and imaginary part only where both stand side
// by side: in phase and in quadrature, resistance and reactance, conductance and
// susceptance.
var letterPairs = [][2]string{{"x", "y"}, {"i", "q"}, {"inphase", "quadrature"}, {"r", "x"}, {"rs", "xs"}, {"g", "b"}, {"gp", "bp"}}

// assignComplex finds the pairs, and the one that is the response: of two the one that
// is not named as the source, to which the other is the reference.
func (t *sweepTable) assignComplex() error {
	if firstWithRole(t.columns, RoleResponse) >= 0 {
		return nil // asked for
	}
	t.pairs = t.namedPairs()
	if len(t.pairs) == 0 {
		t.pairs = t.lettered()
	}
	if len(t.pairs) == 2 && nameSays(t.pairs[0].name, RoleReference) != nameSays(t.pairs[1].name, RoleReference) {
		if nameSays(t.pairs[0].name, RoleReference) {
			slices.Reverse(t.pairs)
		}
		for _, i := range []int{t.pairs[1].re, t.pairs[1].im} {
			t.columns[i].is(RoleReference, "its name is %q; the response is divided by it as a complex number", t.columns[i].Name)
		}
	} else if len(t.pairs) > 1 {
		return &Error{Err: ErrNoData, Found: "several pairs of real and imaginary part: " + t.listed(), Expected: "one, or a source and a response"}
	}
	if len(t.pairs) > 0 {
		p := t.pairs[0]
		t.columns[p.re].is(RoleReal, "its name is %q", t.columns[p.re].Name)
		t.columns[p.im].is(RoleImaginary, "its name is %q", t.columns[p.im].Name)
	}
	return nil
}

// free reports a column of numbers that has no role yet.
func (t *sweepTable) free(i int) bool {
	return t.columns[i].Role == "" && t.plan.steps[i].op == opValue
}

// namedPairs are the columns whose names say real and imaginary and have all else in
// common.
func (t *sweepTable) namedPairs() []complexPair {
	var pairs []complexPair
	for i := range t.columns {
		if !t.free(i) || !nameSays(t.columns[i].Name, RoleReal) || deviationName(t.columns[i].Name) {
			continue
		}
		stem := t.stem(i)
		for k := range t.columns {
			if t.free(k) && nameSays(t.columns[k].Name, RoleImaginary) && t.stem(k) == stem && !deviationName(t.columns[k].Name) {
				pairs = append(pairs, complexPair{i, k, stem})
				break
			}
		}
	}
	return pairs
}

// stem is the name of a column without the words for real and imaginary.
func (t *sweepTable) stem(i int) string {
	return strings.Join(slices.DeleteFunc(words(t.columns[i].Name), func(w string) bool {
		return w == "part" || slices.Contains(sweepWords[RoleReal], w) || slices.Contains(sweepWords[RoleImaginary], w)
	}), " ")
}

// lettered finds a pair of columns side by side whose names are letters for the parts.
func (t *sweepTable) lettered() []complexPair {
	for _, pair := range letterPairs {
		for i := 1; i < len(t.columns); i++ {
			if t.free(i-1) && t.free(i) && fold(t.columns[i-1].Name) == pair[0] && fold(t.columns[i].Name) == pair[1] {
				return []complexPair{{i - 1, i, ""}}
			}
		}
	}
	return nil
}

// complexResponse sets magnitude and phase from the pair, over that of the source.
func (t *sweepTable) complexResponse(s *Sweep) error {
	re, im := &t.columns[t.pairs[0].re], &t.columns[t.pairs[0].im]
	s.setComplex(re.scaled(), im.scaled())
	if s.Unit, s.Name = re.unit.base, strings.TrimSpace(re.Name); s.Unit == "s" { // S is siemens here
		s.Unit = "S"
	}
	if len(t.pairs) > 1 {
		var source Sweep
		source.setComplex(t.columns[t.pairs[1].re].scaled(), t.columns[t.pairs[1].im].scaled())
		for i := range s.Phase {
			s.Phase[i] -= source.Phase[i]
		}
		s.Reference = source.Magnitude
	}
	return t.someValues(s, re)
}

func (s *Sweep) setComplex(re, im []float64) {
	s.Cartesian = true
	s.Magnitude, s.Phase = make([]float64, len(re)), make([]float64, len(re))
	for i := range re {
		s.Magnitude[i], s.Phase[i] = math.Hypot(re[i], im[i]), math.Atan2(im[i], re[i])
	}
}
