package report

import (
	"errors"
	"fmt"
	"html/template"
	"io"
	"time"

	"dieaway/decay/quantity"
)

// A History is all measurements of one device in an archive.
type History struct {
	Device string
	// Entries are in order of time.
	Entries []*Filed
}

// ReadHistory returns the entries of a page that [History.WritePage] wrote, by
// their names; an error means that the page is of another make or damaged.
func ReadHistory(page []byte) (map[string]*Filed, error) {
	entries := map[string]*Filed{}
	err := readRows(page, func(r *filedRow, line []byte) {
		f := r.filed()
		f.line = line
		entries[f.Name] = f
	})
	return entries, err
}

// A followed is one quantity that is followed over time.
type followed struct {
	label, letter string
	// value, u are the keys of a row's numbers.
	value, u string
	of       func(*Filed) quantity.Quantity
	limits   func(*FiledLimits) Limits
}

var followedQuantities = []followed{
	{"natural frequency", "f_0", "f", "fu", func(f *Filed) quantity.Quantity { return f.NaturalFrequency }, func(l *FiledLimits) Limits { return l.NaturalFrequency }},
	{"quality factor", "Q", "q", "qu", func(f *Filed) quantity.Quantity { return f.Q }, func(l *FiledLimits) Limits { return l.Q }},
	{"time constant", "τ", "a", "au", func(f *Filed) quantity.Quantity { return f.TimeConstant }, func(l *FiledLimits) Limits { return l.TimeConstant }},
}

// kindNames are the kinds of measurement, the first the commonest, in the plural
// and with the colour they are drawn in.
var kindNames = []struct{ kind, name, color string }{
	{"ringdown", "ring-downs", "samples"}, {"sweep", "driven sweeps", "peak"}, {"crosscheck", "cross-checks", "envelope"}, {"unknown", "others", "quiet"},
}

// chiefKind is the kind of most entries with a result.
func (h *History) chiefKind() (kind, name string) {
	counts := map[string]int{}
	for _, f := range h.Entries {
		if f.Q.Known() || f.NaturalFrequency.Known() {
			counts[f.Kind]++
		}
	}
	most := 0
	for _, k := range kindNames {
		if counts[k.kind] > most {
			most, kind, name = counts[k.kind], k.kind, k.name
		}
	}
	return kind, name
}

// trends are the trends of the chief kind in the order of followedQuantities; nil
// where nothing is known.
func (h *History) trends() []*quantity.Trend {
	kind, _ := h.chiefKind()
	out := make([]*quantity.Trend, len(followedQuantities))
	for i, what := range followedQuantities {
		var at []float64
		var q []quantity.Quantity
		for _, f := range h.Entries {
			if f.Kind == kind {
				at, q = append(at, float64(f.Made.UnixMilli())), append(q, what.of(f))
			}
		}
		if t, err := quantity.TrendOf(at, q); err == nil {
			out[i] = t
		}
	}
	return out
}

// A trendRow is mean and change of one quantity for people.
type trendRow struct{ Label, Mean, Change, U, Class, Verdict string }

func trendRows(trends []*quantity.Trend) (rows []trendRow) {
	for i, t := range trends {
		if t == nil {
			continue
		}
		r := trendRow{Label: followedQuantities[i].label, Mean: t.Mean.String(), Verdict: "too few to tell"}
		if t.Change.Known() {
			r.Change, r.U = t.Change.String(), quantity.Format(t.K*t.Change.U, t.Change.Unit, 2)
			r.Class, r.Verdict = "steady", "none seen"
			if t.Drifts() {
				r.Class, r.Verdict = "drifts", "drifts"
			}
		}
		rows = append(rows, r)
	}
	return rows
}

// A historyPage is what the template shows.
type historyPage struct {
	frame
	Trends           []trendRow
	TrendOf, Caption string
	First            []firstFiled
	RowSet           *rowSet
}

// A firstFiled is a row of the page before its script runs.
type firstFiled struct {
	*filedRow
	When string
}

// WritePage writes the device's history as one HTML page that needs no network:
// mean and change, charts over time, and a table of all entries that is sorted and
// filtered in the page. It is meant to stand beside the folders of the entries.
func (h *History) WritePage(w io.Writer) error {
	if len(h.Entries) == 0 {
		return errors.New("report: a history without any entry")
	}
	trends := h.trends()
	latest := h.Entries[len(h.Entries)-1]
	_, name := h.chiefKind()
	p := &historyPage{
		frame: frame{Kind: "One device over time", Heading: clean(h.Device, nameLength), Status: latest.row().Status,
			What: h.what(), Verdict: "in the latest of " + plural(len(h.Entries), "measurement"), More: template.JS(rowsJS)},
		Trends:  trendRows(trends),
		TrendOf: "Mean of all " + name + ", with the standard uncertainty that follows from their own and from their scatter.",
		Caption: "Each entry holds its page of evidence, the result as JSON, the capture and their checksums.",
	}
	if latest.Verdict != "" {
		p.Verdict += ", limits: " + latest.row().Verdict
	}
	p.Title = p.Heading + " – history"
	var err error
	if len(p.Trends) > 0 {
		f, err := h.figure(trends)
		if err != nil {
			return fmt.Errorf("charts of the page: %w", err)
		}
		p.Figures = []*figure{f}
	}
	if p.RowSet, err = h.rows(); err != nil {
		return err
	}
	for i := len(h.Entries) - 1; i >= 0 && len(p.First) < firstRows; i-- {
		row := h.Entries[i].row()
		p.First = append(p.First, firstFiled{row, h.Entries[i].Made.UTC().Format(time.DateTime)})
	}
	return p.write(w, "history.html", p)
}

func (h *History) rows() (*rowSet, error) {
	lines := make([][]byte, len(h.Entries))
	for i, f := range h.Entries {
		var err error
		if lines[i], err = f.bytes(); err != nil {
			return nil, err
		}
	}
	return joinRows(lines), nil
}

// what says which time the history covers.
func (h *History) what() string {
	first, last := h.Entries[0].Made.UTC(), h.Entries[len(h.Entries)-1].Made.UTC()
	if len(h.Entries) == 1 {
		return "Measured on " + first.Format(time.DateOnly) + "."
	}
	return fmt.Sprintf("Measured from %s to %s.", first.Format(time.DateOnly), last.Format(time.DateOnly))
}
