package driven

import (
	"fmt"
	"math"
	"slices"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// restGain is the logarithm of the likelihood that the resistance of the coil
// must gain before a notch is given one.
const restGain = 3

// fitPart fits the form of one part from the best of the starts.
func fitPart(d *rows, part capture.Part) (*fitted, bool) {
	var best *fitted
	few := d.fewer(part)
	for _, c := range starts(few, part) {
		s := newState(c, few)
		v := few.firstNoise()
		s.robust(few, &v)
		if l := s.likelihood(few, v); finite(l) && (best == nil || l > best.likelihood) {
			best = &fitted{state: s, noise: v, likelihood: l}
		}
	}
	if best == nil {
		return nil, false
	}
	best.state, best.noise = fitRobustly(best.state, d)
	best.likelihood = best.state.likelihood(d, best.noise)
	if part == capture.Both {
		best.tryRest(d)
	}
	best.finish(d)
	return best, true
}

// tryRest gives the coil of a notch a resistance where the rows ask for it.
func (f *fitted) tryRest(d *rows) {
	s := f.state
	s.freeRest(d.m[extreme(d.smoothed(), capture.Both)] / s.gain)
	s, v := fitRobustly(s, d)
	if l := s.likelihood(d, v); l > f.likelihood+restGain {
		s.rest = math.Abs(s.rest)
		f.state, f.noise, f.likelihood = s, v, l
	}
}

// told is how much likelier (its logarithm) one form must be than another to be
// told from it.
const told = 4

// choose fits what the response was measured across: what is said, else what the
// name of the column says, else the form that the rows follow best. why says it
// in words.
func choose(d *rows, s *capture.Sweep, opt Options) (f *fitted, why string, guessed bool) {
	if opt.Across != "" {
		f, _ = fitPart(d, opt.Across)
		return f, "as given", false
	}
	if s.Part != "" {
		f, _ = fitPart(d, s.Part)
		return f, fmt.Sprintf("by the name %q of the column", s.Name), true
	}
	var all []*fitted
	for _, part := range []capture.Part{capture.Capacitor, capture.Resistor, capture.Inductor, capture.Both} {
		if f, ok := fitPart(d, part); ok {
			all = append(all, f)
		}
	}
	if len(all) == 0 {
		return nil, "", true
	}
	best := slices.MaxFunc(all, func(a, b *fitted) int { return int(math.Copysign(1, a.likelihood-b.likelihood)) })
	all = slices.DeleteFunc(all, func(f *fitted) bool { return f.likelihood < best.likelihood-told })
	if len(all) == 1 {
		return best, "guessed: no other form follows the rows as well", true
	}
	return unsure(d, all)
}

// unsure chooses among forms that follow the rows alike. A passive circuit cannot
// have more than the source's voltage across its resistor; coil and capacitor have
// more than that at any Q above one.
func unsure(d *rows, all []*fitted) (f *fitted, why string, guessed bool) {
	f, how := all[0], "assumed"
	resistor := slices.IndexFunc(all, func(f *fitted) bool { return f.across == capture.Resistor })
	switch top := slices.Max(d.smoothed()); {
	case !d.ratio || resistor < 0:
	case top > 1.02 && f.across == capture.Resistor:
		f = all[(resistor+1)%len(all)]
	case top > 1.02:
		how = "assumed, as the response is greater than the source"
	default:
		f, how = all[resistor], "assumed, as the response is nowhere greater than the source"
	}
	most := 0.0
	var others string
	for _, o := range all {
		if o == f {
			continue
		}
		if others != "" {
			others += " or "
		}
		others += partName(o.across)
		most = math.Max(most, math.Abs(o.f0/f.f0-1))
	}
	return f, fmt.Sprintf("%s: %s would do as well, and move f_0 by up to %s", how, others, quantity.Percent(most)), true
}

// partName names a part in a sentence.
func partName(p capture.Part) string {
	switch p {
	case capture.Inductor:
		return "the coil"
	case capture.Resistor:
		return "the resistor (the current)"
	case capture.Both:
		return "coil and capacitor together (a notch)"
	}
	return "the capacitor"
}
