package decay

import (
	"fmt"
	"math"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

const (
	samplesLeast  = 8
	decaySigma    = 3   // a rate nearer to zero than this is no decay
	critical      = 0.6 // Q below which one damped sinusoid is not told from two exponentials
	oscillateGain = 16  // chi-squared that an oscillation must explain beyond an exponential
)

// unfit names what makes a record useless before any fit.
func unfit(s series, first, last int) (Finding, bool) {
	w := s.slice(min(first, s.len()), max(min(first, s.len()), last))
	n := w.count()
	if n < samplesLeast {
		return fault(capture.NoDecay,
			fmt.Sprintf("only %d samples lie in the gate; at least %d are needed to fit a decay.", n, samplesLeast),
			"Widen the gate, or capture more samples of the decay."), true
	}
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range w.y {
		if !math.IsNaN(v) {
			lo, hi = math.Min(lo, v), math.Max(hi, v)
		}
	}
	if lo == hi {
		return fault(capture.NoDecay,
			fmt.Sprintf("All %d samples have the same value, %g.", n, lo),
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
func judge(g *gate, d *Decay, v noise) ([]Finding, bool) {
	f := &g.fit
	q := &d.Quantities
	if !q.Q.Known() || math.IsNaN(q.DecayRate.U) {
		return []Finding{noRing()}, true
	}
	window := f.s
	if gain, need := energyGain(f, v), energyNeeded(window.len()); gain < need {
		return []Finding{fault(capture.NoDecay,
			fmt.Sprintf("No decay stands out of the noise: the best fit explains %.3g times the noise, and chance alone explains up to %.3g in %d samples.", gain, need, f.n),
			"Raise the amplitude of the shock or average several decays; check that the channel is the one that rings.")}, true
	}
	rate, u := q.DecayRate.Value, q.DecayRate.U
	if rate < -decaySigma*u {
		return []Finding{fault(capture.NoDecay,
			fmt.Sprintf("The oscillation grows, by %s a cycle: this is no free decay.", percent(math.Expm1(-q.LogDecrement.Value))),
			"Remove what feeds the circuit (an oscillating amplifier, a drive that is still building up) or set the gate behind it.")}, true
	}
	if rate < decaySigma*u {
		return []Finding{fault(capture.DriveOn,
			fmt.Sprintf("The amplitude does not fall within the record: its rate is %s, which is not told from zero.", q.DecayRate),
			"Switch the source off for the capture, or, if it is off, record longer: at least a fifth of the time constant, better three.")}, true
	}
	return overdampedReasons(f, q, v)
}

// energyGain is the energy that the ring explains beyond a constant, in units of
// the noise density where the ring lives.
func energyGain(f *ringFit, v noise) float64 {
	return (newRing(f.s).aboutMean() - f.rss) / sq(v.rms*v.factor(f.w))
}

// energyNeeded is what the largest of n noise lines explains by chance (twice the
// logarithm of their number) with a margin for the search over rates and windows.
func energyNeeded(n int) float64 { return 2*math.Log(float64(n)) + 20 }

// overdampedReasons refuses what does not oscillate: the fit must explain more
// than a bare exponential does.
func overdampedReasons(f *ringFit, q *Quantities, v noise) ([]Finding, bool) {
	e, ok := fitExponential(f.s)
	if !ok {
		return nil, false
	}
	gain := (e - f.rss) / sq(v.rms*v.factor(f.w))
	if gain > oscillateGain && f.w > f.a*0.1 {
		return nil, false
	}
	return []Finding{fault(capture.Overdamped,
		"The record falls without swinging: a bare exponential fits it as well as a damped oscillation does.",
		"Nothing rings here that has a frequency; check the wiring and the probe, or read the time constant with a model without oscillation.")}, true
}

// fitExponential returns the residual sum of squares of a bare exponential about
// a constant, from the best of a row of start rates.
func fitExponential(s series) (float64, bool) {
	p := newPoles(s, 0, 1)
	best := math.Inf(1)
	for _, u := range []float64{0.3, 2, 8, 30} {
		if sol := minimise(p, []float64{u / p.length}, coarse); sol.stop != Singular {
			best = math.Min(best, sol.normal.rss)
		}
	}
	return best, !math.IsInf(best, 1)
}

// doubts lists what makes a measured decay less trustworthy.
func doubts(g *gate, d *Decay, v noise) []Finding {
	var out []Finding
	q := &d.Quantities
	u := (d.To - d.From) * q.DecayRate.Value
	if u < 0.5 {
		out = append(out, warning(capture.ShortRecord,
			fmt.Sprintf("The record covers %.2g time constants of the decay; Q hangs on a fall of only %s.", u, percent(-math.Expm1(-u))),
			"Record longer: three to five time constants."))
	}
	if d.Cycles < 2 && q.Q.Value > 1 {
		out = append(out, warning(capture.FewCycles,
			fmt.Sprintf("Only %.2g cycles lie in the gate.", d.Cycles),
			"Record more of the decay, or move the gate so that it holds several cycles."))
	}
	if d.SNR < 14 {
		out = append(out, warning(capture.WeakSignal,
			fmt.Sprintf("The ring starts at only %.1f times the noise (%.1f dB).", math.Pow(10, d.SNR/20), d.SNR),
			"Shock harder, use a smaller vertical range, or average several decays."))
	}
	if v.factor(g.fit.w) > 1.5 {
		out = append(out, note(capture.ColouredNoise,
			fmt.Sprintf("The noise is %.2g times as dense at the ring's frequency as white noise of the same size; the uncertainties allow for it.", v.factor(g.fit.w)),
			"Nothing to do; a lower bandwidth limit does not help, a stronger ring does."))
	}
	return out
}

// percent prints a ratio as a percentage with its sign dropped.
func percent(x float64) string { return fmt.Sprintf("%.3g %%", 100*math.Abs(x)) }

// compareReadings holds the classical readings against the fit.
func compareReadings(d *Decay, r *Readings) []Finding {
	var out []Finding
	check := func(what string, reading, fit quantity.Quantity) {
		if !reading.Known() || !(reading.U > 0) {
			return
		}
		// The reading uses a few of the samples of the fit, so that their errors
		// are all but independent; beyond four times their joint uncertainty.
		if diff := math.Abs(reading.Value - fit.Value); diff > 4*math.Hypot(reading.U, fit.U) {
			out = append(out, warning(capture.ReadingsDisagree,
				fmt.Sprintf("The %s is %s but the fit gives %s: they differ by %s, beyond both uncertainties.", what, reading, fit, percent(diff/fit.Value)),
				"Look at the residual and at the log of the envelope: the decay is not one exponential, or something disturbs its first cycles."))
		}
	}
	check("frequency read from the crossings", r.DampedFrequency, d.Quantities.DampedFrequency)
	check("log decrement read from the peaks", r.LogDecrement, d.Quantities.LogDecrement)
	return out
}
