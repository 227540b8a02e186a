package circuit

import (
	"bytes"
	"math"
	"math/cmplx"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// benchOf is a bench file of exact values; 0 is left out.
func benchOf(topology Topology, l, c, resistor, coil, source, probe, probeC float64) *Bench {
	return &Bench{Topology: topology, Inductance: given(l, "H"), Capacitance: given(c, "F"), Resistor: given(resistor, "ohm"),
		CoilResistance: given(coil, "ohm"), RingDown: setupOf(source, probe, probeC), Sweep: setupOf(source, probe, probeC)}
}

func setupOf(source, probe, probeC float64) Setup {
	return Setup{SourceResistance: given(source, "ohm"), ProbeResistance: given(probe, "ohm"), ProbeCapacitance: given(probeC, "F"),
		MeterBandwidth: quantity.Unknown("Hz")}
}

func simulated(t *testing.T, s *Simulation) []float64 {
	t.Helper()
	y, err := s.RingDown()
	if err != nil {
		t.Fatal(err)
	}
	return y
}

// fallen is the capacitor's voltage of a series circuit whose source fell from one
// volt at time zero, from the roots of its characteristic equation
// L C s^2 + R C s + 1 = 0: v(0) = 1, v'(0) = 0.
func fallen(r, l, c, t float64) float64 {
	if t <= 0 {
		return 1
	}
	a, root := complex(r/(2*l), 0), cmplx.Sqrt(complex(r*r/(4*l*l)-1/(l*c), 0))
	s1, s2, at := root-a, -root-a, complex(t, 0)
	return real((s1*cmplx.Exp(s2*at) - s2*cmplx.Exp(s1*at)) / (s1 - s2))
}

// TestRingDownAgainstClosedForm: the circuits of OpenStax, University Physics 2
// (derived), ringing and overdamped, against the roots of their equation.
func TestRingDownAgainstClosedForm(t *testing.T) {
	for _, w := range []struct{ r, l, c float64 }{
		{0.2, 4e-3, 2e-6}, {100, 150e-3, 0.25e-6}, {100, 2, 5e-6}, {2, 10e-3, 1.5e-6}, {5, 5e-3, 500e-6},
		{40, 2e-3, 0.5e-3}, {4, 3e-3, 0.8e-3}, {200, 5e-3, 6e-6}, // overdamped
	} {
		interval := 0.037 * 2 * math.Pi * math.Sqrt(w.l*w.c)
		s := &Simulation{Bench: benchOf(Series, w.l, w.c, w.r, 0, 0, 0, 0), Interval: interval, Samples: 5000, Pretrigger: 11, Amplitude: 1}
		for i, y := range simulated(t, s) {
			if want := fallen(w.r, w.l, w.c, float64(i-11)*interval); math.Abs(y-want) > 1e-9 {
				t.Fatalf("%v: sample %d is %.12f, want %.12f", w, i, y, want)
			}
		}
	}
}

// TestSquareWaveAgainstClosedForm adds up what each edge of a square wave does.
func TestSquareWaveAgainstClosedForm(t *testing.T) {
	const r, l, c, wave, interval = 100, 150e-3, 0.25e-6, 130.7, 31e-6
	s := &Simulation{Bench: benchOf(Series, l, c, r, 0, 0, 0, 0), Interval: interval, Samples: 1500, Pretrigger: 200, Source: 1.5, SquareWave: wave}
	for i, y := range simulated(t, s) {
		at, want := float64(i-200)*interval, 1.0 // long ago, at an odd edge, it went up
		for m := -60; float64(m)/(2*wave) < at; m++ {
			step := fallen(r, l, c, at-float64(m)/(2*wave)) - 1
			if m%2 != 0 {
				step = -step
			}
			want += step
		}
		if math.Abs(y-1.5*want) > 1e-9 {
			t.Fatalf("sample %d is %.12f, want %.12f", i, y, 1.5*want)
		}
	}
}

// TestParallelAgainstRungeKutta lets go of the current of a coil.
func TestParallelAgainstRungeKutta(t *testing.T) {
	const l, c, coil, source, interval = 1e-3, 1e-9, 3.0, 20e3, 1e-7
	s := &Simulation{Bench: benchOf(Parallel, l, c, 47e3, coil, source, 1e6, 12e-12), Interval: interval, Samples: 400, Source: 10}
	got := simulated(t, s)
	across := 1 / (1/47e3 + 1/1e6 + 1/coil) // at rest the coil is its resistance
	v := 10 * across / (source + across)
	p := physical{parallel: true, rs: source, rf: 47e3, rc: coil, rp: 1e6, l: l, c: c, cp: 12e-12, startV: v, startI: -v / coil}
	for i, want := range p.ring(interval, 400, 40) {
		if math.Abs(got[i]-want) > 1e-7 {
			t.Fatalf("sample %d is %.9f, want %.9f", i, got[i], want)
		}
	}
}

// TestSimulatedLoading measures simulated ring-downs and wants what is worked out
// for loads (derived from the characteristic equation).
func TestSimulatedLoading(t *testing.T) {
	for _, w := range []struct{ probe, probeC, f0, q, tau float64 }{
		{10e6, 12e-12, 15905.9616, 98.95177, 1.9802215e-3},
		{10e6, 15e-12, 15903.5791, 98.93724, 1.9802274e-3},
		{1e6, 15e-12, 15903.6506, 90.85381, 1.8184294e-3},
		{1e6, 100e-12, 15836.5879, 90.53987, 1.8198198e-3},
	} {
		q := fitted(t, &Simulation{Bench: benchOf(Series, 10e-3, 10e-9, 0, 10, 0, w.probe, w.probeC), Interval: 5e-6, Samples: 2000, Amplitude: 1})
		closeTo(t, "f0", q.NaturalFrequency.Value, w.f0, 1e-7)
		closeTo(t, "Q", q.Q.Value, w.q, 1e-6)
		closeTo(t, "tau", q.TimeConstant.Value, w.tau, 1e-6)
	}
	// A source of 50 ohm left in the loop (the same table).
	q := fitted(t, &Simulation{Bench: benchOf(Series, 10e-3, 10e-9, 0, 10, 50, 0, 0), Interval: 5e-6, Samples: 600, Amplitude: 1})
	closeTo(t, "Q", q.Q.Value, 16.667, 3e-5)
}

// TestSimulatedTextbook: OpenStax, University Physics 2 (derived), exact values.
func TestSimulatedTextbook(t *testing.T) {
	for _, w := range []struct{ r, l, c, f0, q float64 }{
		{0.2, 4e-3, 2e-6, 1779.40636, 223.606798}, {100, 150e-3, 0.25e-6, 821.872592, 7.745967},
		{100, 2, 5e-6, 50.3292121, 6.3245553}, {2, 10e-3, 1.5e-6, 1299.494669, 40.824829},
	} {
		tau := 2 * w.l / w.r
		q := fitted(t, &Simulation{Bench: benchOf(Series, w.l, w.c, w.r, 0, 0, 0, 0), Interval: tau * 2e-3, Samples: 2000, Amplitude: 4})
		closeTo(t, "f0", q.NaturalFrequency.Value, w.f0, 1e-7)
		closeTo(t, "Q", q.Q.Value, w.q, 1e-6)
	}
}

// fitted fits a simulated record with a trace of noise.
func fitted(t *testing.T, s *Simulation) *decay.Quantities {
	t.Helper()
	s.Noise = 1e-8
	y := simulated(t, s)
	ch := &capture.Channel{Name: "v", Number: 1, Unit: "V", Samples: y,
		Axis: &capture.Axis{N: len(y), Interval: s.Interval, Start: -float64(s.Pretrigger) * s.Interval}}
	r := decay.Analyze(ch, decay.Options{})
	if r.Quantities == nil {
		t.Fatalf("refused: %v", r.Findings)
	}
	return r.Quantities
}

// TestSimulatedNoise: standard deviation and correlation of neighbours; the
// converter adds step/sqrt(12) (IEEE 1057, from memory) and clips.
func TestSimulatedNoise(t *testing.T) {
	still := &Simulation{Bench: benchOf(Series, 1e-3, 1e-9, 20, 0, 0, 0, 0), Interval: 1e-7, Samples: 200000, Noise: 0.02, NoiseCorrelation: 0.8}
	y := simulated(t, still)
	var sum, beside float64
	for i, v := range y {
		sum += v * v
		if i > 0 {
			beside += v * y[i-1]
		}
	}
	closeTo(t, "standard deviation", math.Sqrt(sum/float64(len(y))), 0.02, 0.02)
	closeTo(t, "correlation", beside/sum, 0.8, 0.02)

	still.NoiseCorrelation, still.Converter = 0, Converter{Bits: 8, FullScale: 5.12}
	sum = 0
	for _, v := range simulated(t, still) {
		sum += v * v
		if levels := v / 0.02; math.Abs(levels-math.Round(levels)) > 1e-9 {
			t.Fatalf("%g V is no level of the converter", v)
		}
	}
	closeTo(t, "with converter", math.Sqrt(sum/200000), math.Sqrt(0.02*0.02+0.02*0.02/12), 0.02)

	clipping := &Simulation{Bench: still.Bench, Interval: 1e-7, Samples: 500, Amplitude: 3, Converter: Converter{Bits: 8, FullScale: 4}}
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range simulated(t, clipping) {
		lo, hi = math.Min(lo, v), math.Max(hi, v)
	}
	if lo != -2 || hi != 2-4.0/256 {
		t.Errorf("clipped to %g and %g V, want -2 and %g", lo, hi, 2-4.0/256)
	}
}

// TestSimulationsAreRead: what is written is read without a flag.
func TestSimulationsAreRead(t *testing.T) {
	for _, interval := range []float64{1e-7, 2e-7, 1e-6, 5e-3, 4e-10, 1.0 / 3e6, 2} {
		l := 1e3 * interval * interval / 4e-9
		s := &Simulation{Bench: benchOf(Series, l, 1e-9, math.Sqrt(l/1e-9)/20, 0, 0, 0, 0), Interval: interval, Samples: 700, Pretrigger: 70,
			Amplitude: 1, Noise: 0.004, Converter: Converter{Bits: 10, FullScale: 4}}
		s.Bench.Device = "loop 07, spare"
		r, err := s.Record()
		if err != nil {
			t.Fatal(err)
		}
		y := r.Samples
		var text bytes.Buffer
		if err := r.Write(&text); err != nil {
			t.Fatal(err)
		}
		c, err := capture.Read(bytes.NewReader(text.Bytes()), "s.csv", capture.Options{})
		if err != nil {
			t.Fatalf("%g s: %v\n%s", interval, err, text.String()[:300])
		}
		ch := c.Channels[0]
		closeTo(t, "interval", ch.Axis.Interval, interval, 1e-7)
		if len(c.Findings) > 0 || ch.Unit != "V" || math.Abs(ch.Axis.Time(70)) > 1e-6*interval {
			t.Errorf("%g s: findings %v, unit %s, trigger at %g s", interval, c.Findings, ch.Unit, ch.Axis.Time(70))
		}
		for i := range y {
			if math.Abs(ch.Samples[i]-y[i]) > 1e-8 {
				t.Fatalf("%g s: sample %d is read as %g, want %g", interval, i, ch.Samples[i], y[i])
			}
		}
	}
	sweep := &SweepSimulation{Bench: benchOf(Series, 1e-3, 1e-9, 20, 0, 0, 0, 0), Frequencies: []float64{150e3, 155e3, 159e3, 160e3, 165e3, 170e3}, Across: capture.Resistor}
	h, err := sweep.Sweep()
	if err != nil {
		t.Fatal(err)
	}
	var text bytes.Buffer
	if err := sweep.Write(&text, h); err != nil {
		t.Fatal(err)
	}
	got, err := capture.ReadSweep(bytes.NewReader(text.Bytes()), "s.csv", capture.SweepOptions{})
	if err != nil {
		t.Fatalf("%v\n%s", err, &text)
	}
	if got.Part != capture.Resistor || got.Reference == nil || got.Phase == nil {
		t.Errorf("read as part %q, reference %v, phase %v", got.Part, got.Reference, got.Phase)
	}
	closeTo(t, "response", got.Magnitude[2], cmplx.Abs(h[2]), 1e-6)
	closeTo(t, "phase", got.Phase[2], cmplx.Phase(h[2]), 1e-4)
}

// TestSimulationRefuses: what cannot be simulated is said.
func TestSimulationRefuses(t *testing.T) {
	ok := func() *Simulation {
		return &Simulation{Bench: benchOf(Series, 1e-3, 1e-9, 20, 0, 0, 0, 0), Interval: 1e-7, Samples: 100, Amplitude: 1}
	}
	for name, spoil := range map[string]func(s *Simulation){
		"no inductance":     func(s *Simulation) { s.Bench.Inductance = quantity.Unknown("H") },
		"no loss":           func(s *Simulation) { s.Bench.Resistor = quantity.Unknown("ohm") },
		"parallel, no way":  func(s *Simulation) { s.Bench.Topology = Parallel },
		"no interval":       func(s *Simulation) { s.Interval = math.NaN() },
		"no samples":        func(s *Simulation) { s.Samples = 0 },
		"too many samples":  func(s *Simulation) { s.Samples = 1 << 40 },
		"trigger at end":    func(s *Simulation) { s.Pretrigger = 100 },
		"bits":              func(s *Simulation) { s.Converter.Bits = 40 },
		"no full scale":     func(s *Simulation) { s.Converter.Bits = 8 },
		"noise":             func(s *Simulation) { s.Noise = math.NaN() },
		"noise correlation": func(s *Simulation) { s.NoiseCorrelation = 1 },
		"growth":            func(s *Simulation) { s.LossGrowth = -1 },
		"square wave":       func(s *Simulation) { s.SquareWave = 1e15 },
	} {
		s := ok()
		spoil(s)
		if _, err := s.RingDown(); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}

// TestComplete: what is left open is set as at the bench (common practice), and
// what is given stays.
func TestComplete(t *testing.T) {
	b := benchOf(Series, 1.62e-3, 1e-9, 15, 15, 50, 10e6, 12e-12) // 124.3 kHz, tau 40.45 us
	s := &Simulation{Bench: b, Converter: Converter{Bits: 8}}
	if err := s.Complete(math.NaN(), math.NaN()); err != nil {
		t.Fatal(err)
	}
	if s.Interval != 200e-9 || s.Amplitude != 1 || s.Converter.FullScale != 5 {
		t.Errorf("interval %g s, amplitude %g V, full scale %g V; want 200 ns (40 samples a cycle), 1 V, 5 V", s.Interval, s.Amplitude, s.Converter.FullScale)
	}
	closeTo(t, "samples", float64(s.Samples), 5*40.45e-6/0.9/200e-9, 0.01)
	closeTo(t, "pretrigger", float64(s.Pretrigger), float64(s.Samples)/10, 0.01)
	s = &Simulation{Bench: b, Interval: 1e-7, Source: 3}
	if err := s.Complete(20e-6, 250e-6); err != nil {
		t.Fatal(err)
	}
	if s.Interval != 1e-7 || s.Samples != 2500 || s.Pretrigger != 200 || s.Amplitude != 0 {
		t.Errorf("%+v", s)
	}
}
