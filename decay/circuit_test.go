package decay

import (
	"math"
	"math/rand/v2"
	"testing"
)

// seriesCircuit integrates L q” + R q' + q/C = 0 from a charged capacitor by the
// classical Runge-Kutta method in steps a hundredth of the sampling interval, and
// samples the capacitor voltage. No closed form of the decay enters.
func seriesCircuit(l, r, c, v0, interval float64, n int) []float64 {
	const sub = 100
	h := interval / sub
	q, i := c*v0, 0.0
	slope := func(q, i float64) (dq, di float64) { return i, -(r*i + q/c) / l }
	out := make([]float64, n)
	for k := range out {
		out[k] = q / c
		for range sub {
			a1, b1 := slope(q, i)
			a2, b2 := slope(q+h/2*a1, i+h/2*b1)
			a3, b3 := slope(q+h/2*a2, i+h/2*b2)
			a4, b4 := slope(q+h*a3, i+h*b3)
			q += h / 6 * (a1 + 2*a2 + 2*a3 + a4)
			i += h / 6 * (b1 + 2*b2 + 2*b3 + b4)
		}
	}
	return out
}

func withNoise(y []float64, sigma float64, seed uint64) []float64 {
	rng := rand.New(rand.NewPCG(seed, 1))
	out := make([]float64, len(y))
	for i, v := range y {
		out[i] = v + sigma*rng.NormFloat64()
	}
	return out
}

// TestWorkedExamples runs circuits of OpenStax, University Physics Volume 2,
// chapters on alternating current and RLC circuits (CC BY): printed values to
// their printed digits, exact ones (derived) to the uncertainty of the fit.
func TestWorkedExamples(t *testing.T) {
	for _, c := range []struct {
		name                    string
		r, l, c, v0             float64
		f0, q                   float64 // exact
		printedF, printedQ      float64 // 0: not printed
		halfLife, printedHalf   float64 // time to half amplitude, s
		decrement, printedWidth float64 // printedWidth in rad/s
	}{
		{name: "0.2 ohm, 4 mH, 2 uF", r: 0.2, l: 4e-3, c: 2e-6, v0: 4, f0: 1779.40636, q: 223.606798,
			printedF: 1.12e4 / (2 * math.Pi), printedQ: 224, decrement: 0.0140497, printedWidth: 50},
		{name: "100 ohm, 150 mH, 0.25 uF", r: 100, l: 0.15, c: 0.25e-6, v0: 1, f0: 821.872592, q: 7.745967,
			printedF: 820, decrement: 0.40642547},
		{name: "100 ohm, 2 H, 5 uF", r: 100, l: 2, c: 5e-6, v0: 1, f0: 50.3292121, q: 6.3245553,
			printedF: 50, printedQ: 6.32, printedWidth: 50},
		{name: "2 ohm, 10 mH, 1.5 uF", r: 2, l: 10e-3, c: 1.5e-6, v0: 1, f0: 1299.494669, q: 40.824829,
			halfLife: 6.931472e-3, printedHalf: 6.9e-3, decrement: 0.0769587619},
	} {
		t.Run(c.name, func(t *testing.T) {
			tau := 2 * c.l / c.r
			interval := 1 / c.f0 / 25
			y := seriesCircuit(c.l, c.r, c.c, c.v0, interval, int(4*tau/interval))
			r := Analyze(channel(withNoise(y, 1e-3*c.v0, 3), 0, interval), Options{})
			if r.Status != Good {
				t.Fatalf("%s: %v", r.Status, r.Findings)
			}
			q := r.Quantities
			within(t, "f0", q.NaturalFrequency.Value, c.f0, 4*q.NaturalFrequency.U)
			within(t, "Q", q.Q.Value, c.q, 4*q.Q.U)
			if c.decrement > 0 {
				within(t, "log decrement", q.LogDecrement.Value, c.decrement, 4*q.LogDecrement.U)
			}
			if c.halfLife > 0 {
				half := math.Ln2 * q.TimeConstant.Value
				within(t, "half time", half, c.halfLife, 4*math.Ln2*q.TimeConstant.U)
				near(t, "printed half time", half, c.printedHalf, 0.01)
			}
			if c.printedF > 0 {
				near(t, "printed f0", q.NaturalFrequency.Value, c.printedF, 0.007)
			}
			if c.printedQ > 0 {
				near(t, "printed Q", q.Q.Value, c.printedQ, 0.005)
			}
			if c.printedWidth > 0 {
				near(t, "printed width", 2*math.Pi*q.Bandwidth.Value, c.printedWidth, 0.005)
			}
		})
	}
}

