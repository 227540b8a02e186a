package decay

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestBendLaws checks the closed forms against values derived by quadrature
// (derived: amplitude laws): a = 1, A0 = 1, b or c = 0.2.
func TestBendLaws(t *testing.T) {
	for _, c := range []struct {
		law  bendLaw
		t, u float64
	}{
		{quadratic, 0.5, .5622825}, {quadratic, 1, .3265905}, {quadratic, 2, .1153819}, {quadratic, 3, .0418364},
		{constant, 0.5, .5278368}, {constant, 1, .2414553}, {constant, 2, 0},
	} {
		u, _, _, _, _, _ := c.law.shape(1, 0.2, c.t)
		within(t, c.law.String(), u, c.u, 6e-8)
	}
}

// TestBendShape checks u and I of every law against their differential equations
// integrated by the classical Runge-Kutta method, and the derivatives against differences.
func TestBendShape(t *testing.T) {
	rate := map[bendLaw]func(u, a, b float64) (du, di float64){
		quadratic: func(u, a, b float64) (float64, float64) { return -a*u - b*u*u, u },
		cubic:     func(u, a, b float64) (float64, float64) { return -a*u - b*u*u*u, u * u },
		constant:  func(u, a, b float64) (float64, float64) { return -a*u - b, u },
	}
	for law, f := range rate {
		for _, b := range []float64{1e-6, 0.01, 0.3, 2} {
			const a, h = 0.7, 1e-3
			u, i := 1.0, 0.0
			for k := 0; k < 600; k++ {
				k1, i1 := f(u, a, b)
				k2, i2 := f(u+h/2*k1, a, b)
				k3, i3 := f(u+h/2*k2, a, b)
				k4, i4 := f(u+h*k3, a, b)
				u += h / 6 * (k1 + 2*k2 + 2*k3 + k4)
				i += h / 6 * (i1 + 2*i2 + 2*i3 + i4)
				if u < 0.05 {
					break
				}
				at := float64(k+1) * h
				gu, gi, ua, ub, ia, ib := law.shape(a, b, at)
				if math.Abs(gu-u) > 1e-9 || math.Abs(gi-i) > 1e-9 {
					t.Fatalf("%v b=%g t=%g: u %.12g I %.12g, integrated %.12g %.12g", law, b, at, gu, gi, u, i)
				}
				if k%100 == 50 {
					const e = 1e-6
					up, ip, _, _, _, _ := law.shape(a+e, b, at)
					um, im, _, _, _, _ := law.shape(a-e, b, at)
					within(t, "du/da", ua, (up-um)/(2*e), 1e-6)
					within(t, "dI/da", ia, (ip-im)/(2*e), 1e-6)
					up, ip, _, _, _, _ = law.shape(a, b+e, at)
					um, im, _, _, _, _ = law.shape(a, b-e, at)
					within(t, "du/db", ub, (up-um)/(2*e), 1e-6)
					within(t, "dI/db", ib, (ip-im)/(2*e), 1e-6)
				}
			}
		}
	}
}

// TestConstantLossStops: around the moment at which the ring stops, wherever
// rounding puts it, the amplitude is small or zero and the phase goes on steadily.
func TestConstantLossStops(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 7))
	for range 20000 {
		a, b := math.Exp(-20*rng.Float64()), math.Exp(-15*rng.Float64())
		stop := math.Log1p(a/b) / a
		at := stop * (1 + 1e-9*(rng.Float64()-0.5))
		u, i, ua, ub, ia, ib := constant.shape(a, b, at)
		if !(u >= 0 && u < 1e-6) || math.IsNaN(i+ua+ub+ia+ib) || i < 0 {
			t.Fatalf("a %g, b %g, t %g: u %g, I %g", a, b, at, u, i)
		}
		if v, j, _, _, _, _ := constant.shape(a, b, 3*stop); v != 0 || math.Abs(j-i) > 1e-6*i {
			t.Fatalf("behind the stop: u %g, I %g, want 0 and %g", v, j, i)
		}
	}
}

// TestOneExponentialIsBiased: one exponential fitted to the quadratic law reads the
// time constant low, by the table derived by quadrature (tolerance 3e-4 of the
// ratio), and the amplitude law takes the bias out.
func TestOneExponentialIsBiased(t *testing.T) {
	for _, c := range []struct {
		b     float64
		ratio [3]float64
	}{
		{.01, [3]float64{.99342, .99534, .99556}},
		{.05, [3]float64{.96825, .97735, .97835}},
		{.2, [3]float64{.88774, .91753, .92044}},
		{.5, [3]float64{.77135, .82396, .82798}},
	} {
		for k, u := range []float64{1, 3, 5} {
			const n, w = 4000, 0.7
			a := u / n
			y := bentRing(n, a, c.b*a, w, 0)
			f, ok := fitRing(series{y: y, dt: 1}, a, w, fine)
			if !ok {
				t.Fatal("no fit")
			}
			within(t, "tau of one exponential", a/f.a, c.ratio[k], 3e-4)
			rng := rand.New(rand.NewPCG(5, uint64(k)))
			for i := range y {
				y[i] += 1e-4 * rng.NormFloat64()
			}
			r := Analyze(channel(y, 0, 1), Options{})
			if r.Status == Refused {
				t.Fatalf("refused: %v", r.Findings)
			}
			within(t, "small-signal rate", r.Quantities.DecayRate.Value, a, 4*r.Quantities.DecayRate.U)
			if !has(r, "amplitude-dependent") || r.Model != Amplitude {
				t.Errorf("b=%g u=%g: model %s, findings %v", c.b, u, r.Model, r.Findings)
			}
		}
	}
}

// bentRing integrates dA/dt = -aA - bA^2, dphi/dt = w + gA by the classical
// Runge-Kutta method, ten steps an interval.
func bentRing(n int, a, b, w, g float64) []float64 {
	y := make([]float64, n)
	amp, phase := 1.0, 0.0
	const sub = 10
	h := 1.0 / sub
	f := func(u float64) float64 { return -a*u - b*u*u }
	for i := range y {
		y[i] = amp * math.Cos(phase)
		for range sub {
			k1 := f(amp)
			k2 := f(amp + h/2*k1)
			k3 := f(amp + h/2*k2)
			k4 := f(amp + h*k3)
			phase += h * (w + g*(amp+h/2*k1)) // midpoint, exact to third order in the rate
			amp += h / 6 * (k1 + 2*k2 + 2*k3 + k4)
		}
	}
	return y
}
