package report

import (
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
	"time"

	"dieaway/decay"
	"dieaway/decay/circuit"
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

// A setSpread is how one quantity spreads.
type setSpread struct{ Label, Mean, Median, Range, Between, Within, Own string }

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
		Status: string(s.Status()), Verdict: s.verdict(), What: s.counts() + "."}}
	p.judge(s.limits())
	if p.Heading == "" {
		p.Heading = plural(len(s.Rows), "capture")
	}
	p.Title = p.Heading + " – free decays, " + p.Status
	var spreads []spreadOf
	for _, spread := range s.judge() {
		if spread.Spread != nil {
			spreads = append(spreads, spread)
			p.Spreads = append(p.Spreads, shown(spread))
		}
	}
	var err error
	if p.Figures, err = s.figures(spreads); err != nil {
		return fmt.Errorf("charts of the page: %w", err)
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

// verdict says what is to be said of the worst of them.
func (s *Set) verdict() string {
	if s.Status() == decay.Good {
		return "nothing speaks against the numbers of any"
	}
	return "is the worst of them"
}

// limits is the worst verdict on the limits, "" without any.
func (s *Set) limits() circuit.Verdict {
	for _, worst := range []circuit.Verdict{circuit.Fail, circuit.Undecided, circuit.Pass} {
		if slices.ContainsFunc(s.Rows, func(r *SetRow) bool { return r.Verdict == worst }) {
			return worst
		}
	}
	return ""
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
	return setRow{r, text(r.NaturalFrequency), text(r.Q), text(r.TimeConstant), fileName(r.File, longName), r.word(), why, r.picture}
}

func shown(p spreadOf) setSpread {
	share := func(x float64) string {
		return fmt.Sprintf("%s (%s)", quantity.Format(x, p.Mean.Unit, 3), quantity.Percent(x/math.Abs(p.Mean.Value)))
	}
	return setSpread{p.label, p.Mean.String(), quantity.Format(p.Median, p.Mean.Unit, 6),
		quantity.Format(p.Least, p.Mean.Unit, 6) + " to " + quantity.Format(p.Most, p.Mean.Unit, 6),
		share(p.Between), share(p.Within), share(p.Own)}
}
