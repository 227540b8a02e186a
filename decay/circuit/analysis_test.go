package circuit

import (
	"math"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// reader is the loop antenna of a tag reader with all that hangs on it.
var reader = physical{rs: 50, rf: 15, rc: 15, l: 1.62e-3, c: 1e-9, rp: 10e6, cp: 12e-12, startV: 1}

// inside wants the truth within 4 standard uncertainties of q, and those below most.
func inside(t *testing.T, what string, q quantity.Quantity, truth, most float64) {
	t.Helper()
	if !(math.Abs(q.Value-truth) <= 4*q.U+1e-9*math.Abs(truth)) || !(q.U <= most*math.Abs(truth)) {
		t.Errorf("%s: got %s (%.9g, u %.3g), simulated with %g; u at most %g of it", what, q, q.Value, q.U, truth, most)
	}
}

func TestAnalyzeSimulated(t *testing.T) {
	parallel := physical{parallel: true, rs: 33e3, rf: 22e3, rc: 15, l: 1.62e-3, c: 1e-9, rp: 10e6, cp: 12e-12, startV: 1}
	for name, p := range map[string]physical{"series": reader, "parallel": parallel} {
		t.Run(name, func(t *testing.T) {
			r, _ := p.measure(t, 80, 30, 1e-3, 1)
			b := p.bench(p)
			a := Analyze(b, r.Quantities)
			bare := physical{parallel: p.parallel, rf: p.rf, rc: p.rc, l: p.l, c: p.c}
			want, loaded := bare.pole(), p.pole()
			inside(t, "inductance", a.Inductance, p.l, 0)
			inside(t, "capacitance", a.Capacitance, p.c, 1e-3)
			inside(t, "coil resistance", a.Resistance, p.rc, 0.01)
			inside(t, "unloaded f0", a.Unloaded.NaturalFrequency, want.NaturalFrequency, 1e-4)
			inside(t, "unloaded Q", a.Unloaded.Q, want.Q(), 0.01)
			inside(t, "unloaded damping ratio", a.Unloaded.DampingRatio, 1/(2*want.Q()), 0.01)
			inside(t, "total Q", a.Total.Q, loaded.Q(), 0.01)
			if len(a.Findings) != 0 {
				t.Errorf("findings: %v", a.Findings)
			}
			sumIsWhole(t, a.Budget)
			part := map[string]Loss{}
			for _, l := range a.Budget {
				part[l.Part] = l
			}
			if name == "series" { // resistances in one loop stand as they are
				inside(t, "source", part["source"].Resistance, 50, 0)
				inside(t, "resistor", part["resistor"].Resistance, 15, 0)
				inside(t, "coil and the rest", part["coil and the rest"].Resistance, 15, 0.01)
				// R/L + 1/(Rp C') as a resistance in the loop: L/(Rp C').
				inside(t, "probe", part["probe"].Resistance, p.l/(p.rp*(p.c+p.cp)), 1e-3)
			}
		})
	}
}

// TestAnalyzeSweep finds the circuit from its sweep, in whose set-up the source is out
// of the loop and another probe hangs on it; poles and sums are of the impedances.
func TestAnalyzeSweep(t *testing.T) {
	sweep := readerSweep()
	sweep.cp, sweep.rp = 4e-12, 1e6
	b := reader.bench(sweep)
	b.Sweep.TimebaseU = 1e-4
	q := swept(&sweep, 2e-3).Quantities
	q.NaturalFrequency.U = math.Hypot(q.NaturalFrequency.U, 1e-4*q.NaturalFrequency.Value)
	a := AnalyzeSweep(b, q)
	want := (&physical{rf: reader.rf, rc: reader.rc, l: reader.l, c: reader.c}).pole()
	inside(t, "capacitance", a.Capacitance, reader.c, 1e-3)
	inside(t, "coil resistance", a.Resistance, reader.rc, 0.01)
	inside(t, "unloaded f0", a.Unloaded.NaturalFrequency, want.NaturalFrequency, 2e-4)
	inside(t, "unloaded Q", a.Unloaded.Q, want.Q(), 0.01)
	inside(t, "probe", lossOf(a, "probe").Resistance, sweep.l/(sweep.rp*(sweep.c+sweep.cp)), 1e-3)
	sumIsWhole(t, a.Budget)
	if len(a.Findings) != 0 || lossOf(a, "source").Part != "" {
		t.Errorf("%+v", a)
	}
	// 1e-4 of the clock are 2e-4 of C: with the scatter of f0, that is all there is.
	scatter := 2e-3 / (2 * q.Q.Value)
	closeTo(t, "u(C)/C'", a.Capacitance.U/(reader.c+sweep.cp), 2*math.Hypot(1e-4, scatter), 0.01)
	// A capacitance in the bench file that the sweep contradicts.
	b.Capacitance = quantity.New(1.2e-9, 1e-11, "F")
	b.Inductance.U = 1e-4 * b.Inductance.Value
	a = AnalyzeSweep(b, q)
	if len(a.Findings) != 1 || !strings.Contains(a.Findings[0].Message, "by the sweep and the inductance of the bench file") {
		t.Errorf("%v", a.Findings)
	}
}

func lossOf(a *Analysis, part string) (l Loss) {
	for _, l := range a.Budget {
		if l.Part == part {
			return l
		}
	}
	return l
}

func sumIsWhole(t *testing.T, budget []Loss) {
	t.Helper()
	sum := 0.0
	for _, l := range budget {
		sum += l.Share.Value
	}
	closeTo(t, "sum of the shares", sum, 1, 1e-9)
}

// TestKnownComponents finds the rest of one circuit from each component alone.
func TestKnownComponents(t *testing.T) {
	p := reader
	r, _ := p.measure(t, 80, 30, 1e-4, 2)
	for _, known := range []string{"inductance", "capacitance", "coil resistance"} {
		b := p.bench(p)
		b.Inductance = quantity.Unknown("H")
		switch known {
		case "inductance":
			b.Inductance = quantity.New(p.l, 0.01*p.l, "H")
		case "capacitance":
			b.Capacitance = quantity.New(p.c, 0.01*p.c, "F")
		default:
			b.CoilResistance = quantity.New(p.rc, 0.01*p.rc, "ohm")
		}
		a := Analyze(b, r.Quantities)
		if a.Known != known {
			t.Errorf("known %s: got %s", known, a.Known)
		}
		inside(t, known+": inductance", a.Inductance, p.l, 0.011)
		inside(t, known+": capacitance", a.Capacitance, p.c, 0.011)
		inside(t, known+": coil resistance", a.Resistance, p.rc, 0.1)
		if known == "inductance" { // L C is known far better: 1 % of L is 1 % of C' = 1012 pF
			closeTo(t, "u(C)", a.Capacitance.U, 0.01*(p.c+p.cp), 0.01)
		}
	}
}

// TestPropagation compares uncertainties with the scatter of results whose inputs
// are drawn at random, correlated as they are: no derivative takes part (JCGM
// 101:2008, propagation of distributions; 20000 draws, 3 % of the scatter).
func TestPropagation(t *testing.T) {
	b := reader.bench(reader)
	b.Inductance.U, b.Resistor.U = 1e-3*b.Inductance.Value, 0.1
	b.RingDown.SourceResistance.U, b.RingDown.ProbeCapacitance.U, b.RingDown.TimebaseU = 0.2, 1e-12, 1e-4
	truth := reader.pole()
	fd, rate := truth.DampedFrequency(), truth.DecayRate
	uf, ua, corr := 3e-5*fd, 2e-3*rate, 0.6 // the clock is 1e-4 more on both
	q := &decay.Quantities{DampedFrequency: quantity.New(fd, fd*math.Hypot(3e-5, 1e-4), "Hz"),
		DecayRate: quantity.New(rate, rate*math.Hypot(2e-3, 1e-4), "1/s"), Correlation: corr}
	a := Analyze(b, q)
	draws := drawAnalyses(b, fd, rate, uf, ua, corr, 20000)
	for i, got := range []quantity.Quantity{a.Inductance, a.Capacitance, a.Resistance, a.Unloaded.NaturalFrequency, a.Unloaded.Q, a.Budget[0].Share} {
		closeTo(t, "standard uncertainty of result "+string(rune('0'+i)), got.U, stat.StdDev(draws[i], nil), 0.03)
	}
}

// TestGumH2 runs example H.2 of JCGM 100:2008 through the propagation of this
// package: a pair and a single input with the covariance of the example, here in
// its three correlated pairs as printed: r(V,I) -0.36 with the phase held.
func TestGumH2(t *testing.T) {
	joint, err := quantity.Means([]string{"V", "I", "phi"}, []string{"V", "A", "rad"},
		[]float64{5.007, 4.994, 5.005, 4.990, 4.999},
		[]float64{19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3},
		[]float64{1.0456, 1.0438, 1.0468, 1.0428, 1.0433})
	if err != nil {
		t.Fatal(err)
	}
	var in inputs
	var v, i, phi float64
	cov := mat.NewSymDense(3, nil)
	for r := range 3 {
		for c := range 3 {
			cov.SetSym(r, c, joint.Covariance(r, c))
		}
	}
	in.blocks = append(in.blocks, block{0, cov})
	in.bind("V", joint.At(0).Value, &v)
	in.bind("I", joint.At(1).Value, &i)
	in.bind("phi", joint.At(2).Value, &phi)
	got, err := in.propagate([]result{{"R", "ohm"}, {"X", "ohm"}, {"Z", "ohm"}}, func(y []float64) {
		y[0], y[1], y[2] = v*math.Cos(phi)/i, v*math.Sin(phi)/i, v/i
	})
	if err != nil {
		t.Fatal(err)
	}
	for k, want := range []struct{ value, u float64 }{{127.732, 0.07107141}, {219.847, 0.29558168}, {254.260, 0.23633613}} {
		printed(t, "value", got.At(k).Value, want.value, 3)
		closeTo(t, "u", got.At(k).U, want.u, 1e-6)
	}
	closeTo(t, "r(R,X)", got.Correlation(0, 1), -0.58842978, 1e-6)
	closeTo(t, "r(R,Z)", got.Correlation(0, 2), -0.48525922, 1e-6)
	closeTo(t, "r(X,Z)", got.Correlation(1, 2), 0.99251165, 1e-6)
}

// TestWrongBench: what cannot be is named, and its gravity is right.
func TestWrongBench(t *testing.T) {
	r, _ := reader.measure(t, 80, 30, 1e-3, 3)
	for _, c := range []struct {
		name     string
		change   func(b *Bench)
		severity capture.Severity
		want     string // "" for no finding
	}{
		{"right", func(*Bench) {}, "", ""},
		{"more source than loss", func(b *Bench) { b.RingDown.SourceResistance.Value = 75 }, capture.Warning, "takes away more loss"},
		{"all the loss", func(b *Bench) { b.RingDown.SourceResistance = quantity.New(65.2, 0.5, "ohm") }, capture.Note, "none within its uncertainty"},
		{"a hundred times the inductance", func(b *Bench) { b.Inductance.Value *= 100 }, capture.Warning, "less than the 12 pF of the probe"},
		{"a probe of 100 ohm", func(b *Bench) { b.RingDown.ProbeResistance.Value = 100 }, capture.Warning, "No coil and capacitor"},
		{"another capacitor", func(b *Bench) {
			b.Inductance.U = 1e-6
			b.Capacitance = quantity.New(1.1e-9, 1e-11, "F")
		}, capture.Warning, "The capacitance is"},
		{"the same capacitor", func(b *Bench) {
			b.Inductance.U = 1e-6
			b.Capacitance = quantity.New(1.01e-9, 1e-11, "F")
		}, "", ""},
		{"a capacitor read wrongly", func(b *Bench) { b.Capacitance = quantity.New(10e-9, math.NaN(), "F") }, capture.Warning, "The capacitance is"},
		{"nothing known", func(b *Bench) { b.Inductance = quantity.Unknown("H") }, capture.Note, "gives none of"},
	} {
		b := reader.bench(reader)
		c.change(b)
		a := Analyze(b, r.Quantities)
		if c.want == "" {
			if len(a.Findings) != 0 {
				t.Errorf("%s: %v", c.name, a.Findings)
			}
			continue
		}
		if len(a.Findings) != 1 || a.Findings[0].Code != capture.Loading || a.Findings[0].Severity != c.severity ||
			!strings.Contains(a.Findings[0].Message, c.want) {
			t.Errorf("%s: %+v, want a %s with %q", c.name, a.Findings, c.severity, c.want)
		}
	}
}

// TestShare: no digits that nobody measured, neither of the rounding of a sum that is
// whole by its nature nor of values that count as exact.
func TestShare(t *testing.T) {
	for _, c := range []struct {
		share quantity.Quantity
		want  string
	}{
		{quantity.New(1, 2.6e-14, ""), "100 %"},
		{quantity.New(50.0/53, 0, ""), "94.34 %"},
		{quantity.New(0.6246, 0.0064, ""), "62.46(64) %"},
	} {
		if got := Share(c.share); got != c.want {
			t.Errorf("%g ± %g: got %q, want %q", c.share.Value, c.share.U, got, c.want)
		}
	}
}

// TestLimitsAsk: limits on what only components tell say why they are undecided.
func TestLimitsAsk(t *testing.T) {
	b, err := ParseBench([]byte("[limits]\nunloaded_q = { min = 30 }\n"), "b")
	if err != nil {
		t.Fatal(err)
	}
	q := &decay.Quantities{DampedFrequency: quantity.New(125e3, 1, "Hz"), DecayRate: quantity.New(1e4, 1, "1/s")}
	if a := Analyze(b, q); len(a.Findings) != 1 || a.Findings[0].Code != capture.Loading {
		t.Errorf("found %+v, want a note of loading", a.Findings)
	}
}
