package report

import (
	"encoding/json"
	"errors"
	"fmt"
	"html/template"
	"io"
	"time"

	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// A History is all measurements of one device in an archive, on their way to its
// page. It is made of a page written earlier or of nothing, and takes the
// measurements one by one: what it costs does not depend on how many there are, but
// for the copying of their rows.
type History struct {
	sums historySums
	rows *rowSet
}

// historySums are what the page says of all measurements.
type historySums struct {
	Device      string               `json:"device"`
	N           int                  `json:"n"`
	First, Last int64                // milliseconds since 1970
	LastName    string               // of the entry, for the order of equal times
	Kinds       map[string]*kindSums `json:"kinds"`
}

// kindSums are those of one kind of measurement.
type kindSums struct {
	N      int // with a result
	Trends [3]quantity.TrendSums
}

// NewHistory returns the history of a device without any measurement.
func NewHistory() *History {
	h := &History{sums: historySums{Kinds: map[string]*kindSums{}}}
	h.rows = &rowSet{sums: &h.sums}
	return h
}

// ReadHistory returns the history of a page that [History.WritePage] wrote; an
// error means that the page is of another make or damaged.
func ReadHistory(page []byte) (*History, error) {
	h := NewHistory()
	var err error
	h.rows, err = readRowSet(page, &h.sums)
	return h, err
}

// Len is the number of measurements.
func (h *History) Len() int { return h.sums.N }

// errOrder says that a measurement comes before one that was added already.
var errOrder = errors.New("report: a measurement out of the order of time")

// Add adds a measurement, which must be newer than those before, of the device,
// whose latest name counts. Otherwise it returns an error and the history has to
// be made anew in the order of time.
func (h *History) Add(device string, f *Filed) error {
	row, s := f.row(), &h.sums
	if s.N > 0 && (row.Made < s.Last || row.Made == s.Last && row.Name <= s.LastName) {
		return errOrder
	}
	if s.N == 0 {
		s.First = row.Made
	}
	s.N++
	s.Device, s.Last, s.LastName = device, row.Made, row.Name
	k := s.Kinds[row.Kind]
	if k == nil {
		k = new(kindSums)
		s.Kinds[row.Kind] = k
	}
	if f.Q.Known() || f.NaturalFrequency.Known() {
		k.N++
	}
	for i, what := range followedQuantities {
		k.Trends[i].Add(float64(row.Made), what.of(f))
	}
	return h.rows.add(row)
}

// latest returns up to n measurements, newest first.
func (h *History) latest(n int) (rows []*filedRow) {
	for _, line := range h.rows.last(n) {
		row := new(filedRow)
		if err := json.Unmarshal(line, row); err == nil { // we wrote it
			rows = append(rows, row)
		}
	}
	return rows
}

// A followed is one quantity that is followed over time.
type followed struct {
	label, letter, unit string
	// value, u are the keys of a row's numbers.
	value, u string
	of       func(*Filed) quantity.Quantity
	limits   func(*filedRow) *[2]*float64
}

var followedQuantities = [3]followed{
	{"natural frequency", "f₀", "Hz", "f", "fu", func(f *Filed) quantity.Quantity { return f.NaturalFrequency }, func(r *filedRow) *[2]*float64 { return r.LF }},
	{"quality factor", "Q", "", "q", "qu", func(f *Filed) quantity.Quantity { return f.Q }, func(r *filedRow) *[2]*float64 { return r.LQ }},
	{"time constant", "τ", "s", "a", "au", func(f *Filed) quantity.Quantity { return f.TimeConstant }, func(r *filedRow) *[2]*float64 { return r.LT }},
}

// kindNames are the kinds of measurement, the first the commonest, in the plural
// and with the colour they are drawn in.
var kindNames = []struct{ kind, name, color string }{
	{"ringdown", "ring-downs", "samples"}, {"sweep", "driven sweeps", "peak"}, {"crosscheck", "cross-checks", "envelope"},
	{"components", "component measurements", "crossing"}, {"unknown", "others", "quiet"},
}

// chief returns the kind with the most results: its key, its name and its sums.
func (h *History) chief() (kind, name string, sums *kindSums) {
	sums = new(kindSums)
	for _, k := range kindNames {
		if s := h.sums.Kinds[k.kind]; s != nil && s.N > sums.N {
			kind, name, sums = k.kind, k.name, s
		}
	}
	return kind, name, sums
}

// trends are the trends of the chief kind in the order of followedQuantities.
func (h *History) trends() (out [3]*quantity.Trend) {
	_, _, sums := h.chief()
	for i, what := range followedQuantities {
		out[i] = sums.Trends[i].Trend(what.unit)
	}
	return out
}

// A trendRow is mean and change of one quantity for people.
type trendRow struct{ Label, Mean, Change, U, Class, Verdict string }

func trendRows(trends [3]*quantity.Trend) (rows []trendRow) {
	for i, t := range trends {
		if t.N == 0 {
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

// KindName is the kind of measurement for people.
func (f firstFiled) KindName() string { return KindName(f.Kind) }

// KindName names a kind of measurement, as [Filed] has it, for people.
func KindName(kind string) string {
	switch kind {
	case "ringdown":
		return "ring-down"
	case "crosscheck":
		return "cross-check"
	}
	return kind
}

// WritePage writes the device's history as one HTML page that needs no network:
// mean and change, charts over time, and a table of all entries that is sorted and
// filtered in the page. It is meant to stand beside the folders of the entries.
func (h *History) WritePage(w io.Writer) error {
	if h.sums.N == 0 {
		return errors.New("report: a history without any entry")
	}
	trends := h.trends()
	_, name, _ := h.chief()
	first := h.latest(firstRows)
	p := &historyPage{
		frame: frame{Kind: "One device over time", Heading: clean(h.sums.Device, nameLength), Status: first[0].Status,
			What: h.what(), Verdict: "in the latest of " + plural(h.sums.N, "measurement"), More: template.JS(rowsJS)},
		Trends:  trendRows(trends),
		TrendOf: "Mean of all " + name + ", with the standard uncertainty that follows from their own and from their scatter.",
		Caption: "Each entry holds its page of evidence, the result as JSON, the capture and their checksums.",
		RowSet:  h.rows,
	}
	switch v := first[0].Verdict; v {
	case "":
	case string(circuit.Fail):
		p.Status, p.Verdict = v, "outside the limits "+p.Verdict
	default:
		p.Verdict += "; limits: " + v
	}
	p.Title = p.Heading + " – history"
	if len(p.Trends) > 0 {
		f, err := h.figure(trends, first)
		if err != nil {
			return fmt.Errorf("charts of the page: %w", err)
		}
		p.Figures = []*figure{f}
	}
	for _, row := range first {
		p.First = append(p.First, firstFiled{row, whenOf(row.Made)})
	}
	return p.write(w, "history.html", p)
}

// whenOf writes a time in milliseconds since 1970.
func whenOf(ms int64) string { return time.UnixMilli(ms).UTC().Format(time.DateTime) }

// what says which time the history covers.
func (h *History) what() string {
	first, last := time.UnixMilli(h.sums.First).UTC(), time.UnixMilli(h.sums.Last).UTC()
	if first.Format(time.DateOnly) == last.Format(time.DateOnly) {
		return "Measured on " + first.Format(time.DateOnly) + "."
	}
	return fmt.Sprintf("Measured from %s to %s.", first.Format(time.DateOnly), last.Format(time.DateOnly))
}
