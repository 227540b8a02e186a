package report

import (
	"errors"
	"io"
	"math"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// schemaCrossCheck names the form of the JSON; scripts depend on it.
const schemaCrossCheck = "dieaway.crosscheck.v1"

// A CrossCheck shows a ring-down and a driven sweep of one circuit side by side.
type CrossCheck struct {
	RingDown *RingDown
	Sweep    *Sweep
	// Check is the comparison, nil when one of the two could not be read.
	Check *circuit.CrossCheck
	// Device is the name of the circuit, "" when nobody gave one.
	Device string
	// Origin says how the result was made; the page shows it.
	Origin Origin
}

// Err says which of the two could not be read, and why; nil when both were.
func (c *CrossCheck) Err() error { return allOf(c.RingDown.Err, c.Sweep.Err) }

func (c *CrossCheck) check() error {
	if c.RingDown == nil || c.Sweep == nil || c.Err() == nil && c.Check == nil {
		return errors.New("report: a cross-check without ring-down, sweep or comparison")
	}
	return nil
}

// Status is the worst of ring-down, sweep and comparison; "" when one of the two
// could not be read.
func (c *CrossCheck) Status() decay.Status {
	switch {
	case c.Err() != nil:
		return ""
	case !c.Check.Compared():
		return decay.Refused
	}
	return statusOf(decay.Good, c.Findings())
}

// Findings returns the findings of the comparison and the warnings of both sides,
// which name their file, gravest first. It is not nil.
func (c *CrossCheck) Findings() []capture.Finding {
	all := []capture.Finding{}
	if c.Check != nil {
		all = append(all, c.Check.Findings...)
	}
	all = append(all, warningsOf(c.RingDown.file(), c.RingDown.Findings())...)
	return gravest(append(all, warningsOf(c.Sweep.file(), c.Sweep.Findings())...))
}

// warningsOf returns the warnings and faults of one file of several, with its name.
func warningsOf(file string, all []capture.Finding) (out []capture.Finding) {
	for _, f := range all {
		if f.Severity != capture.Note {
			f.Message = file + ": " + f.Message
			out = append(out, f)
		}
	}
	return out
}

// agreement is "agrees", "disagrees", or "" when there was nothing to compare.
func (c *CrossCheck) agreement() string {
	switch {
	case c.Check == nil || !c.Check.Compared():
		return ""
	case c.Check.Agrees:
		return "agrees"
	}
	return "disagrees"
}

type jsonCrossCheck struct {
	Schema       string            `json:"schema"`
	Status       string            `json:"status"`
	Verdict      *string           `json:"verdict"`
	Decisive     *string           `json:"decisive"`
	Device       *string           `json:"device"`
	RingDown     any               `json:"ringdown"`
	Sweep        any               `json:"sweep"`
	Comparisons  []jsonComparison  `json:"comparisons"`
	LossBudget   []jsonLoss        `json:"loss_budget"`
	SweepBudget  []jsonLoss        `json:"sweep_loss_budget"`
	Predicted    jsonPredicted     `json:"predicted"`
	Explanations []string          `json:"explanations"`
	Findings     []capture.Finding `json:"findings"`
}

type jsonComparison struct {
	Quantity   string            `json:"quantity"`
	Condition  string            `json:"condition"`
	RingDown   quantity.Quantity `json:"ringdown"`
	Sweep      quantity.Quantity `json:"sweep"`
	Difference quantity.Quantity `json:"difference"`
	En         number            `json:"e_n"`
	Agrees     bool              `json:"agrees"`
}

// jsonPredicted holds what each measurement says of the other's set-up.
type jsonPredicted struct {
	RingDown jsonCondition `json:"ringdown"`
	Sweep    jsonCondition `json:"sweep"`
}

// WriteJSON writes the cross-check as one line of JSON, schema
// dieaway.crosscheck.v1, with the whole objects of ring-down and sweep in it.
func (c *CrossCheck) WriteJSON(w io.Writer) error {
	if err := c.check(); err != nil {
		return err
	}
	out := &jsonCrossCheck{Schema: schemaCrossCheck, Status: string(c.Status()), Verdict: orNull(c.agreement()), Device: orNull(c.Device),
		RingDown: c.ringDownJSON(), Sweep: c.sweepJSON(), Comparisons: []jsonComparison{}, LossBudget: []jsonLoss{}, SweepBudget: []jsonLoss{},
		Predicted:    jsonPredicted{conditionJSON(unknownCondition), conditionJSON(unknownCondition)},
		Explanations: []string{}, Findings: c.Findings()}
	if c.Err() != nil {
		out.Status = "unreadable"
		return writeLine(w, out)
	}
	k := c.Check
	for _, x := range k.Comparisons {
		out.Comparisons = append(out.Comparisons, jsonComparison{x.Quantity, x.Condition, x.RingDown, x.Sweep, x.Difference, number(x.En), x.Agrees})
	}
	if k.Compared() {
		out.Decisive = orNull(k.Decisive)
	}
	out.LossBudget, out.SweepBudget = budgetJSON(k.RingDown.Budget), budgetJSON(k.Sweep.Budget)
	out.Predicted = jsonPredicted{conditionJSON(k.Sweep.Predicted), conditionJSON(k.RingDown.Predicted)}
	out.Explanations = append(out.Explanations, k.Explanations...)
	return writeLine(w, out)
}

func (c *CrossCheck) ringDownJSON() any {
	if r := c.RingDown; r.Err != nil {
		return unreadable(schemaRingDown, r.file(), r.sha256(), r.Device, r.Err)
	}
	return c.RingDown.json()
}

func (c *CrossCheck) sweepJSON() any {
	if r := c.Sweep; r.Err != nil {
		return unreadable(schemaSweep, r.file(), r.sha256(), r.Device, r.Err)
	}
	return c.Sweep.json()
}

var unknownCondition = circuit.Condition{NaturalFrequency: unknown, Q: unknown, DampingRatio: unknown, Bandwidth: unknown}

// An agreementRow is one quantity by both measurements, for people.
type agreementRow struct {
	Label, RingDown, Sweep, Difference, En string
	Agrees                                 bool
}

// Word is the verdict on the row.
func (r agreementRow) Word() string {
	if r.Agrees {
		return "agrees"
	}
	return "disagrees"
}

// An agreementTable is all quantities in one condition.
type agreementTable struct {
	Condition string
	Rows      []agreementRow
}

// agreementTables returns a table for each condition, in the order of the check.
func agreementTables(k *circuit.CrossCheck) (tables []agreementTable) {
	labels := map[string]string{"natural_frequency_hz": "natural frequency", "q": "quality factor",
		"damping_ratio": "damping ratio", "bandwidth_hz": "bandwidth"}
	for _, x := range k.Comparisons {
		if len(tables) == 0 || tables[len(tables)-1].Condition != x.Condition {
			tables = append(tables, agreementTable{Condition: x.Condition})
		}
		t := &tables[len(tables)-1]
		t.Rows = append(t.Rows, agreementRow{labels[x.Quantity], x.RingDown.String(), x.Sweep.String(), x.Difference.String(), enText(x.En), x.Agrees})
	}
	return tables
}

// enText is a degree of equivalence to two digits.
func enText(en float64) string {
	switch {
	case math.IsNaN(en):
		return "unknown"
	case math.Abs(en) > 999:
		return "over 999"
	}
	return quantity.Format(en, "", 2)
}

// verdict is the result of the comparison in one line for people.
func (c *CrossCheck) verdict() string {
	if !c.Check.Compared() {
		return "there is nothing to compare: the findings say why"
	}
	how := "as measured"
	if c.Check.Decisive == circuit.Unloaded {
		how = "with source and probe taken out"
	}
	word := map[bool]string{true: "agree", false: "disagree"}[c.Check.Agrees]
	s := "ring-down and sweep " + word + " " + how
	if c.Status() == decay.Doubtful {
		s += "; " + verdictOf(c.Findings())
	}
	return s + limitsToo(c.RingDown.Limits)
}
