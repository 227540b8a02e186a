package driven

import (
	"fmt"
	"math"
	"testing"

	"dieaway/capture"
)

// The table is derived from the impedances, and checked
// numerically.
func TestTableD(t *testing.T) {
	for _, w := range []struct{ q, fd, fc, peak, i1, i2, lo, hi, width float64 }{
		{1, .86602540, .70710678, 1.154701, .61803399, 1.61803399, math.NaN(), 1.16877089, math.NaN()},
		{2, .96824584, .93541435, 2.065591, .78077641, 1.28077641, .62520163, 1.16581427, 1.849753},
		{5, .99498744, .98994949, 5.025189, .90498756, 1.10498756, .88374347, 1.08581651, 4.948706},
		{10, .99874922, .99749687, 10.012523, .95124922, 1.05124922, .94611050, 1.04636271, 9.974842},
		{50, .99995000, .99989999, 50.002500, .99005000, 1.01005000, .98984898, 1.00985098, 49.994999},
		{100, .99998750, .99997500, 100.001250, .99501250, 1.00501250, .99496237, 1.00496262, 99.997500},
	} {
		name := fmt.Sprintf("Q %g: ", w.q)
		s := loop07(w.q).span(201, math.Min(4, 1.9*w.q))
		r := Analyze(s.sweep(newRand(1)), Options{Across: capture.Capacitor})
		if r.Quantities == nil {
			t.Fatalf("%s%v", name, r.Findings)
		}
		f0 := s.f0()
		near(t, name+"fd/f0", r.Quantities.DampedFrequency.Value/f0, w.fd, 1e-8)
		near(t, name+"f_C/f0", r.Quantities.PeakFrequency.Value/f0, w.fc, 1e-8)
		near(t, name+"peak of V_C", r.Quantities.PeakGain.Value, w.peak, 1e-6*w.q)
		near(t, name+"bandwidth", r.Quantities.Bandwidth.Value, f0/w.q, 1e-7*f0)
		near(t, name+"damping ratio", r.Quantities.DampingRatio.Value, 1/(2*w.q), 1e-8)

		// The inductor's curve mirrors the capacitor's.
		l := curve{across: capture.Inductor, f0: 1, q: w.q, gain: 1}
		x, _ := l.peakAt()
		near(t, name+"f_L/f0", x, 1/w.fc, 1e-7)
		near(t, name+"peak of V_L", l.peakGain(), w.peak, 1e-6*w.q)

		// The half-power frequencies of the table lie at 1/sqrt 2 of the form, and
		// the reading makes Q of them again.
		for part, pair := range map[capture.Part][2]float64{capture.Resistor: {w.i1, w.i2}, capture.Capacitor: {w.lo, w.hi}, capture.Inductor: {1 / w.hi, 1 / w.lo}} {
			c := curve{across: part, f0: 1, q: w.q, gain: 1}
			for _, x := range pair {
				if m, _ := c.at(x); !math.IsNaN(x) {
					near(t, fmt.Sprintf("%s%s at %.8f", name, part, x), m*math.Sqrt2/c.peakGain(), 1, 1e-6)
				}
			}
			if q, b := qOf(pair[0], pair[1], part); !math.IsNaN(pair[0] + pair[1]) {
				near(t, fmt.Sprintf("%sQ of the reading, %s", name, part), q, w.q, 3e-7*w.q*w.q)
				near(t, fmt.Sprintf("%sbandwidth of the reading, %s", name, part), b, 1/w.q, 3e-7)
			}
		}
		if !math.IsNaN(w.width) {
			near(t, name+"f0/width of V_C", 1/(w.hi-w.lo), w.width, 2e-6*w.q)
		}
	}
}

