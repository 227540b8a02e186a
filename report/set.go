package report

import (
	"cmp"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"

	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// A Set is many ring-downs, one row each: it keeps the results and lets go of the
// samples. Rows are in the order they were added.
type Set struct {
	// Heading names the set on the page, "" for none; Origin says how it was made.
	Heading string
	Origin  Origin
	// Limits are those of the bench file, for the charts.
	Limits []circuit.Range
	Rows   []*SetRow
}

// A SetRow is one ring-down of a set.
type SetRow struct {
	File, SHA256, Device, Channel, Model string
	Status                               decay.Status
	// Verdict on the limits, "" without any.
	Verdict circuit.Verdict
	// Quantities are not Known where the file was refused or could not be read.
	NaturalFrequency, DampedFrequency, TimeConstant, Q quantity.Quantity
	SNR                                                float64 // dB, NaN when unknown
	// Codes of the findings, gravest first, and the message of the gravest.
	Codes []string
	Grave string
	// Err says why the file could not be read, "" when it could.
	Err string
	// Outlier names the quantities that do not belong to the rest; Judge fills it in.
	Outlier []string

	picture string // the record as a path in a box of 160 by 36
}

// Row returns the row of a ring-down. It may be called at once for several; the row
// holds nothing of the samples, but for a small picture when that is wanted.
func (r *RingDown) Row(picture bool) *SetRow {
	row := &SetRow{File: r.file(), SHA256: r.sha256(), Device: r.Device, SNR: math.NaN(),
		NaturalFrequency: unknownIn("Hz"), DampedFrequency: unknownIn("Hz"), TimeConstant: unknownIn("s"), Q: unknown}
	if r.Err != nil {
		row.Err = r.Err.Error()
		return row
	}
	row.Status, row.Channel = r.Status(), r.Channel.Name
	if r.Limits != nil {
		row.Verdict = r.Limits.Verdict
	}
	for i, f := range r.Findings() {
		row.Codes = append(row.Codes, string(f.Code))
		if i == 0 {
			row.Grave = f.Message
		}
	}
	if picture {
		row.picture = pictureOf(r.Channel.Samples)
	}
	if r.refused() {
		return row
	}
	q := r.Result.Quantities
	row.Model = string(r.Result.Model)
	row.NaturalFrequency, row.DampedFrequency, row.TimeConstant, row.Q = q.NaturalFrequency, q.DampedFrequency, q.TimeConstant, q.Q
	if len(r.Result.Decays) > 0 {
		row.SNR = r.Result.Decays[0].SNR
	}
	return row
}

func unknownIn(unit string) quantity.Quantity { return quantity.Unknown(unit) }

// word is the first word on a row: its status, or that it could not be read.
func (r *SetRow) word() string {
	if r.Err != "" {
		return "unreadable"
	}
	return string(r.Status)
}

// A spreadOf is one quantity of a set and how it spreads.
type spreadOf struct {
	label, letter, key string
	of                 func(*SetRow) quantity.Quantity
	*quantity.Spread   // nil with fewer than two values
}

// Judge works out the spread of each quantity and marks the rows that are outliers.
func (s *Set) judge() []spreadOf {
	out := []spreadOf{
		{label: "natural frequency", letter: "f_0", key: "natural_frequency", of: func(r *SetRow) quantity.Quantity { return r.NaturalFrequency }},
		{label: "quality factor", letter: "Q", key: "q", of: func(r *SetRow) quantity.Quantity { return r.Q }},
		{label: "time constant", letter: "tau", key: "time_constant", of: func(r *SetRow) quantity.Quantity { return r.TimeConstant }},
	}
	for _, r := range s.Rows {
		r.Outlier = nil
	}
	for i := range out {
		all := make([]quantity.Quantity, len(s.Rows))
		for k, r := range s.Rows {
			all[k] = out[i].of(r)
		}
		spread, err := quantity.SpreadOf(all)
		if err != nil {
			continue
		}
		out[i].Spread = spread
		for _, k := range spread.Outliers {
			s.Rows[k].Outlier = append(s.Rows[k].Outlier, out[i].letter)
		}
	}
	return out
}

// WriteHead writes the heading of the table that [SetRow.WriteSummary] continues.
func (s *Set) WriteHead(w io.Writer) error {
	_, err := fmt.Fprintln(w, "result      natural frequency    quality factor   time constant     limits     file")
	return err
}

// WriteSummary writes the row as one line of the table.
func (r *SetRow) WriteSummary(w io.Writer, style Style) error {
	s := newSummary(w, style)
	color := map[string]string{"good": green, "doubtful": yellow, "refused": red, "unreadable": red}[r.word()]
	s.WriteString(s.paint(pad(r.word(), 11), color) + " ")
	for _, c := range []struct {
		q     quantity.Quantity
		width int
	}{{r.NaturalFrequency, 20}, {r.Q, 16}, {r.TimeConstant, 17}} {
		text := ""
		if c.q.Known() {
			text = c.q.String()
		}
		s.WriteString(pad(text, c.width) + " ")
	}
	s.WriteString(pad(string(r.Verdict), 10) + " " + fileName(r.File, nameLength))
	if len(r.Codes) > 0 {
		s.WriteString("  " + strings.Join(r.Codes, " "))
	}
	s.WriteString("\n")
	return s.Flush()
}

// WriteSummary writes what the rows have in common: how many are good, the spread
// of each quantity against its uncertainty, and the outliers by name.
func (s *Set) WriteSummary(w io.Writer, style Style) error {
	out := newSummary(w, style)
	out.WriteString("\n")
	out.item("", s.counts())
	spreads := s.judge()
	if spreads[0].Spread != nil {
		out.WriteString("\n                     mean                   between files  within a file  by themselves\n")
	}
	for _, p := range spreads {
		if p.Spread == nil {
			continue
		}
		relative := func(x float64) string { return pad(quantity.Percent(x/math.Abs(p.Mean.Value)), 14) }
		out.WriteString(trimRight(fmt.Sprintf("  %-18s %s %s %s %s", p.label, pad(p.Mean.String(), 22), relative(p.Between), relative(p.Within), relative(p.Own))) + "\n")
	}
	for _, r := range s.outliers() {
		out.item("  outlier: ", fmt.Sprintf("%s, by its %s", fileName(r.File, nameLength), strings.Join(r.Outlier, ", ")))
	}
	return out.Flush()
}

func (s *Set) outliers() (out []*SetRow) {
	for _, r := range s.Rows {
		if len(r.Outlier) > 0 {
			out = append(out, r)
		}
	}
	return out
}

// counts says how many captures there are of each kind.
func (s *Set) counts() string {
	n, words := map[string]int{}, []string{}
	for _, r := range s.Rows {
		n[r.word()]++
		if r.Verdict != "" {
			n[string(r.Verdict)]++
		}
	}
	for _, w := range []string{"good", "doubtful", "refused", "unreadable", "pass", "undecided", "fail"} {
		if n[w] > 0 {
			words = append(words, fmt.Sprintf("%d %s", n[w], w))
		}
	}
	return plural(len(s.Rows), "capture") + ": " + strings.Join(words, ", ")
}

// WriteCSVHead writes the heading of a table with comma and decimal point (RFC
// 4180), the units in the names of its columns, that [SetRow.WriteCSV] continues.
func WriteCSVHead(w io.Writer) error {
	return writeCSV(w, "file", "sha256", "status", "device", "channel", "model", "natural_frequency_hz", "u_natural_frequency_hz",
		"damped_frequency_hz", "u_damped_frequency_hz", "time_constant_s", "u_time_constant_s", "q", "u_q", "snr_db", "limits", "findings", "error")
}

// WriteCSV writes the row of one file; what is not known is left empty.
func (r *SetRow) WriteCSV(w io.Writer) error {
	cells := []string{r.File, r.SHA256, r.word(), r.Device, r.Channel, r.Model}
	for _, q := range []quantity.Quantity{r.NaturalFrequency, r.DampedFrequency, r.TimeConstant, r.Q} {
		cells = append(cells, csvNumber(q.Value), csvNumber(q.U))
	}
	return writeCSV(w, append(cells, csvNumber(r.SNR), string(r.Verdict), strings.Join(r.Codes, " "), r.Err)...)
}

func writeCSV(w io.Writer, cells ...string) error {
	out := csv.NewWriter(w)
	err := out.Write(cells)
	out.Flush()
	return cmp.Or(err, out.Error())
}

func csvNumber(x float64) string {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return ""
	}
	return strconv.FormatFloat(x, 'g', 12, 64)
}

