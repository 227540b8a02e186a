package decay

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestGaps: the normal equations of a window with samples missing, of any depth, are the
// sums over those that are there.
func TestGaps(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 63))
	for _, n := range []int{1000, projectionFrom + 7, parallelFrom + 300} {
		s := series{y: benchRing(n, 78, 4), dt: 1, gaps: true}
		for i := range s.y {
			if rng.IntN(4) == 0 || i > n/5 && i < n/4 {
				s.y[i] = math.NaN()
			}
		}
		p := newPoles(s, 2, 1)
		theta := []float64{3 / float64(n), 0.08, 9 / float64(n), 0.11, 5 / float64(n)}
		got, list := p.gram(theta), p.list(theta)
		var want gram
		want.accumulate(s, p.ref, p.slot(len(list)), func(t float64, f *[parametersMost]float64) { p.basis(list, t, f) })
		for a := range want.g.n {
			size := math.Sqrt(want.g.At(a, a))
			within(t, "product with the samples", (got.b[a]-want.b[a])/size/math.Sqrt(p.yy), 0, 1e-13)
			for b := range want.g.n {
				within(t, "product of functions", (got.g.At(a, b)-want.g.At(a, b))/size/math.Sqrt(want.g.At(b, b)), 0, 1e-13)
			}
		}
	}
}
