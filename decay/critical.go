package decay

import "math"

// secondOrder is the natural response on both sides of critical damping,
//
//	y(t) = ref + c + exp(-at) (p K(t) + q S(t)),
//	K = cos wt, S = sin(wt)/w       for D = w^2 > 0
//	K = cosh vt, S = sinh(vt)/v     for D = -v^2 < 0,
//
// with theta = (a, D) and D passing through zero without a break, so that a, D
// and with them f0 = sqrt(a^2 + D)/(2 pi), zeta = a/sqrt(a^2 + D) keep a sound
// covariance where frequency and rates do not.
func newSecondOrder(s series) *design {
	length := s.position(s.len() - 1)
	d := &design{
		s: s, ref: s.level(), width: 7, linear: []int{0, 1, 2},
		derivative: [][]product{{{3, 1}, {4, 2}}, {{5, 1}, {6, 2}}},
		eval: func(th []float64, t float64, f *[parametersMost]float64) {
			k, s, kd, sd := dampedPair(th[0], th[1], t)
			f[1], f[2] = k, s
			f[3], f[4] = -t*k, -t*s
			f[5], f[6] = kd, sd
		},
		domain: func(th []float64) bool {
			a, d := th[0], th[1]
			return a > 0 && a < 8 && a*a+d > 0 && d < math.Pi*math.Pi && a*length > 0.1
		},
	}
	d.prepare()
	return d
}

// dampedPair returns exp(-at) K and exp(-at) S and their derivatives by D. Close
// to D = 0 the series in x = D t^2 are used.
func dampedPair(a, d, t float64) (k, s, kd, sd float64) {
	x := d * t * t
	if math.Abs(x) < 1e-3 {
		e := math.Exp(-a * t)
		k = 1 - x/2 + x*x/24
		s = t * (1 - x/6 + x*x/120)
		kd = -t * t / 2 * (1 - x/6 + x*x/120)
		sd = -t * t * t / 6 * (1 - x/10 + x*x/280)
		return e * k, e * s, e * kd, e * sd
	}
	if d > 0 {
		w, e := math.Sqrt(d), math.Exp(-a*t)
		sin, cos := math.Sincos(w * t)
		k, s = e*cos, e*sin/w
	} else {
		// The two exponentials apart, so that neither overflows.
		v := math.Sqrt(-d)
		slow, fast := math.Exp(-(a-v)*t)/2, math.Exp(-(a+v)*t)/2
		k, s = slow+fast, (slow-fast)/v
	}
	return k, s, -t * s / 2, (t*k - s) / (2 * d)
}

// secondOrderFit is a second-order response fitted from one onset on.
type secondOrderFit struct {
	s          series
	at         int // first sample
	a, d       float64
	cov        sym // of (a, D), for unit noise
	c, p, q    float64
	uC         float64 // of the offset, for unit noise
	rss        float64
	used       int
	stop       StopReason
	iterations int
}

// fitSecondOrder fits at most n samples of s from sample at on. In a long window the
// best of many starts is found on means of it.
func fitSecondOrder(s series, at, n int) (secondOrderFit, bool) {
	window := s.slice(at, s.len()).thinned(n)
	means, m := window.averaged(startMeans)
	best, ok := fitNearCritical(means, nearStarts(means))
	if far, found := fitTwoFalls(means, fallStarts(means)); found && (!ok || far.rss < best.rss) {
		best, ok = far, true
	}
	if ok && m > 1 {
		best, ok = refitSecondOrder(window, best.a/float64(m), best.d/sq(float64(m)))
	}
	best.at = at
	return best, ok
}

// refitSecondOrder fits a window from (a, D) on: all of it where the two rates stand
// apart, and a part of it near critical damping, where only the slower [design] holds.
func refitSecondOrder(window series, a, d float64) (secondOrderFit, bool) {
	if v := math.Sqrt(math.Max(0, -d)); v > ratesApart*a {
		if f, ok := fitTwoFalls(window, [][]float64{{a - v, a + v}}); ok {
			return f, true
		}
	}
	return fitNearCritical(window.thinned(choiceSamples), [][]float64{{a, d}})
}

