package decay

import (
	"math/rand/v2"
	"slices"
	"testing"
)

// TestUnchecked: what is passed over in search of samples far off the fit holds none,
// and of a clean record the most is passed over.
func TestUnchecked(t *testing.T) {
	const n = 6 * parallelFrom
	for seed := range uint64(8) {
		rng := rand.New(rand.NewPCG(seed, 73))
		y := benchRing(n, 20, 3)
		for range seed { // of seven to nine times the noise, and all are found
			y[n/8+rng.IntN(7*n/8)] += 0.01 * (11 + 2*rng.Float64())
		}
		s := newSeries(channel(y, 0, 1))
		g, ok := findGate(s, false, false, "")
		if !ok {
			t.Fatal("no decay")
		}
		window := s.slice(g.first, g.last)
		limit := glitchSigma * g.fit.sigma()
		var some []int
		looked := 0
		for _, part := range g.unchecked(limit) {
			some = append(some, g.far(window, part[0], part[1], limit)...)
			looked += part[1] - part[0]
		}
		all := g.far(window, g.first, g.last, limit)
		if !slices.Equal(some, all) || len(all) < int(seed) {
			t.Errorf("%d spikes: %v far off, %v of all samples", seed, some, all)
		}
		if seed == 0 && looked > n/2 {
			t.Errorf("%d of %d samples of a clean record were looked at again", looked, n)
		}
	}
}
