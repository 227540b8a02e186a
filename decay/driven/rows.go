package driven

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// rows are the rows that can be fitted, in rising frequency.
type rows struct {
	f, m []float64 // Hz, and magnitude after the corrections
	phi  []float64 // rad, nil without phase
	dev  []float64 // stated standard deviation of m, nil when none is
	from []int     // row of the sweep
	// reference is the voltage that m was divided by, nil for none.
	reference []float64
	// cartesian: real and imaginary part scatter alike. decibels: the scatter is
	// at first taken to be in proportion to the magnitude. ratio: m is a part of
	// the source's voltage.
	cartesian, decibels, ratio bool
	unit                       string
	corrections                []string
}

func (d *rows) len() int { return len(d.f) }

// newRows takes the rows that have a frequency, a response and, if there is a
// column of them, a phase; divides by the reference, or corrects for the meter.
func newRows(s *capture.Sweep, opt Options) *rows {
	d := &rows{cartesian: s.Cartesian, decibels: s.Decibels, ratio: s.Decibels && s.Unit == "" || s.Reference != nil, unit: s.Unit}
	for i, f := range s.Frequency {
		if f > 0 && s.Magnitude[i] >= 0 && !math.IsInf(s.Magnitude[i], 0) && (s.Phase == nil || finite(s.Phase[i])) && (s.Reference == nil || s.Reference[i] > 0) {
			d.from = append(d.from, i)
		}
	}
	slices.SortStableFunc(d.from, func(a, b int) int { return cmp.Compare(s.Frequency[a], s.Frequency[b]) })
	pick := func(column []float64) []float64 {
		if column == nil {
			return nil
		}
		out := make([]float64, len(d.from))
		for k, i := range d.from {
			out[k] = column[i]
		}
		return out
	}
	d.f, d.m, d.phi, d.dev = pick(s.Frequency), pick(s.Magnitude), pick(s.Phase), pick(s.Deviation)
	d.divide(pick(s.Reference))
	if s.Reference == nil && opt.MeterBandwidth > 0 && d.len() > 0 {
		d.correctMeter(opt.MeterBandwidth)
	}
	if m := slices.Max(append(d.m, 0)); d.dev == nil && !(m > 0) {
		d.from, d.f, d.m, d.phi, d.reference = nil, nil, nil, nil, nil // no response at all
	}
	return d
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

// divide takes the sag of the source out.
func (d *rows) divide(reference []float64) {
	if reference == nil {
		return
	}
	d.reference = reference
	for i, v := range reference {
		d.scale(i, 1/v)
	}
	d.unit = ""
	d.corrections = append(d.corrections, "divided by the reference")
}

func (d *rows) scale(i int, k float64) {
	d.m[i] *= k
	if d.dev != nil {
		d.dev[i] *= k
	}
}

// correctMeter makes good what a meter with one pole at fm loses and delays: it
// reads 1/(1 + jf/fm) of the truth.
func (d *rows) correctMeter(fm float64) {
	for i, f := range d.f {
		d.scale(i, math.Hypot(1, f/fm))
		if d.phi != nil {
			d.phi[i] += math.Atan(f / fm)
		}
	}
	last := d.f[len(d.f)-1]
	d.corrections = append(d.corrections, fmt.Sprintf("corrected for a meter of %s bandwidth, by up to +%s",
		quantity.Format(fm, "Hz", 4), quantity.Percent(math.Hypot(1, last/fm)-1)))
}

// smoothed is the magnitude with single rows that stand out replaced by the
// middle one of three.
func (d *rows) smoothed() []float64 {
	out := slices.Clone(d.m)
	for i := 1; i+1 < len(out); i++ {
		a, b, c := d.m[i-1], d.m[i], d.m[i+1]
		out[i] = math.Max(math.Min(a, b), math.Min(math.Max(a, b), c))
	}
	return out
}

// fewer are rows enough to choose a start by: of a long sweep every few, and all
// around the strongest response, which may be narrow.
func (d *rows) fewer(part capture.Part) *rows {
	if d.len() <= rowsForStarts {
		return d
	}
	stride := (d.len() + rowsForStarts/2 - 1) / (rowsForStarts / 2)
	at := extreme(d.smoothed(), part)
	var list []int
	for i := range d.len() {
		if i%stride == 0 || i > at-rowsForStarts/4 && i < at+rowsForStarts/4 {
			list = append(list, i)
		}
	}
	out := *d
	for _, column := range []*[]float64{&out.f, &out.m, &out.phi, &out.dev, &out.reference} {
		if *column == nil {
			continue
		}
		kept := make([]float64, len(list))
		for k, i := range list {
			kept[k] = (*column)[i]
		}
		*column = kept
	}
	return &out
}

// rowsForStarts is how many rows are enough to choose a start by.
const rowsForStarts = 1200

// extreme is the index of the greatest value, or of the least for a notch.
func extreme(v []float64, part capture.Part) int {
	best := 0
	for i, x := range v {
		if part == capture.Both && x < v[best] || part != capture.Both && x > v[best] {
			best = i
		}
	}
	return best
}
