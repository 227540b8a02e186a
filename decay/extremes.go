package decay

import (
	"math"
	"slices"
)

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
	return e.most(e.lo, -1, first, last), e.most(e.hi, 1, first, last)
}

// most returns the index of the first sample whose product with sign is largest, ends
// being the extremes of the blocks to that side. What the extremes tell is asked before
// the samples themselves.
func (e *Extremes) most(ends []float64, sign float64, first, last int) int {
	from, to := (first+rangeBlock-1)/rangeBlock, last/rangeBlock
	if from > to {
		return e.among(first, last, sign, math.Inf(-1))
	}
	top, block := math.Inf(-1), -1
	for k := from; k < to; k++ {
		if v := sign * ends[k]; v > top {
			top, block = v, k
		}
	}
	at := -1
	if first < from*rangeBlock && sign*ends[from-1] >= top {
		at = e.among(first, from*rangeBlock, sign, math.Nextafter(top, math.Inf(-1)))
	}
	switch {
	case at >= 0:
		top = sign * e.y[at]
	case block >= 0:
		at = block*rangeBlock + slices.Index(e.block(block), ends[block])
	}
	if last > to*rangeBlock && sign*ends[to] > top {
		if i := e.among(to*rangeBlock, last, sign, top); i >= 0 {
			at = i
		}
	}
	return at
}

// among returns the index of the first of samples first to last-1 whose product with
// sign is largest, and above floor; -1 when there is none.
func (e *Extremes) among(first, last int, sign, floor float64) int {
	at := -1
	for i, v := range e.y[first:last] {
		if v *= sign; v > floor {
			floor, at = v, first+i
		}
	}
	return at
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
