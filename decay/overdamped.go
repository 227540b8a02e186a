package decay

import (
	"math"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// overdampedDecay measures what falls without ringing, where two exponentials can
// be told from one. It returns nil where they cannot: nothing then tells f0.
func overdampedDecay(s series, timebase float64) (*Decay, []Finding) {
	best, ok := bestSecondOrder(s)
	if !ok {
		return nil, nil
	}
	r := make([]float64, best.s.len())
	for i, v := range best.s.y {
		r[i] = v - best.value(best.s.position(i))
	}
	v := noiseOf(r, math.Sqrt(best.rss/math.Max(1, float64(best.used-5))))
	one, ok := fitExponential(best.s)
	density := sq(v.rms * v.factor(0))
	if !ok || (one-best.rss)/density < evidence || onlyAtTheEdge(s, best.at, density) {
		return nil, nil
	}
	cov := sym{n: 2}
	for i := range 2 {
		for j := range 2 {
			cov.set(i, j, best.cov.At(i, j)*density)
		}
	}
	q := secondOrderQuantities(best.a, best.d, s.dt, &cov, timebase)
	if !(q.DampingRatio.U < dampingKnown*q.DampingRatio.Value) {
		return nil, nil
	}
	d := &Decay{
		First: best.at, Last: s.len(), From: s.time(best.at), To: s.time(s.len() - 1), Quantities: q,
		NoiseRMS: v.rms, ResidualRMS: math.Sqrt(best.rss / float64(best.used)),
		NoiseFactor: v.factor(0), Used: best.used, Stop: best.stop, Iterations: best.iterations,
		Amplitude: unknown(""), Phase: unknown("rad"),
		Offset:     quantity.New(best.c, best.uC*math.Sqrt(density), ""),
		Parameters: secondOrderParameters(best.a, best.d, s.dt, &cov, timebase),
		law:        secondOrderLaw{best}, noise: v,
	}
	d.SNR = 20 * math.Log10(math.Sqrt((one-best.rss)/float64(best.used))/v.rms)
	return d, []Finding{dampingFinding(&q, best.d, math.Sqrt(cov.At(1, 1)))}
}

// edgeSamples are left out to see whether the second exponential is more than the
// corner of an edge.
const edgeSamples = 4

// onlyAtTheEdge reports whether a few samples behind the onset one exponential is
// enough: then the second was the edge itself.
func onlyAtTheEdge(s series, at int, density float64) bool {
	if at == 0 || s.len()-at < 4*samplesLeast {
		return false
	}
	two, ok := fitSecondOrder(s, at+edgeSamples, s.len())
	one, okOne := fitExponential(two.s)
	return !ok || !okOne || (one-two.rss)/density < evidence
}

// dampingKnown is the relative uncertainty up to which a damping ratio is quoted.
const dampingKnown = 0.3

// bestSecondOrder tries the samples around every onset.
func bestSecondOrder(s series) (best secondOrderFit, found bool) {
	p := newPyramid(s)
	levels := p.flat
	least := math.Inf(1)
	start := 0
	for _, o := range p.onsets() {
		for at := o; at <= o+2 && s.len()-at >= 2*samplesLeast; at++ {
			f, ok := fitSecondOrder(s, at, onsetSamples)
			if !ok {
				continue
			}
			rss := f.rss / float64(f.used) * float64(s.len()-at)
			if left := levels.about(0, at/levels.block) + rss; left < least {
				start, least, found = at, left, true
			}
		}
	}
	if !found {
		return best, false
	}
	return fitSecondOrder(s, start, s.len()-start)
}

// onsetSamples are enough to tell one onset from another.
const onsetSamples = 256

func dampingFinding(q *Quantities, d, u float64) Finding {
	if math.Abs(d) < decaySigma*u {
		return warning(capture.NearCritical,
			sprintf("The damping ratio is %s: the record does not tell on which side of critical it lies.", q.DampingRatio),
			"Natural frequency and damping ratio stand; a damped frequency does not exist at this damping.")
	}
	return warning(capture.Overdamped,
		sprintf("The record falls without swinging, as two exponentials: damping ratio %s.", q.DampingRatio),
		"Natural frequency and damping ratio stand; take out what damps the circuit (source, fitted resistor, probe) if it should ring.")
}

// secondOrderQuantities are those that exist on both sides of critical damping:
// f0, zeta, Q, the decay rate a (the mean of two real rates) and the bandwidth a/pi.
func secondOrderQuantities(a, d, dt float64, cov *sym, timebase float64) Quantities {
	s := math.Sqrt(a*a + d)
	make := func(value, da, dd float64, unit string) quantity.Quantity {
		v := da*da*cov.At(0, 0) + dd*dd*cov.At(1, 1) + 2*da*dd*cov.At(0, 1)
		if unit != "" {
			v += sq(value * timebase)
		}
		return quantity.New(value, math.Sqrt(math.Max(v, 0)), unit)
	}
	tp := 2 * math.Pi
	return Quantities{
		DampedFrequency:  unknown("Hz"),
		NaturalFrequency: make(s/(tp*dt), a/s/(tp*dt), 1/(2*s)/(tp*dt), "Hz"),
		TimeConstant:     make(dt/a, -dt/(a*a), 0, "s"),
		DecayRate:        make(a/dt, 1/dt, 0, "1/s"),
		Q:                make(s/(2*a), 1/(2*s)-s/(2*a*a), 1/(4*a*s), ""),
		DampingRatio:     make(a/s, 1/s-a*a/(s*s*s), -a/(2*s*s*s), ""),
		LogDecrement:     unknown(""),
		Bandwidth:        make(a/(math.Pi*dt), 1/(math.Pi*dt), 0, "Hz"),
	}
}

func unknown(unit string) quantity.Quantity { return quantity.New(math.NaN(), math.NaN(), unit) }

// secondOrderLaw is the fitted curve; there is no envelope but the curve itself.
type secondOrderLaw struct{ f secondOrderFit }

func (l secondOrderLaw) at(t float64) (value, envelope, baseline float64) {
	value, baseline = l.f.value(t/l.f.s.dt), l.f.c
	return value, math.Abs(value - baseline), baseline
}
