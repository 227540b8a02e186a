package decay

import (
	"math"
	"math/cmplx"
	"slices"
)

// projection returns sum y z^n and sum y n z^n over all samples. The poles of a deep
// record move little from one step of a fit to the next: the samples are passed over
// once, for what they come to at the nodes of blocks, and not at every step.
func (p *poles) projection(z pole) (out [2]complex128) {
	if p.s.len() >= projectionFrom {
		if n, top := p.near.about(p, z); n != nil {
			return n.project(p.s, z, top)
		}
	}
	y := p.whole()
	if len(y) < parallelFrom {
		var t powers // on the stack
		t.fill(z, len(y))
		return t.project(y, 0, len(y), p.ref)
	}
	t := new(powers)
	t.fill(z, len(y))
	halves(len(y), func(first, last int) func() {
		sum := t.project(y, first, last, p.ref)
		return func() { out[0], out[1] = out[0]+sum[0], out[1]+sum[1] }
	})
	return out
}

// projections are sums over nodes about the poles of windows of one record, what was
// used last at the end.
type projections struct{ list []*nodal }

const (
	projectionFrom  = 3 << 13 // samples from which sums over nodes pay
	projectionsKept = 2       // those of two rings
	// projectionReach is the [nodeReach] with which what is left is lost in rounding.
	projectionReach = 0.01
)

// about returns sums over nodes that reach z, with the level of the longest blocks that
// do; nil for a ring that falls within a block: it has to be summed up directly.
func (all *projections) about(p *poles, z pole) (*nodal, int) {
	for i, n := range all.list {
		if top := n.level(cmplx.Abs(n.deviation(z)), projectionReach); top >= 0 && n.ref == p.ref && n.sharesSamples(p.s) {
			n.extend(p.s)
			all.list = append(slices.Delete(all.list, i, i+1), n)
			return n, top
		}
	}
	if math.Abs(z.a)*nodeBlock/2 > projectionReach {
		return nil, 0
	}
	if len(all.list) == projectionsKept {
		all.list = slices.Delete(all.list, 0, 1)
	}
	n := newNodal(p.s, z.w, p.ref)
	all.list = append(all.list, n)
	return n, n.level(cmplx.Abs(n.deviation(z)), projectionReach)
}

// deviation is log z - jw.
func (n *nodal) deviation(z pole) complex128 { return complex(-z.a, z.w-n.w) }

// project returns sum (y - ref) z^n and sum (y - ref) n z^n over the samples of window,
// by blocks of levels up to top.
func (n *nodal) project(window series, z pole, top int) (sum [2]complex128) {
	var within [nodeLevels]atNodes // z^n from the middle of a block
	for j := range within[:top+1] {
		for i, x := range nodeAt {
			within[j][i] = z.at(x * float64(n.levels[j].length) / 2)
		}
	}
	n.cover(window.from, window.from+window.len(), top, math.Inf(1), func(j, at int, b *nodeSums) {
		half := float64(n.levels[j].length) / 2
		var s, t complex128
		for i, x := range nodeAt {
			v := b.y[i] * within[j][i]
			s += v
			t += complex(x*half, 0) * v
		}
		middle := float64(at-window.from) + half - 0.5
		base := z.at(middle)
		sum[0] += base * s
		sum[1] += base * (complex(middle, 0)*s + t)
	}, func(first, last int) {
		for i := first - window.from; i < last-window.from; i++ {
			if v := window.y[i] - n.ref; v == v {
				s := z.at(float64(i)) * complex(v, 0)
				sum[0] += s
				sum[1] += complex(float64(i), 0) * s
			}
		}
	})
	return sum
}
