package decay

import (
	"math"
	"testing"
)

// TestStepStart: a capacitor voltage leaves its level without a kink when the
// drive steps. The start must not take in the level: the intervals hold the truth
// for heavily and lightly damped rings, and the mean Q is right.
func TestStepStart(t *testing.T) {
	n := records(40)
	for _, q := range []float64{0.6, 0.8, 1, 1.5, 2, 3, 5, 20} {
		for _, r := range []float64{100, 300} {
			const w0 = 2 * math.Pi / 300
			y := stepResponse(w0, q, 500, 4000)
			inside, m, refused := 0, mean{}, 0
			for seed := range uint64(n) {
				res := Analyze(channel(withNoise(y, 1/r, seed), 0, 1), Options{})
				if res.Quantities == nil || math.IsNaN(res.Quantities.DampedFrequency.Value) {
					refused++
					continue
				}
				m.add(res.Quantities.Q.Value, res.Quantities.Q.U)
				if math.Abs(res.Quantities.Q.Value-q) < 1.96*res.Quantities.Q.U {
					inside++
				}
			}
			coverage := float64(inside) / m.n
			t.Logf("Q %g, A/sigma %g: mean %.5g, u %.2g, scatter %.2g, coverage %.2f, refused %d", q, r, m.value(), m.u/m.n, m.scatter(), coverage, refused)
			if coverage < 0.8 || refused > n/10 {
				t.Errorf("Q %g, A/sigma %g: coverage %.2f, %d refused", q, r, coverage, refused)
			}
		}
	}
}

// stepResponse integrates y” + (w0/Q) y' + w0^2 (y - drive) = 0, a drive that
// falls from one to zero at sample first, by the classical Runge-Kutta method.
func stepResponse(w0, q float64, first, n int) []float64 {
	const sub = 8
	h := 1.0 / sub
	y, v := 1.0, 0.0
	out := make([]float64, n)
	f := func(y, v float64) float64 { return -w0/q*v - w0*w0*y }
	for i := range out {
		out[i] = y
		if i < first {
			continue
		}
		for range sub {
			k1, l1 := v, f(y, v)
			k2, l2 := v+h/2*l1, f(y+h/2*k1, v+h/2*l1)
			k3, l3 := v+h/2*l2, f(y+h/2*k2, v+h/2*l2)
			k4, l4 := v+h*l3, f(y+h*k3, v+h*l3)
			y += h / 6 * (k1 + 2*k2 + 2*k3 + k4)
			v += h / 6 * (l1 + 2*l2 + 2*l3 + l4)
		}
	}
	return out
}
