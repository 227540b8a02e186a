package driven

import (
	"math"
	"slices"

	"dieaway/capture"
)

// A kind says how the scatter of the rows goes with the response.
type kind int

const (
	constant     kind = iota
	proportional      // to the response, as of readings in dB, or of few digits on changing ranges
	divided           // of a voltage and a reference that scatter alike, after the division
)

// noise is the scatter of magnitude (along the curve) and of phase (across it):
// its kind, and how large it is where the shape of the kind is one.
type noise struct {
	kindAlong, kindAcross kind
	along, across         float64
}

// firstNoise is the kind to begin with.
func (d *rows) firstNoise() noise {
	switch {
	case d.decibels:
		return noise{kindAlong: proportional, kindAcross: proportional}
	case d.reference != nil:
		return noise{kindAlong: divided, kindAcross: divided}
	}
	return noise{}
}

// otherNoises are the kinds that may be likelier than v.
func (d *rows) otherNoises(v noise) (out []noise) {
	kinds := []kind{constant, proportional}
	if d.reference != nil {
		kinds = append(kinds, divided)
	}
	for _, along := range kinds {
		for _, across := range kinds {
			o := noise{kindAlong: along, kindAcross: across}
			if d.dev != nil {
				o.kindAlong = v.kindAlong // stated: nothing to choose
			}
			if d.phi == nil || d.cartesian {
				o.kindAcross = o.kindAlong
			}
			if o.kindAlong == v.kindAlong && (o.kindAcross == v.kindAcross || d.phi == nil) || slices.Contains(out, o) {
				continue
			}
			out = append(out, o)
		}
	}
	return out
}

// The least response, as a part of the greatest, that a scatter in proportion to
// it is believed at. In a notch the few rows near zero would else decide alone.
const (
	scaleFloor = 1e-4
	notchFloor = 0.05
)

// shapes are the standard deviations of the rows but for the factors of the
// noise: stated, constant, or in proportion to the curve.
func (s *state) shapes(d *rows, v noise) (along, across []float64) {
	along, across = make([]float64, d.len()), make([]float64, d.len())
	size := make([]float64, d.len())
	for i, f := range d.f {
		size[i] = s.gain * s.size(f)
	}
	floor := scaleFloor * slices.Max(size)
	if s.across == capture.Both {
		floor = notchFloor * slices.Max(size)
	}
	shape := func(k kind, i int) float64 {
		switch k {
		case proportional:
			return math.Max(size[i], floor)
		case divided: // u^2(V/R) = u^2 (1 + (V/R)^2)/R^2
			return math.Hypot(1, size[i]) / d.reference[i]
		}
		return 1
	}
	for i := range d.f {
		along[i], across[i] = shape(v.kindAlong, i), shape(v.kindAcross, i)
		if d.dev != nil {
			along[i] = d.dev[i]
		}
		if d.cartesian {
			across[i] = along[i]
		}
	}
	return along, across
}

// residuals are what the curve leaves of the rows, in parts of their shapes.
func (s *state) residuals(d *rows, v noise) (along, across []float64) {
	along, across = s.shapes(d, v)
	for i := range d.f {
		a, c := s.residual(d, i)
		along[i], across[i] = a/along[i], c/across[i]
	}
	return along, across
}

// madScale is the standard deviation of normal noise with the median absolute
// value of r; where half of r is all but zero it is that of the rest.
func madScale(r []float64) float64 {
	abs, sum := make([]float64, len(r)), 0.0
	for i, x := range r {
		abs[i] = math.Abs(x)
		sum += x * x
	}
	slices.Sort(abs)
	n := len(abs)
	median := (abs[(n-1)/2] + abs[n/2]) / 2
	return math.Max(median/0.674490, 0.02*math.Sqrt(sum/float64(n)))
}

// measure sets the factors of the noise from the residuals.
func (v *noise) measure(d *rows, along, across []float64) {
	v.along = madScale(along)
	if d.phi != nil {
		v.across = madScale(across)
	}
	if d.cartesian {
		v.along = madScale(slices.Concat(along, across))
		v.across = v.along
	}
	v.atLeast(d)
}

// finest is the scatter, as a part of the response, that is taken for the rounding
// of a computed sweep rather than for noise: no meter reads nine digits.
const finest = 1e-9

// atLeast keeps the factors of the noise above rounding.
func (v *noise) atLeast(d *rows) {
	v.along = math.Max(v.along, d.rounding(v.kindAlong))
	if d.phi != nil {
		v.across = math.Max(v.across, d.rounding(v.kindAcross))
	}
}

// rounding is the least factor of the noise.
func (d *rows) rounding(k kind) float64 {
	if k == proportional || d.dev != nil {
		return finest
	}
	return finest * slices.Max(d.m)
}

