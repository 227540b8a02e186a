package report

import (
	"math"
	"slices"

	"dieaway/capture"
)

// How much of a record the page shows. Up to exactLimit samples it shows all of
// them. Beyond, it shows the smallest and the largest sample of each bin, which
// keeps the outline of an oscillation as well as a single spike; an average would
// keep neither. In a few windows of some cycles the bins are finer, one sample
// each where that is enough.
const (
	exactLimit    = 10000
	binsInGates   = 1600
	binsElsewhere = 500
	binsInWindow  = 700
	windowCycles  = 12
)

// An indexRange is the samples from one up to before another.
type indexRange struct{ from, to int }

// A segment is a part of the record, shown in bins of some samples; a bin of one
// is every sample.
type segment struct {
	indexRange
	bin int
}

// segments says how to show the samples from a.from to a.to, with up to fine bins
// inside each of the windows, which are in order and do not overlap, and about
// bins bins outside of them.
func segments(a indexRange, windows []indexRange, bins, fine int) []segment {
	outside := a.to - a.from
	for _, w := range windows {
		outside -= max(0, min(w.to, a.to)-max(w.from, a.from))
	}
	bin := binFor(outside, bins)
	var out []segment
	add := func(from, to, bin int) {
		if from < to {
			out = append(out, segment{indexRange{from, to}, bin})
		}
	}
	at := a.from
	for _, w := range windows {
		from, to := max(w.from, at), min(w.to, a.to)
		if from >= to {
			continue
		}
		add(at, from, bin)
		add(from, to, binFor(w.to-w.from, fine))
		at = to
	}
	add(at, a.to, bin)
	return out
}

// reduced reports whether any bin is of more than one sample.
func reduced(parts []segment) bool {
	return slices.ContainsFunc(parts, func(p segment) bool { return p.bin > 1 })
}

// binFor returns the size of bins for n samples: one where the two points of each
// bin would be no fewer than the samples.
func binFor(n, bins int) int {
	if n <= 2*bins {
		return 1
	}
	return (n + bins - 1) / bins
}

// windowsOf returns the parts of a gate that are shown more finely: its first
// cycles, its middle and its last ones. cycle is in samples, NaN when unknown.
func windowsOf(g indexRange, cycle float64) []indexRange {
	if g.to <= g.from {
		return nil
	}
	size := (g.to - g.from + 2) / 3
	if w := windowCycles * cycle; w < float64(size) {
		size = min(size, max(int(math.Ceil(w)), 100))
	}
	lead := min(size/8, g.from) // the moment before the decay tells how it was started
	middle := (g.from + g.to - size) / 2
	return []indexRange{
		{g.from - lead, g.from + size - lead},
		{middle, middle + size},
		{g.to - size, g.to},
	}
}

// A trace is a reduced course of values over time. NaN breaks the line.
type trace struct{ t, v []float64 }

func (tr *trace) add(t, v float64) { tr.t, tr.v = append(tr.t, t), append(tr.v, v) }

// values gives the values of a course from sample from up to before sample to, on
// any core.
type values func(from, to int) []float64

// samplesOf gives the samples of a channel.
func samplesOf(ch *capture.Channel) values {
	return func(from, to int) []float64 { return ch.Samples[from:to] }
}

// reduce shows a course over the segments. Bins give their smallest and largest
// value in the order of time; missing values are left out of them.
func reduce(axis *capture.Axis, parts []segment, course values) trace {
	return inPieces(parts, func(p segment, tr *trace) {
		if p.bin == 1 {
			for k, v := range course(p.from, p.to) {
				tr.add(axis.Time(p.from+k), v)
			}
			return
		}
		for i := p.from; i < p.to; i += p.bin {
			lo, hi := extremes(course(i, min(i+p.bin, p.to)))
			if lo.index < 0 {
				tr.add(axis.Time(i), math.NaN())
				continue
			}
			if lo.index > hi.index {
				lo, hi = hi, lo
			}
			tr.add(axis.Time(i+lo.index), lo.value)
			if hi.index != lo.index {
				tr.add(axis.Time(i+hi.index), hi.value)
			}
		}
	})
}

type extreme struct {
	index int
	value float64
}

// extremes finds the smallest and the largest of y; the indices are -1 when none is
// a number.
func extremes(y []float64) (lo, hi extreme) {
	lo, hi = extreme{-1, math.Inf(1)}, extreme{-1, math.Inf(-1)}
	for i, v := range y {
		if v < lo.value {
			lo = extreme{i, v}
		}
		if v > hi.value {
			hi = extreme{i, v}
		}
	}
	if hi.index < 0 || lo.index < 0 {
		return extreme{index: -1}, extreme{index: -1}
	}
	return lo, hi
}

// crests returns the largest |sample - baseline| of each stretch of samples of
// the given length, at its time: with a stretch of half a cycle, the peaks.
func crests(ch *capture.Channel, a indexRange, stretch int, baseline func(t float64) float64) trace {
	return inPieces([]segment{{a, stretch}}, func(p segment, tr *trace) {
		for i := p.from; i < p.to; i += p.bin {
			b := baseline(ch.Axis.Time(i))
			lo, hi := extremes(ch.Samples[i:min(i+p.bin, p.to)])
			if lo.index < 0 {
				continue
			}
			at := hi
			if b-lo.value > hi.value-b {
				at = lo
			}
			if v := math.Abs(at.value - b); v > 0 { // nothing on a logarithmic axis
				tr.add(ch.Axis.Time(i+at.index), v)
			}
		}
	})
}
