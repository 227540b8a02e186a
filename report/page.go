package report

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
	"time"

	"dieaway/capture"
	"dieaway/decay"
)

// WritePage writes the evidence as one HTML page that needs no network: what was
// measured and the verdict, the results with their uncertainties, findings,
// charts, and how it was made. The same ring-down gives the same bytes.
//
// The page holds a reduced copy of a long record; it stays below 2.5 MB whatever
// the record's length. A file that could not be read has no page: WritePage
// returns its error.
func (r *RingDown) WritePage(w io.Writer) error {
	if err := r.check(); err != nil {
		return err
	}
	return writeSheet(w, "ringdown.html", r.Err, r.sheet, r.WriteJSON)
}

// sheet is the page with all its figures.
func (r *RingDown) sheet() (*page, error) {
	var f *figure
	var more details
	if err := together(into(&f, r.figure), into(&more, r.details)); err != nil {
		return nil, err
	}
	p := r.page(f)
	f.Notes = append(f.Notes, more.notes...)
	p.Figures = append(p.Figures, more.figures...)
	return p, nil
}

// details are the figures behind the first, which tells in notes of those that are not
// to be had.
type details struct {
	figures []*figure
	notes   []string
}

func (r *RingDown) details() (details, error) {
	s := r.spectraOf()
	if s == nil {
		return details{}, nil
	}
	var residual, ring attempt
	var along []*figure
	err := together(into(&residual, s.residual), into(&along, r.alongFigures), into(&ring, s.ring))
	var out details
	for _, f := range slices.Concat([]*figure{residual.figure}, along, []*figure{ring.figure}) {
		if f != nil {
			out.figures = append(out.figures, f)
		}
	}
	for _, n := range []string{residual.why, ring.why} {
		if n != "" {
			out.notes = append(out.notes, n)
		}
	}
	return out, err
}

// A page is what the template shows.
type page struct {
	frame
	evidence
	benched
	Decays     []decayRow
	MoreDecays int
	Modes      []decayRow
	Parameters []parameterRow
	// ParametersCaption says what the table of them shows.
	ParametersCaption string
}

// The evidence is what the page of a ring-down and that of a sweep both show.
type evidence struct {
	Refused           bool
	Headline, Results []row
	Facts             []fact
	Readings          []comparison
	ReadingsCaption   string
	Findings          []capture.Finding
	Origin, Layout    []fact
	Columns           []capture.Column
	// Sideways is true of a file with a line for each channel: Columns are lines then.
	Sideways bool
}

// A fact is a name and what there is to say.
type fact struct{ Name, Value string }

// A decayRow is one of several decays, or of two modes.
type decayRow struct {
	Number int
	Gate   string
	Rows   []row
}

func (r *RingDown) page(f *figure) *page {
	f.Words, f.Notes = wordsOfTime, r.notes(f)
	p := &page{
		frame: frame{Kind: "Free decay of a resonant circuit", Heading: r.heading(), What: r.what(),
			Status: string(r.Status()), Verdict: r.verdict(), Figures: []*figure{f}},
		evidence: evidence{Refused: r.refused(), Findings: cleaned(r.Findings()),
			Origin: r.origin(), Layout: r.layout(), Columns: r.Capture.Layout.Columns, Sideways: r.Capture.Layout.Sideways},
	}
	p.benched = benchedOf(r.Circuit, r.Limits)
	p.judge(p.verdictOnLimits())
	p.Title = p.Heading + " – free decay, " + p.Status
	record := fact{"record", r.recordLine()}
	if p.Refused {
		p.Layout = append([]fact{record}, p.Layout...)
		return p
	}
	res := r.Result
	p.Results = resultRows(res.Quantities)
	p.Headline = p.Results[:4]
	p.Readings = comparisons(res)
	of := ""
	if len(res.Decays) > 1 {
		of = fmt.Sprintf(" of decay %d", res.Best+1)
	}
	p.Parameters = parameterRows(res.Decays[res.Best].Parameters)
	p.ParametersCaption = "The parameters of the fit" + of + ", at the start of the gate, with the correlation coefficient of each pair (GUM 5.2.2), −1 to +1: what is to be calculated from two of them needs it beside their uncertainties."
	p.ReadingsCaption = "What crossings of the baseline and heights of peaks say by themselves, beside the fit" + of + ". In parentheses: the difference in standard uncertainties of the reading."
	p.Facts = []fact{{"model", modelName(res)}}
	if line := r.channelLine(); line != "" {
		p.Facts = append(p.Facts, fact{"channel", line})
	}
	p.Facts = append(p.Facts, record)
	if len(res.Decays) == 1 {
		d := res.Decays[0]
		p.Facts = append(p.Facts, fact{"gate", gateLine(d)}, fact{"noise", noiseLine(d, r.unit())})
		p.Facts = append(p.Facts, fact{"fit", fitLine(d)})
		p.Facts = stated(p.Facts)
		for _, row := range shapeRows(d) {
			p.Facts = append(p.Facts, fact{row.Label, row.Quantity.String()})
		}
	} else {
		p.Decays, p.MoreDecays = decayRows(res.Decays)
	}
	for i, m := range res.Modes {
		p.Modes = append(p.Modes, decayRow{Number: i + 1, Rows: resultRows(m)})
	}
	return p
}

