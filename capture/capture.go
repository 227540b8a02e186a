// Package capture reads oscilloscope text of any layout into channels on a
// time axis.
//
// The reader knows no maker: it describes a file by its shape (preamble,
// header, units row, data; the role of each column) and says what it
// understood in a [Layout], which [Capture.Explain] prints. A table that lies on its
// side is turned first (sideways.go). A text goes through three steps:
//
//   - the head of the text decides the layout (detect.go, shape.go, preamble.go, keys.go,
//     names.go, nameunit.go, roles.go, timecolumn.go, joined.go, steps.go);
//   - the data pass follows that layout over the whole text, block by block on
//     all processors, without keeping text (plan.go, slowrow.go, scan.go, number.go). Of the
//     time column it keeps a regression, and the stamps only where they do not
//     lie on a line (span.go); where the time falls, it finds the records (records.go);
//   - all values known, the time axis is decided, roles are corrected, and what
//     was left out or cannot be trusted is said in findings (axis.go, decide.go, uneven.go,
//     codes.go, build.go, findings.go).
package capture

import "math"

// A Capture is one file as the reader understood it.
type Capture struct {
	// File is the name it was read from, "-" for standard input.
	File string
	// SHA256 is the lower-case hexadecimal digest of the bytes of the file.
	SHA256 string
	// Channels holds the channels in the order of their columns, at least one.
	Channels []*Channel
	// Layout says how the file was understood.
	Layout Layout
	// Findings tells what the reader left out or could not trust:
	// ignored-columns, coarse-time, uneven-time, missing-samples.
	Findings []Finding
}

// A Channel is one voltage or current against time.
type Channel struct {
	// Number counts the channels of the capture from 1.
	Number int
	// Name is the channel's name as the file gives it, or "channel N".
	Name string
	// Column is the number of its column in the file, from 1.
	Column int
	// Unit is the SI unit of the samples without prefix ("V", "A"), or "" when
	// the file does not tell; "counts" for raw converter codes.
	Unit string
	// Axis is the time axis. Channels with a common time column share it.
	Axis *Axis
	// Samples holds the values in Unit; a sample that is missing or over range
	// is NaN. len(Samples) equals Axis.N.
	Samples []float64
}

// An Axis is the time axis of one or more channels.
type Axis struct {
	// N is the number of samples.
	N int
	// Start is the time of sample 0, in seconds.
	Start float64
	// Interval is the nominal sampling interval, in seconds, greater than zero:
	// what the stamps rise by from one sample to the next, by least squares,
	// where none is missing and none is repeated.
	Interval float64
	// Times holds the true time of every sample, in seconds, not decreasing;
	// nil when the samples are uniform: sample i is at Start + i*Interval.
	Times []float64
	// IntervalU is the standard uncertainty of Interval from the print of the
	// stamps, in seconds; 0 for a declared interval, which is taken at its word,
	// and for stamps that are not even in spite of missing samples. The clock's
	// own error is not in it.
	IntervalU float64
	// Resolution is the step of the printed times, in seconds; 0 without a time column.
	Resolution float64
	// Source says where the axis came from, in words for people, for example
	// "time column, regression over 2500 stamps".
	Source string
}

// Time returns the time of sample i in seconds.
func (a *Axis) Time(i int) float64 {
	if a.Times != nil {
		return a.Times[i]
	}
	return a.Start + float64(i)*a.Interval
}

// Index returns the index of the first sample at or after t seconds, from 0 to N.
func (a *Axis) Index(t float64) int {
	if a.Times != nil {
		lo, hi := 0, a.N
		for lo < hi {
			mid := int(uint(lo+hi) >> 1)
			if a.Times[mid] < t {
				lo = mid + 1
			} else {
				hi = mid
			}
		}
		return lo
	}
	// A part in 1e9 of an interval is rounding of the stamp, not a later sample.
	i := math.Ceil((t-a.Start)/a.Interval - 1e-9)
	return int(math.Max(0, math.Min(i, float64(a.N))))
}
