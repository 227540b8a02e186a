package decay

import (
	"fmt"
	"math"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// rivalGain is the chi-squared between two models below which the better one is no
// sure thing, and above which the lesser one is still worth a word: two parameters
// more explain as much by chance in one record of four hundred.
const rivalGain = 12

// rival is what separates a fit from another model that its samples do not rule
// out: the differences of the nonlinear parameters, in their order. The uncertainty
// of the fit takes them in as one standard deviation.
type rival struct {
	by   []float64
	gain float64 // chi-squared by which the other model is better, or worse if negative
	fall bool    // the other model has an exponential beside the ring
}

// findRival looks for such a model.
func (f *ringFit) findRival() *rival {
	switch {
	case f.companion != nil:
		return nil
	case f.bend != nil:
		return f.otherLaw()
	}
	v := f.noise()
	bend := f.beside(f.bent())
	best := rival{by: bend.by[:], gain: bend.gain / sq(v.rms*v.factor(f.w))}
	if f.s.len() < parallelFrom { // in a long window an exponential as weak pulls nothing
		for _, u := range fallRates {
			fall := f.beside(pole{a: u / f.problem.length})
			if gain := fall.gain / sq(v.rms*v.factor(0)); gain > best.gain {
				best = rival{fall.by[:], gain, true}
			}
		}
	}
	if best.gain < rivalGain {
		return nil
	}
	return &best
}

// otherLaw compares the two laws of an amplitude that falls smoothly.
func (f *ringFit) otherLaw() *rival {
	other := quadratic
	switch f.bend.law {
	case quadratic:
		other = cubic
	case constant:
		return nil
	}
	window := f.s.thinned(choiceSamples)
	own, ok := refitBent(window, f, 0, coarse)
	second, found := fitBent(window, other, own.nodes, f.a, f.w, coarse)
	if !ok || !found {
		return nil
	}
	v := noiseOf(own.residuals(window, 0), own.sigma())
	gain := (own.rss - second.rss) / sq(v.rms*v.factor(f.w))
	if gain < -rivalGain {
		return nil
	}
	return &rival{by: []float64{second.a - own.a, second.w - own.w, second.bend.b - own.bend.b, second.bend.g - own.bend.g}, gain: gain}
}

// gainOverOne is the chi-squared that the model takes off that of one ring, and what it
// would have to take off to be chosen by evidence.
func (f *ringFit) gainOverOne() (gain, decisive float64) {
	window := f.s.thinned(choiceSamples)
	plain, okPlain := fitRing(window, f.a, f.w, coarse)
	own, ok := refit(window, f, 0, coarse)
	if !ok || !okPlain { // what one ring cannot follow at all
		return math.Inf(1), 0
	}
	v := noiseOf(own.residuals(window, 0), own.sigma())
	gain = math.Max(0, plain.rss-own.rss) / sq(v.rms*v.factor(f.addition()))
	return gain, own.charge() - plain.charge()
}

// earned reports whether evidence speaks for what the fit has beyond one ring. A model
// that was forced may have nothing to follow but the edge before the decay.
func (f *ringFit) earned(model Model) bool {
	if f.bend == nil && f.companion == nil {
		return false
	}
	if model == open {
		return true // it was chosen by that
	}
	gain, decisive := f.gainOverOne()
	return gain >= decisive
}

// widen adds the difference to a covariance of the fit's parameters.
func (p *rival) widen(cov *sym) {
	if p == nil {
		return
	}
	for i, x := range p.by {
		for j, y := range p.by[:i+1] {
			cov.set(i, j, cov.At(i, j)+x*y)
		}
	}
}

// undecided says that one ring accounts for the samples, but that its rival does so
// better.
func (f *ringFit) undecided() Finding {
	a, w := f.a+f.rival.by[0], f.w+f.rival.by[1]
	say := note
	if f.rival.gain > evidence {
		say = warning
	}
	then := fmt.Sprintf("with one, the ring would have %s and Q %.4g", quantity.Format(w/(2*math.Pi*f.s.dt), "Hz", 6), math.Hypot(a, w)/(2*a))
	if f.rival.fall {
		return say(capture.BaselineDrift,
			fmt.Sprintf("An exponential beside the ring, of a baseline that recovers or of an edge that is not over, is not ruled out: %s. The uncertainties span both.", then),
			"Let the record hold more of the level after the decay, or set the gate a little later.")
	}
	return say(capture.AmplitudeDependent,
		fmt.Sprintf("A weak dependence on the amplitude is not ruled out: %s at small amplitude. The uncertainties span both.", then),
		"Capture once more at half the amplitude, or average several decays: the two then part or agree.")
}
