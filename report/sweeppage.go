package report

import (
	"fmt"
	"io"
)

// A sweepPage is what the template of a sweep shows.
type sweepPage struct {
	frame
	evidence
	benched
}

// WritePage writes the evidence as one HTML page that needs no network, as
// [RingDown.WritePage] does: the resonance curve with its fit, the phase, what the
// fit leaves, results and findings.
func (r *Sweep) WritePage(w io.Writer) error {
	if err := r.check(); err != nil {
		return err
	}
	return writeSheet(w, "sweep.html", r.Err, r.page, r.WriteJSON)
}

func (r *Sweep) page() (*sweepPage, error) {
	f, err := r.figure()
	if err != nil {
		return nil, err
	}
	heading := fileName(r.file(), nameLength)
	if r.Device != "" {
		heading = clean(r.Device, nameLength)
	}
	p := &sweepPage{
		frame: frame{Kind: "Driven sweep of a resonant circuit", Heading: heading, What: r.what(),
			Status: string(r.Status()), Verdict: r.verdict(), Figures: []*figure{f}},
		evidence: evidence{Refused: r.refused(), Findings: cleaned(r.Findings()), Origin: r.origin(),
			Layout: layoutFacts(&r.Table.Layout), Columns: r.Table.Layout.Columns},
	}
	p.benched = benchedOf(r.Circuit, r.Limits)
	p.judge(p.verdictOnLimits())
	p.Title = p.Heading + " – driven sweep, " + p.Status
	if p.Refused {
		p.Layout = append([]fact{{"sweep", r.rowsLine()}}, p.Layout...)
		return p, nil
	}
	p.Results = sweepRows(r.Result)
	p.Headline = p.Results[:4]
	p.Facts = r.facts()
	p.Readings = sweepComparisons(r.Result)
	p.ReadingsCaption = "What peak and half-power points say by themselves, corrected for what the response was measured across, beside the fit. In parentheses: the difference in standard uncertainties of the reading."
	return p, nil
}

// what says in one line what was measured.
func (r *Sweep) what() string {
	s := upperFirst(r.source())
	if r.refused() {
		return s + "."
	}
	return fmt.Sprintf("%s: %s, fitted with the exact form of a second-order resonance.", s, plural(len(r.Result.Points), "row"))
}

func (r *Sweep) origin() []fact {
	return r.Origin.facts(fact{"file", fileName(r.file(), longName)}, fact{"SHA-256", r.sha256()},
		fact{"device", clean(r.Device, longName)}, fact{"response", clean(r.Table.Name, longName)})
}
