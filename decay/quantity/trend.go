package quantity

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// A Trend is what repeated measurements of one quantity say of it over time.
type Trend struct {
	// N measurements counted.
	N int
	// Mean is their weighted mean.
	Mean Quantity
	// Change is the rise of the straight line through them from the first time to
	// the last, in the unit of the quantity; unknown with fewer than three times.
	Change Quantity
	// K is the coverage factor for 95 % of Change, larger than 2 where its
	// uncertainty comes from the scatter of few measurements.
	K float64
	// Birge is the ratio of the scatter about the line to what the uncertainties
	// let expect; NaN when they are unknown, or fewer than three.
	Birge float64
}

// Drifts reports whether the change is larger than its expanded uncertainty K u.
func (t *Trend) Drifts() bool { return math.Abs(t.Change.Value) > t.K*t.Change.U }

// TrendOf returns mean and change of the quantities q measured at times at, in any
// unit of time and in any order; q[i] without a value are left out, and all have
// one unit. With every uncertainty known the weights are 1/u^2, and where the
// scatter is larger than they explain, the uncertainties are multiplied by the
// Birge ratio sqrt(chi^2/(n-2)) (R. T. Birge, Phys. Rev. 40, 207, 1932; common
// practice). With one unknown or zero, all weigh the same. What all measurements
// share, such as a time base, moves neither and is not in the uncertainties.
func TrendOf(at []float64, q []Quantity) (*Trend, error) {
	var x, y, w []float64
	weighted := true
	unit := ""
	for i, a := range q {
		if a.Known() {
			x, y, w = append(x, at[i]), append(y, a.Value), append(w, 1/(a.U*a.U))
			weighted = weighted && a.knownU() && finite(1/(a.U*a.U)) && a.U > 0
			unit = a.Unit
		}
	}
	if len(x) == 0 {
		return nil, errors.New("no measurement has a value")
	}
	if !weighted {
		w = nil
	}
	t := &Trend{N: len(x), Change: Unknown(unit), K: math.NaN(), Birge: math.NaN()}
	t.Mean = meanOf(y, w, unit)
	if line, err := Line(x, y, w); err == nil && len(x) > 2 {
		t.line(line, x, weighted)
	}
	return t, nil
}

// line takes change and coverage from the straight line.
func (t *Trend) line(f LineFit, x []float64, weighted bool) {
	dof := float64(f.Degrees)
	if weighted {
		t.Birge = math.Sqrt(f.ChiSquare / dof)
		if t.Birge <= 1 {
			dof = math.Inf(1) // the uncertainties stand, and with them k
		} else {
			f = f.Scaled()
		}
	}
	lo, hi := x[0], x[0]
	for _, v := range x {
		lo, hi = math.Min(lo, v), math.Max(hi, v)
	}
	t.Change = New(f.Slope*(hi-lo), math.Sqrt(f.VarSlope)*(hi-lo), t.Mean.Unit)
	t.K = 2
	if !math.IsInf(dof, 1) {
		t.K = distuv.StudentsT{Sigma: 1, Nu: dof}.Quantile(0.975)
	}
}

// meanOf is the weighted mean; its uncertainty covers the scatter too.
func meanOf(y, w []float64, unit string) Quantity {
	var sw, sum, chi2 float64
	weight := func(i int) float64 {
		if w == nil {
			return 1
		}
		return w[i]
	}
	for i, v := range y {
		sw += weight(i)
		sum += weight(i) * (v - y[0])
	}
	mean := y[0] + sum/sw
	for i, v := range y {
		chi2 += weight(i) * (v - mean) * (v - mean)
	}
	birge := math.Sqrt(chi2 / float64(len(y)-1)) // NaN of one
	if w != nil && !(birge > 1) {
		birge = 1
	}
	return New(mean, birge/math.Sqrt(sw), unit)
}
