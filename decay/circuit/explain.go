package circuit

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// explain says in plain words where differences come from.
func (c *comparer) explain() {
	c.say(c.explainMeasured())
	for _, w := range c.sides() {
		if c.unload {
			c.say(c.explainSource(w))
			c.say(c.explainProbe(w))
		}
	}
	c.say(c.explainPeak())
	c.say(c.explainAmplitude())
	c.say(c.explainSpeed())
	c.say(c.explainUnloaded())
	c.say(c.explainClocks())
}

func (c *comparer) say(s string) {
	if s != "" {
		s = strings.ToUpper(s[:1]) + s[1:]
		c.Explanations = append(c.Explanations, strings.TrimSuffix(s, ".")+".")
	}
}

// explainMeasured states the difference that the rest explains.
func (c *comparer) explainMeasured() string {
	q, _ := c.comparison(AsMeasured, "q")
	f, _ := c.comparison(AsMeasured, "natural_frequency_hz")
	s := fmt.Sprintf("as measured, Q is %s by the ring-down and %s by the sweep (E_n %s), f_0 %s and %s (E_n %s)",
		q.RingDown, q.Sweep, figure(q.En), f.RingDown, f.Sweep, figure(f.En))
	if c.Decisive == AsMeasured {
		return s + ": they " + agreement(c.Agrees) + c.sameLoad()
	}
	return s
}

// sameLoad says on what a comparison as measured rests.
func (c *comparer) sameLoad() string {
	if c.alike && c.scene.bench.File == "" {
		return "; this counts only if the same source and probe were connected both times, and a bench file takes them out"
	}
	return ""
}

// figure is a degree of equivalence to two digits.
func figure(en float64) string { return quantity.Format(en, "", 2) }

func agreement(agrees bool) string {
	if agrees {
		return "agree"
	}
	return "disagree"
}

// explainSource says what the source takes in a set-up.
func (c *comparer) explainSource(w *sideWork) string {
	for _, l := range w.Budget {
		if l.Part == partSource {
			return fmt.Sprintf("the source resistance of %s takes %s of the loss in the %s",
				quantity.Format(w.at.source, "ohm", 4), Share(l.Share), w.name)
		}
	}
	return ""
}

// Share is a share of the loss in percent, for people.
func Share(q quantity.Quantity) string {
	if q.U == 0 {
		return quantity.Format(100*q.Value, "%", 4) // digits that nobody measured
	}
	return quantity.New(100*q.Value, 100*q.U, "%").String()
}

// explainProbe says what the probe moves in a set-up.
func (c *comparer) explainProbe(w *sideWork) string {
	source, resistor, probe := c.scene.parts(w.at)
	if probe == (Load{}) {
		return ""
	}
	r := w.m.resonance()
	without := c.scene.tank(r, w.at).Loaded(source.Plus(resistor))
	return fmt.Sprintf("the probe shifts f_0 by %s and Q by %s in the %s",
		signed(r.NaturalFrequency/without.NaturalFrequency-1), signed(r.Q()/without.Q()-1), w.name)
}

// signed is a relative change: in ppm up to a tenth of a percent.
func signed(x float64) string {
	if math.Abs(x) < 1e-3 {
		return fmt.Sprintf("%+.0f ppm", x*1e6)
	}
	return fmt.Sprintf("%+.3g %%", x*100)
}

// explainPeak says that the response is not greatest at f0.
func (c *comparer) explainPeak() string {
	q := c.driven.Quantities
	shift := q.PeakFrequency.Value/q.NaturalFrequency.Value - 1
	part := map[capture.Part]string{capture.Capacitor: "capacitor", capture.Inductor: "coil"}[c.driven.Across]
	if part == "" || !(math.Abs(shift) > 2*q.NaturalFrequency.Relative()) {
		return ""
	}
	side := "below"
	if shift > 0 {
		side = "above"
	}
	return fmt.Sprintf("the voltage across the %s is greatest %s %s f_0, at %s: the peak of the curve is not the natural frequency",
		part, strings.TrimLeft(signed(math.Abs(shift)), "+"), side, q.PeakFrequency)
}

func (c *comparer) explainAmplitude() string {
	if !hasFinding(c.ringDown.Findings, capture.AmplitudeDependent) {
		return ""
	}
	s := "the loss depends on the amplitude, and the two ran at different amplitudes"
	if d := c.ringDown.Decays; len(d) > 0 && d[0].AtStart != nil {
		s += fmt.Sprintf(": the ring-down has a Q of %s in its first cycle and %s at small amplitude", d[0].AtStart.Q, c.ringDown.Quantities.Q)
	}
	return s
}

func (c *comparer) explainSpeed() string {
	for _, f := range c.driven.Findings {
		if f.Code == capture.SweptTooFast {
			return "the sweep was too fast, which widens the curve and lowers its Q: " + f.Message
		}
	}
	return ""
}

func hasFinding(all []decay.Finding, code capture.Code) bool {
	return slices.ContainsFunc(all, func(f decay.Finding) bool { return f.Code == code })
}

// explainUnloaded is the conclusion.
func (c *comparer) explainUnloaded() string {
	if !c.unload {
		return ""
	}
	s := ""
	if q, ok := c.comparison(Unloaded, "q"); ok {
		s = fmt.Sprintf("Q is %s by the ring-down and %s by the sweep (E_n %s)", q.RingDown, q.Sweep, figure(q.En))
	} else {
		s = "less than no loss remains on one side"
	}
	f, _ := c.comparison(Unloaded, "natural_frequency_hz")
	return fmt.Sprintf("with source and probe taken out, %s, f_0 %s and %s (E_n %s): they %s",
		s, f.RingDown, f.Sweep, figure(f.En), agreement(c.Agrees))
}

// worstClock is the largest error that a clock in use may have: of an RC oscillator
// 1 %, but no scope or generator runs on one (common practice).
const worstClock = 1e-3

// explainClocks points at the clocks where Q agrees and the frequency does not:
// an error of a time base moves frequencies but no Q.
func (c *comparer) explainClocks() string {
	q, ok := c.comparison(c.Decisive, "q")
	f, _ := c.comparison(c.Decisive, "natural_frequency_hz")
	if !ok || !q.Agrees || f.Agrees {
		return ""
	}
	off := f.RingDown.Value/f.Sweep.Value - 1
	cause := "a capacitance that differed does that (probe, leads, temperature), or a core that was driven harder"
	if math.Abs(off) < worstClock {
		cause = "an error of one of the clocks does that (give their timebase), or a capacitance that changed in between"
	}
	return fmt.Sprintf("only the frequencies differ, by %s: %s", signed(off), cause)
}
