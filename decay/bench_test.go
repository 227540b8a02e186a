package decay

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// BenchmarkAnalyze runs the whole analysis on records of growing length, of the
// same ring at 20 samples a cycle over four time constants; bytes are those of
// the samples in memory.
func BenchmarkAnalyze(b *testing.B) {
	for _, n := range []int{2500, 100_000, 10_000_000} {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			ch := channel(benchRing(n, 20, 4), 0, 1e-7)
			b.SetBytes(int64(8 * n))
			for b.Loop() {
				Analyze(ch, Options{})
			}
		})
	}
}

func benchRing(n int, spc, u float64) []float64 {
	rng := rand.New(rand.NewPCG(1, 1))
	y := make([]float64, n)
	a, w := u/float64(n), 2*math.Pi/spc
	for i := range y {
		y[i] = math.Exp(-a*float64(i))*math.Cos(w*float64(i)) + 0.01*rng.NormFloat64()
	}
	return y
}

// BenchmarkKinds runs the analysis on one record of each kind of spoilt record.
func BenchmarkKinds(b *testing.B) {
	for _, k := range kinds {
		b.Run(string(k.code), func(b *testing.B) {
			rng := rand.New(rand.NewPCG(1, 53))
			ch := channel(withNoise(k.make(rng), k.noise, 1), 0, 1)
			for b.Loop() {
				Analyze(ch, Options{})
			}
		})
	}
}

// BenchmarkPass is one evaluation of the normal equations: a pass over memory.
func BenchmarkPass(b *testing.B) {
	const n = 10_000_000
	p := newRing(series{y: benchRing(n, 20, 4), dt: 1})
	b.SetBytes(8 * n)
	for b.Loop() {
		p.near.list = nil
		p.evaluate([]float64{4.0 / n, 2 * math.Pi / 20})
	}
}