// OpenStax, University Physics Volume 2 (derived): the circuits, swept.
func TestTextbookCircuits(t *testing.T) {
	for _, w := range []struct{ r, l, c, f0, q, b float64 }{
		{0.200, 4e-3, 2e-6, 1779.40636, 223.606798, 7.95775},
		{100, 150e-3, 0.25e-6, 821.872592, 7.745967, 106.103295},
		{100, 2, 5e-6, 50.3292121, 6.3245553, 7.9577472},
		{2, 10e-3, 1.5e-6, 1299.494669, 40.824829, 31.830989},
	} {
		s := scene{l: w.l, c: w.c, resistor: w.r, across: capture.Resistor}.span(81, 4)
		r := Analyze(s.sweep(newRand(1)), Options{})
		if r.Quantities == nil || r.Across != capture.Resistor {
			t.Fatalf("%v across %s: %v", w, r.Across, r.Findings)
		}
		near(t, "f0", r.Quantities.NaturalFrequency.Value, w.f0, 1e-8*w.f0)
		near(t, "Q", r.Quantities.Q.Value, w.q, 2e-7*w.q)
		near(t, "bandwidth", r.Quantities.Bandwidth.Value, w.b, 1e-6*w.b)
	}
}

// A whole circuit with the resistance of its source and of its coil. Measured at
// the source the loop has all of it; divided by the voltage at the circuit the
// source's share is gone (derived): 10 mH, 10 nF, 10 ohm and a source of 50 ohm
// have Q = 16.667, and 100 without the source.
func TestSourceResistance(t *testing.T) {
	s := scene{l: 10e-3, c: 10e-9, resistor: 10, source: 50, across: capture.Capacitor}
	s = s.span(121, 4)
	r := Analyze(s.sweep(newRand(1)), Options{})
	near(t, "Q with the source", r.Quantities.Q.Value, 16.6666667, 1e-5)
	s.reference = true
	s = s.span(121, 4)
	r = Analyze(s.sweep(newRand(1)), Options{})
	near(t, "Q without the source", r.Quantities.Q.Value, 100, 1e-4)
	near(t, "f0", r.Quantities.NaturalFrequency.Value, 15915.4943, 1e-3)
	if r.Across != capture.Capacitor || codes(r) != "good drive-sags" || r.Unit != "" {
		t.Errorf("across %s, %s, unit %q", r.Across, codes(r), r.Unit)
	}
	// 0.5 ohm of coil: Q = 95.238.
	s.coil = 0.5
	r = Analyze(s.sweep(newRand(1)), Options{Across: capture.Capacitor})
	near(t, "Q with the coil", r.Quantities.Q.Value, 95.2380952, 1e-4)
	// A notch that does not reach zero shows the coil's resistance by itself.
	s.across, s.reference, s.source = capture.Both, false, 0
	r = Analyze(s.sweep(newRand(1)), Options{})
	near(t, "Q of the notch", r.Quantities.Q.Value, 95.2380952, 1e-3)
	near(t, "depth of the notch", r.Quantities.PeakGain.Value, 0.5/10.5, 1e-5)
	if r.Across != capture.Both {
		t.Errorf("across %s: %s", r.Across, r.Why)
	}
}

// Derived: each row that reads both V_L and V_C gives f0, whatever the drive does.
func TestReactanceRatio(t *testing.T) {
	s := loop07(20).span(61, 3)
	sweep := s.sweep(newRand(1))
	sweep.Part = capture.Capacitor
	s.across = capture.Inductor
	other := s.sweep(newRand(1))
	for i := range sweep.Magnitude { // a drive that wanders
		k := 1 + 0.3*math.Sin(float64(i))
		sweep.Magnitude[i] *= k
		other.Magnitude[i] *= k
	}
	sweep.Others = []capture.SweepColumn{{Name: "V_L", Part: capture.Inductor, Values: other.Magnitude}}
	r := Analyze(sweep, Options{})
	near(t, "f0 of the ratio", r.Readings.ReactanceRatio.Value, s.f0(), 1e-6)
	near(t, "trend", r.Readings.Trend.Value, 0, 1e-9)
	if len(r.Readings.Rows) != 61 {
		t.Errorf("%d rows", len(r.Readings.Rows))
	}
	near(t, "f0 of a row", r.Readings.Rows[7], s.f0(), 1e-6)
}

