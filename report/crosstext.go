package report

import (
	"fmt"
	"io"

	"dieaway/decay/circuit"
)

// WriteSummary writes the cross-check for people: verdict, both measurements side
// by side in each condition, where the loss sits, how the ring-down keeps its limits,
// the explanations and the findings.
func (c *CrossCheck) WriteSummary(w io.Writer, style Style) error {
	if err := c.check(); err != nil {
		return err
	}
	s := newSummary(w, style)
	if err := c.Err(); err != nil {
		s.unreadable(err)
		return s.Flush()
	}
	s.crossHead(c)
	for _, t := range agreementTables(c.Check) {
		s.agreement(t)
	}
	s.predictions(c.Check)
	s.budgetOf("ring-down", c.Check.RingDown)
	s.budgetOf("sweep", c.Check.Sweep)
	s.limits(c.RingDown.Limits)
	if len(c.Check.Explanations) > 0 {
		s.WriteString("\n")
	}
	for _, e := range c.Check.Explanations {
		s.item("  - ", e)
	}
	s.findings(c.Findings())
	return s.Flush()
}

func (s *summary) crossHead(c *CrossCheck) {
	word := c.agreement()
	if word == "" {
		word = string(c.Status())
	}
	color := map[string]string{"agrees": green, "disagrees": red, "refused": red}[word]
	s.item(s.paint(word, color)+": ", c.verdict())
	if c.Device != "" {
		s.item("  ", clean(c.Device, nameLength))
	}
	s.item(label("ring-down"), c.RingDown.source())
	s.item(label("sweep"), c.Sweep.source())
}

// agreement writes one condition.
func (s *summary) agreement(t agreementTable) {
	fmt.Fprintf(s, "\n  %s ring-down          sweep              E_n\n", pad(t.Condition, 20))
	for _, r := range t.Rows {
		fmt.Fprintf(s, "  %s %s %s %s %s\n", pad(r.Label, 20), pad(r.RingDown, 18), pad(r.Sweep, 18), pad(r.En, 7), r.Word())
	}
}

// predictions writes what each measurement says of the other's set-up.
func (s *summary) predictions(k *circuit.CrossCheck) {
	facts := predictionFacts(k)
	if len(facts) > 0 {
		s.WriteString("\n")
	}
	for _, f := range facts {
		s.item("  "+f.Name+": ", f.Value)
	}
}

func (s *summary) budgetOf(setup string, side circuit.Side) {
	rows := lossRows(side.Budget, side.Total)
	if len(rows) > 0 {
		s.WriteString("\n  in the set-up of the " + setup)
	}
	s.budget(rows)
}
