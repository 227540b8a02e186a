package decay

import (
	"math"
	"math/cmplx"
)

// checked is a stretch of the record, samples first to last-1, that fit, whose window
// begins at sample origin, leaves residuals of at most size most. A later fit that
// differs little leaves hardly more: its residuals need not be looked at again.
type checked struct {
	first, last, origin int
	fit                 ringFit
	most                float64
}

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
// (|c - d| + |d| (exp(|x|n) - 1)) |z^n|. Other models are not compared.
func (c *checked) change(g *gate) float64 {
	was, is := &c.fit, &g.fit
	if was.companion != nil || is.companion != nil || was.bend != nil || is.bend != nil || !is.s.even() {
		return math.Inf(1)
	}
	now := term{is.a, is.w, is.p, is.q}.from(float64(c.origin - g.first))
	apart := cmplx.Abs(complex(was.p-now.p, was.q-now.q))
	from, to := float64(c.first-c.origin), float64(c.last-c.origin)
	turned := math.Expm1(math.Hypot(was.a-is.a, was.w-is.w) * to)
	largest := math.Exp(math.Max(-was.a*from, -was.a*to))
	return math.Abs(was.offset()-is.offset()) + (apart+math.Hypot(now.p, now.q)*turned)*largest
}
