package decay

import (
	"math"
	"slices"
	"sync/atomic"
)

// pyramid holds a record at falling sample rates: level k is the mean over 4^k
// neighbouring samples. The mean of an exponential exp(zn) over blocks is again
// that exponential, so that decay rate and frequency can be sought on the level
// where the ring has a handful of samples per cycle, however deep the record is.
type pyramid struct {
	levels []series
	flat   *plateaus
}

const pyramidRatio = 4

// newPyramid fills gaps with the last value and puts uneven samples on a uniform
// grid: good enough to look for start values, never used for the result.
func newPyramid(s series) *pyramid {
	base := series{y: s.y, t0: s.time(0), dt: s.dt, record: s.record, from: s.from}
	if s.times != nil {
		base.y = gridded(s)
	} else if s.gaps {
		base.y = filled(slices.Clone(s.y))
	}
	p := &pyramid{levels: []series{base}, flat: newPlateaus(base.y)}
	for last := base; last.len() >= 16*pyramidRatio; {
		last = series{y: make([]float64, last.len()/pyramidRatio), t0: last.t0 + last.dt*(pyramidRatio-1)/2, dt: last.dt * pyramidRatio}
		p.levels = append(p.levels, last)
	}
	p.sumUp()
	return p
}

const (
	fineLevels = 4       // levels that are summed up together
	fineBlock  = 1 << 12 // samples of level 0, in one go: they stay close by
)

// sumUp fills the levels and the plateaus.
func (p *pyramid) sumUp() {
	n := p.levels[0].len()
	halves(n, func(first, last int) func() {
		for at := (first + fineBlock - 1) / fineBlock * fineBlock; at < last; at += fineBlock {
			end := min(at+fineBlock, n)
			p.flat.add(p.levels[0].y, at, end)
			for k := 1; k < min(fineLevels, len(p.levels)); k++ {
				p.level(k, at/scale(k), end/scale(k))
			}
		}
		return func() {}
	})
	for k := fineLevels; k < len(p.levels); k++ {
		p.level(k, 0, p.levels[k].len())
	}
	p.flat.run()
}

// level fills samples first to last-1 of level k.
func (p *pyramid) level(k, first, last int) {
	below := p.levels[k-1].y[first*pyramidRatio:]
	for i, out := 0, p.levels[k].y[first:last]; i < len(out); i++ {
		b := below[i*pyramidRatio : i*pyramidRatio+pyramidRatio]
		out[i] = (b[0] + b[1] + b[2] + b[3]) / pyramidRatio
	}
}

// filled replaces NaN by the last value before it (the first one after it at the start).
func filled(y []float64) []float64 {
	last := 0.0
	if i := slices.IndexFunc(y, func(v float64) bool { return !math.IsNaN(v) }); i >= 0 {
		last = y[i]
	}
	for i, v := range y {
		if math.IsNaN(v) {
			y[i] = last
		} else {
			last = v
		}
	}
	return y
}

// gridded interpolates an uneven series linearly at uniform times.
func gridded(s series) []float64 {
	n := max(2, min(4*s.len(), int((s.times[s.len()-1]-s.times[0])/s.dt+1.5)))
	src := filled(slices.Clone(s.y))
	out := make([]float64, n)
	j := 0
	for i := range out {
		t := s.times[0] + float64(i)*s.dt
		for j+2 < s.len() && s.times[j+1] < t {
			j++
		}
		span := s.times[j+1] - s.times[j]
		f := 0.0
		if span > 0 {
			f = math.Min(1, math.Max(0, (t-s.times[j])/span))
		}
		out[i] = src[j] + f*(src[j+1]-src[j])
	}
	return out
}

// scale returns the number of samples of level 0 in one of level k.
func scale(k int) int { return 1 << (2 * k) }

// levelFor is the finest level on which n samples of level 0 are no more than most.
func (p *pyramid) levelFor(n, most int) int {
	k := 0
	for k+1 < len(p.levels) && n/scale(k) > most {
		k++
	}
	return k
}

// onsets proposes where a decay may begin, as indices of level 0 in order of time.
// Any shock stands out, at some scale, as the place where the mean of a stretch
// differs most from the mean of the next: the steepest place of each level is
// followed down to the finest (edge tracking across scales as in Mallat and Hwang
// 1992, from memory). The start of the record is always among them.
func (p *pyramid) onsets() []int {
	found := []int{0}
	for k := len(p.levels) - 1; k >= 0; k-- {
		i := p.steepest(k, 0, p.levels[k].len())
		for j := k - 1; j >= 0; j-- {
			i *= pyramidRatio
			i = p.steepest(j, i-pyramidRatio, i+3*pyramidRatio)
		}
		found = append(found, i)
	}
	slices.Sort(found)
	return slices.Compact(found)
}

// steepest returns the index before the largest step between neighbours or next
// neighbours in samples first to last-1 of level k.
func (p *pyramid) steepest(k, first, last int) int {
	y := p.levels[k].y
	first, last = max(0, first), min(len(y), last)
	most, at := -1.0, first
	var shared atomic.Uint64 // the largest step so far, as bits
	shared.Store(math.Float64bits(most))
	halves(max(0, last-2-first), func(from, to int) func() {
		d, i := p.largestStep(k, first+from, first+to, &shared)
		return func() {
			if d > most {
				most, at = d, i
			}
		}
	})
	return at
}

// largestStep returns the largest step from one of samples first to last-1, and where.
// A stretch whose range is smaller than that, or than what the other half has found
// so far, is passed over.
func (p *pyramid) largestStep(k, first, last int, shared *atomic.Uint64) (most float64, at int) {
	most, at = -1, first
	all := p.levels[k].y
	for from, to := first, 0; from < last; from = to {
		to = min(from+rangeBlock, last)
		least := math.Float64frombits(shared.Load())
		if r := p.rangeOf(k, from, to+2); r <= most || r < least {
			continue
		}
		y := all[from : to+2]
		for i := range len(y) - 2 {
			if d := math.Abs(y[i+1] - y[i]); d > most {
				most, at = d, from+i
			}
			if d := math.Abs(y[i+2] - y[i]); d > most {
				most, at = d, from+i
			}
		}
		if most > least {
			shared.Store(math.Float64bits(most)) // or what the other half found meanwhile
		}
	}
	return most, at
}

// rangeOf is not less than the range of samples first to last-1 of level k.
func (p *pyramid) rangeOf(k, first, last int) float64 {
	if record, start := p.levels[0].extremes(); record != nil {
		return record.rangeOf(start+first*scale(k), start+last*scale(k))
	}
	return math.Inf(1)
}
