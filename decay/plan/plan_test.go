package plan

import (
	"math"
	"math/rand/v2"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// loop07 is the loop antenna of a 125 kHz tag reader.
const loop07 = `
[device]
name = "loop 07"
[circuit]
inductance = "1.62 mH"
capacitance = "1.0 nF"
coil_resistance = "15"
resistor = "15"
[ringdown]
source_resistance = "50"
probe_resistance = "10M"
probe_capacitance = "12p"
`

func bench(t *testing.T) *circuit.Bench {
	t.Helper()
	b, err := circuit.ParseBench([]byte(loop07), "loop07.toml")
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func made(t *testing.T, w Wish) *Plan {
	t.Helper()
	p, err := Make(w)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol*math.Abs(want)) {
		t.Errorf("%s = %.7g, want %.7g within %.1g", what, got, want, tol)
	}
}

// TestExpected holds what a plan expects against the formula for many cycles and
// samples (derived): sd(tau)/tau = (1/R) sqrt(2/(n K(u))).
func TestExpected(t *testing.T) {
	for _, w := range []Wish{
		{NaturalFrequency: 125e3, Q: 200, Amplitude: 1, Noise: 5e-3, Want: 1e-3},
		{NaturalFrequency: 10e6, Q: 50, Amplitude: 0.1, Noise: 1e-3, Want: 5e-4, Memory: 1_000_000},
		{NaturalFrequency: 4e6, Q: 49735.92, Amplitude: 1, Noise: 2e-3, Want: 1e-3, Memory: 10_000_000},
	} {
		p := made(t, w)
		s := p.Setting
		tau := w.Q / (math.Pi * w.NaturalFrequency)
		u := math.Floor(0.9*s.Record*s.SampleRate) / s.SampleRate / tau
		e := math.Exp(-2 * u)
		k := ((1-e)*(1-e) - 4*u*u*e) / (8 * (1 - e))
		want := w.Noise / w.Amplitude / math.Sqrt(float64(s.Averages)) * math.Sqrt(2/(tau*s.SampleRate*k))
		near(t, "u(tau)/tau", s.Expected.TimeConstant.Relative(), want, 0.02)
		if !p.Met || s.Expected.Q.Relative() > p.Wish.Want {
			t.Errorf("%+v: met %v with %g", w, p.Met, s.Expected.Q.Relative())
		}
	}
}

// TestSettingsAreOnTheScope: rate and record in steps of 1-2-5, samples within the
// memory, the range in divisions (common practice).
func TestSettingsAreOnTheScope(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 1))
	between := func(lo, hi float64) float64 { return lo * math.Pow(hi/lo, rng.Float64()) }
	for range 300 {
		w := Wish{NaturalFrequency: between(10, 1e8), Q: between(0.6, 1e5), Amplitude: between(0.01, 100), Bits: 8, Memory: int(between(500, 1e6)), Want: between(1e-5, 0.05)}
		w.Noise = w.Amplitude * between(1e-4, 1)
		p := made(t, w)
		s := p.Setting
		fault := len(p.Findings) > 0 && p.Findings[0].Severity == capture.Fault
		if s.Expected == nil { // the decay has more cycles than the memory samples
			if !fault || w.Q < float64(w.Memory)/20 {
				t.Errorf("%+v: no setting, %v", w, p.Findings)
			}
			continue
		}
		near(t, "rate", quantity.StepUp(s.SampleRate), s.SampleRate, 1e-9)
		near(t, "record", quantity.StepUp(s.Record), s.Record, 1e-9)
		near(t, "range", 8*quantity.StepUp(s.FullScale/8), s.FullScale, 1e-9)
		if s.Samples > w.Memory || s.FullScale < 2*w.Amplitude || s.PerCycle < 2.5 {
			t.Errorf("%+v gives %+v", w, s)
		}
		if fault == p.Met || p.Met && s.Expected.Q.Relative() > w.Want {
			t.Errorf("%+v: met %v, %g wanted, %g expected, %v", w, p.Met, w.Want, s.Expected.Q.Relative(), p.Findings)
		}
		for _, a := range p.Alternatives {
			switch worse := a.Expected.Q.Relative() > s.Expected.Q.Relative(); a.Verdict {
			case "cheaper":
				if a.Samples*a.Averages >= s.Samples*s.Averages {
					t.Errorf("%s is not cheaper: %d samples and %d averages", a.Change, a.Samples, a.Averages)
				}
			case "better":
				if worse {
					t.Errorf("%s is not better: %g and %g", a.Change, a.Expected.Q.Relative(), s.Expected.Q.Relative())
				}
			default:
				t.Errorf("%s is %q", a.Change, a.Verdict)
			}
		}
	}
}

// TestBestAtFixedMemory: where the memory is the limit, records of about two time
// constants are best (derived: u = 2.0175, 1.5 to 3 within 6 %).
func TestBestAtFixedMemory(t *testing.T) {
	p := made(t, Wish{NaturalFrequency: 1e6, Q: 1000, Amplitude: 1, Noise: 0.2, Want: 1e-9, Memory: 10000})
	if u := p.Setting.TimeConstants; p.Met || u < 1.4 || u > 3.2 {
		t.Errorf("met %v, %g time constants, want 1.5 to 3", p.Met, u)
	}
}

