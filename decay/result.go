package decay

import (
	"dieaway/capture"
	"dieaway/decay/quantity"
)

// A Finding is a reason to distrust a result; see [capture.Finding].
type Finding = capture.Finding

// Status is the verdict on a whole analysis.
type Status string

// Good carries no warning, Doubtful at least one, Refused a fault: there is no
// decay that can be measured and the numbers are withheld.
const (
	Good     Status = "good"
	Doubtful Status = "doubtful"
	Refused  Status = "refused"
)

// Model names the law that the decay was fitted with.
type Model string

// The models.
const (
	Exponential Model = "exponential" // one damped sinusoid about a constant offset
	Amplitude   Model = "amplitude"   // damping and frequency depend on the amplitude
	TwoMode     Model = "two-mode"    // two damped sinusoids
	Overdamped  Model = "overdamped"  // two real exponentials
)

// A Result is what [Analyze] makes of one channel.
type Result struct {
	Status Status
	Model  Model
	// Quantities is the result to quote; nil when refused.
	Quantities *Quantities
	// Decays holds the free decays found, in order of time. A refused record may
	// have one, to show what was tried; its numbers are not to be quoted.
	Decays []*Decay
	// Modes is set for TwoMode only, strongest first.
	Modes []*Quantities
	// Best is the index in Decays of the one whose rate is known best.
	Best int
	// Readings are the classical readings of the best decay, independent of the fit.
	Readings Readings
	// Findings is sorted by severity, gravest first.
	Findings []Finding

	record *Extremes
}

// Extremes are those of the samples of ch, at hand where it is the channel that was
// analysed.
func (r *Result) Extremes(ch *capture.Channel) *Extremes {
	if r.record != nil && r.record.of(ch.Samples) {
		return r.record
	}
	return NewExtremes(ch.Samples)
}

// Quantities are the parameters of a damped oscillation.
type Quantities struct {
	DampedFrequency  quantity.Quantity // fd, Hz
	NaturalFrequency quantity.Quantity // f0 = sqrt(fd^2 + (alpha/2pi)^2), Hz
	TimeConstant     quantity.Quantity // tau of the amplitude, s
	DecayRate        quantity.Quantity // alpha = 1/tau, 1/s
	Q                quantity.Quantity // pi f0 tau
	DampingRatio     quantity.Quantity // zeta = 1/(2Q)
	LogDecrement     quantity.Quantity // alpha/fd
	Bandwidth        quantity.Quantity // alpha/pi = f0/Q, Hz
	// Correlation of DecayRate and DampedFrequency, -1 to 1.
	Correlation float64
}

// A Decay is one free decay of the record and the fit to it.
type Decay struct {
	// First and Last are the indices of the first sample used and of the one
	// behind the last; From and To their times in s.
	First, Last int
	From, To    float64
	// Cycles of the damped oscillation between From and To.
	Cycles     float64
	Quantities Quantities
	// Amplitude (unit of the channel), phase (rad, cosine) and offset refer to From:
	// y(t) = Offset + Amplitude exp(-(t-From)/tau) cos(2 pi fd (t-From) + Phase).
	Amplitude, Phase, Offset quantity.Quantity
	// Parameters are those that were fitted, named as the constants of this package
	// say, with their covariance and so the full matrix of their correlations; nil
	// when there is none.
	Parameters *quantity.Joint
	// AtStart holds the damped frequency and Q at the first cycle; amplitude model only.
	AtStart *AtStart
	// NoiseRMS is the standard deviation of the noise and ResidualRMS the rms of
	// what the fit leaves, in the unit of the channel.
	NoiseRMS, ResidualRMS float64
	// SNR is the ratio of the amplitude at From to the noise, in dB.
	SNR float64
	// NoiseFactor is the square root of the ratio of the noise density at the
	// damped frequency to that of white noise of the same rms; 1 for white noise.
	NoiseFactor float64
	// Used is the number of samples fitted.
	Used int
	// Stop says why the iteration ended, Iterations how many steps it took.
	Stop       StopReason
	Iterations int

	law   law
	noise noise
	left  []int // samples missing or left out of the fit, from First on
}

// AtStart is what an amplitude-dependent circuit does at its first cycle.
type AtStart struct {
	DampedFrequency quantity.Quantity // Hz
	Q               quantity.Quantity
}

// law is the fitted curve: the model of a decay with all its parameters.
type law interface {
	// at returns value and envelope (above the baseline, never negative) and baseline t seconds after From.
	at(t float64) (value, envelope, baseline float64)
}

// At returns the fitted curve at time t seconds: its value, the envelope of the
// oscillation (half the distance between its upper and lower edge) and the
// baseline it rings about, in the unit of the channel.
func (d *Decay) At(t float64) (value, envelope, baseline float64) { return d.law.at(t - d.From) }

// Residuals returns sample less fitted curve for n samples of ch from index first
// on, in the unit of the channel; NaN where there is no sample. For one ring on
// even samples it costs a few operations each, where [Decay.At] takes a cosine.
func (d *Decay) Residuals(ch *capture.Channel, first, n int) []float64 {
	out := make([]float64, n)
	d.ResidualsInto(ch, n)(out, first)
	return out
}

// ResidualsInto returns a function that fills out, of at most n values, with the
// residuals from sample first of ch on. It may be called on any core.
func (d *Decay) ResidualsInto(ch *capture.Channel, n int) func(out []float64, first int) {
	l, ok := d.law.(exponentialLaw)
	if !ok || ch.Axis.Times != nil {
		return func(out []float64, first int) {
			for i := range out {
				v, _, _ := d.At(ch.Axis.Time(first + i))
				out[i] = ch.Samples[first+i] - v
			}
		}
	}
	dt := ch.Axis.Interval
	curve := newFollower(l.offset, n, ringsOf(l, 0, 0, dt)...)
	return func(out []float64, first int) {
		curve.residuals(out, ch.Samples[first:first+len(out)], (ch.Axis.Time(first)-d.From)/dt)
	}
}

// Readings are what a person would read off the screen with care, each with its
// own uncertainty, and the points they were read at.
type Readings struct {
	// Crossings of the baseline give the damped frequency, Hz. Not Known when there are too few.
	DampedFrequency quantity.Quantity
	// Peaks give the logarithmic decrement, Q, and the time constant in s.
	LogDecrement, Q, TimeConstant quantity.Quantity
	// Baseline is the level that the readings were made about.
	Baseline float64
	// Crossings are times in s; Peaks are times in s and values in the unit of
	// the channel (maxima and minima). For long decays they are a sample of all.
	Crossings []float64
	Peaks     []Point
	// Line is the straight line through ln(|peak - Baseline|): Line[0] at the
	// start of the decay, Line[1] in 1/s (negative for a decay).
	Line [2]float64
}

// A Point is a time in s and a value in the unit of the channel.
type Point struct{ Time, Value float64 }
