package report

import (
	"fmt"
	"io"

	"dieaway/capture"
	"dieaway/decay/circuit"
)

// A crossPage is what the template of a cross-check shows.
type crossPage struct {
	frame
	Refused                    bool
	Tables                     []agreementTable
	Facts                      []fact
	Explanations               []string
	Budgets                    []budgetTable
	Findings                   []capture.Finding
	benched                    // the limits, which the ring-down is held against
	Origin                     []fact
	CaptureLayout, SweepLayout []fact
}

// A budgetTable is the loss budget of one set-up.
type budgetTable struct {
	ID, Title string
	Rows      []lossRow
}

// WritePage writes the cross-check as one HTML page that needs no network: both
// measurements side by side, the explanations, the loss budgets, and the charts of
// both with what each predicts of the other.
func (c *CrossCheck) WritePage(w io.Writer) error {
	if err := c.check(); err != nil {
		return err
	}
	return writeSheet(w, "crosscheck.html", c.Err(), c.page, c.WriteJSON)
}

func (c *CrossCheck) page() (*crossPage, error) {
	figures, err := c.figures()
	if err != nil {
		return nil, err
	}
	status := c.agreement()
	if status == "" {
		status = string(c.Status())
	}
	p := &crossPage{
		frame: frame{Kind: "Ring-down and driven sweep of a resonant circuit", Heading: c.heading(),
			What: upperFirst(c.RingDown.source()) + "; " + c.Sweep.source() + ".", Status: status, Verdict: c.verdict(), Figures: figures},
		Refused: !c.Check.Compared(), Findings: cleaned(c.Findings()),
		Tables: agreementTables(c.Check), Facts: onPage(predictionFacts(c.Check)), Origin: c.origin(),
		benched: benchedOf(nil, c.RingDown.Limits), CaptureLayout: c.RingDown.layout(), SweepLayout: layoutFacts(&c.Sweep.Table.Layout),
	}
	p.Title = p.Heading + " – ring-down and sweep, " + status
	for _, e := range c.Check.Explanations {
		p.Explanations = append(p.Explanations, subscripts.Replace(e))
	}
	for _, b := range []budgetTable{
		{"ring-loss", "Where the loss sits in the ring-down", lossRows(c.Check.RingDown.Budget, c.Check.RingDown.Total)},
		{"sweep-loss", "Where the loss sits in the sweep", lossRows(c.Check.Sweep.Budget, c.Check.Sweep.Total)},
	} {
		if len(b.Rows) > 0 {
			p.Budgets = append(p.Budgets, b)
		}
	}
	return p, nil
}

// figures are those of sweep and ring-down, each with what the other predicts, and the
// spectra and courses that the page of a ring-down has.
func (c *CrossCheck) figures() ([]*figure, error) {
	ring, sweep := *c.RingDown, *c.Sweep
	if c.Check.Compared() && len(ring.Result.Decays) > 0 {
		if t := c.Check.Sweep.Transient(ring.Result.Decays[ring.Result.Best]); t != nil {
			ring.predicted = t
		}
		if p := c.Check.RingDown.Predicted; p.Q.Known() {
			sweep.predicted = sweep.Result.Resonating(p.NaturalFrequency.Value, p.Q.Value)
		}
	}
	over, err := ring.figure()
	if err != nil {
		return nil, err
	}
	over.Words, over.Notes = wordsOfTime, ring.notes(over)
	driven, err := sweep.figure()
	if err != nil {
		return nil, err
	}
	more, err := ring.details()
	over.Notes = append(over.Notes, more.notes...)
	return append([]*figure{driven, over}, more.figures...), err
}

func (c *CrossCheck) heading() string {
	if c.Device != "" {
		return clean(c.Device, nameLength)
	}
	return fileName(c.RingDown.file(), nameLength) + " and " + fileName(c.Sweep.file(), nameLength)
}

func (c *CrossCheck) origin() []fact {
	return c.Origin.facts(fact{"capture", fileName(c.RingDown.file(), longName)}, fact{"SHA-256 of the capture", c.RingDown.sha256()},
		fact{"sweep", fileName(c.Sweep.file(), longName)}, fact{"SHA-256 of the sweep", c.Sweep.sha256()},
		fact{"device", clean(c.Device, longName)})
}

// predictionFacts are what each measurement says of the other's set-up.
func predictionFacts(k *circuit.CrossCheck) (facts []fact) {
	add := func(name string, p circuit.Condition) {
		if p.Q.Known() {
			facts = append(facts, fact{name, fmt.Sprintf("f_0 %s, Q %s", p.NaturalFrequency, p.Q)})
		}
	}
	add("sweep as the ring-down predicts it", k.RingDown.Predicted)
	add("ring as the sweep predicts it", k.Sweep.Predicted)
	return facts
}

// Caption says what a table of one condition compares.
func (t agreementTable) Caption() string {
	if t.Condition == circuit.Unloaded {
		return "Without source and probe, by calculation."
	}
	return "As measured, each in its own set-up."
}
