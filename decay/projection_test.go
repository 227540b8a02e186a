package decay

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"
)

// TestProjection: sums over nodes are those of the definition, for poles up to
// as far away as they may be, and of a window that grew.
func TestProjection(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 61))
	y := make([]float64, 3*parallelFrom+77)
	const ref, w, most = 3.5, 0.31, projectionReach / (nodeBlock / 2)
	for i := range y {
		y[i] = ref + math.Exp(-1e-5*float64(i))*math.Cos(w*float64(i)+1) + 0.1*rng.NormFloat64()
	}
	p := newRing(series{y: y[:parallelFrom+5], dt: 1})
	p.projection(pole{0, w})
	whole := p.extended(series{y: y, dt: 1})
	for _, d := range []complex128{0, complex(-1e-5, 0), complex(-0.99*most, 0), complex(0, 0.99*most)} {
		z := pole{-real(d), w + imag(d)}
		got := whole.projection(z)
		var want [2]complex128
		var size [2]float64
		for n, v := range y {
			term := complex(v-whole.ref, 0) * z.at(float64(n))
			want[0] += term
			want[1] += complex(float64(n), 0) * term
			size[0] += cmplx.Abs(term)
			size[1] += float64(n) * cmplx.Abs(term)
		}
		for k := range want {
			// Phases of 60,000 rad are rounded to some 1e-12.
			within(t, "sum over its terms", cmplx.Abs(got[k]-want[k])/size[k], 0, 1e-12)
		}
	}
	if len(whole.near.list) != 1 {
		t.Errorf("%d sets of sums about poles within reach of the first", len(whole.near.list))
	}
}
