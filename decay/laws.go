package decay

import "math"

// exponentialLaw is the fitted curve of a ringFit in physical units.
type exponentialLaw struct {
	amplitude, rate, omega, phase, offset float64
	companion                             *term // rates and frequency per second
}

func (f *ringFit) law() law {
	if f.bend != nil {
		own := *f
		own.nodes = nil // they need not outlive the analysis
		return bentLaw{own}
	}
	l := exponentialLaw{f.size(), f.a / f.s.dt, f.w / f.s.dt, math.Atan2(-f.q, f.p), f.offset(), nil}
	if c := f.companion; c != nil {
		l.companion = &term{c.a / f.s.dt, c.w / f.s.dt, c.p, c.q}
	}
	return l
}

// at counts a plain exponential to the baseline and the beat of a second ring to
// the envelope.
func (l exponentialLaw) at(t float64) (value, envelope, baseline float64) {
	envelope, baseline = l.amplitude*math.Exp(-l.rate*t), l.offset
	value = envelope * math.Cos(l.omega*t+l.phase)
	switch c := l.companion; {
	case c == nil:
	case c.w == 0:
		baseline += c.at(t)
	default:
		value += c.at(t)
		envelope = c.beat(t, envelope, l.omega*t+l.phase)
	}
	return value + baseline, envelope, baseline
}

// beat is the envelope of the sum of this ring and another of the given envelope
// and phase: the magnitude of the sum of two phasors.
func (t *term) beat(at, envelope, phase float64) float64 {
	e := math.Exp(-t.a*at) * math.Hypot(t.p, t.q)
	d := phase - (t.w*at + math.Atan2(-t.q, t.p))
	return math.Sqrt(math.Max(0, envelope*envelope+e*e+2*envelope*e*math.Cos(d)))
}

// bentLaw is the fitted curve of an amplitude law.
type bentLaw struct{ f ringFit }

func (l bentLaw) at(t float64) (value, envelope, baseline float64) {
	n := t / l.f.s.dt
	u, _, _, _, _, _ := l.f.bend.law.shape(l.f.a, l.f.bend.b, n)
	return l.f.value(n), u * l.f.size(), l.f.offset()
}
