package decay

import (
	"math"

	"dieaway/decay/quantity"
)

// A StopReason says why the iteration of a fit ended.
type StopReason int

// The reasons.
const (
	NotRun       StopReason = iota // no fit was made
	Converged                      // the step fell below a thousandth of the uncertainty
	NoProgress                     // no shorter step lowers the residual
	IterationCap                   // the limit of iterations was reached
	LeftDomain                     // a parameter left the range in which it means anything
	Singular                       // the normal equations cannot be solved
)

var stopNames = [...]string{"not run", "converged", "no progress", "iteration cap", "left domain", "singular"}

// String returns the reason in words.
func (s StopReason) String() string {
	if s < 0 || int(s) >= len(stopNames) {
		return "unknown"
	}
	return stopNames[s]
}

// ringFit is a damped sinusoid fitted to a window, in intervals of the samples,
// with a companion or none: y(n) = ref + c + exp(-a n) (p cos wn + q sin wn) + ...
type ringFit struct {
	s             series
	a, w, c, p, q float64
	ref           float64
	companion     *term // beside the ring, or nil
	bend          *bend // its dependence on the amplitude, or nil
	rss           float64
	n             int
	stop          StopReason
	iterations    int
	normal        normal
	problem       *poles // that it solves; nil with an amplitude law
	nodes         *nodal // sums of a fit with an amplitude law, or nil
	left          *noise // see noise
	rival         *rival // a model that the samples do not rule out, or nil
}

// term is a component beside the ring: a second ring, or, with w = 0, a plain
// exponential p exp(-a n).
type term struct{ a, w, p, q float64 }

func (t *term) at(n float64) float64 {
	sin, cos := math.Sincos(t.w * n)
	return math.Exp(-t.a*n) * (t.p*cos + t.q*sin)
}

// fitRing fits a damped sinusoid about a constant, started at (a, w), to the
// tolerance of [minimise]. It is false when no fit can be made at all.
func fitRing(s series, a, w, tolerance float64) (ringFit, bool) {
	return fitSum(s, pole{a, w}, nil, tolerance)
}

// fitSum fits a ring and, unless it is nil, a companion.
func fitSum(s series, ring pole, companion *pole, tolerance float64) (ringFit, bool) {
	if s.len() < samplesLeast {
		return ringFit{}, false
	}
	return newRing(s).fitSum(ring, companion, tolerance)
}

// fitSum does so to the samples of p.
func (p *poles) fitSum(ring pole, companion *pole, tolerance float64) (ringFit, bool) {
	switch {
	case companion == nil:
		return p.alike(1, 0).solve([]float64{ring.a, ring.w}, tolerance)
	case companion.w > 0:
		return p.alike(2, 0).solve([]float64{ring.a, ring.w, companion.a, companion.w}, tolerance)
	default:
		return p.alike(1, 1).solve([]float64{ring.a, ring.w, companion.a}, tolerance)
	}
}

// solve fits from theta on.
func (p *poles) solve(theta []float64, tolerance float64) (ringFit, bool) {
	if p.n < samplesLeast || !(p.yy > 0) {
		return ringFit{}, false
	}
	sol := minimise(p, theta, tolerance)
	if sol.stop == Singular {
		return ringFit{}, false
	}
	return p.fit(sol), true
}

func (r *poles) fit(sol solution) ringFit {
	b := sol.normal.beta
	f := ringFit{
		s: r.s, a: sol.theta[0], w: sol.theta[1], c: b[0], p: b[1], q: b[2], ref: r.ref,
		rss: sol.normal.rss, n: r.n, stop: sol.stop, iterations: sol.iterations, normal: sol.normal,
		problem: r,
	}
	switch {
	case r.rings == 2:
		f.companion = &term{sol.theta[2], sol.theta[3], b[3], b[4]}
	case r.falls == 1:
		f.companion = &term{a: sol.theta[2], p: b[3]}
	}
	return f
}

// places of a, w, c, p, q among the parameters of the normal equations.
func (f *ringFit) places() [5]int {
	k := f.normal.jtj.n - len(f.normal.beta)
	return [5]int{0, 1, k, k + 1, k + 2}
}

// theta lists the nonlinear parameters of a fit without an amplitude law.
func (f *ringFit) theta() []float64 {
	switch c := f.companion; {
	case c == nil:
		return []float64{f.a, f.w}
	case c.w > 0:
		return []float64{f.a, f.w, c.a, c.w}
	default:
		return []float64{f.a, f.w, c.a}
	}
}

// companionPole is the start of a fit with the same companion, nil for none.
func (f *ringFit) companionPole() *pole {
	if f.companion == nil {
		return nil
	}
	return &pole{f.companion.a, f.companion.w}
}

// aboutMean is the energy of the window about its mean.
func (f *ringFit) aboutMean() float64 {
	if f.problem != nil {
		return f.problem.aboutMean()
	}
	return newRing(f.s).aboutMean()
}

func (f *ringFit) dof() float64    { return math.Max(1, float64(f.n-f.normal.jtj.n)) }
func (f *ringFit) sigma() float64  { return math.Sqrt(f.rss / f.dof()) }
func (f *ringFit) size() float64   { return math.Hypot(f.p, f.q) }
func (f *ringFit) offset() float64 { return f.ref + f.c }
func (f *ringFit) period() float64 { return 2 * math.Pi / f.w } // samples

