package report

import (
	"errors"
	"fmt"
	"html/template"
	"io"
	"math"
	"strings"
	"time"

	"dieaway/decay/quantity"
)

// A setPage is what the template shows.
type setPage struct {
	frame
	Spreads  []setSpread
	Outliers []setRow
	Rows     []setRow
	Made     []fact
	Judged   bool
}

// A setSpread is one quantity with its chart.
type setSpread struct {
	Label, Mean, Median, Range, Between, Within, Own string
	Chart                                            template.HTML
}

// A setRow is a row for people.
type setRow struct {
	*SetRow
	F, Qs, Tau, Name, Word, Why, Picture string
}

// WritePage writes the set as one HTML page that needs no network: how each
// quantity spreads, its run chart and distribution, and every capture with a small
// picture of its record.
func (s *Set) WritePage(w io.Writer) error {
	if len(s.Rows) == 0 {
		return errors.New("report: a set without any capture")
	}
	p := &setPage{frame: frame{Kind: "Free decays of several captures", Heading: clean(s.Heading, nameLength),
		Status: string(s.Status()), Verdict: "is the worst of them", What: s.counts() + "."}}
	if p.Heading == "" {
		p.Heading = plural(len(s.Rows), "capture")
	}
	p.Title = p.Heading + " – " + plural(len(s.Rows), "capture")
	for _, spread := range s.judge() {
		if spread.Spread != nil {
			p.Spreads = append(p.Spreads, s.shown(spread))
		}
	}
	for _, r := range s.Rows {
		row := rowForPeople(r)
		p.Rows = append(p.Rows, row)
		if len(r.Outlier) > 0 {
			p.Outliers = append(p.Outliers, row)
		}
		p.Judged = p.Judged || r.Verdict != ""
	}
	made := ""
	if !s.Origin.Made.IsZero() {
		made = s.Origin.Made.UTC().Format(time.DateTime) + " UTC"
	}
	p.Made = stated([]fact{{"version", clean(s.Origin.Version, longName)}, {"command line", clean(s.Origin.CommandLine, 4*longName)}, {"made", made}})
	return p.write(w, "set.html", p)
}

func rowForPeople(r *SetRow) setRow {
	text := func(q quantity.Quantity) string {
		if !q.Known() {
			return ""
		}
		return q.String()
	}
	why := strings.Join(r.Codes, " ")
	if r.Err != "" {
		why = clean(r.Err, longName)
	}
	return setRow{r, text(r.NaturalFrequency), text(r.Q), text(r.TimeConstant), clean(r.File, longName), r.word(), why, r.picture}
}

func (s *Set) shown(p spreadOf) setSpread {
	share := func(x float64) string {
		return fmt.Sprintf("%s (%s)", quantity.Format(x, p.Mean.Unit, 3), quantity.Percent(x/math.Abs(p.Mean.Value)))
	}
	return setSpread{p.label, p.Mean.String(), quantity.Format(p.Median, p.Mean.Unit, 6),
		quantity.Format(p.Least, p.Mean.Unit, 6) + " to " + quantity.Format(p.Most, p.Mean.Unit, 6),
		share(p.Between), share(p.Within), share(p.Own), s.chart(p)}
}

// The run chart and its distribution, in units of the drawing.
const (
	chartLeft, chartWide, chartTop, chartHigh = 10.0, 640.0, 12.0, 190.0
	barsLeft, barsWide                        = 670.0, 130.0
	barsMost                                  = 40
	pointsWithBars                            = 1500 // beyond, points stand alone
)

// A setChart draws one quantity against the number of the capture.
type setChart struct {
	strings.Builder
	lo, hi float64
	n      int
}

func (c *setChart) y(v float64) float64 { return chartTop + chartHigh*(c.hi-v)/(c.hi-c.lo) }
func (c *setChart) x(i int) float64 {
	return chartLeft + chartWide*(float64(i)+0.5)/float64(c.n)
}

