package circuit

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// A physical is a whole circuit, part by part, to be simulated without any
// formula of the package. A resistance of 0 in rs, rf, rp is not connected when
// parallel is set, and a wire when it is not; rp of 0 is never connected.
type physical struct {
	parallel       bool
	rs, rf, rc     float64 // source, fitted resistor, coil
	l, c, rp, cp   float64
	startV, startI float64
}

// ohms returns the loop's resistance and the conductance across the capacitor by
// adding up what is connected where.
func (p *physical) ohms() (series, shunt float64) {
	series = p.rc
	for _, r := range []float64{p.rs, p.rf} {
		if r == 0 {
			continue
		}
		if p.parallel {
			shunt += 1 / r
		} else {
			series += r
		}
	}
	if p.rp != 0 {
		shunt += 1 / p.rp
	}
	return series, shunt
}

// ring integrates di/dt and dv/dt of the two Kirchhoff equations by the classical
// Runge-Kutta method and returns the voltage of the capacitor.
func (p *physical) ring(interval float64, n, sub int) []float64 {
	series, shunt := p.ohms()
	slope := func(i, v float64) (di, dv float64) {
		return -(series*i + v) / p.l, (i - shunt*v) / (p.c + p.cp)
	}
	h, i, v := interval/float64(sub), p.startI, p.startV
	out := make([]float64, n)
	for k := range out {
		out[k] = v
		for range sub {
			a1, b1 := slope(i, v)
			a2, b2 := slope(i+h/2*a1, v+h/2*b1)
			a3, b3 := slope(i+h/2*a2, v+h/2*b2)
			a4, b4 := slope(i+h*a3, v+h*b3)
			i += h / 6 * (a1 + 2*a2 + 2*a3 + a4)
			v += h / 6 * (b1 + 2*b2 + 2*b3 + b4)
		}
	}
	return out
}

// gain returns the voltage of the capacitor for one volt of the source (or, in a
// parallel circuit, for one ampere into it) by impedances at the complex
// frequency s in rad/s.
func (p *physical) gain(s complex128) complex128 {
	across := s * complex(p.c+p.cp, 0) // admittance across the capacitor
	if p.rp != 0 {
		across += complex(1/p.rp, 0)
	}
	coil := s*complex(p.l, 0) + complex(p.rc, 0)
	if !p.parallel {
		return 1 / across / (1/across + coil + complex(p.rs+p.rf, 0))
	}
	total := across + 1/coil
	for _, r := range []float64{p.rs, p.rf} {
		if r != 0 {
			total += complex(1/r, 0)
		}
	}
	return 1 / total
}

// pole follows the impedances to the complex frequency of the free ring, where
// the gain is infinite, by Newton's method with a numerical derivative.
func (p *physical) pole() Resonance {
	w := 1 / math.Sqrt(p.l*(p.c+p.cp))
	s := complex(-0.01*w, w)
	inverse := func(s complex128) complex128 { return 1 / p.gain(s) }
	for range 60 {
		h := s * 1e-6
		s -= inverse(s) / ((inverse(s+h) - inverse(s-h)) / (2 * h))
	}
	return Resonance{cmplx.Abs(s) / (2 * math.Pi), -real(s)}
}

// TestLoadedAgainstImpedances finds the free ring of whole circuits from their
// impedances, in both topologies.
func TestLoadedAgainstImpedances(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 1))
	between := func(lo, hi float64) float64 { return lo * math.Pow(hi/lo, rng.Float64()) }
	for k := range 200 {
		p := physical{parallel: k%2 == 1, l: between(1e-6, 1), c: between(1e-12, 1e-6)}
		z := math.Sqrt(p.l / p.c)
		p.cp = p.c * between(1e-3, 1)
		p.rp, p.rc = z*between(3, 1e5), z*between(1e-5, 0.2)
		p.rs, p.rf = z*between(1e-4, 0.2), z*between(1e-4, 0.2)
		if p.parallel {
			p.rs, p.rf = z*between(5, 1e4), z*between(5, 1e4)
		}
		b := p.bench(p)
		s := newScene(b)
		got := Tank{p.l, p.c, p.rc}.Loaded(s.load(&s.ringDown))
		want := p.pole()
		closeTo(t, "f0", got.NaturalFrequency, want.NaturalFrequency, 1e-9)
		closeTo(t, "decay rate", got.DecayRate, want.DecayRate, 1e-8)
	}
}

