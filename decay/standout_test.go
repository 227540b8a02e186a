package decay

import (
	"math"
	"testing"
)

// slowNoise is Gaussian noise of unit variance, x(n) = rho x(n-1) + e(n).
func slowNoise(n int, rho float64) []float64 {
	random := normal01(5)
	y, x := make([]float64, n), 0.0
	for i := range y {
		x = rho*x + math.Sqrt(1-rho*rho)*random()
		y[i] = x
	}
	return y
}

// Noise of any colour has no edge that stands out; a step of eight standard deviations
// does, and so does a short ring on a level whose means do not see it.
func TestStandsOut(t *testing.T) {
	const n = 50000
	for _, rho := range []float64{0, 0.9, 0.99, 0.999} {
		if newPyramid(series{y: slowNoise(n, rho), dt: 1}).standsOut() {
			t.Errorf("noise of rho %g stands out", rho)
		}
		step, ring := slowNoise(n, rho), slowNoise(n, rho)
		for i := n / 2; i < n; i++ {
			step[i] += 8
			u := float64(i - n/2)
			ring[i] += 8 * math.Exp(-u/100) * math.Cos(2*math.Pi*u/16)
		}
		for name, y := range map[string][]float64{"step": step, "ring": ring} {
			if !newPyramid(series{y: y, dt: 1}).standsOut() {
				t.Errorf("a %s in noise of rho %g does not stand out", name, rho)
			}
		}
	}
}
