// Package driven turns a driven sweep of a resonant circuit into natural
// frequency and Q, with their uncertainty and the reasons to distrust them. It
// fits the exact second-order forms of the series circuit, which at low Q no
// Lorentzian is.
package driven

import "dieaway/capture"

// Options steer [Analyze]; the zero value lets the data decide everything.
type Options struct {
	// Across says what the response was measured across; "" takes the name of the
	// column, else the form that the rows follow best.
	Across capture.Part
	// Dwell is the time in s that the source stays at each frequency before the
	// reading; 0: not known.
	Dwell float64
	// MeterBandwidth is the frequency in Hz at which a meter with one pole reads
	// low by 3 dB; 0: no correction. It cancels in a response divided by a reference.
	MeterBandwidth float64
	// TimebaseU is the relative standard uncertainty of the source's frequency; it
	// enters f0 and the bandwidth but not Q.
	TimebaseU float64
}