// Status is the worst of the rows; a file that could not be read counts as refused.
func (s *Set) Status() decay.Status {
	worst := decay.Good
	for _, r := range s.Rows {
		switch {
		case r.Err != "" || r.Status == decay.Refused:
			return decay.Refused
		case r.Status == decay.Doubtful:
			worst = decay.Doubtful
		}
	}
	return worst
}

// The picture of a record: bins, and the box it is drawn in.
const (
	pictureBins             = 80
	pictureWide, pictureTop = 160, 36
)

// pictureOf draws the smallest and the largest sample of each bin as a path.
func pictureOf(y []float64) string {
	lo, hi, ok := span(y)
	if !ok || hi == lo {
		return ""
	}
	height := func(v float64) int { return int(math.Round((pictureTop - 2) * (hi - v) / (hi - lo))) }
	var b strings.Builder
	bins := min(pictureBins, len(y))
	for k := range bins {
		from, to := k*len(y)/bins, (k+1)*len(y)/bins
		low, high, ok := span(y[from:to])
		if !ok {
			continue
		}
		x := 1 + (pictureWide-2)*k/max(1, bins-1)
		ends := []int{height(low) + 1, height(high) + 1}
		if k%2 == 1 {
			slices.Reverse(ends)
		}
		fmt.Fprintf(&b, "%c%d %dV%d", "ML"[min(k, 1)], x, ends[0], ends[1])
	}
	return b.String()
}
