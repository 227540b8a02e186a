package driven

import (
	"flag"
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"dieaway/capture"
	"dieaway/decay"
)

// The studies run the whole analysis on seeded sweeps and compare it with the bound
// and with its own intervals. By default each cell has few sweeps and wide
// tolerances; `go test ./decay/driven -run Study -v -study 1000` prints the tables.
var studySweeps = flag.Int("study", 0, "seeded sweeps in each cell of the studies; 0 runs a short version")

// cell is one kind of sweep: Q, half bandwidths to each side, rows in a bandwidth,
// and the greatest response over the noise.
type cell struct {
	q, m, perB, r float64
	phase         bool
	across        capture.Part
}

func (c cell) String() string {
	kind := "magnitude"
	if c.phase {
		kind = "complex"
	}
	return fmt.Sprintf("%-9s across %-9s Q %-5g span %2g half bandwidths, %2g rows in one, peak/noise %3g", kind, c.across, c.q, c.m, c.perB, c.r)
}

func (c cell) scene() scene {
	s := loop07(c.q)
	s.across, s.phase, s.phaseOffset = c.across, c.phase, 0.7
	top := 1.0 // of the source, what the response reaches at most
	if c.across == capture.Capacitor || c.across == capture.Inductor {
		top = c.q
	}
	s.noise = top / c.r
	return s.span(2*int(c.m*c.perB/2)+2, c.m) // an even number: no row at f0, where a notch has no slope
}

// bound is the Cramer-Rao bound of f0 and Q for the scene in white noise of its
// deviation, from derivatives of the impedances by L, R, gain and phase.
func (s scene) bound(t *testing.T) (sdF0, sdQ float64) {
	t.Helper()
	par := []float64{s.f0(), s.q(), 1, 0}
	n := len(par)
	if !s.phase {
		n = 3
	}
	at := func(p []float64, f float64) complex128 {
		o := s
		o.l = 1 / (sq(2*math.Pi*p[0]) * o.c)
		o.resistor = math.Sqrt(o.l/o.c)/p[1] - o.coil - o.source
		v, _ := o.answer(f)
		return v * complex(p[2]*math.Cos(p[3]), p[2]*math.Sin(p[3]))
	}
	var info sums
	for _, f := range s.frequencies {
		base := at(par, f)
		re, im := make([]float64, n), make([]float64, n)
		for k := range n {
			step := []float64{1e-5 * par[0] / par[1], 1e-5 * par[1], 1e-5, 1e-5}[k]
			p := append([]float64{}, par...)
			p[k] += step
			up := at(p, f)
			p[k] -= 2 * step
			d := (up - at(p, f)) / complex(2*step, 0)
			if s.phase {
				re[k], im[k] = real(d)/s.noise, imag(d)/s.noise
			} else {
				re[k] = (real(base)*real(d) + imag(base)*imag(d)) / math.Hypot(real(base), imag(base)) / s.noise
			}
		}
		info.add(re, 0)
		info.add(im, 0)
	}
	jtj, cov := mat.NewSymDense(n, nil), mat.NewSymDense(n, nil)
	for i := range n {
		for k := 0; k <= i; k++ {
			jtj.SetSym(i, k, info.jtj[i][k])
		}
	}
	var c mat.Cholesky
	if !c.Factorize(jtj) || c.InverseTo(cov) != nil {
		t.Fatal("no bound")
	}
	return math.Sqrt(cov.At(0, 0)), math.Sqrt(cov.At(1, 1))
}

// studyCells: what does not say otherwise is enough for the closed forms,
// which belong to the resonance curve of a high Q.
var studyCells = []cell{
	{q: 200, m: 20, perB: 10, r: 100, across: capture.Resistor},
	{q: 200, m: 20, perB: 10, r: 50, across: capture.Resistor, phase: true},
	{q: 100, m: 3, perB: 20, r: 100, across: capture.Capacitor},
	{q: 100, m: 3, perB: 20, r: 100, across: capture.Capacitor, phase: true},
	{q: 30, m: 2, perB: 10, r: 30, across: capture.Inductor},
	{q: 5, m: 3, perB: 20, r: 100, across: capture.Capacitor},
	{q: 5, m: 3, perB: 20, r: 100, across: capture.Resistor, phase: true},
	{q: 1, m: 1.5, perB: 60, r: 200, across: capture.Capacitor},
	{q: 0.6, m: 1.1, perB: 100, r: 300, across: capture.Capacitor},
	{q: 50, m: 10, perB: 10, r: 1000, across: capture.Both},
	{q: 1e5, m: 3, perB: 20, r: 100, across: capture.Capacitor},
}

