// Package report shows what was measured: as JSON for programs, as text for a
// terminal, and as one self-contained page that is the evidence. It computes no
// physics: every figure comes from packages capture and decay.
package report

import (
	"cmp"
	"errors"
	"slices"
	"strings"
	"time"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
)

// A RingDown is everything there is to say about one channel of one capture.
// Either Err is set, or Capture, Channel and Result are.
type RingDown struct {
	Capture *capture.Capture
	// Channel is the channel of Capture that Result belongs to.
	Channel *capture.Channel
	Result  *decay.Result
	// Chosen tells that nobody named the channel: it was chosen of those in Capture.
	Chosen bool
	// Err says why the file could not be read.
	Err error
	// File is the name of the file as it was given, "-" for standard input, and
	// SHA256 the lower-case hexadecimal digest of its bytes; "" takes those of Capture.
	File, SHA256 string
	// Device is the name of the circuit under test, "" when nobody gave one.
	Device string
	// Circuit is what the result says of the circuit, nil without a bench file.
	Circuit *circuit.Analysis
	// Limits is how the result stands to the limits of the bench file, nil without any.
	Limits *circuit.Judgement
	// Origin says how the result was made; the page shows it.
	Origin Origin

	// predicted is what a sweep says of the first decay; nil for none.
	predicted curve

	// curves stands in for the decays of Result in tests.
	curves []curve
}

// Origin says how a result was made. Empty fields are left out of the page.
type Origin struct {
	// Version is the version of the program, CommandLine how it was called.
	Version, CommandLine string
	// Made is when; it is passed in, so that the same input gives the same page.
	Made time.Time
}

// A curve is the fitted law of one decay; [decay.Decay] is one.
type curve interface {
	// At returns value, envelope and baseline at time t in s, in the unit of the channel.
	At(t float64) (value, envelope, baseline float64)
}

var _ curve = (*decay.Decay)(nil)

func (r *RingDown) curve(i int) curve {
	if r.curves != nil {
		return r.curves[i]
	}
	return r.Result.Decays[i]
}

// check tells whether the fields belong together.
func (r *RingDown) check() error {
	if r.Err == nil && (r.Capture == nil || r.Channel == nil || r.Channel.Axis == nil || r.Result == nil) {
		return errors.New("report: a ring-down without capture, channel or result")
	}
	return nil
}

func (r *RingDown) file() string {
	if r.File == "" && r.Capture != nil {
		return r.Capture.File
	}
	return r.File
}

// source names channel and file, safe to show.
func (r *RingDown) source() string {
	name := clean(r.Channel.Name, nameLength)
	if !strings.HasPrefix(strings.ToLower(name), "channel") {
		name = "channel " + name
	}
	return name + " of " + fileName(r.file(), nameLength)
}

// unit is the channel's unit, safe to show.
func (r *RingDown) unit() string { return clean(r.Channel.Unit, unitLength) }

func (r *RingDown) sha256() string {
	if r.SHA256 == "" && r.Capture != nil {
		return r.Capture.SHA256
	}
	return r.SHA256
}

// gravity orders findings, gravest first.
var gravity = map[capture.Severity]int{capture.Fault: 0, capture.Warning: 1, capture.Note: 2}

// Findings returns what speaks against the result, gravest first: the findings of
// the analysis, of the circuit and of the reader, each once. It is not nil.
func (r *RingDown) Findings() []capture.Finding {
	all := []capture.Finding{}
	if r.Result != nil {
		all = append(all, r.Result.Findings...)
	}
	if r.Circuit != nil {
		all = append(all, r.Circuit.Findings...)
	}
	if r.Capture != nil {
		all = withReader(all, r.Capture.Findings)
	}
	return gravest(all)
}

// withReader appends the findings of the reader that are not there yet.
func withReader(all, reader []capture.Finding) []capture.Finding {
	for _, f := range reader {
		if !slices.Contains(all, f) {
			all = append(all, f)
		}
	}
	return all
}

// gravest sorts findings, gravest first.
func gravest(all []capture.Finding) []capture.Finding {
	slices.SortStableFunc(all, func(a, b capture.Finding) int {
		return cmp.Compare(gravity[a.Severity], gravity[b.Severity])
	})
	return all
}

// Status is the verdict on the result with the findings of the reader counted in:
// a warning of either makes it doubtful. It is "" when the file could not be read.
func (r *RingDown) Status() decay.Status {
	if r.Result == nil {
		return ""
	}
	return statusOf(r.Result.Status, r.Findings())
}

// statusOf is the verdict of an analysis with the findings of the reader counted in.
func statusOf(s decay.Status, all []capture.Finding) decay.Status {
	if s == decay.Good && len(all) > 0 && all[0].Severity != capture.Note {
		return decay.Doubtful
	}
	return s
}

// refused reports whether the numbers are withheld.
func (r *RingDown) refused() bool {
	return r.Result.Status == decay.Refused || r.Result.Quantities == nil
}
