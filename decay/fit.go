package decay

import (
	"math"

	"gonum.org/v1/gonum/mat"

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

// ringFit is a damped sinusoid fitted to a window, in the units of the samples'
// index; a, w, c, p, q as in [ring].
type ringFit struct {
	s             series
	a, w, c, p, q float64
	ref           float64
	rss           float64
	n             int
	stop          StopReason
	iterations    int
	normal        normal
}

// fitRing fits a damped sinusoid about a constant, started at (a, w).
func fitRing(s series, a, w float64) (ringFit, bool) {
	if s.len() < 6 {
		return ringFit{}, false
	}
	p := newRing(s)
	if p.n < 6 || !(p.yy > 0) {
		return ringFit{}, false
	}
	sol := minimise(p, []float64{a, w})
	if sol.normal.jtj == nil {
		return ringFit{}, false
	}
	return p.fit(sol), true
}

func (r *ring) fit(sol solution) ringFit {
	b := sol.normal.beta
	return ringFit{
		s: r.s, a: sol.theta[0], w: sol.theta[1], c: b[0], p: b[1], q: b[2], ref: r.ref,
		rss: sol.normal.rss, n: r.n, stop: sol.stop, iterations: sol.iterations, normal: sol.normal,
	}
}

func (f *ringFit) dof() float64     { return math.Max(1, float64(f.n-5)) }
func (f *ringFit) sigma() float64   { return math.Sqrt(f.rss / f.dof()) }
func (f *ringFit) size() float64    { return math.Hypot(f.p, f.q) }
func (f *ringFit) offset() float64  { return f.ref + f.c }
func (f *ringFit) tau() float64     { return f.s.dt / f.a }
func (f *ringFit) period() float64  { return 2 * math.Pi / f.w } // samples
func (f *ringFit) qFactor() float64 { return math.Hypot(f.a, f.w) / (2 * f.a) }

// value returns the curve n intervals after the first sample of the window.
func (f *ringFit) value(n float64) float64 {
	sin, cos := math.Sincos(f.w * n)
	return f.offset() + math.Exp(-f.a*n)*(f.p*cos+f.q*sin)
}

// residuals of the samples first to last-1 of s, whose sample 0 is n0 intervals
// after the start of the fitted window.
func (f *ringFit) residuals(s series, n0 float64) []float64 {
	out := make([]float64, s.len())
	if s.times != nil {
		for i, v := range s.y {
			out[i] = v - f.value(n0+s.position(i))
		}
		return out
	}
	t := newPowers(f.a, f.w)
	c := f.offset()
	for at := 0; at < len(out); at += blockLength {
		n := n0 + float64(at)
		sin, cos := math.Sincos(f.w * n)
		e := math.Exp(-f.a * n)
		// (p - jq) base z^m, of which the real part is the curve.
		re, im := e*(f.p*cos+f.q*sin), e*(f.p*sin-f.q*cos)
		for m := range min(blockLength, len(out)-at) {
			out[at+m] = s.y[at+m] - c - (re*t.re[m] - im*t.im[m])
		}
	}
	return out
}

// covariance returns the covariance of (a, w, c, p, q) for noise v: the inverse
// of J'J with the noise density where each parameter lives, at the damped
// frequency for all but the offset and at zero for the offset.
func (f *ringFit) covariance(v noise) (*mat.SymDense, bool) {
	cov, ok := invertSym(f.normal.jtj)
	if !ok {
		return nil, false
	}
	at, zero := v.rms*v.factor(f.w), v.rms*v.factor(0)
	scale := [5]float64{at, at, zero, at, at}
	for i := range 5 {
		for j := i; j < 5; j++ {
			cov.SetSym(i, j, cov.At(i, j)*scale[i]*scale[j])
		}
	}
	return cov, true
}

// quantitiesOf carries (a, w), radians and nepers per interval dt (s), with their
// covariance to everything that follows from them; timebase is the relative
// standard uncertainty of dt, which leaves pure numbers alone. The formulas are
// those of the damped oscillator: s^2 = a^2 + w^2, f0 = s/(2 pi dt), Q = s/(2a).
func quantitiesOf(a, w, dt float64, cov mat.Symmetric, timebase float64) Quantities {
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
func (f *ringFit) shape(cov mat.Symmetric, unit string) (amplitude, phase, offset quantity.Quantity) {
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

// exponentialLaw is the fitted curve of a ringFit in physical units.
type exponentialLaw struct{ amplitude, rate, omega, phase, offset float64 }

func (f *ringFit) law() law {
	return exponentialLaw{f.size(), f.a / f.s.dt, f.w / f.s.dt, math.Atan2(-f.q, f.p), f.offset()}
}

func (l exponentialLaw) at(t float64) (value, envelope, baseline float64) {
	envelope = l.amplitude * math.Exp(-l.rate*t)
	return l.offset + envelope*math.Cos(l.omega*t+l.phase), envelope, l.offset
}
