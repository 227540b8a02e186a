package report

import (
	"fmt"
	"io"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// A planPage is what the template of a plan shows.
type planPage struct {
	frame
	Refused            bool   // nothing can be set
	Setting            string // the heading of what to set
	Headline, Settings []fact
	Expected           []row
	Findings           []capture.Finding
	Forecast           []forecastRow
	Alternatives       []alternativeRow
	Origin             []fact
}

// An alternativeRow is another setting for people.
type alternativeRow struct {
	Verdict, Change, Record, Rate, Samples, Averages, U, Reason string
}

// alternativeRows tabulates what else there is.
func (p Plan) alternativeRows() (rows []alternativeRow) {
	for _, a := range p.Alternatives {
		rows = append(rows, alternativeRow{a.Verdict, a.Change, format(a.Record, "s"), trimHertz(a.SampleRate) + "/s", quantity.Count(a.Samples),
			fmt.Sprint(a.Averages), quantity.Percent(a.Expected.Q.Relative()), a.Reason})
	}
	return rows
}

// WritePage writes the plan as one HTML page that needs no network: what to set, what
// to expect, how that changes with record and sample rate, and what else there is.
func (p Plan) WritePage(w io.Writer) error {
	return writeSheet(w, "plan.html", nil, p.page, p.WriteJSON)
}

func (p Plan) page() (*planPage, error) {
	figures, err := p.figures()
	if err != nil {
		return nil, err
	}
	out := &planPage{
		frame: frame{Kind: "Plan of a ring-down", Heading: clean(p.Device, nameLength), What: upperFirst("the ring: " + p.ringLine() + "."),
			Status: string(p.Status()), Verdict: p.verdict(), Figures: figures},
		Setting: "What to set", Findings: cleaned(p.Findings),
		Forecast: forecastRows(p.Forecast), Alternatives: p.alternativeRows(),
		Origin: p.Origin.facts(fact{"device", clean(p.Device, longName)}),
	}
	if out.Heading == "" {
		out.Heading = fmt.Sprintf("A ring at %s", format(p.Ring.NaturalFrequency, "Hz"))
	}
	out.Title = out.Heading + " – plan, " + out.Status
	s := &p.Setting
	if out.Refused = s.Expected == nil; out.Refused {
		return out, nil
	}
	if !p.Met {
		out.Setting = "The best that can be set"
	}
	out.Settings, out.Expected = append(settingFacts(s), fact{"source", p.sourceLine()}), resultRows(s.Expected)[:4]
	out.Headline = []fact{{"record", format(s.Record, "s")}, {"sample rate", trimHertz(s.SampleRate) + "/s"},
		{"averages", averages(s.Averages)}, {"vertical range", format(s.FullScale, "V")}}
	return out, nil
}
