package report

import (
	"fmt"
	"io"
	"strings"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// A componentsPage is what the template of components shows.
type componentsPage struct {
	frame
	benched
	Refused           bool
	Why               string // there is no result, a sentence
	Headline, Results []row
	Facts             []fact
	Findings          []capture.Finding
	Rows              []componentPageRow
	Origin            []fact
	Layouts           []captureLayout
}

// A componentPageRow is one capture of the table.
type componentPageRow struct {
	Name, Added, Picture        string
	NaturalFrequency, DecayRate string
	// How far both are off the components, and the same in standard uncertainties;
	// "" without a result.
	FrequencyOff, FrequencyU, RateOff, RateU string
}

// A captureLayout says how one of several captures was read.
type captureLayout struct {
	Name  string
	Facts []fact
}

// WritePage writes the components as one HTML page that needs no network: the values,
// the line that they were found from, the residuals and every capture. Components
// that were refused have a page that says why.
func (c *Components) WritePage(w io.Writer) error {
	if err := c.check(); err != nil {
		return err
	}
	return writeSheet(w, "components.html", c.Err(), c.page, c.WriteJSON)
}

func (c *Components) page() (*componentsPage, error) {
	figures, err := c.figures()
	if err != nil {
		return nil, err
	}
	p := &componentsPage{
		frame: frame{Kind: "Coil, capacitance and resistance of a resonant circuit", Heading: clean(c.Device, nameLength),
			What: c.what(), Status: string(c.Status()), Verdict: c.verdict(), Figures: figures},
		benched: benchedOf(nil, c.Limits), Refused: c.Result == nil, Findings: cleaned(c.Findings()),
		Rows: c.pageRows(), Origin: c.origin(),
	}
	p.judge(p.verdictOnLimits())
	if p.Heading == "" {
		p.Heading = plural(len(c.RingDowns), "capture") + " with parts added"
	}
	p.Title = p.Heading + " – components, " + p.Status
	for i, r := range c.RingDowns {
		p.Layouts = append(p.Layouts, captureLayout{fmt.Sprintf("How capture %d was read", i+1), append(stated([]fact{
			{"file", fileName(r.file(), longName)}, {"channel", clean(r.Channel.Name, longName)}, {"record", r.recordLine()}}), r.layout()...)})
	}
	if c.Result == nil {
		p.Why = upperFirst(p.Verdict)
		if !strings.HasSuffix(p.Why, "?") {
			p.Why += "."
		}
	} else {
		p.Results = componentResults(c.Result)
		p.Headline = p.Results
		p.Facts = c.facts()
	}
	return p, nil
}

// what says in one line what was measured.
func (c *Components) what() string {
	part := "capacitors"
	if c.Added[0].Unit == "ohm" {
		part = "resistors"
	}
	var values []string
	for _, a := range c.Added {
		values = append(values, quantity.Format(a.Value, a.Unit, 4))
	}
	return fmt.Sprintf("Ring-downs with known %s added: %s.", part, listed(values))
}

// facts are the conditions of the result.
func (c *Components) facts() []fact {
	line := c.Result.Line
	setUp := ""
	if line.SetUp > 0 {
		setUp = quantity.Format(line.SetUp, "F", 4) + " across the capacitor"
		if line.Resistors {
			setUp = quantity.Format(line.SetUp, "ohm", 4) + " in the loop"
		}
		setUp += " in every capture, by the bench file"
	}
	return stated([]fact{{"residuals", chiSquareLine(c.Result)}, {"taken out", setUp}, {"to damp it", dampingLine(&c.Result.Damping)}})
}

func (c *Components) pageRows() (rows []componentPageRow) {
	for i, r := range c.RingDowns {
		row := componentPageRow{Name: fileName(r.file(), longName), Added: c.Added[i].String(), Picture: pictureOf(r.Channel.Samples)}
		if !r.refused() {
			row.NaturalFrequency, row.DecayRate = r.Result.Quantities.NaturalFrequency.String(), r.Result.Quantities.DecayRate.String()
		}
		if c.Result != nil {
			f, a := residualsOf(&c.Result.Rows[i], c.Result.Line.Resistors)
			row.FrequencyOff, row.FrequencyU = quantity.Percent(f.Value), inU(f)
			row.RateOff, row.RateU = quantity.Percent(a.Value), inU(a)
		}
		rows = append(rows, row)
	}
	return rows
}

func (c *Components) origin() []fact {
	from := []fact{{"device", clean(c.Device, longName)}}
	for i, r := range c.RingDowns {
		from = append(from, fact{fmt.Sprintf("SHA-256 of capture %d", i+1), r.sha256()})
	}
	return c.Origin.facts(from...)
}
