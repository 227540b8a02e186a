package quantity

import (
	"fmt"
	"math"
)

// A LineFit is the straight line y = Intercept + Slope x by least squares.
type LineFit struct {
	// Intercept is in the unit of y, Slope in the unit of y over that of x.
	Intercept, Slope float64
	// VarIntercept, VarSlope and Covariance are the variances of the two and
	// their covariance.
	VarIntercept, VarSlope, Covariance float64
	// ChiSquare is the sum of w (y - line)^2.
	ChiSquare float64
	// Degrees of freedom: points of non-zero weight less two.
	Degrees int
}

// Line fits a straight line to the points (x, y), which have the same length.
//
// With w nil all points weigh the same and the variances follow from their
// scatter about the line, with n - 2 degrees of freedom (GUM H.3): at least three
// points are needed. With w given, w[i] = 1/u(y[i])^2, and the variances follow
// from the weights alone; where only ratios of weights are known, take [LineFit.Scaled].
// A point of zero weight counts for nothing. Fewer points, one abscissa for all
// of them, a negative weight or a number that is not finite is an error.
func Line(x, y, w []float64) (LineFit, error) {
	if len(x) != len(y) || w != nil && len(w) != len(x) {
		return LineFit{}, fmt.Errorf("straight line: %d abscissas, %d ordinates and %d weights", len(x), len(y), len(w))
	}
	weight := func(i int) float64 {
		if w == nil {
			return 1
		}
		return w[i]
	}
	s, err := sumLine(x, y, weight)
	if err != nil {
		return LineFit{}, err
	}
	if need := 2; w == nil && s.n < need+1 || s.n < need {
		return LineFit{}, fmt.Errorf("straight line: %d points are too few", s.n)
	}
	fit, err := s.solve(x, y, weight)
	if w == nil && err == nil {
		fit = fit.Scaled()
	}
	return fit, err
}

// lineSums are the weighted moments about the centre of the abscissas, which
// keeps the two parameters from cancelling each other's digits.
type lineSums struct {
	n          int
	w          float64
	mx, my     float64
	sxx, sxy   float64
	spread     float64 // largest |x - mx|
	magnitudes float64 // largest |x|
}

func sumLine(x, y []float64, weight func(int) float64) (s lineSums, err error) {
	for i := range x {
		wi := weight(i)
		if !finite(x[i]) || !finite(y[i]) || !finite(wi) || wi < 0 {
			return s, fmt.Errorf("straight line: point %d is (%g, %g) with weight %g", i+1, x[i], y[i], wi)
		}
		if wi == 0 {
			continue
		}
		s.n++
		s.w += wi
		s.mx += wi * x[i]
		s.my += wi * y[i]
		s.magnitudes = math.Max(s.magnitudes, math.Abs(x[i]))
	}
	s.mx /= s.w
	s.my /= s.w
	for i := range x {
		if wi := weight(i); wi > 0 {
			d := x[i] - s.mx
			s.sxx += wi * d * d
			s.sxy += wi * d * (y[i] - s.my)
			s.spread = math.Max(s.spread, math.Abs(d))
		}
	}
	return s, nil
}

func (s lineSums) solve(x, y []float64, weight func(int) float64) (LineFit, error) {
	if !(s.spread > 1e-14*s.magnitudes) {
		return LineFit{}, fmt.Errorf("straight line: all %d points have the abscissa %g", s.n, s.mx)
	}
	f := LineFit{Slope: s.sxy / s.sxx, VarSlope: 1 / s.sxx, Degrees: s.n - 2}
	f.Intercept = s.my - f.Slope*s.mx
	f.VarIntercept = 1/s.w + s.mx*s.mx/s.sxx
	f.Covariance = -s.mx / s.sxx
	for i := range x {
		// About the centre, so that a far intercept costs no digits.
		r := (y[i] - s.my) - f.Slope*(x[i]-s.mx)
		f.ChiSquare += weight(i) * r * r
	}
	return f, nil
}

// Scaled returns the fit with its variances multiplied by ChiSquare/Degrees:
// the scatter about the line then sets the scale of the weights. Without a
// degree of freedom the variances become NaN.
func (f LineFit) Scaled() LineFit {
	k := math.NaN()
	if f.Degrees > 0 {
		k = f.ChiSquare / float64(f.Degrees)
	}
	f.VarIntercept *= k
	f.VarSlope *= k
	f.Covariance *= k
	return f
}

// Correlation of intercept and slope, -1 to 1; NaN when a variance is zero or unknown.
func (f LineFit) Correlation() float64 {
	return f.Covariance / math.Sqrt(f.VarIntercept*f.VarSlope)
}

// At returns the height of the line at x and its standard uncertainty.
func (f LineFit) At(x float64) (y, u float64) {
	v := f.VarIntercept + 2*x*f.Covariance + x*x*f.VarSlope
	return f.Intercept + f.Slope*x, math.Sqrt(math.Max(0, v))
}
