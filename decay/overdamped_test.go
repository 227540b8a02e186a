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
