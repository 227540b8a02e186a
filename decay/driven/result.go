package driven

import (
	"gonum.org/v1/gonum/mat"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// A Result is what [Analyze] makes of one sweep.
type Result struct {
	Status decay.Status
	// Across is what the response was taken to be measured across, Why says in
	// words what decided it, and Guessed is true when nobody said so.
	Across  capture.Part
	Why     string
	Guessed bool
	// Complex is true when magnitude and phase were fitted together.
	Complex bool
	// Quantities is the result to quote; nil when refused.
	Quantities *Quantities
	// Readings are the classical readings, independent of the fit.
	Readings Readings
	// Findings is sorted by severity, gravest first.
	Findings []decay.Finding
	// Corrections says in words what was done to the readings before the fit:
	// divided by the reference, corrected for the meter.
	Corrections []string
	// Points are the rows as they were fitted, in rising frequency.
	Points []Point
	// Unit is that of the magnitudes of Points: "" for a ratio.
	Unit string
	// NoiseRMS is the standard deviation of the magnitude of the rows about the fit
	// at the strongest response, in Unit.
	NoiseRMS float64
	// Iterations is the number of steps of the last fit.
	Iterations int

	curve curve
}

// Quantities are the parameters of the resonance.
type Quantities struct {
	NaturalFrequency quantity.Quantity // f0, Hz
	Q                quantity.Quantity // of the whole loop, source included
	Bandwidth        quantity.Quantity // f0/Q, Hz
	DampingRatio     quantity.Quantity // 1/(2Q)
	DampedFrequency  quantity.Quantity // f0 sqrt(1 - 1/(4Q^2)), Hz; not Known when overdamped
	// PeakFrequency is where the response is greatest, for [capture.Both] where it
	// is least, in Hz: not f0 across the capacitor or the coil. Not Known where the
	// response has no peak.
	PeakFrequency quantity.Quantity
	// PeakGain is the fitted magnitude there: a ratio when the response was divided
	// by the reference, else in the unit of the response.
	PeakGain quantity.Quantity
	// Correlation of NaturalFrequency and Q, -1 to 1.
	Correlation float64
}

// Joint returns f0 (Hz) and Q, in this order, with their covariance.
func (q *Quantities) Joint() (*quantity.Joint, error) {
	f, k := q.NaturalFrequency, q.Q
	cov := mat.NewSymDense(2, []float64{f.U * f.U, q.Correlation * f.U * k.U, q.Correlation * f.U * k.U, k.U * k.U})
	return quantity.NewJoint([]string{"f0", "Q"}, []string{"Hz", ""}, []float64{f.Value, k.Value}, cov)
}

// A Point is one row of the sweep.
type Point struct {
	Frequency float64 // Hz
	Magnitude float64 // in the unit of the result, after the corrections
	Phase     float64 // rad, on the scale of the fitted curve; NaN without phase
	Deviation float64 // standard deviation that it was weighted with, in the unit of the result
	Outlier   bool    // left out of the fit
}

// Readings are what a person would read off the curve with care, each with its
// own uncertainty; not Known where the sweep does not reach that far.
type Readings struct {
	// Peak is the greatest response (the least, for a notch) through three points.
	Peak struct{ Frequency, Magnitude quantity.Quantity }
	// Lower and Upper are the half-power frequencies in Hz by interpolation.
	Lower, Upper quantity.Quantity
	// Q and Bandwidth (Hz) follow from the half-power frequencies, corrected for
	// what the response was measured across.
	Q, Bandwidth quantity.Quantity
	// ReactanceRatio is f0 in Hz from sqrt(V_C/V_L) of every row, its weighted mean.
	ReactanceRatio quantity.Quantity
	// Trend is the relative change of that f0 for a relative change of the frequency.
	Trend quantity.Quantity
	// Rows holds that f0 of each of Points in Hz, nil without the two columns.
	Rows []float64
}

// At returns the fitted response at f hertz: its magnitude in the unit of the
// result and its phase in radians, that of the circuit alone (zero for a
// capacitor at low frequency). Both are NaN for a refused sweep without a fit.
func (r *Result) At(f float64) (magnitude, phase float64) { return r.curve.at(f) }