// ratesApart is half the difference of two rates over their mean from which they stand apart.
const ratesApart = 0.3

// nearStarts are values of (a, D) to start from.
func nearStarts(window series) (out [][]float64) {
	length := window.position(window.len() - 1)
	for _, u := range []float64{3, 10, 30} {
		a := u / length
		out = append(out, []float64{a, -0.5 * a * a}, []float64{a, 0.3 * a * a})
	}
	return out
}

// fitNearCritical fits in a and D, the best of given starts.
func fitNearCritical(window series, starts [][]float64) (best secondOrderFit, ok bool) {
	p := newSecondOrder(window)
	for _, start := range starts {
		sol := minimise(p, start, fine)
		inv, sound := sol.normal.jtj.inverse()
		if sol.stop != Converged || !sound || ok && sol.normal.rss >= best.rss {
			continue
		}
		b := sol.normal.beta
		best, ok = secondOrderFit{s: p.s, a: sol.theta[0], d: sol.theta[1], cov: inv,
			c: p.ref + b[0], p: b[1], q: b[2], uC: math.Sqrt(inv.At(2, 2)),
			rss: sol.normal.rss, used: p.n, stop: sol.stop, iterations: sol.iterations}, true
	}
	return best, ok
}

// fallStarts are pairs of rates to start from.
func fallStarts(window series) (out [][]float64) {
	length := window.position(window.len() - 1)
	for _, u := range []float64{1, 4, 12} {
		for _, ratio := range []float64{3, 20, 100} {
			out = append(out, []float64{u / length, ratio * u / length})
		}
	}
	return out
}

// fitTwoFalls fits rates r1 < r2, the best of given starts, far above critical damping,
// where a and D run along a bent valley: a = (r1+r2)/2, v = (r2-r1)/2, D = -v^2, and
// with exp(-r1 t) = exp(-at)(K + vS), exp(-r2 t) = exp(-at)(K - vS) the rest.
func fitTwoFalls(window series, starts [][]float64) (best secondOrderFit, ok bool) {
	p := newPoles(window, 0, 2)
	for _, start := range starts {
		sol := minimise(p, start, fine)
		inv, sound := sol.normal.jtj.inverse()
		if sol.stop != Converged || !sound || ok && sol.normal.rss >= best.rss {
			continue
		}
		r1, r2, b := sol.theta[0], sol.theta[1], sol.normal.beta
		if r1 <= 0 || r2 <= 0 {
			continue
		}
		v := (r2 - r1) / 2
		da, dd := [2]float64{0.5, 0.5}, [2]float64{v, -v}
		best, ok = secondOrderFit{s: window, a: (r1 + r2) / 2, d: -v * v, cov: transformed(&inv, da, dd),
			c: p.ref + b[0], p: b[1] + b[2], q: v * (b[1] - b[2]), uC: math.Sqrt(inv.At(2, 2)),
			rss: sol.normal.rss, used: p.n, stop: sol.stop, iterations: sol.iterations}, true
	}
	return best, ok
}

// transformed carries the covariance of the first two parameters through two
// linear forms.
func transformed(cov *sym, x, y [2]float64) sym {
	out := sym{n: 2}
	form := func(a, b [2]float64) (sum float64) {
		for i := range 2 {
			for j := range 2 {
				sum += a[i] * cov.At(i, j) * b[j]
			}
		}
		return sum
	}
	out.set(0, 0, form(x, x))
	out.set(0, 1, form(x, y))
	out.set(1, 1, form(y, y))
	return out
}

func (f *secondOrderFit) value(n float64) float64 {
	k, s, _, _ := dampedPair(f.a, f.d, n)
	return f.c + f.p*k + f.q*s
}