// TestLoaded: what source and probe do (derived): 10 mH, 10 nF, 10 ohm
// with 10 Mohm and 12 pF.
func TestLoaded(t *testing.T) {
	b := bench(t)
	b.Inductance, b.Capacitance = quantity.New(10e-3, 0, "H"), quantity.New(10e-9, 0, "F")
	b.CoilResistance, b.Resistor, b.RingDown.SourceResistance = quantity.New(10, 0, "ohm"), quantity.New(0, 0, "ohm"), quantity.New(0, 0, "ohm")
	p := made(t, Wish{Amplitude: 1, Noise: 1e-3, Bench: b, Want: 0.01})
	near(t, "free f0", p.Forecast.Free.NaturalFrequency, 15915.4943, 1e-8)
	near(t, "free Q", p.Forecast.Free.Q(), 100, 1e-9)
	near(t, "f0", p.Ring.NaturalFrequency, 15905.9616, 1e-8)
	near(t, "Q", p.Ring.Q(), 98.95177, 1e-6)
	b.Capacitance = quantity.Unknown("F") // the coil and what is expected tell the same
	p = made(t, Wish{NaturalFrequency: 15915.4943, Q: 100, Amplitude: 1, Noise: 1e-3, Bench: b, Want: 0.01})
	near(t, "Q", p.Ring.Q(), 98.95177, 1e-6)
	near(t, "settling", p.Settle, p.Ring.TimeConstant()*math.Log(1/(0.1*1e-3)), 1e-9)
}

// TestPlanIsKept goes all the way: a plan, captures of the circuit simulated with
// its settings, and their fits, whose scatter is what the plan promised.
func TestPlanIsKept(t *testing.T) {
	seeds := 200
	if testing.Short() {
		seeds = 40
	}
	b := bench(t)
	p := made(t, Wish{Bench: b, Amplitude: 1, Noise: 8e-3, Bits: 8, Want: 2e-3})
	s := p.Setting
	if !p.Met || s.Averages != 1 {
		t.Fatalf("%+v", s)
	}
	var off, stated float64
	for seed := range seeds {
		sim := &circuit.Simulation{Bench: b, Amplitude: 1, Noise: 8e-3, Interval: 1 / s.SampleRate, Samples: s.Samples,
			Pretrigger: int(math.Round(s.Pretrigger() * s.SampleRate)), Converter: circuit.Converter{Bits: 8, FullScale: s.FullScale},
			Random: rand.New(rand.NewPCG(uint64(seed), 99))}
		y, err := sim.RingDown()
		if err != nil {
			t.Fatal(err)
		}
		r := decay.Analyze(&capture.Channel{Name: "v", Number: 1, Unit: "V", Samples: y,
			Axis: &capture.Axis{N: len(y), Interval: sim.Interval, Start: -s.Pretrigger()}}, decay.Options{})
		if r.Quantities == nil {
			t.Fatalf("seed %d: %v", seed, r.Findings)
		}
		e := r.Quantities.Q.Value/p.Ring.Q() - 1
		off += e * e
		stated += r.Quantities.Q.Relative()
	}
	got, mean, promised := math.Sqrt(off/float64(seeds)), stated/float64(seeds), s.Expected.Q.Relative()
	t.Logf("relative u(Q): promised %.3g, scatter of %d seeds %.3g, stated %.3g", promised, seeds, got, mean)
	// The scatter of a scatter from n values is 1/sqrt(2n): three times that.
	if slack := 3 / math.Sqrt(2*float64(seeds)); got > promised*(1+slack) || got < promised*(1-slack-0.3) {
		t.Errorf("the scatter is %.3g, promised %.3g", got, promised)
	}
	if mean > 1.1*promised {
		t.Errorf("the fits state %.3g, promised %.3g", mean, promised)
	}
}

// TestRefused: wishes that mean nothing are errors that say why.
func TestRefused(t *testing.T) {
	good := Wish{NaturalFrequency: 1e5, Q: 50, Amplitude: 1, Noise: 1e-3}
	for name, spoil := range map[string]func(w *Wish){
		"no frequency":     func(w *Wish) { w.NaturalFrequency = 0 },
		"no amplitude":     func(w *Wish) { w.Amplitude = 0 },
		"nothing to limit": func(w *Wish) { w.Noise = 0 },
		"not a number":     func(w *Wish) { w.Q = math.NaN() },
		"overdamped":       func(w *Wish) { w.Q = 0.5 },
		"bits":             func(w *Wish) { w.Bits = 99 },
		"want":             func(w *Wish) { w.Want = 0.6 },
		"memory":           func(w *Wish) { w.Memory = 10 },
	} {
		w := good
		spoil(&w)
		if _, err := Make(w); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	p := made(t, Wish{NaturalFrequency: 1e5, Q: 50, Amplitude: 1e-6, Noise: 1})
	if p.Met || p.Findings[0].Code != capture.WeakSignal || p.Findings[0].Severity != capture.Fault {
		t.Errorf("a ring in a million times its noise: met %v, %v", p.Met, p.Findings)
	}
}
