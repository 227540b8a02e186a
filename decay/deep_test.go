package decay

import (
	"math/rand/v2"
	"testing"
)

// TestDeepRecords: half a million samples and more, from less than three samples
// a cycle to two hundred thousand, give the ring to the Cramer-Rao bound (within
// five of it in each record).
func TestDeepRecords(t *testing.T) {
	for _, c := range []cell{
		{1e6, 2.6, 5, 0.5, 0},
		{3e4, 20, 5, 3, 0.2},
		{500, 1000, 5, 3, 0.2},
		{8, 50000, 30, 3, 0.2},
		{0.8, 200000, 30, 5, 0.2},
	} {
		for seed := range uint64(records(2)) {
			rng := rand.New(rand.NewPCG(seed, 7))
			y, first := c.record(rng)
			b := c.bound(t, y[first:])
			r := Analyze(channel(withNoise(y, 1/c.r, seed), 0, 1), Options{})
			if r.Quantities == nil {
				t.Errorf("%v, seed %d: refused, %v", c, seed, r.Findings)
				continue
			}
			within(t, c.String()+": Q", r.Quantities.Q.Value, c.q, 5*b.Q.U)
			within(t, c.String()+": fd", r.Quantities.DampedFrequency.Value, b.DampedFrequency.Value, 5*b.DampedFrequency.U)
		}
	}
}
