package circuit

import (
	"math"
	"strings"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/driven"
	"dieaway/decay/quantity"
)

// swept is the result of a sweep whose f0 and Q are those of the circuit's pole.
func swept(p *physical, relative float64) *driven.Result {
	r := p.pole()
	f, q := r.NaturalFrequency, r.Q()
	return &driven.Result{Status: decay.Good, Across: capture.Capacitor, Quantities: &driven.Quantities{
		NaturalFrequency: quantity.New(f, relative/(2*q)*f, "Hz"), Q: quantity.New(q, relative*q, ""),
		PeakFrequency: quantity.New(f*math.Sqrt(1-1/(2*q*q)), relative/q*f, "Hz")}}
}

// readerSweep is the reader's antenna in the sweep: the response was divided by
// the voltage at the circuit, which takes the source's resistance out.
func readerSweep() physical {
	p := reader
	p.rs = 0
	return p
}

func TestCompareSimulated(t *testing.T) {
	ring, sweep := reader, readerSweep()
	sweep.cp, sweep.rp = 4e-12, 1e6
	r, _ := ring.measure(t, 80, 30, 1e-3, 4)
	c := Compare(ring.bench(sweep), r, swept(&sweep, 2e-3))
	if !c.Compared() || c.Decisive != Unloaded || !c.Agrees {
		t.Fatalf("compared %v by %s, agrees %v: %+v", c.Compared(), c.Decisive, c.Agrees, c.Findings)
	}
	measured, _ := c.comparison(AsMeasured, "q")
	if measured.Agrees || !(measured.En < -10) {
		t.Errorf("as measured Q has E_n %.3g, and one is far more loaded", measured.En)
	}
	bare := physical{rf: ring.rf, rc: ring.rc, l: ring.l, c: ring.c}
	want := bare.pole()
	for _, side := range []Side{c.RingDown, c.Sweep} {
		inside(t, "unloaded Q", side.Unloaded.Q, want.Q(), 0.02)
		inside(t, "unloaded f0", side.Unloaded.NaturalFrequency, want.NaturalFrequency, 1e-4)
		sumIsWhole(t, side.Budget)
	}
	// Each predicts the other, by the impedances of the other set-up.
	inside(t, "sweep predicted", c.RingDown.Predicted.Q, sweep.pole().Q(), 0.02)
	inside(t, "sweep predicted", c.RingDown.Predicted.NaturalFrequency, sweep.pole().NaturalFrequency, 1e-4)
	inside(t, "ring-down predicted", c.Sweep.Predicted.Q, ring.pole().Q(), 0.02)
	inside(t, "ring-down predicted", c.Sweep.Predicted.NaturalFrequency, ring.pole().NaturalFrequency, 1e-4)
	text := strings.Join(c.Explanations, "\n")
	for _, want := range []string{
		"The source resistance of 50 Ω takes 62.", "The probe shifts f_0 by -0.", "of the loss in the ring-down",
		"The voltage across the capacitor is greatest", "below f_0", "With source and probe taken out", "they agree"} {
		if !strings.Contains(text, want) {
			t.Errorf("no explanation with %q in:\n%s", want, text)
		}
	}
}

// TestProbeShift: the explanation gives the shift of the loading table (derived):
// 10 Mohm and 12 pF across 10 nF of a tank of 10 mH and 10 ohm.
func TestProbeShift(t *testing.T) {
	p := physical{rc: 10, l: 10e-3, c: 10e-9, rp: 10e6, cp: 12e-12}
	r, _ := physicalResult(&p)
	c := Compare(p.bench(p), r, swept(&p, 1e-4))
	text := strings.Join(c.Explanations, "\n")
	if want := "The probe shifts f_0 by -599 ppm and Q by -1.05 % in the ring-down."; !strings.Contains(text, want) {
		t.Errorf("no %q in:\n%s", want, text)
	}
}

