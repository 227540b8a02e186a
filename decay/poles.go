package decay

import (
	"math"
	"math/cmplx"
	"slices"
)

// A pole is one exponential of a model, exp((-a + jw) n) with n in intervals:
// a ring with w > 0, a plain exponential with w = 0.
type pole struct{ a, w float64 }

// at returns the exponential at time n.
func (z pole) at(n float64) complex128 { return cmplx.Exp(complex(-z.a*n, z.w*n)) }

// over is the exponential counted in steps of m intervals.
func (z pole) over(m float64) pole { return pole{z.a * m, z.w * m} }

// poles is the least-squares problem of a sum of exponentials about a constant,
//
//	y(n) = ref + c + sum_k exp(-a_k n) (p_k cos w_k n + q_k sin w_k n) + sum_l d_l exp(-b_l n)
//
// theta = (a_1, w_1, a_2, w_2, ..., b_1, ...), beta = (c, p_1, q_1, ..., d_1, ...).
// Everything that the normal equations need lies in the span of the constant, of
// the exponentials and of n times them, so that one pass over the samples per
// theta is enough, and only for their products with y: all other sums are
// geometric series.
type poles struct {
	s            series
	solid        []float64 // with what is missing at the level ref; see whole
	rings, falls int       // damped sinusoids, plain exponentials
	n            int
	ref          float64
	y, yy        float64 // sums about ref
	length       float64 // in intervals
	missing      []int   // samples that are not there
	near         *projections
	// latest is what at returned last: a fit that goes on where one ended need not
	// pass over the samples again for its first step.
	latest struct {
		theta  []float64
		normal normal
	}
}

func newPoles(s series, rings, falls int) *poles {
	p := &poles{rings: rings, falls: falls, ref: s.level(), near: &projections{}}
	p.take(s)
	return p
}

// extended is the problem about s, which goes on where the samples of p end: what was
// summed up is kept.
func (p *poles) extended(s series) *poles {
	out := p.alike(p.rings, p.falls)
	out.take(s)
	return out
}

// elsewhere is the problem about another window of the record; where it is deep both share
// sums over nodes.
func (p *poles) elsewhere(window series) *poles {
	if window.len() < parallelFrom {
		return newPoles(window, p.rings, p.falls)
	}
	out := &poles{rings: p.rings, falls: p.falls, ref: p.ref, near: p.near}
	out.take(window)
	return out
}

// take makes the problem one about s, which begins as the samples before did.
func (p *poles) take(s series) {
	rest := s.y[p.s.len():]
	if len(rest) < parallelFrom {
		p.add(sums(rest, p.ref))
	} else {
		halves(len(rest), func(first, last int) func() {
			y, yy, n := sums(rest[first:last], p.ref)
			return func() { p.add(y, yy, n) }
		})
	}
	p.s, p.solid, p.missing = s, s.y, nil
	p.length = s.position(s.len() - 1)
	if p.n < s.len() && s.even() {
		p.solid = nil
		for i, v := range s.y {
			if v != v {
				p.missing = append(p.missing, i)
			}
		}
	}
}

func (p *poles) add(y, yy float64, n int) { p.y, p.yy, p.n = p.y+y, p.yy+yy, p.n+n }

// sums returns the sum and the sum of squares of y - ref and their number; NaN is
// left out. Four sets of sums let the additions overlap.
func sums(y []float64, ref float64) (sum, squares float64, n int) {
	var s0, s1, s2, s3, q0, q1, q2, q3 float64
	i := 0
	for ; i+3 < len(y); i += 4 {
		a, b, c, d := y[i]-ref, y[i+1]-ref, y[i+2]-ref, y[i+3]-ref
		s0, s1, s2, s3 = s0+a, s1+b, s2+c, s3+d
		q0, q1, q2, q3 = q0+a*a, q1+b*b, q2+c*c, q3+d*d
	}
	for ; i < len(y); i++ {
		v := y[i] - ref
		s0, q0 = s0+v, q0+v*v
	}
	if sum = s0 + s1 + s2 + s3; sum == sum {
		return sum, q0 + q1 + q2 + q3, len(y)
	}
	return sumsOfThose(y, ref)
}

// sumsOfThose is [sums] of the samples that are there.
func sumsOfThose(y []float64, ref float64) (sum, squares float64, n int) {
	for _, v := range y {
		v -= ref
		if v == v {
			sum += v
			squares += v * v
			n++
		}
	}
	return sum, squares, n
}

// alike is the problem of another number of exponentials about the same samples.
func (p *poles) alike(rings, falls int) *poles {
	out := *p
	out.rings, out.falls = rings, falls
	out.latest.theta = nil
	return &out
}

// covers reports whether the problem is about the samples of s.
func (p *poles) covers(s series) bool { return p.begins(s) && p.s.len() == s.len() }

// begins reports whether it is about the first samples of s.
func (p *poles) begins(s series) bool {
	return p != nil && p.s.len() <= s.len() && &p.s.y[0] == &s.y[0] && p.s.stride == s.stride
}

// newRing is the problem of one ring.
func newRing(s series) *poles { return newPoles(s, 1, 0) }

// aboutMean is the energy about the mean: what a constant leaves.
func (p *poles) aboutMean() float64 { return p.yy - p.y*p.y/float64(max(1, p.n)) }

func (p *poles) size() int { return p.n }

// at turns theta into normal equations.
func (p *poles) at(theta []float64) (normal, bool) {
	if slices.Equal(theta, p.latest.theta) {
		return p.latest.normal, true
	}
	n, ok := p.evaluate(theta)
	if ok {
		p.latest.theta, p.latest.normal = theta, n
	}
	return n, ok
}