// ring returns the oscillation n intervals after the first sample of the window.
func (f *ringFit) ring(n float64) float64 {
	if f.bend == nil {
		ring := term{f.a, f.w, f.p, f.q}
		return ring.at(n)
	}
	u, phase := f.bend.at(f.a, f.w, n)
	sin, cos := math.Sincos(phase)
	return u * (f.p*cos + f.q*sin)
}

// value returns the curve n intervals after the first sample of the window.
func (f *ringFit) value(n float64) float64 {
	v := f.offset() + f.ring(n)
	if f.companion != nil {
		v += f.companion.at(n)
	}
	return v
}

// covariance returns the covariance of (a, w, c, p, q) for noise v.
func (f *ringFit) covariance(v noise) (cov sym, ok bool) {
	full, ok := f.fullCovariance(v)
	return f.ringPart(&full), ok
}

// fullCovariance returns the covariance of all parameters: in white noise the
// inverse of J'J times the variance, in coloured noise the sandwich, or, for long
// windows, the inverse scaled by the density where each parameter lives: at the
// ring's frequency, for the offset at zero. It is widened for what is not known
// of the noise, and for a model that the samples do not rule out.
func (f *ringFit) fullCovariance(v noise) (sym, bool) {
	cov, ok := f.plainCovariance(v)
	k := sq(widening(v.freedom(f.w, cov.n)))
	for i := range cov.v {
		cov.v[i] *= k
	}
	f.rival.widen(&cov)
	return cov, ok
}

func (f *ringFit) plainCovariance(v noise) (sym, bool) {
	if len(v.ar) > 0 && f.s.len() <= sandwichSamples {
		if c, ok := newColoured(f); ok {
			meat := c.meat(c.density(v))
			out := c.sandwich(&meat)
			for i := range out.v {
				out.v[i] *= v.rms * v.rms
			}
			return out, true
		}
	}
	cov, ok := f.normal.jtj.inverse()
	at, zero, offset := v.rms*v.factor(f.w), v.rms*v.factor(0), f.places()[2]
	scale := func(i int) float64 {
		if i == offset {
			return zero
		}
		return at
	}
	for i := range cov.n {
		for j := range i + 1 {
			cov.set(i, j, cov.At(i, j)*scale(i)*scale(j))
		}
	}
	return cov, ok
}

// noise describes what the fit leaves of its window.
func (f *ringFit) noise() noise {
	if f.left == nil {
		v := f.noiseLeft()
		f.left = &v
	}
	return *f.left
}

func (f *ringFit) noiseLeft() noise {
	r := f.residuals(f.s.slice(0, min(f.s.len(), noiseSamples)), 0)
	v := noiseOf(r, f.sigma())
	if len(v.ar) == 0 || f.s.len() > unbiasSamples || !f.s.whole() {
		return v
	}
	c, ok := newColoured(f)
	if !ok {
		return v
	}
	return c.unbiased(v, r)
}

// quantitiesOf carries (a, w), radians and nepers per interval dt (s), with their
// covariance to everything that follows from them; timebase is the relative
// standard uncertainty of dt, which leaves pure numbers alone. The formulas are
// those of the damped oscillator: s^2 = a^2 + w^2, f0 = s/(2 pi dt), Q = s/(2a).
func quantitiesOf(a, w, dt float64, cov *sym, timebase float64) Quantities {
	s := math.Hypot(a, w)
	caa, cww, caw := cov.At(0, 0), cov.At(1, 1), cov.At(0, 1)
	// make propagates a derivative (da, dw) and adds the time base where it enters.
	make := func(value, da, dw float64, unit string) quantity.Quantity {
		v := da*da*caa + dw*dw*cww + 2*da*dw*caw
		if unit != "" {
			v += value * timebase * value * timebase
		}
		return quantity.New(value, math.Sqrt(math.Max(v, 0)), unit)
	}
	tp := 2 * math.Pi
	return Quantities{
		DampedFrequency:  make(w/(tp*dt), 0, 1/(tp*dt), "Hz"),
		NaturalFrequency: make(s/(tp*dt), a/s/(tp*dt), w/s/(tp*dt), "Hz"),
		TimeConstant:     make(dt/a, -dt/(a*a), 0, "s"),
		DecayRate:        make(a/dt, 1/dt, 0, "1/s"),
		Q:                make(s/(2*a), -w*w/(2*a*a*s), w/(2*a*s), ""),
		DampingRatio:     make(a/s, w*w/(s*s*s), -a*w/(s*s*s), ""),
		LogDecrement:     make(tp*a/w, tp/w, -tp*a/(w*w), ""),
		Bandwidth:        make(a/(math.Pi*dt), 1/(math.Pi*dt), 0, "Hz"),
		Correlation:      caw / math.Sqrt(caa*cww),
	}
}

// shape returns amplitude, phase and offset with their uncertainty, in unit.
func (f *ringFit) shape(cov *sym, unit string) (amplitude, phase, offset quantity.Quantity) {
	size := f.size()
	u := func(dp, dq float64) float64 {
		v := dp*dp*cov.At(3, 3) + dq*dq*cov.At(4, 4) + 2*dp*dq*cov.At(3, 4)
		return math.Sqrt(math.Max(v, 0))
	}
	amplitude = quantity.New(size, u(f.p/size, f.q/size), unit)
	phase = quantity.New(math.Atan2(-f.q, f.p), u(f.q/(size*size), -f.p/(size*size)), "rad")
	offset = quantity.New(f.offset(), math.Sqrt(cov.At(2, 2)), unit)
	return amplitude, phase, offset
}