// bench returns the bench file that knows all but the coil's resistance: the
// circuit rings down as p and is swept as sweep.
func (p *physical) bench(sweep physical) *Bench {
	b := &Bench{File: "b.toml", Topology: Series, CoilResistance: quantity.Unknown("ohm"), Capacitance: quantity.Unknown("F"),
		Inductance: quantity.New(p.l, math.NaN(), "H"), Resistor: given(p.rf, "ohm")}
	if p.parallel {
		b.Topology = Parallel
	}
	b.RingDown, b.Sweep = p.setup(), sweep.setup()
	return b
}

func (p *physical) setup() Setup {
	return Setup{SourceResistance: given(p.rs, "ohm"), ProbeResistance: given(p.rp, "ohm"), ProbeCapacitance: given(p.cp, "F"),
		MeterBandwidth: quantity.Unknown("Hz")}
}

// given is a value of a bench file without an uncertainty; 0 is left out.
func given(x float64, unit string) quantity.Quantity {
	if x == 0 {
		return quantity.Unknown(unit)
	}
	return quantity.New(x, math.NaN(), unit)
}

// measure rings the circuit and fits the ring with noise of sigma.
func (p *physical) measure(t *testing.T, perCycle, cycles int, sigma float64, seed uint64) (*decay.Result, *capture.Channel) {
	t.Helper()
	interval := 2 * math.Pi * math.Sqrt(p.l*(p.c+p.cp)) / float64(perCycle)
	y := p.ring(interval, perCycle*cycles, 20)
	rng := rand.New(rand.NewPCG(seed, 1))
	for i := range y {
		y[i] += sigma * rng.NormFloat64()
	}
	ch := &capture.Channel{Name: "v", Number: 1, Unit: "V", Axis: &capture.Axis{N: len(y), Interval: interval}, Samples: y}
	r := decay.Analyze(ch, decay.Options{})
	if r.Quantities == nil {
		t.Fatalf("the simulated ring was refused: %v", r.Findings)
	}
	return r, ch
}

// drawAnalyses draws all inputs of a bench file at random and returns inductance,
// capacitance, resistance, unloaded f0 and Q and the source's share of each draw.
func drawAnalyses(b *Bench, fd, rate, uf, ua, corr float64, n int) [6][]float64 {
	rng := rand.New(rand.NewPCG(11, 1))
	draw := func(q quantity.Quantity) float64 {
		if math.IsNaN(q.U) {
			return q.Value
		}
		return q.Value + q.U*rng.NormFloat64()
	}
	var out [6][]float64
	for range n {
		z1, z2, scale := rng.NormFloat64(), rng.NormFloat64(), 1+b.RingDown.TimebaseU*rng.NormFloat64()
		a := rate + ua*z1
		f := fd + uf*(corr*z1+math.Sqrt(1-corr*corr)*z2)
		source, resistor := draw(b.RingDown.SourceResistance), draw(b.Resistor)
		load := Load{source + resistor, 1 / draw(b.RingDown.ProbeResistance), draw(b.RingDown.ProbeCapacitance)}
		l := draw(b.Inductance)
		tank := WithInductance(l, Damped(f*scale, a*scale), load)
		free := tank.Loaded(Load{Resistance: resistor})
		for i, x := range []float64{l, tank.Capacitance, tank.Resistance, free.NaturalFrequency, free.Q(), source / l / (2 * a * scale)} {
			out[i] = append(out[i], x)
		}
	}
	return out
}
