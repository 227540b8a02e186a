// Package decay turns the free decay of a resonant circuit into damped and
// natural frequency, time constant and Q, each with its uncertainty, and the
// reasons to distrust them. It knows no file, no flag and no page.
package decay

import "dieaway/capture"

// Options steer [Analyze]; the zero value lets the data decide everything.
type Options struct {
	// From and To override where the gate begins and ends, in s; nil finds them.
	From, To *float64
	// Model forces a model; "" chooses by evidence.
	Model Model
	// TimebaseU is the relative standard uncertainty of the scope's time base
	// (2e-5 for 20 ppm as one standard deviation); it enters frequencies and
	// times but not Q, damping ratio and decrement.
	TimebaseU float64
}

// Analyze finds the free decay in a channel, fits it, and says what it found.
// A record without a measurable decay is Refused, with the finding that says why.
func Analyze(ch *capture.Channel, opt Options) *Result { panic("not yet") }

// AnalyzeCapture analyses the channel of c that rings: the only one, or the one
// whose decay stands out most. It returns the channel it chose.
func AnalyzeCapture(c *capture.Capture, opt Options) (*capture.Channel, *Result) { panic("not yet") }

// StopReason says why the iteration of a fit ended.
type StopReason int

// The reasons.
const (
	NotRun       StopReason = iota // no fit was made
	Converged                      // the step fell below a thousandth of the uncertainty
	NoProgress                     // no shorter step lowers the residual
	IterationCap                   // the limit of iterations was reached
	LeftDomain                     // a parameter left the range in which it means anything
	Singular                       // the normal equations cannot be solved
)
