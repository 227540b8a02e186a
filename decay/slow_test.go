package decay

import (
	"fmt"
	"math/rand/v2"
	"testing"
)

// Slow noise alone, an autoregression of the first order close to a random walk,
// holds no ring: nothing that is found in it may be called good.
func TestSlowNoiseIsNeverGood(t *testing.T) {
	for _, rho := range []float64{0.9, 0.99, 0.999, 0.9999} {
		t.Run(fmt.Sprint(rho), func(t *testing.T) {
			for seed := range uint64(12) {
				rng := rand.New(rand.NewPCG(seed, 9))
				y, x := make([]float64, 2500), 0.0
				for i := range y {
					x = rho*x + rng.NormFloat64()
					y[i] = x
				}
				if r := Analyze(channel(y, 0, 1e-7), Options{}); r.Status == Good {
					t.Errorf("seed %d: %v", seed, r.Quantities.Q)
				}
			}
		})
	}
}
