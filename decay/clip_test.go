package decay

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// TestClippedLevel: a capacitor voltage that is cut off at both ends, the level
// before the edge with it, is named, and the ring still comes out right.
func TestClippedLevel(t *testing.T) {
	const q, step = 20, 1.0 / 213
	y := stepResponse(2*math.Pi/31.4, q, 111, 1111)
	for seed := range uint64(20) {
		rng := rand.New(rand.NewPCG(seed, 71))
		x := make([]float64, len(y))
		for i, v := range y {
			v = step * math.Round((v+0.004*rng.NormFloat64())/step)
			x[i] = math.Max(-0.6, math.Min(0.596, v))
		}
		r := Analyze(channel(x, 0, 1), Options{})
		if r.Quantities == nil || !has(r, "clipped") {
			t.Fatalf("seed %d: %s, %v", seed, r.Status, r.Findings)
		}
		within(t, "Q", r.Quantities.Q.Value, q, 4*r.Quantities.Q.U)
	}
}

// TestClippedLater: a square wave whose second edges ring beyond the range is named
// although the first decay is whole, and no decay is measured in pieces.
func TestClippedLater(t *testing.T) {
	const edges, between, step = 6, 2500, 1.0 / 128
	y := drivenCircuit(kindA, kindA, edges*between, func(i int) float64 { return float64((i/between + 1) % 2) })
	for seed := range uint64(10) {
		rng := rand.New(rand.NewPCG(seed, 77))
		x := make([]float64, len(y))
		for i, v := range y {
			v = step * math.Round((v+0.3*step*rng.NormFloat64())/step)
			x[i] = math.Max(-1.3, math.Min(1.3, v))
		}
		r := Analyze(channel(x, 0, 1), Options{})
		if r.Quantities == nil || !has(r, "clipped") {
			t.Fatalf("seed %d: %s, %v", seed, r.Status, r.Findings)
		}
		if n := len(r.Decays); n != edges-1 {
			t.Errorf("seed %d: %d decays behind %d edges", seed, n, edges-1)
		}
		within(t, "Q", r.Quantities.Q.Value, kindQ, 4*r.Quantities.Q.U)
	}
}

// TestSlowNoise: strongly coloured noise alone, up to what is all but a random walk,
// gives no decay that passes as good, and hardly any that is measured at all.
func TestSlowNoise(t *testing.T) {
	for _, rho := range []float64{0.9, 0.95, 0.99, 0.9999} {
		t.Run(fmt.Sprint(rho), func(t *testing.T) {
			measured := 0
			const n = 12
			for seed := range uint64(n) {
				rng := rand.New(rand.NewPCG(seed, 73))
				r := Analyze(channel(autoregressive(rng, 2500, rho), 0, 1), Options{})
				if r.Status == Good {
					t.Errorf("seed %d: good, Q %v", seed, r.Quantities.Q)
				}
				if r.Quantities != nil {
					measured++
				}
			}
			if measured > n/4 {
				t.Errorf("%d of %d records of noise were measured", measured, n)
			}
		})
	}
}

// TestExponentialAfterLevel: a bare exponential behind a level is refused; the
// corner of the edge is no second exponential.
func TestExponentialAfterLevel(t *testing.T) {
	for seed := range uint64(20) {
		y := make([]float64, 2000)
		for i := range y {
			y[i] = math.Exp(-math.Max(0, float64(i-300)) / 200)
		}
		r := Analyze(channel(withNoise(y, 0.01, seed), 0, 1e-6), Options{})
		if r.Status != Refused || !has(r, "overdamped") {
			t.Errorf("seed %d: %s, %v", seed, r.Status, r.Findings)
		}
	}
}