// chart returns run chart and distribution as one drawing. All that it says in
// words goes through clean and escaping.
func (s *Set) chart(p spreadOf) template.HTML {
	limits := s.limitsOf(p.key)
	c := &setChart{lo: p.Least, hi: p.Most, n: len(s.Rows)}
	for _, l := range limits {
		c.lo, c.hi = math.Min(c.lo, l), math.Max(c.hi, l)
	}
	room := 0.08*(c.hi-c.lo) + 2*p.Within + 1e-12*math.Abs(c.hi)
	c.lo, c.hi = c.lo-room, c.hi+room
	unit := p.Mean.Unit
	fmt.Fprintf(c, `<svg class="run" viewBox="0 0 810 232" role="img" aria-label="%s of each capture in their order with U (k = 2), and how many share a value; all values stand in the table">`, p.label)
	fmt.Fprintf(c, `<path class="frame" d="M%g %gh%gv%gh-%gz"/>`, chartLeft, chartTop, chartWide, chartHigh, chartWide)
	c.level("mean", p.Mean.Value)
	for _, l := range limits {
		c.level("limit", l)
	}
	for i, r := range s.Rows {
		c.point(i, r, p)
	}
	c.bars(s.Rows, p)
	fmt.Fprintf(c, `<text x="%g" y="228">capture 1 to %d</text>`, chartLeft, c.n)
	for _, v := range []float64{p.Least, p.Most} {
		at := c.y(v) + 4
		if v == p.Most {
			at -= 10
		} else {
			at += 10
		}
		fmt.Fprintf(c, `<text x="%g" y="%.1f">%s</text>`, chartLeft+4, at, quantity.Format(v, unit, 6))
	}
	c.WriteString("</svg>")
	return template.HTML(c.String())
}

// limitsOf returns the limits that the bench file sets on a quantity.
func (s *Set) limitsOf(key string) (out []float64) {
	for _, r := range s.Limits {
		if r.Quantity != key {
			continue
		}
		for _, v := range []float64{r.Min, r.Max} {
			if !math.IsNaN(v) {
				out = append(out, v)
			}
		}
	}
	return out
}

func (c *setChart) level(class string, v float64) {
	fmt.Fprintf(c, `<path class="%s" d="M%g %.1fh%g"/>`, class, chartLeft, c.y(v), chartWide)
}

func (c *setChart) point(i int, r *SetRow, p spreadOf) {
	q := p.of(r)
	if !q.Known() {
		return
	}
	class := "point"
	switch {
	case len(r.Outlier) > 0:
		class = "point out"
	case r.word() != "good":
		class = "point doubt"
	}
	if c.n <= pointsWithBars && q.U > 0 {
		fmt.Fprintf(c, `<path class="bar" d="M%.1f %.1fV%.1f"/>`, c.x(i), c.y(q.Value-2*q.U), c.y(q.Value+2*q.U))
	}
	fmt.Fprintf(c, `<circle class="%s" cx="%.1f" cy="%.1f" r="2.6"><title>%s: %s</title></circle>`,
		class, c.x(i), c.y(q.Value), template.HTMLEscapeString(clean(r.File, nameLength)), template.HTMLEscapeString(q.String()))
}

// bars draws how many captures share a stretch of values, beside the run chart.
func (c *setChart) bars(rows []*SetRow, p spreadOf) {
	if p.Most == p.Least {
		return
	}
	counts := make([]int, int(math.Min(barsMost, math.Max(5, math.Ceil(math.Sqrt(float64(p.N)))))))
	most := 0
	for _, r := range rows {
		if q := p.of(r); q.Known() {
			k := min(len(counts)-1, int(float64(len(counts))*(q.Value-p.Least)/(p.Most-p.Least)))
			counts[k]++
			most = max(most, counts[k])
		}
	}
	step := (p.Most - p.Least) / float64(len(counts))
	for k, n := range counts {
		low := p.Least + float64(k)*step
		fmt.Fprintf(c, `<rect class="count" x="%g" y="%.1f" width="%.1f" height="%.1f"><title>%d from %s</title></rect>`, barsLeft, c.y(low+step),
			barsWide*float64(n)/float64(most), c.y(low)-c.y(low+step), n, quantity.Format(low, p.Mean.Unit, 6))
	}
	fmt.Fprintf(c, `<text x="%g" y="228">longest bar: %d</text>`, barsLeft, most)
}
