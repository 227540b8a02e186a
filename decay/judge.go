package decay

import (
	"fmt"
	"math"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

const (
	samplesLeast  = 8
	decaySigma    = 3    // a rate nearer to zero than this is no decay
	ringingLeast  = 3    // samples that must carry the ring
	fallsShare    = 0.25 // of the energy that a bare exponential may leave
	signChange    = 2.01 // samples a cycle below which a fit that fails is one of samples that only change sign
	oscillateGain = 16   // chi-squared that an oscillation must explain beyond an exponential
)

// unfit names what makes a record useless before any fit.
func unfit(s series, first, last int) (Finding, bool) {
	w := s.slice(min(first, s.len()), max(min(first, s.len()), last))
	n := w.count()
	if w.len() == 0 && s.len() > 0 {
		return fault(capture.NoDecay,
			fmt.Sprintf("No sample lies in the gate: the record runs from %s to %s.", quantity.Format(s.time(0), "s", 6), quantity.Format(s.time(s.len()-1), "s", 6)),
			"Set the gate inside the record."), true
	}
	if n < samplesLeast {
		return fault(capture.NoDecay,
			fmt.Sprintf("Only %d samples lie in the gate; at least %d are needed to fit a decay.", n, samplesLeast),
			"Widen the gate, or capture more samples of the decay."), true
	}
	if s.lo == s.hi {
		return fault(capture.NoDecay,
			fmt.Sprintf("All %d samples have the same value, %g.", n, s.lo),
			"Check the probe, the channel and the vertical range."), true
	}
	return Finding{}, false
}

func fault(code capture.Code, message, remedy string) Finding {
	return Finding{Code: code, Severity: capture.Fault, Message: message, Remedy: remedy}
}

func warning(code capture.Code, message, remedy string) Finding {
	return Finding{Code: code, Severity: capture.Warning, Message: message, Remedy: remedy}
}

func note(code capture.Code, message, remedy string) Finding {
	return Finding{Code: code, Severity: capture.Note, Message: message, Remedy: remedy}
}

func noRing() Finding {
	return fault(capture.NoDecay,
		"Nothing in the record follows a damped oscillation.",
		"Check that the record holds the decay, and that the channel is the one that rings.")
}

// judge decides whether the fit measures a free decay at all. The reasons for a
// refusal are faults.
func judge(s series, g *gate, d *Decay, v noise) (Finding, bool) {
	why, refuse := noDecay(g, d, v)
	if !refuse {
		why, refuse = byChance(s, g, d)
	}
	if !refuse {
		why, refuse = notOscillating(&g.fit, v)
	} else if fallsOnly(s) {
		why = bareExponential()
	}
	return why, refuse
}

// noDecay names what the fit is when it is no free decay.
func noDecay(g *gate, d *Decay, v noise) (Finding, bool) {
	f, q := &g.fit, &d.Quantities
	switch unknown := !q.Q.Known() || math.IsNaN(q.DecayRate.U); {
	case unknown && f.period() < signChange:
		return fault(capture.SparseSamples,
			"Two samples fall on a cycle: they only change sign, which tells no frequency, as phase and amplitude are not to be told apart.",
			"Sample faster, at least five times a cycle."), true
	case unknown:
		return noRing(), true
	}
	if gain, need := energyGain(f, v), energyNeeded(f.s.len()); gain < need {
		return fault(capture.NoDecay,
			fmt.Sprintf("No decay stands out of the noise: the best fit explains %s times the noise, and chance alone explains up to %s in %s samples.", figure(gain, 3), figure(need, 3), quantity.Count(f.n)),
			"Raise the amplitude of the shock or average several decays; check that the channel is the one that rings."), true
	}
	if n := f.samplesRinging(); n < ringingLeast {
		return fault(capture.NoDecay,
			fmt.Sprintf("What stands out is over within %.2g samples: an edge or a glitch, not a decay.", n),
			"Sample faster if the circuit rings that fast; otherwise check that the record holds the decay."), true
	}
	rate, u := q.DecayRate.Value, q.DecayRate.U
	if rate < -decaySigma*u {
		return fault(capture.NoDecay,
			fmt.Sprintf("The oscillation grows, by %s a cycle: this is no free decay.", percent(math.Expm1(-q.LogDecrement.Value))),
			"Remove what feeds the circuit (an oscillating amplifier, a drive that is still building up), or begin the gate after it."), true
	}
	if rate < decaySigma*u {
		return fault(capture.DriveOn,
			fmt.Sprintf("The amplitude does not fall in the gate: its rate is %s, which cannot be told from zero.", q.DecayRate),
			"Switch the source off for the capture, or, if it is off, record longer: at least a fifth of the time constant, better three."), true
	}
	return Finding{}, false
}

// samplesRinging is the number of samples that carry the ring: the square of its
// energy over the sum of its fourth powers, along the envelope.
func (f *ringFit) samplesRinging() float64 {
	e2, e4 := 0.0, 0.0
	for i := range min(f.s.len(), 256) {
		v := math.Exp(-2 * f.a * float64(i))
		e2 += v
		e4 += v * v
	}
	return e2 * e2 / e4
}

const (
	chanceCycles = 4       // cycles below which coloured noise makes a ring by chance,
	chanceShare  = 1.0 / 3 // in a part of the record that is no larger than this,
	chanceRatio  = 4       // of an amplitude no larger than this over the rms of the rest,
	chanceSNR    = 50      // nor than this over what the fit leaves
)

// byChance refuses a short ring in a record that moves as much elsewhere: in
// slow noise a stretch that looks like a few cycles is found by looking for it.
func byChance(s series, g *gate, d *Decay) (Finding, bool) {
	n := g.last - g.first
	if !(d.Cycles < chanceCycles) || float64(n) > chanceShare*float64(s.len()) {
		return Finding{}, false
	}
	rest := math.Inf(1)
	for _, side := range [][2]int{{0, g.first}, {g.last, s.len()}} {
		if side[1]-side[0] < n {
			continue
		}
		p := newRing(s.slice(side[0], side[1]).thinned(choiceSamples))
		rest = math.Min(rest, math.Sqrt(p.aboutMean()/float64(max(1, p.n))))
	}
	if size := g.fit.size(); math.IsInf(rest, 1) || size > chanceRatio*rest || size > chanceSNR*g.fit.sigma() {
		return Finding{}, false
	}
	return fault(capture.NoDecay,
		fmt.Sprintf("The best candidate is %.2g cycles of %s times what the rest of the record moves by: slow noise makes such a stretch by chance.", d.Cycles, figure(g.fit.size()/rest, 2)),
		"Raise the amplitude of the shock or average several decays; set the gate by hand if the ring is known to be there."), true
}

// energyGain is the energy that the ring explains beyond a constant, in units of
// the noise density where the ring lives.
func energyGain(f *ringFit, v noise) float64 {
	return (f.aboutMean() - f.rss) / sq(v.rms*v.factor(f.w))
}

// energyNeeded is what the largest of n noise lines explains by chance (twice the
// logarithm of their number) with a margin for the search over rates and windows.
func energyNeeded(n int) float64 { return 2*math.Log(float64(n)) + 20 }

// notOscillating refuses what does not swing: the fit must explain more than a
// bare exponential does, and no less than two of them.
func notOscillating(f *ringFit, v noise) (Finding, bool) {
	if f.w > heavyRatio*f.a {
		return Finding{}, false // it swings several times: no exponential does
	}
	if twoFallsDo(f) {
		return bareExponential(), true
	}
	e, ok := fitExponential(f.s)
	if !ok {
		return Finding{}, false
	}
	gain := (e - f.rss) / sq(v.rms*v.factor(f.w))
	if gain > oscillateGain && f.w > f.a*0.1 {
		return Finding{}, false
	}
	return bareExponential(), true
}

// twoFallsDo reports whether two exponentials, the response above critical damping,
// explain the window of a heavily damped ring better than the ring does, or as well
// as one that needs a companion or an amplitude law for it.
func twoFallsDo(f *ringFit) bool {
	window := f.s.thinned(choiceSamples)
	falls, ok := fitTwoFalls(window, fallStarts(window))
	if !ok {
		return false
	}
	ring, left := 0.0, make([]float64, 0, window.len())
	for i, r := range f.residuals(window, 0) {
		if r == r {
			ring += r * r
			left = append(left, window.y[i]-falls.value(window.position(i)))
		}
	}
	v := noiseOf(left, math.Sqrt(falls.rss/math.Max(1, float64(falls.used-5))))
	gain := (ring - falls.rss) / sq(v.rms*v.factor(0))
	if f.companion != nil || f.bend != nil {
		gain += 2 * oscillateGain
	}
	return gain > oscillateGain
}

func bareExponential() Finding {
	return fault(capture.Overdamped,
		"The record falls without swinging: a bare exponential fits it as well as a damped oscillation does.",
		"Nothing rings here that has a frequency: check the wiring, the probe and what loads the circuit.")
}

// fallsOnly reports whether a bare exponential from one of the onsets on accounts
// for most of what moves in the record.
func fallsOnly(s series) bool {
	p := newPyramid(s)
	all := p.levels[0].len()
	total := p.flat.left(0, all)
	for _, o := range p.onsets() {
		if all-o < 2*samplesLeast {
			continue
		}
		k := p.levelFor(all-o, startMeans)
		level := p.levels[k].slice(o/scale(k), p.levels[k].len())
		fall, ok := fitExponential(level)
		if !ok {
			continue
		}
		block := o / p.flat.block
		before, behind := p.flat.about(0, block), p.flat.about(block, len(p.flat.sum)-1)
		explained := float64(scale(k)) * (newRing(level).aboutMean() - fall)
		if before+behind-explained < fallsShare*total {
			return behind > fallsShare*total
		}
	}
	return false
}

// startMeans are enough to find the rates of exponentials on, as means of a long window.
const startMeans = 1 << 12

// fitExponential returns the residual sum of squares of a bare exponential about
// a constant, from the best of a row of start rates.
func fitExponential(s series) (float64, bool) {
	means, m := s.averaged(startMeans)
	p := newPoles(means, 0, 1)
	best, at := math.Inf(1), 0.0
	for _, u := range []float64{0.3, 2, 8, 30} {
		if sol := minimise(p, []float64{u / p.length}, coarse); sol.stop != Singular && sol.normal.rss < best {
			best, at = sol.normal.rss, sol.theta[0]
		}
	}
	if m > 1 && !math.IsInf(best, 1) {
		sol := minimise(newPoles(s, 0, 1), []float64{at / float64(m)}, coarse)
		return sol.normal.rss, sol.stop != Singular
	}
	return best, !math.IsInf(best, 1)
}
