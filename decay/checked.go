package decay

import (
	"math"
	"math/cmplx"
)

// checked is a stretch of the record, samples first to last-1, that a plain ring about an
// offset, counted from sample origin, leaves residuals of at most size most of. A later
// fit that differs little leaves hardly more: its residuals need not be looked at again.
type checked struct {
	first, last, origin int
	ring                term
	offset, most        float64
}

// check notes that the fit leaves at most that of samples first to last-1; other models
// are not compared.
func (g *gate) check(first, last int, most float64) {
	if f := &g.fit; last-first >= parallelFrom && f.plain() {
		g.checked = append(g.checked, checked{first, last, g.first, term{f.a, f.w, f.p, f.q}, f.offset(), most})
	}
}

// plain reports whether the fit is one ring about a constant, at even samples.
func (f *ringFit) plain() bool { return f.companion == nil && f.bend == nil && f.s.even() }

// unchecked lists the stretches of the gate, from one sample up to before another, in
// which its fit may leave more than limit.
func (g *gate) unchecked(limit float64) (out [][2]int) {
	at := g.first
	for i := range g.checked {
		c := &g.checked[i]
		if c.first < at || c.last > g.last || !(c.most+c.change(g) <= limit) {
			continue
		}
		if c.first > at {
			out = append(out, [2]int{at, c.first})
		}
		at = c.last
	}
	return append(out, [2]int{at, g.last})
}

// change bounds the difference between the curve that the stretch was checked with and
// that of the gate's fit. With two rings c z^n and d v^n, z = v exp(x), it is at most
// (|c - d| + |d| (exp(|x|n) - 1)) |z^n|.
func (c *checked) change(g *gate) float64 {
	was, f := &c.ring, &g.fit
	if !f.plain() {
		return math.Inf(1)
	}
	is := term{f.a, f.w, f.p, f.q}.from(float64(c.origin - g.first))
	from, to := float64(c.first-c.origin), float64(c.last-c.origin)
	apart := cmplx.Abs(complex(was.p-is.p, was.q-is.q))
	turned := math.Expm1(math.Hypot(was.a-is.a, was.w-is.w) * to)
	largest := math.Exp(math.Max(-was.a*from, -was.a*to))
	return math.Abs(c.offset-f.offset()) + (apart+math.Hypot(is.p, is.q)*turned)*largest
}
