package decay

import (
	"math"

	"dieaway/capture"
)

// series is a stretch of samples with its time axis: what the methods work on.
type series struct {
	y     []float64 // NaN where there is no sample
	t0    float64   // time of y[0], s
	dt    float64   // mean interval, s
	times []float64 // true times, s; nil when uniform
	gaps  bool      // whether y holds a NaN
	// lo and hi are the smallest and the largest sample of the whole record.
	lo, hi float64
	// step is that of the converter, 0 when the samples know none.
	step float64
	// stride, if not 0, is the distance of neighbours in intervals: the series was
	// thinned.
	stride int
	// record knows the extremes of the record, and from is where y begins there.
	record *Extremes
	from   int
}

func newSeries(ch *capture.Channel) series {
	s := series{y: ch.Samples, t0: ch.Axis.Start, dt: ch.Axis.Interval, times: ch.Axis.Times}
	s.record = NewExtremes(s.y)
	s.gaps = s.record.gaps
	s.lo, s.hi, _ = s.record.Limits()
	s.step = stepOf(s.y)
	return s
}

// extremes returns those of the record when y is a part of it, unchanged, and where y
// begins there; nil otherwise.
func (s series) extremes() (e *Extremes, from int) {
	if s.record == nil || s.len() == 0 || &s.record.y[s.from] != &s.y[0] {
		return nil, 0
	}
	return s.record, s.from
}

func (s series) len() int { return len(s.y) }

// even reports whether the samples stand at even times, though some may be missing.
func (s series) even() bool { return s.times == nil }

// whole reports whether they stand at every interval of the record.
func (s series) whole() bool { return s.times == nil && s.stride == 0 }

// spacing is the distance of neighbours in an even series, in intervals.
func (s series) spacing() float64 { return float64(max(1, s.stride)) }

// slice returns samples first to last-1.
func (s series) slice(first, last int) series {
	out := s
	out.y, out.t0, out.from = s.y[first:last], s.time(first), s.from+first
	if s.times != nil {
		out.times = s.times[first:last]
	}
	return out
}

func (s series) time(i int) float64 {
	if s.times != nil && i < len(s.times) {
		return s.times[i]
	}
	if s.times != nil {
		return s.times[len(s.times)-1] + float64(i+1-len(s.times))*s.dt
	}
	return s.t0 + float64(i)*s.dt
}

// position returns the time of sample i after sample 0, in mean intervals.
func (s series) position(i int) float64 {
	if s.times != nil {
		return (s.times[i] - s.times[0]) / s.dt
	}
	if s.stride > 0 {
		return float64(i * s.stride)
	}
	return float64(i)
}

// thinned keeps every m-th sample so that at most n are left: enough to judge a
// model by, at the true times of the samples.
func (s series) thinned(n int) series {
	m := (s.len() + n - 1) / n
	if m <= 1 {
		return s
	}
	out := series{y: make([]float64, 0, n), t0: s.t0, dt: s.dt, gaps: s.gaps, stride: m}
	for i := 0; i < s.len(); i += m {
		out.y = append(out.y, s.y[i])
		if s.times != nil {
			out.times = append(out.times, s.times[i])
		}
	}
	return out
}

// averaged returns the means over stretches of m samples, few enough that at most n are
// left, and m: a series of its own interval, in which an exponential is an exponential
// still, m times as fast.
func (s series) averaged(n int) (out series, m int) {
	if m = (s.len() + n - 1) / n; m <= 1 {
		return s, 1
	}
	out = series{y: make([]float64, s.len()/m), t0: s.t0, dt: s.dt * float64(m), gaps: s.gaps}
	if s.times != nil {
		out.times = make([]float64, len(out.y))
	}
	halves(len(out.y), func(first, last int) func() {
		for i := first; i < last; i++ {
			part := s.slice(i*m, (i+1)*m)
			sum, _, there := sums(part.y, 0)
			out.y[i] = sum / float64(there) // NaN where there is none
			if s.times != nil {
				out.times[i], _, _ = sums(part.times, 0)
				out.times[i] /= float64(m)
			}
		}
		return func() {}
	})
	return out, m
}

// count returns the number of samples that are there.
func (s series) count() int {
	if !s.gaps {
		return len(s.y)
	}
	n := 0
	for _, v := range s.y {
		if !math.IsNaN(v) {
			n++
		}
	}
	return n
}

// level is a value amid the samples to count from: the mean of a thousand of them
// that are there; 0 when there is none.
func (s series) level() float64 {
	sum, n := 0.0, 0
	step := 1 + len(s.y)/1024
	for i := 0; i < len(s.y); i += step {
		if v := s.y[i]; v == v {
			sum += v
			n++
		}
	}
	if n == 0 {
		return 0
	}
	return sum / float64(n)
}
