package report

import (
	"fmt"
	"io"
	"math"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/plan"
	"dieaway/decay/quantity"
)

// schemaPlan names the form of the JSON; scripts depend on it.
const schemaPlan = "dieaway.plan.v1"

// Plan shows what to set on a scope.
type Plan struct {
	*plan.Plan
	// Device is the name of what is to be measured, "" when nobody gave one.
	Device string
	// Origin says how the plan was made; the page shows it.
	Origin Origin
}

// Status is refused when the wish cannot be met.
func (p Plan) Status() decay.Status {
	if !p.Met {
		return decay.Refused
	}
	return statusOf(decay.Good, p.Findings)
}

type jsonPlan struct {
	Schema       string            `json:"schema"`
	Status       decay.Status      `json:"status"`
	Device       *string           `json:"device"`
	Met          bool              `json:"met"`
	Want         number            `json:"want_relative_u_q"`
	Natural      number            `json:"natural_frequency_hz"`
	Q            number            `json:"q"`
	jsonSetting                    // of the setting to use
	Pretrigger   number            `json:"pretrigger_s"`
	Settle       number            `json:"source_settling_s"`
	Edge         number            `json:"source_fall_most_s"`
	Loading      *jsonForecast     `json:"loading"`
	Alternatives []jsonAlternative `json:"alternatives"`
	Findings     []capture.Finding `json:"findings"`
}

type jsonSetting struct {
	Record    number        `json:"record_s"`
	Rate      number        `json:"sample_rate_hz"`
	Samples   int           `json:"samples"`
	Averages  int           `json:"averages"`
	FullScale number        `json:"full_scale_v"`
	Noise     number        `json:"noise_v"`
	Expected  *jsonExpected `json:"expected"`
}

type jsonExpected struct {
	Q               jsonRelative `json:"q"`
	TimeConstant    jsonRelative `json:"time_constant_s"`
	DampedFrequency jsonRelative `json:"damped_frequency_hz"`
}

type jsonRelative struct {
	Value    number `json:"value"`
	Relative number `json:"relative_u"`
}

type jsonAlternative struct {
	Verdict string `json:"verdict"`
	Change  string `json:"change"`
	Reason  string `json:"reason"`
	jsonSetting
}

type jsonForecast struct {
	Free   jsonResonance `json:"by_itself"`
	Source jsonResonance `json:"with_source"`
	Probe  jsonResonance `json:"with_probe"`
	Loaded jsonResonance `json:"with_both"`
}

type jsonResonance struct {
	NaturalFrequency number `json:"natural_frequency_hz"`
	Q                number `json:"q"`
}

// WriteJSON writes the plan as one line of JSON, schema dieaway.plan.v1.
func (p Plan) WriteJSON(w io.Writer) error {
	out := &jsonPlan{Schema: schemaPlan, Status: p.Status(), Device: orNull(p.Device), Met: p.Met, Want: number(p.Wish.Want),
		Natural: number(p.Ring.NaturalFrequency), Q: number(p.Ring.Q()), jsonSetting: settingJSON(&p.Setting),
		Pretrigger: number(p.Setting.Pretrigger()), Settle: number(p.Settle), Edge: number(p.EdgeMost),
		Alternatives: []jsonAlternative{}, Findings: append([]capture.Finding{}, p.Findings...)}
	for _, a := range p.Alternatives {
		out.Alternatives = append(out.Alternatives, jsonAlternative{a.Verdict, a.Change, a.Reason, settingJSON(&a.Setting)})
	}
	if f := p.Forecast; f != nil {
		out.Loading = &jsonForecast{resonanceJSON(f.Free), resonanceJSON(f.Source), resonanceJSON(f.Probe), resonanceJSON(f.Loaded)}
	}
	return writeLine(w, out)
}

func settingJSON(s *plan.Setting) jsonSetting {
	out := jsonSetting{Record: number(s.Record), Rate: number(s.SampleRate), Samples: s.Samples, Averages: s.Averages,
		FullScale: number(s.FullScale), Noise: number(s.Noise)}
	if e := s.Expected; e != nil {
		of := func(q quantity.Quantity) jsonRelative { return jsonRelative{number(q.Value), number(q.Relative())} }
		out.Expected = &jsonExpected{of(e.Q), of(e.TimeConstant), of(e.DampedFrequency)}
	}
	return out
}

func resonanceJSON(r circuit.Resonance) jsonResonance {
	return jsonResonance{number(r.NaturalFrequency), number(r.Q())}
}

