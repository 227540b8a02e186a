package decay

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// ring is the least-squares problem of one damped sinusoid about a constant:
//
//	y(n) = ref + c + exp(-a n) (p cos wn + q sin wn),  n in intervals
//
// theta = (a, w), beta = (c, p, q). Everything the normal equations need lies in
// the span of 1, C, S, nC, nS with C = exp(-an) cos wn and S = exp(-an) sin wn,
// so that one pass over the samples per theta is enough.
type ring struct {
	s      series
	n      int
	ref    float64
	y, yy  float64 // sums about ref
	length float64 // in intervals
}

func newRing(s series) *ring {
	r := &ring{s: s, n: s.count(), ref: s.mean()}
	for _, v := range s.y {
		if !math.IsNaN(v) {
			v -= r.ref
			r.y += v
			r.yy += v * v
		}
	}
	r.length = s.position(s.len() - 1)
	return r
}

func (r *ring) size() int { return r.n }

// valid keeps w where samples can tell it and a where exp neither dies within a
// sample nor explodes within the window.
func (r *ring) valid(theta []float64) bool {
	a, w := theta[0], theta[1]
	return w > 0 && w < math.Pi && a < 8 && a*r.length > -30
}

func (r *ring) at(theta []float64) (normal, bool) {
	m := momentsOf(r.s, r.ref, theta[0], theta[1])
	m.y, m.yy = r.y, r.yy
	return m.normal()
}

// normal forms the normal equations in the order a, w, c, p, q.
func (m *moments) normal() (normal, bool) {
	g, b := m.gram()
	lin := mat.NewSymDense(3, nil)
	for i := range 3 {
		for j := i; j < 3; j++ {
			lin.SetSym(i, j, g[i][j])
		}
	}
	beta, ok := solveSym(lin, b[:3])
	if !ok {
		return normal{}, false
	}
	c, p, q := beta[0], beta[1], beta[2]
	rss := m.yy - c*b[0] - p*b[1] - q*b[2]
	// Columns of J in the basis (1, C, S, nC, nS).
	cols := [5][5]float64{
		{0, 0, 0, -p, -q},
		{0, 0, 0, q, -p},
		{1, 0, 0, 0, 0},
		{0, 1, 0, 0, 0},
		{0, 0, 1, 0, 0},
	}
	var left [5]float64 // basis' r
	for i := range 5 {
		left[i] = b[i] - g[i][0]*c - g[i][1]*p - g[i][2]*q
	}
	out := normal{jtj: mat.NewSymDense(5, nil), jtr: make([]float64, 5), beta: beta, rss: math.Max(rss, 0)}
	for i := range 5 {
		out.jtr[i] = dot5(cols[i], left)
		for j := i; j < 5; j++ {
			sum := 0.0
			for k := range 5 {
				sum += cols[i][k] * dot5(g[k], cols[j])
			}
			out.jtj.SetSym(i, j, sum)
		}
	}
	return out, true
}

func dot5(a, b [5]float64) float64 {
	return a[0]*b[0] + a[1]*b[1] + a[2]*b[2] + a[3]*b[3] + a[4]*b[4]
}

// gram returns the inner products of the basis (1, C, S, nC, nS) with itself and
// with y.
func (m *moments) gram() (g [5][5]float64, b [5]float64) {
	b = [5]float64{m.y, real(m.yz[0]), imag(m.yz[0]), real(m.yz[1]), imag(m.yz[1])}
	g[0] = [5]float64{m.n, real(m.z1[0]), imag(m.z1[0]), real(m.z1[1]), imag(m.z1[1])}
	cc := func(k int) float64 { return (m.ee[k] + real(m.zz[k])) / 2 }
	ss := func(k int) float64 { return (m.ee[k] - real(m.zz[k])) / 2 }
	cs := func(k int) float64 { return imag(m.zz[k]) / 2 }
	for i := range 2 {
		for j := range 2 {
			k := i + j
			g[1+2*i][1+2*j] = cc(k)
			g[2+2*i][2+2*j] = ss(k)
			g[1+2*i][2+2*j] = cs(k)
			g[2+2*i][1+2*j] = cs(k)
		}
	}
	for i := 1; i < 5; i++ {
		g[i][0] = g[0][i]
	}
	return g, b
}
