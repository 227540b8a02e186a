package decay

import (
	"math"
	"math/cmplx"
	"sync"
)

// moments are the sums that the normal equations of a damped sinusoid plus
// constant are made of. With z = exp(-a + jw), time n in intervals:
//
//	zz[k]  = sum n^k z^2n     (k = 0, 1, 2)
//	ee[k]  = sum n^k |z|^2n   (k = 0, 1, 2)
//	z1[k]  = sum n^k z^n      (k = 0, 1)
//	yz[k]  = sum y n^k z^n    (k = 0, 1)
//
// y counts from the reference level of the problem.
type moments struct {
	n      float64
	zz     [3]complex128
	ee     [3]float64
	z1, yz [2]complex128
	y, yy  float64
}

func (m *moments) add(o moments) {
	m.n += o.n
	for k := range 3 {
		m.zz[k] += o.zz[k]
		m.ee[k] += o.ee[k]
	}
	for k := range 2 {
		m.z1[k] += o.z1[k]
		m.yz[k] += o.yz[k]
	}
	m.y += o.y
	m.yy += o.yy
}

// blockLength is the length of the table of powers of z. Within a block the sums
// need no recursion; the blocks are joined with an exact power of z each.
const blockLength = 128

// parallelFrom is the number of samples from which two cores pay.
const parallelFrom = 1 << 16

// momentsOf sums over the series, about level ref. y and yy are left out: they
// do not depend on z.
func momentsOf(s series, ref, a, w float64) moments {
	if !s.uniform() {
		return momentsAt(s, ref, a, w)
	}
	t := newPowers(a, w)
	n := s.len()
	if n < parallelFrom {
		return t.sum(s.y, 0, n, ref)
	}
	half := n / 2 / blockLength * blockLength
	var second moments
	var wg sync.WaitGroup
	wg.Go(func() { second = t.sum(s.y, half, n, ref) })
	first := t.sum(s.y, 0, half, ref)
	wg.Wait()
	first.add(second)
	return first
}

// momentsAt sums at the true time of every sample that is there.
func momentsAt(s series, ref, a, w float64) moments {
	var m moments
	for i, v := range s.y {
		if math.IsNaN(v) {
			continue
		}
		t := s.position(i)
		e := math.Exp(-a * t)
		sin, cos := math.Sincos(w * t)
		z := complex(e*cos, e*sin)
		zz, ee := z*z, e*e
		ct := complex(t, 0)
		m.n++
		m.zz[0] += zz
		m.zz[1] += zz * ct
		m.zz[2] += zz * ct * ct
		m.ee[0] += ee
		m.ee[1] += ee * t
		m.ee[2] += ee * t * t
		m.z1[0] += z
		m.z1[1] += z * ct
		y := complex(v-ref, 0)
		m.yz[0] += y * z
		m.yz[1] += y * z * ct
	}
	return m
}

// powers is the table z^m, m z^m for one z.
type powers struct {
	a, w     float64
	re, im   [blockLength]float64
	mre, mim [blockLength]float64
	full     blockSums
}

// blockSums are sum m^k z^m over one block, for z, z^2 and |z|^2.
type blockSums struct {
	z1 [2]complex128
	zz [3]complex128
	ee [3]float64
}

func newPowers(a, w float64) *powers {
	t := &powers{a: a, w: w}
	t.re[0] = 1
	z := cmplx.Exp(complex(-a, w))
	t.re[1], t.im[1] = real(z), imag(z)
	for m := 2; m < blockLength; m++ {
		// Halving keeps the error at a few units in the last place.
		h, k := m/2, m-m/2
		p := complex(t.re[h], t.im[h]) * complex(t.re[k], t.im[k])
		t.re[m], t.im[m] = real(p), imag(p)
	}
	for m := range blockLength {
		t.mre[m], t.mim[m] = float64(m)*t.re[m], float64(m)*t.im[m]
	}
	t.full = t.blockSums(blockLength)
	return t
}

func (t *powers) blockSums(n int) blockSums {
	var b blockSums
	for m := range n {
		z := complex(t.re[m], t.im[m])
		zz := z * z
		ee := t.re[m]*t.re[m] + t.im[m]*t.im[m]
		x := float64(m)
		c := complex(x, 0)
		b.z1[0] += z
		b.z1[1] += z * c
		b.zz[0] += zz
		b.zz[1] += zz * c
		b.zz[2] += zz * c * c
		b.ee[0] += ee
		b.ee[1] += ee * x
		b.ee[2] += ee * x * x
	}
	return b
}

// sum adds the samples first to last-1; first is a multiple of the block length.
func (t *powers) sum(y []float64, first, last int, ref float64) moments {
	m := moments{n: float64(last - first)}
	for at := first; at < last; at += blockLength {
		block := y[at:min(at+blockLength, last)]
		sums := &t.full
		if len(block) < blockLength {
			partial := t.blockSums(len(block))
			sums = &partial
		}
		base := cmplx.Exp(complex(-t.a*float64(at), t.w*float64(at)))
		m.join(base, float64(at), sums, t.project(block, ref))
	}
	return m
}

// project returns sum y z^m and sum y m z^m over one block.
func (t *powers) project(block []float64, ref float64) [2]complex128 {
	var sr, si, mr, mi float64
	re, im := t.re[:len(block)], t.im[:len(block)]
	mre, mim := t.mre[:len(block)], t.mim[:len(block)]
	for i, v := range block {
		v -= ref
		sr += v * re[i]
		si += v * im[i]
		mr += v * mre[i]
		mi += v * mim[i]
	}
	return [2]complex128{complex(sr, si), complex(mr, mi)}
}

// join adds the sums of a block that begins at time n0, where z^n0 = base.
func (m *moments) join(base complex128, n0 float64, b *blockSums, y [2]complex128) {
	c := complex(n0, 0)
	m.z1[0] += base * b.z1[0]
	m.z1[1] += base * (c*b.z1[0] + b.z1[1])
	m.yz[0] += base * y[0]
	m.yz[1] += base * (c*y[0] + y[1])
	base2 := base * base
	m.zz[0] += base2 * b.zz[0]
	m.zz[1] += base2 * (c*b.zz[0] + b.zz[1])
	m.zz[2] += base2 * (c*c*b.zz[0] + 2*c*b.zz[1] + b.zz[2])
	e := real(base)*real(base) + imag(base)*imag(base)
	m.ee[0] += e * b.ee[0]
	m.ee[1] += e * (n0*b.ee[0] + b.ee[1])
	m.ee[2] += e * (n0*n0*b.ee[0] + 2*n0*b.ee[1] + b.ee[2])
}