// TestOverdampedExamples: circuits of the same source that do not ring. Where the
// two exponentials can be told apart the damping ratio 1/(2Q) comes out;
// otherwise the record is refused. No damped frequency is ever given.
func TestOverdampedExamples(t *testing.T) {
	for _, c := range []struct {
		name      string
		r, l, c   float64
		q         float64
		mustTell  bool
		intervals float64 // samples per slowest time constant
	}{
		{"40 ohm, 2 mH, 0.5 mF", 40, 2e-3, 0.5e-3, 0.05, false, 60},
		{"4 ohm, 3 mH, 0.8 mF", 4, 3e-3, 0.8e-3, 0.484, true, 60},
		{"200 ohm, 5 mH, 6 uF", 200, 5e-3, 6e-6, 0.14434, true, 600},
	} {
		t.Run(c.name, func(t *testing.T) {
			interval := math.Max(2*c.l/c.r, c.r*c.c) / c.intervals
			y := seriesCircuit(c.l, c.r, c.c, 1, interval, int(7*c.intervals))
			r := Analyze(channel(withNoise(y, 1e-3, 5), 0, interval), Options{})
			if !has(r, "overdamped") && !has(r, "near-critical") {
				t.Errorf("findings %v, want overdamped or near-critical", r.Findings)
			}
			if r.Quantities == nil {
				if c.mustTell {
					t.Errorf("refused: %v", r.Findings)
				}
				return
			}
			q := r.Quantities
			if q.DampedFrequency.Known() {
				t.Errorf("a damped frequency of %v", q.DampedFrequency)
			}
			within(t, "zeta", q.DampingRatio.Value, 1/(2*c.q), 4*q.DampingRatio.U+1e-3/c.q)
			f0 := 1 / (2 * math.Pi * math.Sqrt(c.l*c.c))
			within(t, "f0", q.NaturalFrequency.Value, f0, 4*q.NaturalFrequency.U)
		})
	}
}

// TestDampingTable checks what follows from a rate and a frequency against the
// table of damping ratio, Q, frequency ratio, overshoot and decrement (derived:
// delta = 2 pi zeta/sqrt(1-zeta^2), overshoot = exp(-delta/2)).
func TestDampingTable(t *testing.T) {
	for _, c := range []struct{ zeta, q, ratio, overshoot, delta float64 }{
		{0.01, 50, 0.999950, 96.9071, 0.062835},
		{0.02, 25, 0.999800, 93.9090, 0.125689},
		{0.05, 10, 0.998749, 85.4468, 0.314553},
		{0.1, 5, 0.994987, 72.9248, 0.631484},
		{0.2, 2.5, 0.979796, 52.6621, 1.282550},
		{0.3, 1.6667, 0.953939, 37.2326, 1.975970},
		{0.5, 1, 0.866025, 16.3034, 3.627599},
		{0.7071, 0.7071, 0.707107, 4.3214, 6.283185},
	} {
		zeta := c.zeta
		if zeta == 0.7071 {
			zeta = math.Sqrt2 / 2
		}
		a, w := zeta, math.Sqrt(1-zeta*zeta) // natural angular frequency 1
		q := quantitiesOf(a, w, 1, &sym{n: 5}, 0)
		within(t, "zeta", q.DampingRatio.Value, zeta, 1e-12)
		within(t, "Q", q.Q.Value, c.q, 6e-5)
		within(t, "fd/f0", q.DampedFrequency.Value/q.NaturalFrequency.Value, c.ratio, 6e-7)
		within(t, "overshoot", 100*math.Exp(-q.LogDecrement.Value/2), c.overshoot, 6e-5)
		within(t, "delta", q.LogDecrement.Value, c.delta, 6e-7)
		within(t, "bandwidth", q.Bandwidth.Value, q.NaturalFrequency.Value/q.Q.Value, 1e-12)
		within(t, "Q by tau", math.Pi*q.NaturalFrequency.Value*q.TimeConstant.Value, q.Q.Value, 1e-12)
	}
}

func within(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s = %.9g, want %.9g within %.2g", what, got, want, tol)
	}
}

// TestResiduals: the quick residual is the sample less the curve, for one ring, a
// ring with a baseline, two rings and an amplitude law.
func TestResiduals(t *testing.T) {
	for _, k := range kinds {
		switch k.code {
		case "weak-signal", "baseline-drift", "second-mode", "amplitude-dependent":
		default:
			continue
		}
		rng := rand.New(rand.NewPCG(2, 53))
		ch := channel(withNoise(k.make(rng), 0.01, 2), -3e-4, 1e-6)
		r := Analyze(ch, Options{})
		if len(r.Decays) == 0 {
			t.Fatalf("%s: %v", k.name, r.Findings)
		}
		d := r.Decays[0]
		got := d.Residuals(ch, d.First, d.Last-d.First)
		for i, v := range got {
			fit, _, _ := d.At(ch.Axis.Time(d.First + i))
			if want := ch.Samples[d.First+i] - fit; math.Abs(v-want) > 1e-9 {
				t.Fatalf("%s, sample %d: %g, want %g", k.name, i, v, want)
			}
		}
	}
}
