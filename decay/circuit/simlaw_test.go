package circuit

import (
	"math"
	"testing"
)

// TestAmplitudeLaw follows the envelope of a lossy core: dA/dt = -aA - bA^2
// (Rayleigh region; derived) with b A0/a = 0.2, at t = 0.5, 1, 2, 3 of 1/a.
func TestAmplitudeLaw(t *testing.T) {
	const l, c, r = 1e-3, 1e-9, 2.0 // Q 500, 1/a 1 ms
	const tau = 2 * l / r
	s := &Simulation{Bench: benchOf(Series, l, c, r, 0, 0, 0, 0), Interval: tau / 2, Samples: 8, Amplitude: 1, LossGrowth: 0.2}
	run, err := s.begin()
	if err != nil {
		t.Fatal(err)
	}
	for _, w := range []struct{ at, amplitude float64 }{{0.5, .5622825}, {1, .3265905}, {2, .1153819}, {3, .0418364}} {
		run.advance(w.at * tau)
		if a := run.x.amplitude(); math.Abs(a-w.amplitude) > 2e-3*w.amplitude { // first order in 1/Q
			t.Errorf("amplitude %.7f after %g time constants, want %.7f", a, w.at, w.amplitude)
		}
	}
}

// TestFrequencyShift: the ring of a lossy core is slow while it is strong.
func TestFrequencyShift(t *testing.T) {
	const l, c, r = 1e-3, 1e-9, 20.0
	f0 := 1 / (2 * math.Pi * math.Sqrt(l*c))
	s := &Simulation{Bench: benchOf(Series, l, c, r, 0, 0, 0, 0), Interval: 1 / f0 / 400, Samples: 12000, Amplitude: 1, FrequencyShift: -0.01}
	y := simulated(t, s)
	// The amplitude is exp(-pi n/Q) after n cycles, and the shift in proportion to it.
	for _, w := range []struct{ first, last int }{{0, 800}, {10000, 12000}} {
		got, n := 400/crossings(y[w.first:w.last])-1, float64(w.first+w.last)/800
		if want := -0.01 * math.Exp(-math.Pi*n/50); math.Abs(got-want) > 2e-4 {
			t.Errorf("shift %g after %g cycles, want about %g", got, n, want)
		}
	}
}

// crossings returns the mean period in samples between zeros that fall.
func crossings(y []float64) float64 {
	var at []float64
	for i := 1; i < len(y); i++ {
		if y[i-1] > 0 && y[i] <= 0 {
			at = append(at, float64(i-1)+y[i-1]/(y[i-1]-y[i]))
		}
	}
	return (at[len(at)-1] - at[0]) / float64(len(at)-1)
}

// TestSecondMode adds the closed forms of two rings.
func TestSecondMode(t *testing.T) {
	const l, c, r, interval = 1e-3, 1e-9, 20.0, 2e-7
	f2, q2 := 190e3, 33.0
	s := &Simulation{Bench: benchOf(Series, l, c, r, 0, 0, 0, 0), Interval: interval, Samples: 900, Amplitude: 1,
		Second: &SecondMode{Frequency: f2, Q: q2, Strength: 0.3}}
	w2 := 2 * math.Pi * f2
	for i, y := range simulated(t, s) {
		at := float64(i) * interval
		if want := fallen(r, l, c, at) + 0.3*fallen(w2/q2, 1, 1/(w2*w2), at); math.Abs(y-want) > 1e-9 {
			t.Fatalf("sample %d is %.12f, want %.12f", i, y, want)
		}
	}
}
