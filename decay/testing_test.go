package decay

import "dieaway/capture"

// channel wraps samples at a uniform interval (s) as the analysis takes them.
func channel(y []float64, start, interval float64) *capture.Channel {
	return &capture.Channel{
		Number: 1, Name: "coil voltage", Unit: "V", Samples: y,
		Axis: &capture.Axis{N: len(y), Start: start, Interval: interval},
	}
}

// has reports whether r carries a finding of the code.
func has(r *Result, code capture.Code) bool {
	for _, f := range r.Findings {
		if f.Code == code {
			return true
		}
	}
	return false
}
