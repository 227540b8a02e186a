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

// stepResponse is a circuit whose drive falls from one to zero at sample first.
func stepResponse(w0, q float64, first, n int) []float64 {
	return switchedCircuit(w0*w0, n, func(i int) (drive, a float64) {
		if i < first {
			return 1, w0 / (2 * q)
		}
		return 0, w0 / (2 * q)
	})
}
