package decay

import (
	"fmt"
	"math"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// weakSNR is a ratio of four of amplitude to noise, in dB: below five the fit
// leaves the bound, below three it may lock to noise.
const weakSNR = 12

// sparse is the number of samples a cycle below which an alias is not excluded by
// any margin.
const sparse = 2.45

const (
	fewCycles = 2 // in the gate below which a wrong offset or edge hardly shows,
	// unless the window holds the decay as a whole, in time constants: a heavily
	// damped ring has no more cycles than that.
	fullWindow = 3
)

// A ring of less than blurredRing times its rate in angular frequency, Q below 0.9, and an
// exponential of more than blurredShare of it account for many a response between them.
const (
	blurredRing  = 1.5
	blurredShare = 0.3
)

// shortWindow is the window, in time constants, below which the fall is hardly seen.
const shortWindow = 0.45

// doubts lists what makes a measured decay less trustworthy; forced is the model that
// was asked for, "" for none.
func doubts(g *gate, d *Decay, v noise, forced Model) []Finding {
	var out []Finding
	q := &d.Quantities
	u := (d.To - d.From) * q.DecayRate.Value
	if u < shortWindow {
		out = append(out, warning(capture.ShortRecord,
			fmt.Sprintf("The record covers %.2g time constants of the decay; Q rests on a fall of only %s.", u, percent(-math.Expm1(-u))),
			"Record longer: three to five time constants."))
	}
	if d.Cycles < fewCycles && u < fullWindow {
		out = append(out, warning(capture.FewCycles,
			fmt.Sprintf("Only %.2g cycles lie in the gate.", d.Cycles),
			"Record more of the decay, or move the gate so that it holds several cycles."))
	}
	if d.SNR < weakSNR {
		out = append(out, warning(capture.WeakSignal,
			fmt.Sprintf("The ring starts at only %.1f times the noise (%.1f dB).", math.Pow(10, d.SNR/20), d.SNR),
			"Shock harder, use a smaller vertical range, or average several decays."))
	}
	if q.Q.Value-0.5 < decaySigma*q.Q.U {
		out = append(out, warning(capture.NearCritical,
			fmt.Sprintf("Q is %s: the record does not tell whether the circuit swings at all.", q.Q),
			"Natural frequency and damping ratio stand; the damped frequency does not."))
	}
	if spc := g.fit.period(); spc < sparse {
		out = append(out, warning(capture.SparseSamples,
			fmt.Sprintf("Only %.3g samples fall on a cycle: a faster ring would look the same (aliasing).", spc),
			"Sample faster, at least five times a cycle, or make sure by a second capture at another rate that the frequency is the true one."))
	}
	if c := g.fit.companion; c != nil {
		out = append(out, g.besides(c, forced == TwoMode))
	} else if forced == TwoMode {
		out = append(out, note(capture.SecondMode, "The two-mode model was forced, but no second ring can be fitted; the result is that of one.", "Nothing, if one exponential suffices."))
	}
	switch b := g.fit.bend; {
	case b == nil && forced == Amplitude:
		out = append(out, note(capture.AmplitudeDependent, "The amplitude model was forced, but no law of the amplitude can be fitted; the result is that without one.", "Nothing, if one exponential suffices."))
	case b != nil:
		out = append(out, dependsOnAmplitude(d, &g.fit, forced == Amplitude))
	case g.fit.rival != nil:
		out = append(out, g.fit.undecided())
	}
	switch dense := v.factor(g.fit.w); {
	case dense > 2 && d.Cycles < chanceCycles:
		out = append(out, warning(capture.ColouredNoise,
			fmt.Sprintf("The noise is %s times as dense at the ring's frequency as white noise of the same size, and there are %.2g cycles: slow noise may pass for so short a ring, or pull it.", figure(dense, 2), d.Cycles),
			"Raise the amplitude of the shock or average several decays, and compare two captures."))
	case dense > 1.5:
		out = append(out, note(capture.ColouredNoise,
			fmt.Sprintf("The noise is %s times as dense at the ring's frequency as white noise of the same size; the uncertainties allow for it.", figure(dense, 2)),
			"Nothing; a lower bandwidth limit does not help, a stronger ring does."))
	}
	return out
}

// besides names the companion of the ring, or, where it was forced, tells how little
// speaks for it.
func (g *gate) besides(c *term, forced bool) Finding {
	f := &g.fit
	share := math.Hypot(c.p, c.q) / f.size()
	frequency := quantity.Format(c.w/(2*math.Pi*f.s.dt), "Hz", 4)
	if little := f.forcedBy(TwoMode, forced); little != "" {
		return warning(capture.SecondMode,
			fmt.Sprintf("%s It has a second ring of %s, %s of the amplitude of the first.", little, frequency, percent(share)),
			"Let the model be chosen, unless you know by other means that something else resonates.")
	}
	switch tone := c.steady(f.s.position(f.s.len() - 1)); {
	case c.w == 0 && f.w < blurredRing*f.a && share > blurredShare:
		return warning(capture.BaselineDrift,
			fmt.Sprintf("An exponential of %s of the ring's amplitude, with a time constant of %s, was fitted beside a ring that has died within a cycle: the two are hardly told apart, and a circuit that does not swing at all may look like both.",
				percent(share), quantity.Format(f.s.dt/c.a, "s", 3)),
			"Compare with a capture at another time base, begin the gate behind the edge with --from, and couple by DC.")
	case c.w == 0:
		return note(capture.BaselineDrift,
			fmt.Sprintf("The ring sits on a baseline that moves exponentially, by %s of the ring's amplitude with a time constant of %s; it was fitted along.",
				percent(share), quantity.Format(f.s.dt/c.a, "s", 3)),
			"Nothing, if the coupling explains it (AC coupling, a clamp that recovers); otherwise look for what still feeds the circuit.")
	case tone && math.Abs(c.w-f.w) < 2*f.a:
		return warning(capture.DriveOn,
			fmt.Sprintf("A steady tone of %s, %s of the ring's amplitude, stays within the width of the resonance: the source still drives the circuit.", frequency, percent(share)),
			"Switch the source off or disconnect it before the decay; the tone was fitted out, but it may not be steady.")
	case tone:
		return warning(capture.InterferingTone,
			fmt.Sprintf("A steady tone of %s, %s of the ring's amplitude, lies over the decay; it was fitted out.", frequency, percent(share)),
			"Find the source of the tone (mains, a switching supply, a clock) and keep it off the probe.")
	default:
		return warning(capture.SecondMode,
			fmt.Sprintf("A second ring of %s, %s of the amplitude of the first, beats with it; both were fitted.", frequency, percent(share)),
			"Find what else resonates (a coupled circuit, a probe lead, a second winding) and quote each ring by itself.")
	}
}

// dependsOnAmplitude says so, or, where the law was forced, how little speaks for it.
func dependsOnAmplitude(d *Decay, f *ringFit, forced bool) Finding {
	q, at := &d.Quantities, d.AtStart
	law := f.bend.law.String()
	if f.rival != nil {
		law += ", or another law that explains as much: the uncertainties span both"
	}
	course := fmt.Sprintf("from %s and Q %s at the first cycle to %s and Q %s as the ring dies; %s.", at.DampedFrequency, at.Q, q.DampedFrequency, q.Q, law)
	if little := f.forcedBy(Amplitude, forced); little != "" {
		return warning(capture.AmplitudeDependent, little+" It runs "+course,
			"Let the model be chosen, unless you know by other means that the loss moves; a capture at twice the amplitude shows it better.")
	}
	return warning(capture.AmplitudeDependent,
		"Loss and frequency depend on the amplitude: "+course,
		"Quote the small-signal values with the amplitude they hold for, and compare with other measurements at the same amplitude only.")
}

// forcedBy says how little speaks for a model that was forced, "" where it was not, or
// would be chosen by itself.
func (f *ringFit) forcedBy(model Model, forced bool) string {
	if !forced {
		return ""
	}
	gain, decisive := f.gainOverOne()
	if gain >= decisive {
		return ""
	}
	return fmt.Sprintf("The %s model was forced: against one exponential it lowers chi-squared by %s, where %s would be decisive.",
		model, figure(gain, 2), figure(decisive, 2))
}

// percent prints a ratio as a percentage with its sign dropped.
func percent(x float64) string { return quantity.Format(100*math.Abs(x), "%", 3) }

// figure is a pure number with digits significant digits and without an exponent.
func figure(x float64, digits int) string { return quantity.Format(x, "", digits) }

// compareReadings holds the classical readings against the fit. They are averages
// over the decay: where frequency and damping move along it, or two rings beat,
// they have no counterpart in the fit.
func compareReadings(d *Decay, m Model, r *Readings) []Finding {
	var out []Finding
	if m != Exponential {
		return nil
	}
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