// physicalResult is a ring-down with the pole of the circuit and little scatter.
func physicalResult(p *physical) (*decay.Result, Resonance) {
	r := p.pole()
	fd := r.DampedFrequency()
	return &decay.Result{Status: decay.Good, Model: decay.Exponential, Quantities: &decay.Quantities{
		DampedFrequency: quantity.New(fd, 1e-5*fd, "Hz"), NaturalFrequency: quantity.New(r.NaturalFrequency, 1e-5*fd, "Hz"),
		DecayRate: quantity.New(r.DecayRate, 1e-3*r.DecayRate, "1/s"), Q: quantity.New(r.Q(), 1e-3*r.Q(), "")}}, r
}

// TestForgottenSource: with the source left out of the bench file the two
// disagree, in Q and not in frequency.
func TestForgottenSource(t *testing.T) {
	ring, sweep := reader, readerSweep()
	b := ring.bench(sweep)
	b.RingDown.SourceResistance = quantity.Unknown("ohm")
	r, _ := physicalResult(&ring)
	c := Compare(b, r, swept(&sweep, 2e-3))
	q, _ := c.comparison(Unloaded, "q")
	f, _ := c.comparison(Unloaded, "natural_frequency_hz")
	if c.Agrees || q.Agrees || !f.Agrees {
		t.Errorf("agrees %v; Q %+v; f0 %+v", c.Agrees, q, f)
	}
}

// TestSharedClock: a time base that is 100 ppm off moves the ring-down's
// frequency; on the clock of the sweep that is no difference, and on another it
// is within the stated uncertainty or beyond it.
func TestSharedClock(t *testing.T) {
	p := readerSweep()
	for _, c := range []struct {
		name              string
		ringDown, sweep   float64 // timebase of the bench file
		shared            bool
		moveBoth, agrees  bool
		cancels, hintsAtC bool
	}{
		{name: "clocks without a figure", agrees: false, hintsAtC: true},
		{name: "a ring-down good to 100 ppm", ringDown: 1e-4, agrees: true},
		{name: "both on one clock", ringDown: 1e-4, shared: true, moveBoth: true, agrees: true, cancels: true},
		{name: "one clock that cannot explain it", ringDown: 1e-4, shared: true, agrees: false, hintsAtC: true},
	} {
		r, _ := physicalResult(&p)
		q := r.Quantities
		q.DampedFrequency.Value *= 1 + 1e-4
		q.DecayRate.Value *= 1 + 1e-4
		q.DampedFrequency.U = q.DampedFrequency.Value * math.Hypot(1e-6, c.ringDown)
		q.DecayRate.U = math.Hypot(q.DecayRate.U, c.ringDown*q.DecayRate.Value)
		w := swept(&p, 2e-5)
		if c.moveBoth {
			w.Quantities.NaturalFrequency.Value *= 1 + 1e-4
		}
		own := w.Quantities.NaturalFrequency.U
		b := p.bench(p)
		b.RingDown.TimebaseU, b.Sweep.TimebaseU, b.Sweep.SharedClock = c.ringDown, c.sweep, c.shared
		if c.shared {
			b.Sweep.TimebaseU = c.ringDown
		}
		w.Quantities.NaturalFrequency.U = math.Hypot(own, b.Sweep.TimebaseU*w.Quantities.NaturalFrequency.Value)
		got := Compare(b, r, w)
		f, _ := got.comparison(AsMeasured, "natural_frequency_hz")
		if f.Agrees != c.agrees {
			t.Errorf("%s: E_n %.3g, difference %s", c.name, f.En, f.Difference)
		}
		if c.cancels {
			closeTo(t, "u of the difference without the clock", f.Difference.U, math.Hypot(own, 1e-6*f.RingDown.Value), 0.02)
		}
		if hint := strings.Contains(strings.Join(got.Explanations, "\n"), "one of the clocks"); hint != c.hintsAtC {
			t.Errorf("%s: explained by clocks: %v\n%s", c.name, hint, strings.Join(got.Explanations, "\n"))
		}
	}
}