// WriteSummary writes the plan for people.
func (p Plan) WriteSummary(w io.Writer, style Style) error {
	s := newSummary(w, style)
	s.status(p.Status(), p.verdict(), nil)
	if p.Device != "" {
		s.item("  ", clean(p.Device, nameLength))
	}
	s.WriteString("\n")
	s.item(label("the ring"), p.ringLine())
	for _, r := range forecastRows(p.Forecast) {
		if r.Name != withBoth { // that is the ring
			s.item(label(r.Name), r.line())
		}
	}
	if e := p.Setting.Expected; e != nil {
		s.WriteString("\n")
		for _, f := range settingFacts(&p.Setting) {
			s.item(label(f.Name), f.Value)
		}
		s.WriteString("\n")
		for _, row := range resultRows(e)[:4] {
			s.quantity(row)
		}
	}
	s.WriteString("\n")
	s.item(label("source"), p.sourceLine())
	s.alternatives(p.alternativeRows())
	s.findings(p.Findings)
	return s.Flush()
}

func (p Plan) verdict() string {
	want := quantity.Percent(p.Wish.Want)
	if !p.Met {
		return "no setting gives Q to " + want
	}
	return fmt.Sprintf("this gives Q to %s or better (standard uncertainty)", want)
}

func format(x float64, unit string) string  { return quantity.Format(x, unit, 4) }
func format2(x float64, unit string) string { return quantity.Format(x, unit, 2) }

// ringLine says what will be recorded.
func (p Plan) ringLine() string {
	return fmt.Sprintf("%s, Q %s, %s that falls to 1/e in %s", format(p.Ring.NaturalFrequency, "Hz"), format(p.Ring.Q(), ""),
		format(p.Wish.Amplitude, "V"), format(p.Ring.TimeConstant(), "s"))
}

// sourceLine says what the source has to do.
func (p Plan) sourceLine() string {
	return fmt.Sprintf("stands still for %s, then falls within %s", format2(p.Settle, "s"), format2(p.EdgeMost, "s"))
}

// A forecastRow says how the circuit rings with something connected; the shifts are
// those from the circuit by itself, "" of itself.
type forecastRow struct{ Name, F, Q, FShift, QShift string }

func (r forecastRow) line() string {
	s := r.F + ", Q " + r.Q
	if r.FShift != "" {
		s += " (" + r.FShift + ", " + r.QShift + ")"
	}
	return s
}

const withBoth = "with both"

// forecastRows tell what source and probe do to the circuit; none without a forecast.
func forecastRows(f *circuit.Forecast) (rows []forecastRow) {
	if f == nil {
		return nil
	}
	for _, line := range []struct {
		name string
		r    circuit.Resonance
	}{{"by itself", f.Free}, {"with source", f.Source}, {"with probe", f.Probe}, {withBoth, f.Loaded}} {
		row := forecastRow{Name: line.name, F: quantity.Format(line.r.NaturalFrequency, "Hz", 6), Q: format(line.r.Q(), "")}
		if line.r != f.Free {
			row.FShift = fmt.Sprintf("%+.2g %%", 100*(line.r.NaturalFrequency/f.Free.NaturalFrequency-1))
			row.QShift = fmt.Sprintf("%+.2g %%", 100*(line.r.Q()/f.Free.Q()-1))
		}
		rows = append(rows, row)
	}
	return rows
}

// settingFacts say what to set.
func settingFacts(set *plan.Setting) []fact {
	return []fact{
		{"record", fmt.Sprintf("%s, of which %s before the trigger: %s time constants, %s cycles",
			format(set.Record, "s"), format(set.Pretrigger(), "s"), format2(set.TimeConstants, ""), quantity.Format(set.Cycles, "", 3))},
		{"sample rate", fmt.Sprintf("%s/s: %s, %s in a cycle", trimHertz(set.SampleRate), plural(set.Samples, "sample"), quantity.Format(set.PerCycle, "", 3))},
		{"averages", averages(set.Averages)},
		{"vertical range", fmt.Sprintf("%s, %s a division of eight; %s of noise", format(set.FullScale, "V"), format(set.FullScale/8, "V"), quantity.Format(set.Noise, "V", 3))},
	}
}

func averages(n int) string {
	if n == 1 {
		return "none, a single shot"
	}
	return fmt.Sprint(n)
}

// trimHertz prints a rate as "10 MS".
func trimHertz(rate float64) string {
	s := format(rate, "Hz")
	return s[:len(s)-len("Hz")] + "S"
}

// alternatives writes what else there is.
func (s *summary) alternatives(rows []alternativeRow) {
	if len(rows) == 0 {
		return
	}
	s.WriteString("\n  instead                               record    rate       samples  averages  u of Q\n")
	for _, a := range rows {
		fmt.Fprintf(s, "  %s %s %s %s %s %8s  %s\n", pad(a.Verdict, 7), pad(a.Change, 29), pad(a.Record, 9), pad(a.Rate, 10), padLeft(a.Samples, 7), a.Averages, a.U)
		s.item("          ", a.Reason)
	}
}

// padLeft fills s with spaces on the left to n columns.
func padLeft(s string, n int) string {
	return fmt.Sprintf("%*s", int(math.Max(float64(n), float64(len(s)))), s)
}
