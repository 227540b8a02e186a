package circuit

import (
	"math"
	"testing"
)

// closeTo wants got within relative tolerance of want.
func closeTo(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance*math.Abs(want)) {
		t.Errorf("%s: got %.12g, want %.12g (relative difference %.2g, allowed %.2g)", what, got, want, (got-want)/want, tolerance)
	}
}

// half is half a unit in the last of the places digits behind the point.
func half(places int) float64 { return 0.5000001 * math.Pow10(-places) }

func printed(t *testing.T, what string, got, want float64, places int) {
	t.Helper()
	if !(math.Abs(got-want) <= half(places)) {
		t.Errorf("%s: got %.12g, printed %.*f", what, got, places, want)
	}
}

// TestLoading checks the loading table of L = 10 mH, C = 10 nF, R = 10 ohm with a
// probe across the capacitor to every digit. The table was derived from first
// principles and confirmed numerically.
func TestLoading(t *testing.T) {
	bare := Tank{10e-3, 10e-9, 10}
	r := bare.Loaded(Load{})
	printed(t, "bare f0", r.NaturalFrequency, 15915.4943, 4)
	closeTo(t, "bare Q", r.Q(), 100, 1e-12)
	closeTo(t, "bare tau", r.TimeConstant(), 2e-3, 1e-12)
	for _, c := range []struct {
		rp, cp         float64
		f0, q, tau     float64
		ppm, qShiftPct float64
	}{
		{10e6, 12e-12, 15905.9616, 98.95177, 1.9802215, -598.96, -1.0482},
		{10e6, 15e-12, 15903.5791, 98.93724, 1.9802274, -748.66, -1.0628},
		{1e6, 15e-12, 15903.6506, 90.85381, 1.8184294, -744.16, -9.1462},
		{1e6, 100e-12, 15836.5879, 90.53987, 1.8198198, -4957.83, -9.4601},
	} {
		load := Load{Conductance: 1 / c.rp, Capacitance: c.cp}
		l := bare.Loaded(load)
		printed(t, "f0", l.NaturalFrequency, c.f0, 4)
		printed(t, "Q", l.Q(), c.q, 5)
		printed(t, "tau in ms", l.TimeConstant()*1e3, c.tau, 7)
		printed(t, "f0 shift in ppm", (l.NaturalFrequency/r.NaturalFrequency-1)*1e6, c.ppm, 2)
		printed(t, "Q shift in %", (l.Q()/r.Q()-1)*100, c.qShiftPct, 4)
		same(t, "from L", WithInductance(bare.Inductance, l, load), bare)
		same(t, "from C", WithCapacitance(bare.Capacitance, l, load), bare)
		same(t, "from R", WithResistance(bare.Resistance, l, load, false), bare)
	}
	// The same source: a source of 50 ohm in the loop, and 0.5 ohm of coil more.
	printed(t, "Q with 50 ohm in the loop", bare.Loaded(Load{Resistance: 50}).Q(), 16.667, 3)
	printed(t, "Q with 0.5 ohm more", bare.Loaded(Load{Resistance: 0.5}).Q(), 95.238, 3)
}

func same(t *testing.T, how string, got, want Tank) {
	t.Helper()
	closeTo(t, how+": L", got.Inductance, want.Inductance, 1e-9)
	closeTo(t, how+": C", got.Capacitance, want.Capacitance, 1e-9)
	closeTo(t, how+": R", got.Resistance, want.Resistance, 1e-9)
}

// TestParallel goes there and back with losses on both sides, at low and at high Q.
func TestParallel(t *testing.T) {
	for _, q := range []float64{1.5, 3, 50, 1000} {
		bare := Tank{1e-3, 1e-9, 12}
		z := math.Sqrt(bare.Inductance / bare.Capacitance)
		load := Load{Resistance: 3, Conductance: 1 / (q * z), Capacitance: 47e-12}
		r := bare.Loaded(load)
		same(t, "from L", WithInductance(bare.Inductance, r, load), bare)
		same(t, "from C", WithCapacitance(bare.Capacitance, r, load), bare)
		same(t, "from R", WithResistance(bare.Resistance, r, load, 1/(q*z) > 15/(z*z)), bare)
	}
}

