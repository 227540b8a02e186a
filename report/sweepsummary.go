package report

import (
	"io"

	"dieaway/decay/quantity"
)

// WriteSummary writes the sweep for people: the verdict, the results with their
// uncertainties, what was fitted, the readings and the findings.
func (r *Sweep) WriteSummary(w io.Writer, style Style) error {
	if err := r.check(); err != nil {
		return err
	}
	s := newSummary(w, style)
	if r.Err != nil {
		s.unreadable(r.Err)
		return s.Flush()
	}
	s.status(r.Status(), r.verdict(), r.Limits)
	s.item("  ", prefixed(r.Device)+r.source())
	s.WriteString("\n")
	if r.refused() {
		s.item(label("sweep"), r.rowsLine())
		if lo, hi, ok := span(r.Table.Magnitude); ok {
			s.item(label("response"), "between "+quantity.Format(lo, clean(r.Table.Unit, unitLength), 4)+" and "+quantity.Format(hi, clean(r.Table.Unit, unitLength), 4))
		}
	} else {
		s.sweep(r)
	}
	s.circuit(r.Circuit)
	s.limits(r.Limits)
	s.findings(r.Findings())
	return s.Flush()
}

// sweep writes everything that was measured.
func (s *summary) sweep(r *Sweep) {
	for _, row := range sweepRows(r.Result) {
		s.quantity(row)
	}
	s.WriteString("\n")
	for _, f := range r.facts() {
		s.item(label(f.Name), f.Value)
	}
	s.readings(sweepComparisons(r.Result))
}

// facts are the conditions of the result.
func (r *Sweep) facts() []fact {
	return stated([]fact{{"across", acrossLine(r.Result)}, {"fitted", fittedLine(r.Result)}, {"sweep", r.rowsLine()},
		{"scatter", r.scatterLine()}, {"trend", trendLine(r.Result)}})
}
