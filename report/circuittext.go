package report

import (
	"fmt"

	"dieaway/decay/circuit"
)

// circuit writes component values and loss budget.
func (s *summary) circuit(a *circuit.Analysis) {
	if a == nil || !a.Inductance.Known() {
		return
	}
	fmt.Fprintf(s, "\n  the circuit, with the %s of the bench file\n", a.Known)
	for _, f := range componentRows(a) {
		s.item(label(f.Name), f.Value)
	}
	s.budget(lossRows(a.Budget, a.Total))
}

// budget writes where the loss sits, its sum last.
func (s *summary) budget(rows []lossRow) {
	if len(rows) == 0 {
		return
	}
	s.WriteString("\n  where the loss sits  as resistance    Q               share of 1/Q\n")
	for _, r := range rows {
		s.WriteString(trimRight(fmt.Sprintf("  %s %s %s %s", pad(r.Part, 20), pad(r.Resistance, 16), pad(r.Q, 15), r.Share)) + "\n")
	}
}

// limits writes the verdict and each check.
func (s *summary) limits(j *circuit.Judgement) {
	if j == nil {
		return
	}
	color := map[circuit.Verdict]string{circuit.Pass: green, circuit.Undecided: yellow, circuit.Fail: red}
	s.WriteString("\n")
	s.item("  "+s.paint(string(j.Verdict), color[j.Verdict])+": ", verdictOfLimits(j))
	for _, r := range limitRows(j) {
		s.WriteString(trimRight(fmt.Sprintf("  %s %s %s %s", pad(r.Label, 26), pad(r.Result, 20),
			s.paint(pad(string(r.Verdict), 9), color[r.Verdict]), r.Limits)) + "\n")
	}
}