// TestWorkedExamples are those of OpenStax, University Physics Volume 2 (CC BY),
// chapters on alternating current and RLC circuits: the exact values are derived,
// the printed ones stand beside them with the digits the book prints.
func TestWorkedExamples(t *testing.T) {
	r := Tank{4e-3, 2e-6, 0.2}.Loaded(Load{})
	printed(t, "f0", r.NaturalFrequency, 1779.40636, 5)
	printed(t, "Q", r.Q(), 223.606798, 6)
	printed(t, "Q printed", r.Q(), 224, 0)
	printed(t, "B", r.Bandwidth(), 7.95775, 5)
	printed(t, "width in rad/s printed", 2*math.Pi*r.Bandwidth(), 50, 1)
	closeTo(t, "tau", r.TimeConstant(), 40e-3, 1e-12)
	printed(t, "log decrement", r.DecayRate/r.DampedFrequency(), 0.0140497, 7)

	r = Tank{150e-3, 0.25e-6, 100}.Loaded(Load{})
	printed(t, "f0", r.NaturalFrequency, 821.872592, 6)
	printed(t, "Q", r.Q(), 7.745967, 6)
	closeTo(t, "tau", r.TimeConstant(), 3e-3, 1e-12)
	printed(t, "omega_d", 2*math.Pi*r.DampedFrequency(), 5153.20828, 5)
	printed(t, "log decrement", r.DecayRate/r.DampedFrequency(), 0.40642547, 8)

	r = Tank{2, 5e-6, 100}.Loaded(Load{})
	printed(t, "f0", r.NaturalFrequency, 50.3292121, 7)
	printed(t, "Q", r.Q(), 6.3245553, 7)
	printed(t, "omega_d", 2*math.Pi*r.DampedFrequency(), 315.238005, 6)

	r = Tank{10e-3, 1.5e-6, 2}.Loaded(Load{})
	printed(t, "half amplitude in ms", math.Ln2*r.TimeConstant()*1e3, 6.931472, 6)
	printed(t, "f0", r.NaturalFrequency, 1299.494669, 6)
	printed(t, "Q", r.Q(), 40.824829, 6)
	printed(t, "log decrement", r.DecayRate/r.DampedFrequency(), 0.0769587619, 10)

	// 200 mH, 10 uF, half amplitude after 50 cycles: the resistance backwards.
	delta := math.Ln2 / 50
	w0 := 1 / math.Sqrt(200e-3*10e-6)
	rate := w0 * delta / math.Hypot(2*math.Pi, delta)
	tank := WithInductance(200e-3, Resonance{w0 / (2 * math.Pi), rate}, Load{})
	printed(t, "resistance", tank.Resistance, 0.6240502, 7)
	closeTo(t, "capacitance", tank.Capacitance, 10e-6, 1e-12)

	r = Tank{2e-3, 0.5e-3, 40}.Loaded(Load{})
	printed(t, "f0", r.NaturalFrequency, 159.154943, 6)
	closeTo(t, "Q", r.Q(), 0.05, 1e-12)
	if fd := r.DampedFrequency(); !math.IsNaN(fd) {
		t.Errorf("overdamped: damped frequency %g", fd)
	}
	printed(t, "Q just overdamped", Tank{3e-3, 0.8e-3, 4}.Loaded(Load{}).Q(), 0.484, 3)
	printed(t, "Q overdamped", Tank{5e-3, 6e-6, 200}.Loaded(Load{}).Q(), 0.14434, 5)
	r = Tank{5e-3, 500e-6, 5}.Loaded(Load{})
	printed(t, "omega_d", 2*math.Pi*r.DampedFrequency(), 387.298335, 6)
	printed(t, "Q", r.Q(), 0.632456, 6)
}

// TestCrystal checks the equivalent circuit of crystals backwards: from frequency,
// Q and resistance to the motional inductance (computed columns derived).
func TestCrystal(t *testing.T) {
	for _, c := range []struct{ fs, c1, r1, l1, q, tau float64 }{
		{32768, 3e-15, 35e3, 7863.5588, 46257.366, 0.44934622},
		{4e6, 10e-15, 80, 0.15831435, 49735.920, 3.9578587e-3},
		{10e6, 20e-15, 15, 12.665148e-3, 53051.648, 1.6886864e-3},
	} {
		tank := WithResistance(c.r1, Resonance{c.fs, 1 / c.tau}, Load{}, false)
		closeTo(t, "L1", tank.Inductance, c.l1, 2e-8)
		closeTo(t, "C1", tank.Capacitance, c.c1, 2e-8)
		closeTo(t, "Q", tank.Loaded(Load{}).Q(), c.q, 2e-8)
	}
}