// TestSharedParts: with one and the same uncertain probe on both, the unloaded
// frequencies differ by none of its error.
func TestSharedParts(t *testing.T) {
	p := readerSweep()
	r, _ := physicalResult(&p)
	b := p.bench(p)
	b.RingDown.ProbeCapacitance.U = 2e-12
	b.Sweep.ProbeCapacitance.U = 2e-12
	shared, _ := Compare(b, r, swept(&p, 2e-5)).comparison(Unloaded, "natural_frequency_hz")
	b.Sweep.ProbeCapacitance.U = 2.0001e-12 // another one
	apart, _ := Compare(b, r, swept(&p, 2e-5)).comparison(Unloaded, "natural_frequency_hz")
	// u(f0)/f0 = u(Cp)/(2C') = 988 ppm for one probe, the square root of 2 more for two.
	closeTo(t, "u of the difference, two probes", apart.Difference.U/apart.RingDown.Value, math.Sqrt2*2e-12/(2*p.c), 0.02)
	if !(shared.Difference.U < 0.02*apart.Difference.U) {
		t.Errorf("one probe: u of the difference is %g, with two %g", shared.Difference.U, apart.Difference.U)
	}
}

func TestCompareWithoutBench(t *testing.T) {
	p := readerSweep()
	r, _ := physicalResult(&p)
	c := Compare(nil, r, swept(&p, 2e-3))
	if c.Decisive != AsMeasured || !c.Agrees || len(c.Comparisons) != 4 || c.RingDown.Budget != nil || c.RingDown.Unloaded.Q.Known() {
		t.Errorf("%+v", c)
	}
	// Alike set-ups predict each other as they are.
	closeTo(t, "predicted Q", c.RingDown.Predicted.Q.Value, r.Quantities.Q.Value, 1e-9)
	r.Quantities = nil
	if c := Compare(nil, r, swept(&p, 2e-3)); c.Compared() || c.Agrees {
		t.Errorf("a refused ring-down was compared: %+v", c)
	}
}

// TestTransient draws the prediction of a perfect sweep over the simulated ring.
func TestTransient(t *testing.T) {
	ring, sweep := reader, readerSweep()
	r, ch := ring.measure(t, 80, 10, 1e-6, 6)
	c := Compare(ring.bench(sweep), r, swept(&sweep, 1e-6))
	p := c.Sweep.Transient(r.Decays[0])
	if p == nil {
		t.Fatal("no prediction")
	}
	for i, y := range ch.Samples {
		v, envelope, _ := p.At(ch.Axis.Time(i))
		if ch.Axis.Time(i) < r.Decays[0].From {
			continue
		}
		if !(math.Abs(v-y) < 2e-4) || !(envelope >= math.Abs(v)-1e-3) {
			t.Fatalf("sample %d: predicted %g, envelope %g, simulated %g", i, v, envelope, y)
		}
	}
}

// TestExplanations: what the two measurements found of themselves is told where it
// explains a difference. Across the coil the peak lies above f0, at f0/sqrt(1 -
// 1/(2Q^2)) (derived): 511 ppm at Q = 22.135.
func TestExplanations(t *testing.T) {
	p := readerSweep()
	p.rc = 42
	r, resonance := physicalResult(&p)
	r.Findings = []decay.Finding{{Code: capture.AmplitudeDependent, Severity: capture.Warning}}
	r.Decays = []*decay.Decay{{AtStart: &decay.AtStart{Q: quantity.New(15, 0.2, "")}}}
	w := swept(&p, 1e-4)
	w.Across = capture.Inductor
	q := resonance.Q()
	w.Quantities.PeakFrequency.Value = resonance.NaturalFrequency / math.Sqrt(1-1/(2*q*q))
	w.Findings = []decay.Finding{{Code: capture.SweptTooFast, Severity: capture.Warning, Message: "The rate is 0.3 bandwidths squared."}}
	text := strings.Join(Compare(p.bench(p), r, w).Explanations, "\n")
	for _, want := range []string{
		"The loss depends on the amplitude, and the two ran at different amplitudes: the ring-down has a Q of 15.00(20) in its first cycle and 22.",
		"The sweep was too fast, which widens the curve and lowers its Q: The rate is 0.3 bandwidths squared.\n",
		"The voltage across the coil is greatest 511 ppm above f_0"} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q in:\n%s", want, text)
		}
	}
}
