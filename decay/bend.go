package decay

import "math"

// The laws of a ring whose loss and frequency depend on its amplitude. With the
// amplitude u(t) relative to its start and the integral I(t) that the frequency
// shift accumulates over, the curve is
//
//	y(t) = ref + c + u(t) (p cos(wt + G I(t)) + q sin(wt + G I(t)))
//
// where a and w hold in the limit of small amplitude, a + B and w + G at the start.
//
//	quadratic: du/dt = -a u - B u^2, dphi/dt = w + G u
//	           u = E/D, I = ln(D)/B, D = 1 + (B/a)(1 - E), E = exp(-at)
//	           (hysteresis of a core in the Rayleigh region, IEC 60050-221)
//	cubic:     du/dt = -a u - B u^3, dphi/dt = w + G u^2
//	           u = E/sqrt(D), I = ln(D)/(2B), D = 1 + (B/a)(1 - E^2)
//	constant:  du/dt = -a u - B, dphi/dt = w + G u, until u = 0
//	           u = (1 + B/a) E - B/a (a diode drop, dry friction)
type bendLaw int

const (
	quadratic bendLaw = iota
	cubic
	constant
)

var bendNames = [...]string{
	"loss and frequency follow the amplitude (hysteresis)",
	"loss and frequency follow the square of the amplitude",
	"a constant loss beside the proportional one",
}

// String describes the law.
func (l bendLaw) String() string { return bendNames[l] }

// bend is an amplitude law with its parameters, per interval.
type bend struct {
	law  bendLaw
	b, g float64
}

// at returns u and the phase at time t.
func (f *bend) at(a, w, t float64) (u, phase float64) {
	u, i, _, _, _, _ := f.law.shape(a, f.b, t)
	return u, w*t + f.g*i
}

// shape returns u and I at time t and their derivatives by a and B.
func (l bendLaw) shape(a, b, t float64) (u, i, ua, ub, ia, ib float64) {
	switch l {
	case quadratic:
		e, f, fa := integral(a, t) // D = 1 + BF
		d := 1 + b*f
		u, ua, ub = e/d, -t*e/d-e*b*fa/(d*d), -e*f/(d*d)
		i, ia, ib = logIntegral(b, f, fa)
	case cubic:
		_, f, fa := integral(2*a, t)
		f, fa = 2*f, 4*fa // of (1 - E^2)/a
		d := 1 + b*f
		root := math.Sqrt(d)
		u = math.Exp(-a*t) / root
		ua, ub = -t*u-u*b*fa/(2*d), -u*f/(2*d)
		i, ia, ib = logIntegral(b, f, fa)
		i, ia, ib = i/2, ia/2, ib/2
	case constant:
		if b > 0 {
			// Where u has stopped, I stays; its derivatives are those at the stop,
			// for u vanishes there.
			t = math.Min(t, l.stop(a, b))
		}
		e, f, fa := integral(a, t)
		g, ga := secondIntegral(a, t, f, fa)
		if u = e - b*f; u > stopped {
			ua, ub = -t*e-b*fa, -f
		} else {
			u = 0
		}
		i, ia, ib = f+b*g, fa+b*ga, g
	}
	return u, i, ua, ub, ia, ib
}

// stopped is the amplitude at which a ring with a constant loss has stopped:
// rounding hides where it vanishes.
const stopped = 1e-9

// smallExponent is the exponent below which series replace differences.
const smallExponent = 1e-3

// integral returns E = exp(-at), its integral F = (1 - E)/a and dF/da.
func integral(a, t float64) (e, f, fa float64) {
	x := a * t
	e = math.Exp(-x)
	if math.Abs(x) < smallExponent {
		return e, t * (1 - x/2 + x*x/6 - x*x*x/24), t * t * (-0.5 + x/3 - x*x/8 + x*x*x/30)
	}
	f = -math.Expm1(-x) / a
	return e, f, (t*e - f) / a
}

// secondIntegral returns (F - t)/a, which is minus the integral of F, and its
// derivative by a.
func secondIntegral(a, t, f, fa float64) (g, ga float64) {
	if x := a * t; math.Abs(x) < smallExponent {
		return t * t * (-0.5 + x/6 - x*x/24 + x*x*x/120), t * t * t * (1.0/6 - x/12 + x*x/40)
	}
	g = (f - t) / a
	return g, (fa - g) / a
}

// logIntegral returns I = ln(1 + BF)/B and its derivatives by a and B, by series
// where B F is small.
func logIntegral(b, f, fa float64) (i, ia, ib float64) {
	x := b * f
	d := 1 + x
	ia = fa / d
	if math.Abs(x) < 1e-4 {
		return f * (1 - x/2 + x*x/3), ia, f * f * (-0.5 + 2*x/3)
	}
	i = math.Log(d) / b
	return i, ia, (f/d - i) / b
}

