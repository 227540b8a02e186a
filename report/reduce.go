package report

import (
	"math"
	"slices"

	"dieaway/capture"
	"dieaway/decay"
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

// values are a course over the samples of a record, which any core may ask for.
type values struct {
	// fill writes those from a sample on.
	fill func(out []float64, from int)
	// known, when not nil, has their extremes at hand.
	known *decay.Extremes
}

// samplesOf gives the samples of a channel.
func samplesOf(ch *capture.Channel, known *decay.Extremes) values {
	return values{func(out []float64, from int) { copy(out, ch.Samples[from:]) }, known}
}

// reduce shows a course over the segments. Bins give their smallest and largest
// value in the order of time; missing values are left out of them.
func reduce(axis *capture.Axis, parts []segment, c values) trace {
	return inPieces(parts, func(p segment, tr *trace) {
		if p.bin == 1 {
			all := make([]float64, p.to-p.from)
			c.fill(all, p.from)
			for k, v := range all {
				tr.add(axis.Time(p.from+k), v)
			}
			return
		}
		buffer := c.buffer()
		for i := p.from; i < p.to; i += p.bin {
			lo, hi := c.extremes(i, min(i+p.bin, p.to), buffer)
			if lo.index < 0 {
				tr.add(axis.Time(i), math.NaN())
				continue
			}
			if lo.index > hi.index {
				lo, hi = hi, lo
			}
			tr.add(axis.Time(lo.index), lo.value)
			if hi.index != lo.index {
				tr.add(axis.Time(hi.index), hi.value)
			}
		}
	})
}

type extreme struct {
	index int
	value float64
}

// courseBlock is the number of values looked at in one go: they stay close by.
const courseBlock = 1 << 11

// buffer is room for extremes to work in.
func (c values) buffer() []float64 {
	if c.known != nil {
		return nil
	}
	return make([]float64, courseBlock)
}

// extremes finds the smallest and the largest value from one sample up to before
// another; the indices are -1 when none is a number.
func (c values) extremes(from, to int, buffer []float64) (lo, hi extreme) {
	lo, hi = extreme{-1, math.Inf(1)}, extreme{-1, math.Inf(-1)}
	if c.known != nil {
		if l, h := c.known.Of(from, to); l >= 0 && h >= 0 {
			lo, hi = extreme{l, c.known.At(l)}, extreme{h, c.known.At(h)}
		}
		return lo, hi
	}
	for at := from; at < to; at += courseBlock {
		part := buffer[:min(courseBlock, to-at)]
		c.fill(part, at)
		for i, v := range part {
			if v < lo.value {
				lo = extreme{at + i, v}
			}
			if v > hi.value {
				hi = extreme{at + i, v}
			}
		}
	}
	if hi.index < 0 || lo.index < 0 {
		return extreme{index: -1}, extreme{index: -1}
	}
	return lo, hi
}

// crests returns the largest |sample - baseline| of each stretch of samples of
// the given length, at its time: with a stretch of half a cycle, the peaks.
func crests(axis *capture.Axis, samples values, a indexRange, stretch int, baseline func(t float64) float64) trace {
	return inPieces([]segment{{a, stretch}}, func(p segment, tr *trace) {
		buffer := samples.buffer()
		for i := p.from; i < p.to; i += p.bin {
			b := baseline(axis.Time(i))
			lo, hi := samples.extremes(i, min(i+p.bin, p.to), buffer)
			if lo.index < 0 {
				continue
			}
			at := hi
			if b-lo.value > hi.value-b {
				at = lo
			}
			if v := math.Abs(at.value - b); v > 0 { // nothing on a logarithmic axis
				tr.add(axis.Time(at.index), v)
			}
		}
	})
}
