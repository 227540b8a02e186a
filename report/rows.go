package report

import (
	"fmt"
	"math"
	"strings"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// A row is one result with its name and letter, for the summary and for the page.
type row struct {
	Label string
	// Letter and Index print as "f_d" in text and as a letter with a subscript on
	// the page; Greek is the letter of the page where text spells it out.
	Letter, Greek, Index string
	Quantity             quantity.Quantity
}

// Symbol returns the letter for text.
func (r row) Symbol() string {
	if r.Index == "" {
		return r.Letter
	}
	return r.Letter + "_" + r.Index
}

// Columns returns value, expanded uncertainty and relative uncertainty.
func (r row) Columns() quantity.Columns { return r.Quantity.Columns() }

// resultRows returns the result to quote, what matters most first.
func resultRows(q *decay.Quantities) []row {
	return []row{
		{"damped frequency", "f", "", "d", q.DampedFrequency},
		{"natural frequency", "f", "", "0", q.NaturalFrequency},
		{"time constant", "tau", "τ", "", q.TimeConstant},
		{"quality factor", "Q", "", "", q.Q},
		{"decay rate", "alpha", "α", "", q.DecayRate},
		{"damping ratio", "zeta", "ζ", "", q.DampingRatio},
		{"log decrement", "delta", "δ", "", q.LogDecrement},
		{"bandwidth", "B", "", "", q.Bandwidth},
	}
}

// shapeRows returns what belongs to one decay and to the channel's scale.
func shapeRows(d *decay.Decay) []row {
	amplitude, offset := d.Amplitude, d.Offset
	amplitude.Unit, offset.Unit = clean(amplitude.Unit, unitLength), clean(offset.Unit, unitLength)
	rows := []row{
		{"amplitude at gate start", "A", "", "", amplitude},
		{"phase at gate start", "phi", "φ", "", d.Phase},
		{"offset", "c", "", "", offset},
	}
	if d.AtStart != nil {
		rows = append(rows,
			row{"damped frequency, first cycle", "f", "", "d,start", d.AtStart.DampedFrequency},
			row{"quality factor, first cycle", "Q", "", "start", d.AtStart.Q})
	}
	return rows
}

// A comparison sets a classical reading beside the fit.
type comparison struct {
	Label, Short string
	Fit, Reading quantity.Quantity
}

// Difference returns reading less fit, relative to the fit and in units of the
// standard uncertainty of the reading, which is by far the larger of the two.
func (c comparison) Difference() string {
	d := c.Reading.Value - c.Fit.Value
	s := quantity.Percent(d / c.Fit.Value)
	if s == "" {
		return "unknown"
	}
	if d > 0 {
		s = "+" + s
	}
	if n := math.Abs(d / c.Reading.U); !math.IsNaN(n) && !math.IsInf(n, 0) {
		s += fmt.Sprintf(" (%.1f u)", n)
	}
	return s
}

// comparisons returns the readings of the best decay beside its fit; a reading
// that could not be made is left out.
func comparisons(r *decay.Result) []comparison {
	if len(r.Decays) == 0 {
		return nil
	}
	fit, read := &r.Decays[r.Best].Quantities, &r.Readings
	var out []comparison
	for _, c := range []comparison{
		{"damped frequency, from crossings", "f_d from crossings", fit.DampedFrequency, read.DampedFrequency},
		{"log decrement, from peaks", "delta from peaks", fit.LogDecrement, read.LogDecrement},
		{"quality factor, from peaks", "Q from peaks", fit.Q, read.Q},
		{"time constant, from peaks", "tau from peaks", fit.TimeConstant, read.TimeConstant},
	} {
		if c.Reading.Known() && c.Fit.Known() {
			out = append(out, c)
		}
	}
	return out
}

// modelName says in words what was fitted.
func modelName(r *decay.Result) string {
	switch r.Model {
	case decay.Exponential:
		return "one exponential decay"
	case decay.Amplitude:
		return "a decay whose loss and frequency depend on the amplitude; the result is the limit of small amplitude"
	case decay.TwoMode:
		return "two damped modes; the result is that of the one with more energy"
	case decay.Overdamped:
		return "an overdamped return, which does not ring"
	default:
		return "no model"
	}
}

// gateLine says what part of the record was fitted.
func gateLine(d *decay.Decay) string {
	cycles := ""
	if !math.IsNaN(d.Cycles) {
		cycles = fmt.Sprintf("%.1f cycles, ", d.Cycles)
	}
	return fmt.Sprintf("%s to %s, %s%s", quantity.Format(d.From, "s", 6), quantity.Format(d.To, "s", 6),
		cycles, plural(d.Last-d.First, "sample"))
}

// noiseLine says how large the noise is.
func noiseLine(d *decay.Decay, unit string) string {
	s := fmt.Sprintf("%s rms, the fit leaves %s rms", quantity.Format(d.NoiseRMS, unit, 3), quantity.Format(d.ResidualRMS, unit, 3))
	if math.IsNaN(d.SNR) || math.IsInf(d.SNR, 0) {
		return s
	}
	return s + fmt.Sprintf("; SNR %.1f dB", d.SNR)
}

// channelLine says which channel was measured and of which it was chosen; ""
// where there was no choice.
func (r *RingDown) channelLine() string {
	if !r.Chosen || len(r.Capture.Channels) < 2 {
		return ""
	}
	var names []string
	for _, ch := range r.Capture.Channels {
		names = append(names, clean(ch.Name, nameLength))
	}
	return fmt.Sprintf("%s, chosen of %s as the one that rings most clearly", clean(r.Channel.Name, nameLength), listed(names))
}

// listed joins at most eight names.
func listed(names []string) string {
	const most = 8
	if more := len(names) - most; more > 0 {
		names = append(names[:most:most], fmt.Sprintf("%d more", more))
	}
	return strings.Join(names, ", ")
}

// fitLine says for specialists how the fit came about.
func fitLine(d *decay.Decay) string {
	s := plural(d.Used, "sample") + " used, " + d.Stop.String() + " after " + plural(d.Iterations, "step")
	if ratio := d.ResidualRMS / d.NoiseRMS; !math.IsNaN(ratio) && !math.IsInf(ratio, 0) {
		s += fmt.Sprintf("; residual over noise %.3f", ratio)
	}
	if f := d.NoiseFactor; f > 0 && !math.IsInf(f, 0) {
		s += fmt.Sprintf("; noise at the ring %.2f times that of white noise of the same rms", f)
	}
	return s
}

// recordLine says what the record is.
func (r *RingDown) recordLine() string {
	a := r.Channel.Axis
	end := a.Time(max(0, a.N-1))
	return fmt.Sprintf("%s from %s to %s, one every %s", plural(a.N, "sample"),
		quantity.Format(a.Start, "s", 6), quantity.Format(end, "s", 6), quantity.Format(a.Interval, "s", 6))
}

// verdict is the status in one line for people.
func (r *RingDown) verdict() string {
	if r.refused() {
		return "no decay that can be measured: the numbers are withheld"
	}
	return verdictOf(r.Findings())
}

// limitsToo is what a verdict says of the limits, "" without any.
func limitsToo(j *circuit.Judgement) string {
	if j == nil {
		return ""
	}
	return "; limits: " + string(j.Verdict)
}

// verdictOf says in one line what findings do to numbers that are given.
func verdictOf(findings []capture.Finding) string {
	var warnings, notes int
	for _, f := range findings {
		if f.Severity == capture.Note {
			notes++
		} else {
			warnings++
		}
	}
	switch {
	case warnings > 0:
		return plural(warnings, "warning") + " to read before the numbers are used"
	case notes > 0:
		return "nothing speaks against the numbers, " + plural(notes, "note")
	default:
		return "nothing speaks against the numbers"
	}
}

func plural(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return quantity.Count(n) + " " + noun + "s"
}
