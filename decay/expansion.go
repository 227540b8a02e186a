package decay

import (
	"math"
	"math/cmplx"
)

// expansion holds sums of a window over blocks of samples, from which its projection
// on any pole near an undamped ring of angular frequency w follows without the
// samples: of each block
//
//	M_k = sum (y - ref) q^k exp(jwq),  k = 0..3,
//
// q counted from its middle. With d = log z - jw the block adds z^middle times
// sum_k d^k/k! M_k to sum y z^n. From one step of a fit to the next the poles of a
// deep record move by far less than a radian over the block, so that the samples are
// passed over once and not at every step.
type expansion struct {
	w      float64
	blocks [][moments]complex128
}

const (
	moments = 4
	// nearby is |d| times half a block up to which the rest of the series, a
	// hundredth of its fourth power, is lost in the rounding of the sums.
	nearby = 2e-4
	// middle of a block, from its first sample.
	middle = float64(blockLength-1) / 2
)

// projection returns sum y z^n and sum y n z^n over all samples.
func (p *poles) projection(z pole) (out [2]complex128) {
	y := p.s.y
	if len(y) < parallelFrom {
		var t powers // on the stack
		t.fill(z, len(y))
		return t.project(y, 0, len(y), p.ref)
	}
	t := new(powers)
	t.fill(z, len(y))
	if e, ok := p.near.about(z); ok {
		e.extend(y, p.ref)
		blocks := len(y) / blockLength
		out, rest := e.project(z, blocks), t.project(y, blocks*blockLength, len(y), p.ref)
		return [2]complex128{out[0] + rest[0], out[1] + rest[1]}
	}
	halves(len(y), func(first, last int) func() {
		sum := t.project(y, first, last, p.ref)
		return func() { out[0], out[1] = out[0]+sum[0], out[1]+sum[1] }
	})
	return out
}

// expansions are those of one window and its continuations, latest last.
type expansions struct{ list []*expansion }

// expansionsKept are those of two rings.
const expansionsKept = 2

// about returns one that reaches z, if any can: a ring that falls within a block has
// to be summed up directly.
func (all *expansions) about(z pole) (*expansion, bool) {
	for _, e := range all.list {
		if e.reaches(z) {
			return e, true
		}
	}
	e := &expansion{w: z.w}
	if !e.reaches(z) {
		return nil, false
	}
	if len(all.list) == expansionsKept {
		all.list = append(all.list[:0], all.list[1:]...)
	}
	all.list = append(all.list, e)
	return e, true
}

// deviation is d of a pole.
func (e *expansion) deviation(z pole) complex128 { return complex(-z.a, z.w-e.w) }

// reaches reports whether the sums for z follow from those of e.
func (e *expansion) reaches(z pole) bool { return cmplx.Abs(e.deviation(z))*middle < nearby }

// extend sums over the whole blocks of y that are not there yet.
func (e *expansion) extend(y []float64, ref float64) {
	have, want := len(e.blocks), len(y)/blockLength
	if have >= want {
		return
	}
	e.blocks = append(e.blocks, make([][moments]complex128, want-have)...)
	w := newWeights(e.w)
	halves((want-have)*blockLength, func(first, last int) func() {
		for k := have + first/blockLength; k < have+last/blockLength; k++ {
			e.blocks[k] = w.sums((*[blockLength]float64)(y[k*blockLength:]), ref)
		}
		return func() {}
	})
}

// project returns sum y z^n and sum y n z^n over the first count blocks.
func (e *expansion) project(z pole, count int) (sum [2]complex128) {
	d := e.deviation(z)
	d2, d3 := d*d/2, d*d*d/6
	powers := newLadder(z.over(blockLength), count)
	for k, m := range e.blocks[:count] {
		base := powers.next()
		s := m[0] + d*m[1] + d2*m[2] + d3*m[3]
		t := m[1] + d*m[2] + d2*m[3]
		sum[0] += base * s
		sum[1] += base * (complex(float64(k*blockLength)+middle, 0)*s + t)
	}
	shift := z.at(middle)
	return [2]complex128{sum[0] * shift, sum[1] * shift}
}

// weights are the real and imaginary parts of q^k exp(jwq) in the later half of a
// block. Before its middle they are the same but for the sign: it is enough to
// multiply sums and differences of two samples each.
type weights [blockLength / 2][2 * moments]float64

func newWeights(w float64) *weights {
	out := new(weights)
	for m := range out {
		q, power := float64(m)+0.5, 1.0
		sin, cos := math.Sincos(w * q)
		for k := range moments {
			out[m][2*k], out[m][2*k+1] = power*cos, power*sin
			power *= q
		}
	}
	return out
}

// sums are the moments of one block.
func (w *weights) sums(y *[blockLength]float64, ref float64) [moments]complex128 {
	var r0, i0, r1, i1, r2, i2, r3, i3 float64
	for m := range w {
		later, before, f := y[blockLength/2+m], y[blockLength/2-1-m], &w[m]
		sum, difference := later+before-2*ref, later-before
		r0 += sum * f[0]
		i0 += difference * f[1]
		r1 += difference * f[2]
		i1 += sum * f[3]
		r2 += sum * f[4]
		i2 += difference * f[5]
		r3 += difference * f[6]
		i3 += sum * f[7]
	}
	return [moments]complex128{complex(r0, i0), complex(r1, i1), complex(r2, i2), complex(r3, i3)}
}
