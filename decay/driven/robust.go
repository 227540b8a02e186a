package driven

import (
	"math"

	"dieaway/capture"
)

// tukey is the square root of the weight of Tukey's biweight at a residual of r
// standard deviations (Beaton and Tukey 1974, Technometrics 16:147, from memory);
// with 4.685 it keeps 95 % of the efficiency in normal noise.
func tukey(r float64) float64 {
	if r = r / 4.685; math.Abs(r) < 1 {
		return 1 - r*r
	}
	return 0
}

const robustRounds = 30

// robust fits the curve so that rows far off have no say: least squares repeated
// with weights from the residuals before.
func (s *state) robust(d *rows, v *noise) {
	for range robustRounds {
		along, across := s.residuals(d, *v)
		v.measure(d, along, across)
		w := s.weights(d, *v, func(i int) float64 { return tukey(math.Hypot(along[i]/v.along, perhaps(across[i], v.across))) })
		before := *s
		s.descend(d, w, 3)
		if math.Abs(s.f0/before.f0-1)*2*s.q+math.Abs(s.q/before.q-1) < 1e-4 {
			return
		}
	}
}

// perhaps is r/scale, 0 without a scale.
func perhaps(r, scale float64) float64 {
	if scale > 0 {
		return r / scale
	}
	return 0
}

// weights are the reciprocal standard deviations of the rows times a factor.
func (s *state) weights(d *rows, v noise, factor func(i int) float64) weights {
	along, across := s.shapes(d, v)
	for i := range along {
		along[i] = factor(i) / (along[i] * v.along)
		across[i] = perhaps(factor(i)/across[i], v.across)
	}
	return weights{along, across}
}

// studentFreedom makes likelihoods that outliers do not decide.
const studentFreedom = 4

// likelihood is the logarithm of the likelihood of the rows in Student noise of
// the scale of v, up to a constant that is the same for all curves and noises.
func (s *state) likelihood(d *rows, v noise) float64 {
	along, across := s.residuals(d, v)
	sAlong, sAcross := s.shapes(d, v)
	sum := studentLikelihood(along, sAlong, v.along)
	if d.phi != nil {
		sum += studentLikelihood(across, sAcross, v.across)
	}
	return sum
}

// studentLikelihood is that of residuals r in parts of shape, with the factor scale.
func studentLikelihood(r, shape []float64, scale float64) (sum float64) {
	for i := range r {
		sum -= (studentFreedom+1)/2.0*math.Log1p(sq(r[i]/scale)/studentFreedom) + math.Log(shape[i]*scale)
	}
	return sum
}

// The logarithm of the likelihood that another kind of noise must gain before it is
// taken. In a notch only the few rows at its bottom tell the kinds apart, and they
// would gain all the weight by lying close to the curve by chance.
const (
	noiseGain      = 3
	noiseGainNotch = 8
)

// fitRobustly fits from a start with the kind of noise that is likeliest.
func fitRobustly(start state, d *rows) (state, noise) {
	s, v := start, d.firstNoise()
	s.robust(d, &v)
	if v.computed(d) {
		return s, v // no noise: nothing to choose
	}
	best := s.likelihood(d, v)
	first, need := s, float64(noiseGain)
	if s.across == capture.Both {
		need = noiseGainNotch
	}
	for _, other := range d.otherNoises(v) {
		t, u := first, other
		t.robust(d, &u)
		if l := t.likelihood(d, u); l > best+need && !u.computed(d) {
			s, v, best = t, u, l
		}
	}
	return s, v
}