// Derived: a meter with one pole reads low by 0.496 % at f/fm = 0.1 and 10.6 % at
// 0.5; corrected for, it changes nothing.
func TestMeter(t *testing.T) {
	near(t, "1/10 of the bandwidth", 1-1/math.Hypot(1, 0.1), 0.00496, 1e-5)
	s := loop07(3)
	s.phase = true
	s = s.span(101, 3)
	fm := 2 * s.f0()
	sweep := s.sweep(newRand(1))
	for i, f := range sweep.Frequency {
		sweep.Magnitude[i] /= math.Hypot(1, f/fm)
		sweep.Phase[i] -= math.Atan(f / fm)
	}
	plain := Analyze(sweep, Options{Across: capture.Capacitor})
	r := Analyze(sweep, Options{Across: capture.Capacitor, MeterBandwidth: fm})
	near(t, "Q", r.Quantities.Q.Value, 3, 1e-6)
	near(t, "f0", r.Quantities.NaturalFrequency.Value, s.f0(), 1e-3)
	if math.Abs(plain.Quantities.Q.Value-3) < 0.01 || len(r.Corrections) != 1 {
		t.Errorf("uncorrected Q %v, corrections %v", plain.Quantities.Q.Value, r.Corrections)
	}
}

// Derived: swept too fast, by integrating the envelope of the driven circuit,
// da/dt = -(pi B + j 2 pi (f0 - f(t))) a + pi B, with f(t) rising at eta B^2.
func TestSweptTooFast(t *testing.T) {
	const b, f0 = 1.0, 1000.0 // Hz; Q = 1000
	for _, w := range []struct{ eta, qError, tolerance float64 }{{0.03, -0.0005, 0.0002}, {0.1, -0.0048, 0.0005}, {0.3, -0.038, 0.004}, {1, -0.205, 0.02}} {
		rate := w.eta * b * b
		sweep := &capture.Sweep{Unit: "V"}
		span, steps := 40*b, 400000
		dt := span / rate / float64(steps)
		a := complex(0, 0)
		slope := func(a complex128, time float64) complex128 {
			detuning := -span/2 + rate*time // f - f0
			return -complex(math.Pi*b, 2*math.Pi*detuning)*a + complex(math.Pi*b, 0)
		}
		for i := range steps {
			time := float64(i) * dt
			if detuning := -span/2 + rate*time; i%200 == 0 && math.Abs(detuning) < 5*b {
				sweep.Frequency = append(sweep.Frequency, f0+detuning)
				sweep.Magnitude = append(sweep.Magnitude, math.Hypot(real(a), imag(a)))
				sweep.Clock = append(sweep.Clock, time)
			}
			k1 := slope(a, time) // Runge and Kutta
			k2 := slope(a+complex(dt/2, 0)*k1, time+dt/2)
			k3 := slope(a+complex(dt/2, 0)*k2, time+dt/2)
			k4 := slope(a+complex(dt, 0)*k3, time+dt)
			a += complex(dt/6, 0) * (k1 + 2*k2 + 2*k3 + k4)
		}
		r := Analyze(sweep, Options{Across: capture.Resistor})
		name := fmt.Sprintf("eta %g: ", w.eta)
		if r.Quantities == nil {
			t.Errorf("%s%v", name, r.Findings)
			continue
		}
		near(t, name+"half-power Q", r.Readings.Q.Value/(f0/b)-1, w.qError, w.tolerance)
		// The lag of (eta/pi) B is that of the middle between the half-power points;
		// the very top lags twice as far (first-order expansion in the rate).
		lag, width := w.eta/math.Pi, 0.12*w.eta/math.Pi
		near(t, name+"lag of the middle over B", ((r.Readings.Lower.Value+r.Readings.Upper.Value)/2-f0)/b, lag, width)
		if w.eta < 1 {
			near(t, name+"lag of the top over B", (r.Readings.Peak.Frequency.Value-f0)/b, 2*lag, 2*width)
			near(t, name+"lag of the fit over B", (r.Quantities.NaturalFrequency.Value-f0)/b, lag, lag)
		}
		said := false
		for _, f := range r.Findings {
			said = said || f.Code == capture.SweptTooFast
		}
		if said != (w.eta > 0.0301) {
			t.Errorf("%sfindings %s", name, codes(r))
		}
	}
}
