package decay

import "math"

// Extremes knows the smallest and the largest of each block of samples, so that those
// of any stretch follow from a few of them.
type Extremes struct {
	y      []float64
	lo, hi []float64 // of each block; without any sample: +Inf and -Inf
	gaps   bool      // whether any sample is missing
}

// rangeBlock is a compromise: in short blocks more samples are the largest so far,
// which no processor foresees, and long ones are cut more often.
const rangeBlock = 512

// NewExtremes looks at all samples of y, which must stay as they are.
func NewExtremes(y []float64) *Extremes {
	n := (len(y) + rangeBlock - 1) / rangeBlock
	both := make([]float64, 2*n)
	e := &Extremes{y: y, lo: both[:n], hi: both[n:]}
	halves(len(y), func(first, last int) func() {
		missing := false
		for k := (first + rangeBlock - 1) / rangeBlock; k*rangeBlock < last; k++ {
			lo, hi, gaps := span(e.block(k))
			e.lo[k], e.hi[k] = lo, hi
			missing = missing || gaps
		}
		return func() { e.gaps = e.gaps || missing }
	})
	return e
}

// span returns the smallest and the largest sample, and whether any is missing.
func span(y []float64) (lo, hi float64, gaps bool) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for _, v := range y {
		if !(v <= hi) {
			if v != v {
				gaps = true
				continue
			}
			hi = v
		}
		if v < lo {
			lo = v
		}
	}
	return lo, hi, gaps
}

// of reports whether they are those of y.
func (e *Extremes) of(y []float64) bool {
	return len(y) == len(e.y) && (len(y) == 0 || &y[0] == &e.y[0])
}

// Limits are the smallest and the largest of all samples; false when none is there.
func (e *Extremes) Limits() (lo, hi float64, ok bool) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for k := range e.lo {
		lo, hi = min(lo, e.lo[k]), max(hi, e.hi[k])
	}
	return lo, hi, lo <= hi
}

func (e *Extremes) block(k int) []float64 {
	return e.y[k*rangeBlock : min((k+1)*rangeBlock, len(e.y))]
}

// At is sample i.
func (e *Extremes) At(i int) float64 { return e.y[i] }

// Of returns the indices of the first smallest and the first largest of samples first
// to last-1; -1 when none is there.
func (e *Extremes) Of(first, last int) (lo, hi int) {
	x := extent{lo: -1, hi: -1, low: math.Inf(1), high: math.Inf(-1)}
	from, to := (first+rangeBlock-1)/rangeBlock, last/rangeBlock
	if from >= to {
		x.look(e.y, first, last)
		return x.lo, x.hi
	}
	x.look(e.y, first, from*rangeBlock)
	lowest, highest, low, high := -1, -1, x.low, x.high
	for k := from; k < to; k++ {
		if e.lo[k] < low {
			low, lowest = e.lo[k], k
		}
		if e.hi[k] > high {
			high, highest = e.hi[k], k
		}
	}
	for _, k := range []int{min(lowest, highest), max(lowest, highest)} { // in order of time
		if k >= 0 {
			x.look(e.y, k*rangeBlock, (k+1)*rangeBlock)
		}
	}
	x.look(e.y, to*rangeBlock, last)
	return x.lo, x.hi
}

// extent is the smallest and the largest sample so far.
type extent struct {
	lo, hi    int
	low, high float64
}

func (x *extent) look(y []float64, first, last int) {
	for i, v := range y[first:last] {
		if v < x.low {
			x.low, x.lo = v, first+i
		}
		if v > x.high {
			x.high, x.hi = v, first+i
		}
	}
}

// equal lists the samples first to last-1 that equal v, which none exceeds to its side.
func (e *Extremes) equal(v float64, first, last int) (out []int) {
	for k := first / rangeBlock; k*rangeBlock < last; k++ {
		if e.lo[k] != v && e.hi[k] != v {
			continue
		}
		for i := max(first, k*rangeBlock); i < min(last, (k+1)*rangeBlock, len(e.y)); i++ {
			if e.y[i] == v {
				out = append(out, i)
			}
		}
	}
	return out
}

// rangeOf is the range of the blocks that hold samples first to last-1.
func (e *Extremes) rangeOf(first, last int) float64 {
	lo, hi := math.Inf(1), math.Inf(-1)
	for k := first / rangeBlock; k*rangeBlock < last; k++ {
		lo, hi = min(lo, e.lo[k]), max(hi, e.hi[k])
	}
	return hi - lo
}
