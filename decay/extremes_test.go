package decay

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestExtremes: of stretches of every kind, the first smallest and the first largest
// sample are those that looking at each finds.
func TestExtremes(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 67))
	y := make([]float64, 7*rangeBlock+11)
	for i := range y {
		switch y[i] = float64(rng.IntN(40)); { // few levels, so that many are equal
		case rng.IntN(10) == 0:
			y[i] = math.NaN()
		}
	}
	for i := range 2 * rangeBlock {
		y[3*rangeBlock+i] = math.NaN()
	}
	e := NewExtremes(y)
	for range 20000 {
		first := rng.IntN(len(y))
		last := first + rng.IntN(len(y)-first+1)
		lo, hi := -1, -1
		for i := first; i < last; i++ {
			if v := y[i]; v == v {
				if lo < 0 || v < y[lo] {
					lo = i
				}
				if hi < 0 || v > y[hi] {
					hi = i
				}
			}
		}
		if l, h := e.Of(first, last); l != lo || h != hi {
			t.Fatalf("samples %d to %d: %d and %d, want %d and %d", first, last, l, h, lo, hi)
		}
	}
}

// TestSteepest: passing over stretches of small range misses no step.
func TestSteepest(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 71))
	y := benchRing(9*rangeBlock+5, 40, 6)
	for range 50 {
		y[rng.IntN(len(y))] += 0.1 * rng.NormFloat64()
		s := newSeries(channel(y, 0, 1))
		first := rng.IntN(3 * rangeBlock)
		part := s.slice(first, s.len()-rng.IntN(3*rangeBlock))
		quick, slow := newPyramid(part), newPyramid(series{y: part.y})
		for k, level := range quick.levels {
			if got, want := quick.steepest(k, 0, level.len()), slow.steepest(k, 0, level.len()); got != want {
				t.Errorf("level %d: step behind sample %d, want %d", k, got, want)
			}
		}
	}
}
