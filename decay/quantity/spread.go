package quantity

import (
	"errors"
	"math"
	"slices"
)

// A Spread says how values of several things of one kind differ, and how much of
// that their own uncertainties explain.
type Spread struct {
	N int
	// Mean has the standard uncertainty Between/sqrt(N), or Within/sqrt(N) if larger.
	Mean Quantity
	// Median, Least and Most of the values.
	Median, Least, Most float64
	// Between is the standard deviation of the values, Within the root mean square of
	// their standard uncertainties, Own = sqrt(Between^2 - Within^2) what the things
	// differ by themselves; 0 when Within explains it all.
	Between, Within, Own float64
	// Outliers are the places of values that do not belong to the rest.
	Outliers []int
}

const (
	// outlierScore is the modified z score of an outlier, 0.6745 |x - median|/MAD
	// (Iglewicz and Hoaglin, How to Detect and Handle Outliers, 1993, from memory).
	outlierScore = 3.5
	outlierOwn   = 3.0 // of its own uncertainty that an outlier is off at least
	outlierLeast = 5   // values that there must be
)

var errFew = errors.New("fewer than two known values")

// SpreadOf returns the spread of the values that are known. An uncertainty that is
// not known counts as none. Outliers count in all of the figures: they are named,
// not removed.
func SpreadOf(all []Quantity) (*Spread, error) {
	var x []float64
	sum, squares := 0.0, 0.0
	for _, q := range all {
		if !q.Known() {
			continue
		}
		x = append(x, q.Value)
		sum += q.Value
		if q.knownU() {
			squares += q.U * q.U
		}
	}
	n := float64(len(x))
	if n < 2 {
		return nil, errFew
	}
	s := &Spread{N: len(x), Median: median(x), Least: slices.Min(x), Most: slices.Max(x), Within: math.Sqrt(squares / n)}
	mean, about := sum/n, 0.0
	for _, v := range x {
		about += (v - mean) * (v - mean)
	}
	s.Between = math.Sqrt(about / (n - 1))
	s.Own = math.Sqrt(math.Max(0, s.Between*s.Between-s.Within*s.Within))
	s.Mean = New(mean, math.Max(s.Between, s.Within)/math.Sqrt(n), unitOf(all))
	s.findOutliers(all, x)
	return s, nil
}

func unitOf(all []Quantity) string {
	for _, q := range all {
		if q.Known() {
			return q.Unit
		}
	}
	return ""
}

func (s *Spread) findOutliers(all []Quantity, x []float64) {
	if len(x) < outlierLeast {
		return
	}
	off := make([]float64, len(x))
	for i, v := range x {
		off[i] = math.Abs(v - s.Median)
	}
	mad := median(off)
	for i, q := range all {
		if !q.Known() {
			continue
		}
		d, u := math.Abs(q.Value-s.Median), 0.0
		if q.knownU() {
			u = q.U
		}
		if 0.6745*d > outlierScore*mad && d > outlierOwn*u {
			s.Outliers = append(s.Outliers, i)
		}
	}
}

// median returns the middle value, or the mean of the two in the middle.
func median(x []float64) float64 {
	y := slices.Sorted(slices.Values(x))
	n := len(y)
	return (y[(n-1)/2] + y[n/2]) / 2
}