func TestStudyBoundAndCoverage(t *testing.T) {
	n, low, high, least := 40, 0.65, 1.4, 0.82
	if *studySweeps > 0 {
		// Within 5 % and 95 %, as far as so many sweeps can tell (three and two of
		// their standard deviations).
		n = *studySweeps
		chance := 2/math.Sqrt(2*float64(n)) - 2/math.Sqrt(2000)
		low, high = 0.95-math.Max(0, chance), 1.05+math.Max(0, chance)
		least = 0.95 - 3*math.Sqrt(0.95*0.05/float64(n))
	}
	for k, c := range studyCells {
		s := c.scene()
		sdF, sdQ := s.bound(t)
		var sumF, sumQ float64
		insideF, insideQ, refused, notes := 0, 0, 0, 0
		rng := newRand(uint64(k))
		for range n {
			r := Analyze(s.sweep(rng), Options{Across: c.across})
			if r.Quantities == nil {
				refused++
				continue
			}
			if r.Status != decay.Good {
				notes++
			}
			f, q := r.Quantities.NaturalFrequency, r.Quantities.Q
			sumF, sumQ = sumF+sq(f.Value-s.f0()), sumQ+sq(q.Value-c.q)
			if math.Abs(f.Value-s.f0()) < 1.96*f.U {
				insideF++
			}
			if math.Abs(q.Value-c.q) < 1.96*q.U {
				insideQ++
			}
		}
		count := float64(n - refused)
		ratioF, ratioQ := math.Sqrt(sumF/count)/sdF, math.Sqrt(sumQ/count)/sdQ
		coverF, coverQ := float64(insideF)/count, float64(insideQ)/count
		t.Logf("%v: scatter/bound f0 %.3f, Q %.3f; inside of 95 %%: f0 %.1f, Q %.1f; refused %d, doubtful %d", c, ratioF, ratioQ, 100*coverF, 100*coverQ, refused, notes)
		for what, x := range map[string]float64{"f0": ratioF, "Q": ratioQ} {
			if x < low || x > high {
				t.Errorf("%v: scatter of %s is %.3f of the bound", c, what, x)
			}
		}
		if coverF < least || coverQ < least || refused > 0 {
			t.Errorf("%v: coverage f0 %.3f, Q %.3f, refused %d", c, coverF, coverQ, refused)
		}
	}
}

// The bound itself: the closed forms for the resonance curve at high
// Q, wide and narrow.
func TestBoundA4(t *testing.T) {
	for _, w := range []struct {
		phase bool
		m     float64
		f0, q float64 // factors of the span
	}{
		{true, 400, 1, 1}, {true, 1, 1.820, 1.820}, {true, 2, 1.275, 1.275}, {true, 3, 1.155, 1.155}, {true, 5, 1.080, 1.080},
		{false, 400, 1, 1}, {false, 1, 1.405, 3.206}, {false, 2, 1.079, 1.643}, {false, 3, 1.027, 1.346}, {false, 5, 1.006, 1.172},
	} {
		c := cell{q: 1e5, m: w.m, perB: 200, r: 50, across: capture.Resistor, phase: w.phase}
		s := c.scene()
		b := s.f0() / c.q
		df := 2 * w.m * b / 2 / float64(len(s.frequencies)-1)
		want := s.noise * 4 * math.Sqrt(df/(math.Pi*b))
		if w.phase {
			want = s.noise * math.Sqrt(8*df/(math.Pi*b))
		}
		sdF, sdQ := s.bound(t)
		near(t, fmt.Sprintf("phase %v, span %g: sd(Q)/Q over the closed form", w.phase, w.m), sdQ/c.q/want, w.q, 0.012*w.q)
		near(t, fmt.Sprintf("phase %v, span %g: sd(f0) over the closed form", w.phase, w.m), sdF/(b/2)/want, w.f0, 0.012*w.f0)
	}
}
