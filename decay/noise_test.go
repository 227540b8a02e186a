package decay

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

func TestMedian(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for n := range 200 {
		x := make([]float64, n)
		for i := range x {
			x[i] = float64(rng.IntN(1 + n/2))
		}
		want := 0.0
		if y := slices.Sorted(slices.Values(x)); n > 0 {
			want = (y[(n-1)/2] + y[n/2]) / 2
		}
		if got := median(x); got != want {
			t.Fatalf("median of %d is %g, want %g", n, got, want)
		}
	}
}

// TestNoiseFactor: the density of AR(1) noise over that of white noise of the same
// rms at 20 samples per cycle (derived): sqrt((1-r^2)/(1+r^2-2r cos w)).
func TestNoiseFactor(t *testing.T) {
	for _, c := range []struct{ rho, factor float64 }{{0.5, 1.584}, {0.9, 1.392}, {-0.5, 0.584}} {
		v := noise{ar: []float64{c.rho}, gain: 1 - c.rho*c.rho}
		within(t, "factor", v.factor(2*math.Pi/20), c.factor, 6e-4)
		rng := rand.New(rand.NewPCG(3, 1))
		e := autoregressive(rng, 1<<16, c.rho)
		within(t, "estimated factor", noiseOf(e, 1).factor(2*math.Pi/20), c.factor, 0.03)
	}
}