// computed reports rows without noise, of which no kind of noise can be told.
func (v *noise) computed(d *rows) bool { return v.along <= 2*d.rounding(v.kindAlong) }

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

// A fitted curve with all that is needed to judge it.
type fitted struct {
	state
	noise      noise
	likelihood float64
	out        []bool // rows left out
	iterations int
}

// outlierSpan is how many standard deviations one row of n may lie off by chance
// once in a thousand sweeps (Bonferroni), and somewhat more for few rows, whose
// scale is not well known.
func outlierSpan(n int) float64 {
	return math.Sqrt2 * math.Erfinv(1-1e-3/float64(n)) * (1 + 6/float64(n))
}

// finish leaves the outliers out and ends with plain least squares, which in
// normal noise loses nothing to the bound.
func (f *fitted) finish(d *rows) {
	for range 4 {
		out := f.farOff(d)
		settled := f.out != nil && slices.Equal(out, f.out)
		f.out = out
		for range 3 {
			f.iterations += f.descend(d, f.plain(d), stepsMost)
			f.rms(d)
			if f.noise.kindAlong == constant && f.noise.kindAcross == constant {
				break // the weights do not follow the curve
			}
		}
		if settled {
			return
		}
	}
}

// farOff marks the rows that are outliers. Three or more in a row to one side are
// none: there the curve leaves the rows, not they the curve.
func (f *fitted) farOff(d *rows) []bool {
	along, across := f.residuals(d, f.noise)
	out, n := make([]bool, d.len()), 0
	span := outlierSpan(d.len())
	for i := range out {
		out[i] = math.Abs(along[i]) > span*f.noise.along || d.phi != nil && math.Abs(across[i]) > span*f.noise.across
	}
	for i := 0; i < len(out); {
		k := i
		for k < len(out) && out[k] && along[k]*along[i] > 0 {
			k++
		}
		if k-i >= 3 {
			clear(out[i:k])
		}
		i = max(k, i+1)
	}
	for _, o := range out {
		if o {
			n++
		}
	}
	if 3*n > d.len() || d.len()-n <= len(f.free)+1 { // these are no outliers, but a curve that does not fit
		clear(out)
	}
	return out
}

// plain are the weights of the rows that are not left out.
func (f *fitted) plain(d *rows) weights {
	return f.weights(d, f.noise, func(i int) float64 {
		if f.out[i] {
			return 0
		}
		return 1
	})
}

// rms sets the factors of the noise from all rows that are not left out, for the
// degrees of freedom that the parameters took.
func (f *fitted) rms(d *rows) {
	along, across := f.residuals(d, f.noise)
	sa, sc, n := 0.0, 0.0, 0.0
	for i := range along {
		if !f.out[i] {
			sa, sc, n = sa+sq(along[i]), sc+sq(across[i]), n+1
		}
	}
	p := float64(len(f.free))
	switch {
	case d.phi == nil:
		f.noise.along = spread(sa, n-p)
	case d.cartesian:
		f.noise.along = spread(sa+sc, 2*n-p)
		f.noise.across = f.noise.along
	default:
		f.noise.along, f.noise.across = spread(sa, n-p/2), spread(sc, n-p/2)
	}
	f.noise.atLeast(d)
	if d.dev != nil { // what the file states counts, unless the rows scatter more
		f.noise.along = math.Max(f.noise.along, 1)
		if d.cartesian {
			f.noise.across = f.noise.along
		}
	}
}

// spread is the standard deviation that a sum of squares tells with the given
// degrees of freedom: with few of them it is itself not well known, and the
// standard uncertainty that follows from it is that of Student's distribution,
// larger by sqrt(n/(n - 2)) (JCGM 101:2008, 6.4.9).
func spread(squares, degrees float64) float64 {
	return math.Sqrt(squares / math.Max(1, degrees-2))
}

// correlation is that of the residuals of neighbouring rows, along the curve: where
// the rows leave it in waves, for a second resonance or a wrong form, their number
// says less than it would of independent ones.
func (f *fitted) correlation(d *rows) float64 {
	along, _ := f.residuals(d, f.noise)
	products, squares := 0.0, 0.0
	last := math.NaN()
	for i, r := range along {
		if f.out[i] {
			continue
		}
		if !math.IsNaN(last) {
			products += r * last
		}
		squares, last = squares+r*r, r
	}
	rho := products / squares
	if !(rho > correlationLeast) || rho < 3/math.Sqrt(float64(d.len())) || f.noise.computed(d) {
		return 0
	}
	return math.Min(rho, 0.95)
}

// correlationLeast is where the correlation of neighbouring residuals counts.
const correlationLeast = 0.3

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