func (p *poles) evaluate(theta []float64) (normal, bool) {
	g := p.gram(theta)
	return p.normal(&g)
}

// gram sums up the basis at theta.
func (p *poles) gram(theta []float64) (g gram) {
	list := p.list(theta)
	if p.s.even() {
		g = p.uniformGram(list)
		p.takeOut(&g, list)
	} else {
		g.accumulate(p.s, p.ref, p.slot(len(list)), func(t float64, f *[parametersMost]float64) { p.basis(list, t, f) })
	}
	return g
}

func (p *poles) list(theta []float64) []pole {
	out := make([]pole, 0, p.rings+p.falls)
	for k := range p.rings {
		out = append(out, pole{theta[2*k], theta[2*k+1]})
	}
	for l := range p.falls {
		out = append(out, pole{a: theta[2*p.rings+l]})
	}
	return out
}

// valid keeps every w where samples can tell it and every rate where exp neither
// dies within a sample nor explodes within the window.
func (p *poles) valid(theta []float64) bool {
	for _, z := range p.list(theta) {
		if z.w < 0 || z.w >= math.Pi || !(z.a < 8) || !(z.a*p.length > -30) {
			return false
		}
	}
	for k := range p.rings {
		if !(theta[2*k+1] > 0) {
			return false
		}
	}
	return true
}

// The basis of [gram] holds the constant; for each ring C, S, nC, nS; for each
// fall E, nE; in this order, with C = exp(-an) cos wn and S = exp(-an) sin wn.

// slot returns where the functions of pole k begin in the basis.
func (p *poles) slot(k int) int {
	if k <= p.rings {
		return 1 + 4*k
	}
	return 1 + 4*p.rings + 2*(k-p.rings)
}

func (p *poles) isRing(k int) bool { return k < p.rings }

// uniformGram sums over uniform samples, gaps included.
func (p *poles) uniformGram(list []pole) gram {
	g := p.innerProducts(list, p.s.len())
	g.b[0] = p.y
	m := p.s.spacing()
	for k, z := range list {
		sum := p.projection(z.over(m))
		sum[1] *= complex(m, 0)
		p.putProjection(&g, k, sum)
	}
	return g
}

// moments returns sum n^k z^n over the times of n uniform samples for k = 0, 1, 2.
func (p *poles) moments(z pole, n int) [3]complex128 {
	m := p.s.spacing()
	sum := geometric(z.over(m), n)
	sum[1] *= complex(m, 0)
	sum[2] *= complex(m*m, 0)
	return sum
}

// innerProducts returns those of the basis over n uniform samples.
func (p *poles) innerProducts(list []pole, n int) gram {
	var g gram
	g.g.n = p.slot(len(list))
	g.g.set(0, 0, float64(n))
	for k, zk := range list {
		one := p.moments(zk, n)
		p.putPair(&g, k, -1, one, one)
		for l, zl := range list[:k+1] {
			sum, difference := pole{zk.a + zl.a, zk.w + zl.w}, pole{zk.a + zl.a, zk.w - zl.w}
			p.putPair(&g, k, l, p.moments(sum, n), p.moments(difference, n))
		}
	}
	return g
}

func (p *poles) putProjection(g *gram, k int, sum [2]complex128) {
	at := p.slot(k)
	for j := range 2 {
		if p.isRing(k) {
			g.b[at+2*j], g.b[at+2*j+1] = real(sum[j]), imag(sum[j])
		} else {
			g.b[at+j] = real(sum[j])
		}
	}
}

// putPair enters the inner products of pole k with pole l (-1: the constant),
// from the sums of n^j (zk zl)^n and n^j (zk conj zl)^n. With u = zk^n, v = zl^n:
// Re u Re v = (Re uv + Re uv*)/2, Im u Im v = (Re uv* - Re uv)/2,
// Re u Im v = (Im uv - Im uv*)/2, Im u Re v = (Im uv + Im uv*)/2.
func (p *poles) putPair(g *gram, k, l int, uv, uc [3]complex128) {
	for i := range 2 {
		for j := range 2 {
			if l < 0 && j > 0 {
				continue
			}
			s, d := uv[i+j], uc[i+j]
			g.put(p, k, i, false, l, j, false, (real(s)+real(d))/2)
			g.put(p, k, i, true, l, j, true, (real(d)-real(s))/2)
			g.put(p, k, i, false, l, j, true, (imag(s)-imag(d))/2)
			g.put(p, k, i, true, l, j, false, (imag(s)+imag(d))/2)
		}
	}
}

// put enters the product of n^i times the real or imaginary part of pole k with
// n^j times that of pole l, where both are in the basis.
func (g *gram) put(p *poles, k, i int, imK bool, l, j int, imL bool, x float64) {
	a, okA := p.index(k, i, imK)
	b, okB := p.index(l, j, imL)
	if okA && okB {
		g.g.set(a, b, x)
	}
}

func (p *poles) index(k, power int, im bool) (int, bool) {
	switch {
	case k < 0:
		return 0, !im
	case p.isRing(k) && im:
		return p.slot(k) + 2*power + 1, true
	case p.isRing(k):
		return p.slot(k) + 2*power, true
	default:
		return p.slot(k) + power, !im
	}
}

// basis evaluates the basis at time t, in intervals.
func (p *poles) basis(list []pole, t float64, f *[parametersMost]float64) {
	for k, z := range list {
		e := math.Exp(-z.a * t)
		at := p.slot(k)
		if !p.isRing(k) {
			f[at], f[at+1] = e, t*e
			continue
		}
		sin, cos := math.Sincos(z.w * t)
		f[at], f[at+1], f[at+2], f[at+3] = e*cos, e*sin, t*e*cos, t*e*sin
	}
}