// basis writes 1, C, S and the derivatives of C and S by a, w, B, G: but for the 1 real
// and imaginary parts.
func (l bendLaw) basis(th []float64, t float64, f *[parametersMost]float64) {
	u, i, ua, ub, ia, ib := l.shape(th[0], th[2], t)
	sin, cos := math.Sincos(th[1]*t + th[3]*i)
	c, s := u*cos, u*sin
	g := th[3]
	f[1], f[2] = c, s
	f[3], f[4] = ua*cos-s*g*ia, ua*sin+c*g*ia
	f[5], f[6] = -t*s, t*c
	f[7], f[8] = ub*cos-s*g*ib, ub*sin+c*g*ib
	f[9], f[10] = -i*s, i*c
}

// stop is the time at which the ring stops for good, +Inf for never.
func (l bendLaw) stop(a, b float64) float64 {
	if l == constant && b > 0 {
		return math.Log1p(a/b) / a
	}
	return math.Inf(1)
}

// fastest bounds the angular frequency at which the curve and its derivatives depart
// from exp(jwt). Where B is larger than a, they follow 1/(1 + Bt) or 1/sqrt(1 + 2Bt), whose
// sixth derivatives are those of exponentials of 3 and 4.7 times the rate B.
func (f *bend) fastest(a, own, w float64) float64 {
	return math.Hypot(math.Abs(a)+5*math.Abs(f.b), math.Max(math.Abs(own-w), math.Abs(own+f.g-w)))
}

// newBent is the problem with theta = (a, w, B, G) and beta = (c, p, q), about samples
// whose sums are those of n, or nil.
func newBent(s series, law bendLaw, n *nodal) *design {
	length := s.position(s.len() - 1)
	d := &design{
		s: s, ref: s.level(), width: 11, linear: []int{0, 1, 2},
		derivative: [][]product{{{3, 1}, {4, 2}}, {{5, 1}, {6, 2}}, {{7, 1}, {8, 2}}, {{9, 1}, {10, 2}}},
		eval:       law.basis,
		nodes: &byNodes{
			sums: n,
			fastest: func(th []float64, w float64) float64 {
				return (&bend{law, th[2], th[3]}).fastest(th[0], th[1], w)
			},
			corner: func(th []float64) float64 { return law.stop(th[0], th[2]) },
		},
		domain: func(th []float64) bool {
			a, w, b, g := th[0], th[1], th[2], th[3]
			return a > 0 && a < 8 && w > 0 && w < math.Pi && w+g > 0 && w+g < math.Pi &&
				b > -0.9*a && b < 20*(a+1/length) && (law != constant || b >= 0)
		},
	}
	d.prepare()
	return d
}

// fitBent fits an amplitude law, started at a ring (a, w) and a few strengths, with the
// sums of n.
func fitBent(s series, law bendLaw, n *nodal, a, w, tolerance float64) (best ringFit, ok bool) {
	d := newBent(s, law, n)
	for _, strength := range []float64{0.1, 1} {
		sol := minimise(d, []float64{a / (1 + strength/2), w, strength * a / (1 + strength/2), 0}, tolerance)
		if sol.stop == Singular || sol.stop == NotRun {
			continue
		}
		f := d.bentFit(sol, law)
		if !ok || f.rss < best.rss {
			best, ok = f, true
		}
	}
	return best, ok
}

// refitBent continues from the parameters of f on another window, whose start is
// shift intervals after that of f.
func refitBent(s series, f *ringFit, shift, tolerance float64) (ringFit, bool) {
	d := newBent(s, f.bend.law, f.nodes.over(s, f.w))
	u, _, _, _, _, _ := f.bend.law.shape(f.a, f.bend.b, math.Max(shift, -1/(f.a+math.Abs(f.bend.b))))
	power := u
	switch f.bend.law {
	case cubic:
		power = u * u
	case constant:
		power = 1 / math.Max(u, 1e-3)
	}
	g := f.bend.g * power
	if f.bend.law == constant {
		g = f.bend.g * u
	}
	sol := minimise(d, []float64{f.a, f.w, f.bend.b * power, g}, tolerance)
	if sol.stop == Singular || sol.stop == NotRun {
		return ringFit{}, false
	}
	return d.bentFit(sol, f.bend.law), true
}

func (d *design) bentFit(sol solution, law bendLaw) ringFit {
	b := sol.normal.beta
	return ringFit{
		s: d.s, a: sol.theta[0], w: sol.theta[1], c: b[0], p: b[1], q: b[2], ref: d.ref,
		bend: &bend{law, sol.theta[2], sol.theta[3]}, nodes: d.nodes.sums,
		rss: sol.normal.rss, n: d.n, stop: sol.stop, iterations: sol.iterations, normal: sol.normal,
	}
}

// atStart returns damped frequency and Q at the first instant of the window, where
// the rate is a + B and the angular frequency w + G; nil without an amplitude law.
func (f *ringFit) atStart(full *sym, timebase float64) *AtStart {
	if f.bend == nil {
		return nil
	}
	cov := sym{n: 2}
	for i := range 2 {
		for j := range i + 1 {
			cov.set(i, j, full.At(i, j)+full.At(i, j+2)+full.At(i+2, j)+full.At(i+2, j+2))
		}
	}
	q := quantitiesOf(f.a+f.bend.b, f.w+f.bend.g, f.s.dt, &cov, timebase)
	return &AtStart{q.DampedFrequency, q.Q}
}
