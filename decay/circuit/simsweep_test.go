package circuit

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"dieaway/capture"
	"dieaway/decay/driven"
)

// TestSimulatedSweep: heights and half-power frequencies (derived).
func TestSimulatedSweep(t *testing.T) {
	for _, w := range []struct{ q, fC, peak, f1, f2 float64 }{
		{2, .93541435, 2.065591, .78077641, 1.28077641}, {5, .98994949, 5.025189, .90498756, 1.10498756},
		{50, .99989999, 50.002500, .99005000, 1.01005000}, {100, .99997500, 100.001250, .99501250, 1.00501250},
	} {
		const l, c = 10e-3, 10e-9
		r := math.Sqrt(l/c) / w.q
		f0 := 1 / (2 * math.Pi * math.Sqrt(l*c))
		b := benchOf(Series, l, c, r, 0, 0, 0, 0)
		gain := func(part capture.Part, x float64) float64 {
			h, err := (&SweepSimulation{Bench: b, Frequencies: []float64{x * f0}, Across: part}).Sweep()
			if err != nil {
				t.Fatal(err)
			}
			return cmplx.Abs(h[0])
		}
		closeTo(t, "V_C at f0", gain(capture.Capacitor, 1), w.q, 1e-9)
		closeTo(t, "V_L at f0", gain(capture.Inductor, 1), w.q, 1e-9)
		closeTo(t, "V_R at f0", gain(capture.Resistor, 1), 1, 1e-9)
		closeTo(t, "peak of V_C", gain("", w.fC), w.peak, 1e-6)
		closeTo(t, "half power below", gain(capture.Resistor, w.f1), math.Sqrt(0.5), 1e-6)
		closeTo(t, "half power above", gain(capture.Resistor, w.f2), math.Sqrt(0.5), 1e-6)
		closeTo(t, "V_L/V_C", gain(capture.Inductor, 1.1)/gain(capture.Capacitor, 1.1), 1.21, 1e-9)
		if notch := gain(capture.Both, 1); notch > 1e-9 {
			t.Errorf("coil and capacitor together have %g at f0, want 0", notch)
		}
	}
}

// TestSimulatedSweepAtTheBound fits simulated sweeps: their scatter is the bound of
// a driven sweep with magnitude and phase (derived), sd(Q)/Q =
// (sigma/A) sqrt(8 df/(pi B)), 1.080 times more for a span of five half-bandwidths
// either way.
func TestSimulatedSweepAtTheBound(t *testing.T) {
	const l, c, q, sigma, points, seeds = 10e-3, 10e-9, 100.0, 0.5, 201, 60
	b := benchOf(Series, l, c, math.Sqrt(l/c)/q, 0, 0, 0, 0)
	s := &SweepSimulation{Bench: b, Noise: sigma}
	f0 := 1 / (2 * math.Pi * math.Sqrt(l*c))
	var err error
	if s.Frequencies, err = s.Around(5*f0/q, points); err != nil {
		t.Fatal(err)
	}
	squares := 0.0
	for seed := range uint64(seeds) {
		s.Random = rand.New(rand.NewPCG(seed, 4))
		h, err := s.Sweep()
		if err != nil {
			t.Fatal(err)
		}
		table := &capture.Sweep{Frequency: s.Frequencies, Part: capture.Capacitor, Unit: "V", Cartesian: true}
		for _, v := range h {
			table.Magnitude, table.Phase = append(table.Magnitude, cmplx.Abs(v)), append(table.Phase, cmplx.Phase(v))
		}
		r := driven.Analyze(table, driven.Options{})
		if r.Quantities == nil {
			t.Fatalf("refused: %v", r.Findings)
		}
		off := r.Quantities.Q.Value/q - 1
		squares += off * off
	}
	want := 1.080 * sigma / q * math.Sqrt(8*5/math.Pi/(points-1))
	// The scatter of a scatter from n values is 1/sqrt(2n): three times that.
	closeTo(t, "scatter of Q over the bound", math.Sqrt(squares/seeds)/want, 1, 3/math.Sqrt(2*seeds))
}
