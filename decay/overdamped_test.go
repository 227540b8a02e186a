package decay

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// The response above critical damping is the sum of two exponentials of rates
// r1, r2 with r1 r2 = omega0^2 and r1 + r2 = 2 alpha, so that the damping ratio is
// (r1 + r2)/(2 sqrt(r1 r2)) (any textbook of linear circuits). However close the
// rates, it must not be taken for a ring whose loss follows its amplitude.
func TestOverdampedIsNoRing(t *testing.T) {
	for _, fast := range []float64{6, 15, 30, 45} {
		for seed := range uint64(6) {
			t.Run(fmt.Sprintf("60 and %g us, seed %d", fast, seed), func(t *testing.T) {
				random := rand.New(rand.NewPCG(seed, 3))
				r1, r2 := 1/60e-6, 1/(fast*1e-6)
				y := make([]float64, 1500)
				for i := range y {
					s := float64(i) * 2.5e-7
					y[i] = 2*math.Exp(-s*r1) - math.Exp(-s*r2) + 0.002*random.NormFloat64()
				}
				r := Analyze(channel(y, 0, 2.5e-7), Options{})
				if r.Model != Overdamped || r.Status == Refused {
					t.Fatalf("%s, %s: %v", r.Model, r.Status, r.Findings)
				}
				zeta := (r1 + r2) / (2 * math.Sqrt(r1*r2))
				if q := r.Quantities.DampingRatio; math.Abs(q.Value-zeta) > 4*q.U {
					t.Errorf("damping ratio %v, want %.4f", q, zeta)
				}
			})
		}
	}
}

// In a long window the starts are sought on means, and the rates come from all samples:
// zeta and the mean rate of two exponentials that are given.
func TestOverdampedDeep(t *testing.T) {
	const n, slow, fast = 200000, 5e-5, 2e-4
	random := normal01(6)
	y := make([]float64, n)
	for i := range y {
		u := float64(i)
		y[i] = math.Exp(-slow*u) + math.Exp(-fast*u) + 0.003*random()
	}
	f, ok := fitSecondOrder(series{y: y, dt: 1}, 0, n)
	if a := (slow + fast) / 2; !ok || f.used != n || math.Abs(f.a-a) > 4*0.003*math.Sqrt(f.cov.At(0, 0)) {
		t.Errorf("rate %g from %d samples, want %g", f.a, f.used, a)
	}
	if d := -sq((fast - slow) / 2); math.Abs(f.d-d) > 4*0.003*math.Sqrt(f.cov.At(1, 1)) {
		t.Errorf("D %g, want %g", f.d, d)
	}
}

// TestOverdampedIsNoGoodRing: no response of a circuit that does not swing, discharged
// from a level (x = e^-at (cosh st + a/s sinh st), the solution of x" + 2ax' + w0²x = 0),
// passes without a warning as a ring beside an exponential.
func TestOverdampedIsNoGoodRing(t *testing.T) {
	const n, before, zeta, w0 = 3000, 300, 1.3, 0.02
	a, s := zeta*w0, w0*math.Sqrt(zeta*zeta-1)
	y := make([]float64, n)
	for i := range y {
		if y[i] = 1; i >= before {
			u := float64(i - before)
			y[i] = math.Exp(-a*u) * (math.Cosh(s*u) + a/s*math.Sinh(s*u))
		}
	}
	for seed := range uint64(30) {
		r := Analyze(channel(withNoise(y, 0.003, seed), 0, 1), Options{})
		if r.Status == Good {
			t.Errorf("seed %d: %s, damping ratio %s, %v", seed, r.Model, r.Quantities.DampingRatio, r.Findings)
		}
	}
}