// decayRows tabulates several decays, as many as are drawn.
func decayRows(all []*decay.Decay) (rows []decayRow, more int) {
	for i, d := range all[:min(len(all), mostDecays)] {
		rows = append(rows, decayRow{i + 1, gateLine(d), resultRows(&d.Quantities)[:4]})
	}
	return rows, len(all) - len(rows)
}

// notes says below the charts what is to be known of them.
func (r *RingDown) notes(f *figure) []string {
	var out []string
	if !r.refused() {
		out = append(out, "The tinted ground is the gate, the stretch that was fitted.")
	}
	if f.Reduced {
		s := "The record is longer than a page can hold: it is drawn by the smallest and the largest sample of each bin"
		if !r.refused() {
			s += "; the bins are finer, or single samples, in the first cycles, the middle and the last cycles of each decay, and only there is the fitted curve drawn where its cycles are many. The result comes from all samples"
		}
		out = append(out, s+".")
	}
	return out
}

// heading names what was measured.
func (r *RingDown) heading() string {
	if r.Device != "" {
		return clean(r.Device, nameLength)
	}
	return fileName(r.file(), nameLength)
}

// what says in one line what was measured.
func (r *RingDown) what() string {
	s := upperFirst(r.source())
	if r.refused() {
		return s + "."
	}
	cycles := 0.0
	for _, d := range r.Result.Decays {
		cycles += d.Cycles
	}
	switch n := len(r.Result.Decays); {
	case math.IsNaN(cycles):
		return fmt.Sprintf("%s: a free decay, fitted with %s.", s, modelName(r.Result))
	case n > 1:
		return fmt.Sprintf("%s: %d free decays, %.0f cycles in all, fitted with %s.", s, n, cycles, modelName(r.Result))
	default:
		return fmt.Sprintf("%s: %.0f cycles of free decay, fitted with %s.", s, cycles, modelName(r.Result))
	}
}

// longName is where even the full name of a file or device is cut on the page.
const longName = 400

// origin says how the result was made.
func (r *RingDown) origin() []fact {
	return r.Origin.facts(fact{"file", fileName(r.file(), longName)}, fact{"SHA-256", r.sha256()},
		fact{"device", clean(r.Device, longName)}, fact{"channel", clean(r.Channel.Name, longName)})
}

// facts says how the result was made, behind what it was made from.
func (o Origin) facts(from ...fact) []fact {
	facts := append(from, fact{"version", clean(o.Version, longName)}, fact{"command line", clean(o.CommandLine, 4*longName)})
	if !o.Made.IsZero() {
		facts = append(facts, fact{"made", o.Made.UTC().Format(time.DateTime) + " UTC"})
	}
	return stated(facts)
}

// layout says how the file was understood.
func (r *RingDown) layout() []fact {
	return layoutFacts(&r.Capture.Layout, fact{"time axis", clean(r.Channel.Axis.Source, longName)})
}

// layoutFacts says how a file was understood, behind what is peculiar to it.
func layoutFacts(l *capture.Layout, first ...fact) []fact {
	table, each := "", "line"
	if l.Sideways {
		table, each = "on its side, a line for each channel", "column"
	}
	line := func(n int) string {
		if n == 0 {
			return ""
		}
		return fmt.Sprintf("%s %d", each, n)
	}
	encoding := l.Encoding
	if l.Compressed {
		encoding = strings.TrimPrefix(encoding+", compressed", ", ")
	}
	return stated(append(first, fact{"encoding", clean(encoding, nameLength)},
		fact{"table", table}, fact{"names", line(l.HeaderLine)}, fact{"units", line(l.UnitsLine)}, fact{"first sample", line(l.FirstLine)},
		fact{"separator", clean(l.Delimiter, nameLength)}, fact{"decimal mark", clean(l.DecimalMark, nameLength)}))
}

// cleaned returns findings whose texts, which may quote the file, are safe to show.
func cleaned(all []capture.Finding) []capture.Finding {
	for i := range all {
		all[i].Message, all[i].Remedy = clean(all[i].Message, 0), clean(all[i].Remedy, 0)
	}
	return all
}

// stated leaves out the facts without a value.
func stated(all []fact) []fact {
	var out []fact
	for _, f := range all {
		if f.Value != "" {
			out = append(out, f)
		}
	}
	return out
}

// Cells returns the columns of the file with their texts made safe to show.
func (e *evidence) Cells() []capture.Column {
	var out []capture.Column
	for _, c := range e.Columns[:min(len(e.Columns), mostColumns)] {
		c.Name, c.Unit, c.Why = clean(c.Name, nameLength), clean(c.Unit, nameLength), clean(c.Why, longName)
		out = append(out, c)
	}
	return out
}

// mostColumns is how many columns of the file the page lists.
const mostColumns = 40
