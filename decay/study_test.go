package decay

import (
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
	"text/tabwriter"
)

// The studies run the whole analysis on seeded records and compare it with the
// Cramer-Rao bound, its own intervals, and the truth. By default each cell has few
// records and wide tolerances; `go test ./decay -run Study -v -study 1000` prints
// the tables.
var studyRecords = flag.Int("study", 0, "seeded records in each cell of the studies; 0 runs a short version")

func records(short int) int {
	if *studyRecords > 0 {
		return *studyRecords
	}
	return short
}

// cell is one combination of quality factor, samples per cycle, amplitude over
// noise and window in time constants.
type cell struct {
	q, spc, r, u float64
	pre          float64 // share of a pre-trigger stretch before the decay
}

func (c cell) rates() (a, w float64) {
	w = 2 * math.Pi / c.spc
	return w / math.Sqrt(4*c.q*c.q-1), w
}

func (c cell) samples() int {
	a, _ := c.rates()
	return int(c.u / a)
}

func (c cell) String() string {
	return fmt.Sprintf("Q %g\t%g\t%g\t%g\t%d", c.q, c.spc, c.r, c.u, c.samples())
}

// record makes the decay of a cell without noise, of random phase and offset,
// behind a level that the pre-trigger stretch holds.
func (c cell) record(rng *rand.Rand) (y []float64, first int) {
	a, w := c.rates()
	n := c.samples()
	first = int(c.pre * float64(n))
	y = make([]float64, first+n)
	phase, offset := rng.Float64()*2*math.Pi, rng.NormFloat64()
	for i := range y {
		k := float64(i - first)
		if k < 0 {
			y[i] = offset - math.Cos(phase)
		} else {
			y[i] = offset + math.Exp(-a*k)*math.Cos(w*k+phase)
		}
	}
	return y, first
}

// bound returns the Cramer-Rao uncertainties of f (per interval), tau and Q for
// white noise of 1/r on the samples of the decay alone, from the exact Jacobian.
func (c cell) bound(t *testing.T, y []float64) Quantities {
	t.Helper()
	a, w := c.rates()
	n, ok := newRing(series{y: y, dt: 1}).at([]float64{a, w})
	inv, sound := n.jtj.inverse()
	if !ok || !sound {
		t.Fatal("no bound")
	}
	for i := range inv.v {
		inv.v[i] /= c.r * c.r
	}
	return quantitiesOf(a, w, 1, &inv, 0)
}

// score sums up what the analysis made of the records of a cell.
type score struct {
	n, refused, gross, warned int
	zf, ztau, zq              float64 // squared errors over the bound
	inside                    [3]int  // of the stated 95 % intervals of f, tau, Q
}

func (s *score) add(r *Result, truth, bound *Quantities) {
	s.n++
	if r.Quantities == nil || !r.Quantities.DampedFrequency.Known() {
		s.refused++
		return
	}
	if r.Status != Good {
		s.warned++
	}
	q := r.Quantities
	got := [3]float64{q.DampedFrequency.Value, q.TimeConstant.Value, q.Q.Value}
	u := [3]float64{q.DampedFrequency.U, q.TimeConstant.U, q.Q.U}
	want := [3]float64{truth.DampedFrequency.Value, truth.TimeConstant.Value, truth.Q.Value}
	best := [3]float64{bound.DampedFrequency.U, bound.TimeConstant.U, bound.Q.U}
	var z [3]float64
	for i := range z {
		z[i] = (got[i] - want[i]) / best[i]
	}
	if math.Abs(z[0]) > grossZ || math.Abs(z[2]) > grossZ {
		s.gross++
		return
	}
	for i := range z {
		if math.Abs(got[i]-want[i]) <= 1.96*u[i] {
			s.inside[i]++
		}
	}
	s.zf += z[0] * z[0]
	s.ztau += z[1] * z[1]
	s.zq += z[2] * z[2]
}

// grossZ is an error in units of the bound that chance does not make.
const grossZ = 8

func (s *score) kept() float64 { return float64(s.n - s.refused - s.gross) }

func (s *score) rms() (f, tau, q float64) {
	k := s.kept()
	return math.Sqrt(s.zf / k), math.Sqrt(s.ztau / k), math.Sqrt(s.zq / k)
}

func (s *score) coverage(i int) float64 { return 100 * float64(s.inside[i]) / s.kept() }

// boundCells are those of the bound study. Windows of one time constant at a Q
// near one hold a fraction of a cycle and a few samples: there the bound itself
// leaves nothing to measure, and they are left out where it exceeds a fifth of Q.
func boundCells() []cell {
	var out []cell
	for _, pre := range []float64{0, 0.2} {
		for _, q := range []float64{0.6, 0.8, 2, 8, 40, 500, 3e4, 1e6} {
			for _, spc := range []float64{2.5, 7, 20, 200, 1000} {
				for _, r := range []float64{5, 30, 300, 3000} {
					for _, u := range []float64{0.5, 1, 3, 10} {
						c := cell{q, spc, r, u, pre}
						if n := c.samples(); n >= 100 && n <= 60000 {
							out = append(out, c)
						}
					}
				}
			}
		}
	}
	return out
}

// TestStudyBound: scatter over the bound, coverage and gross failures.
func TestStudyBound(t *testing.T) {
	n := records(3)
	w := tabwriter.NewWriter(t.Output(), 0, 0, 2, ' ', 0)
	fmt.Fprintln(w, "cell\tsamples/cycle\tA/sigma\tT/tau\tsamples\tpre\trms f\trms tau\trms Q\t95% f\t95% tau\t95% Q\trefused\tgross\twarned")
	var all score
	for i, c := range boundCells() {
		if *studyRecords == 0 && (i%4 != 1 || c.samples() > 5000) {
			continue
		}
		rng := rand.New(rand.NewPCG(1, 99))
		y, first := c.record(rng)
		if b := c.bound(t, y[first:]); b.Q.U > 0.2*c.q {
			continue
		}
		var s score
		for k := range n {
			seed := uint64(i*100003 + k) // no two cells share their noise
			rng := rand.New(rand.NewPCG(seed, 7))
			y, first := c.record(rng)
			b := c.bound(t, y[first:])
			r := Analyze(channel(withNoise(y, 1/c.r, seed), 0, 1), Options{})
			s.add(r, &b, &b)
			all.add(r, &b, &b)
		}
		f, tau, q := s.rms()
		fmt.Fprintf(w, "%v\t%g\t%.3f\t%.3f\t%.3f\t%.1f\t%.1f\t%.1f\t%d\t%d\t%d\n", c, c.pre, f, tau, q,
			s.coverage(0), s.coverage(1), s.coverage(2), s.refused, s.gross, s.warned)
	}
	f, tau, q := all.rms()
	fmt.Fprintf(w, "all\t\t\t\t\t\t%.3f\t%.3f\t%.3f\t%.2f\t%.2f\t%.2f\t%d\t%d\t%d of %d\n", f, tau, q,
		all.coverage(0), all.coverage(1), all.coverage(2), all.refused, all.gross, all.warned, all.n)
	w.Flush()
	// Loose enough for the short version; the long one is read by people.
	if f > 1.1 || tau > 1.1 || q > 1.1 {
		t.Errorf("scatter over bound %.3f, %.3f, %.3f", f, tau, q)
	}
	if bad := all.refused + all.gross; float64(bad) > 0.02*float64(all.n) {
		t.Errorf("%d refused and %d gross of %d", all.refused, all.gross, all.n)
	}
	for i := range 3 {
		if c := all.coverage(i); c < 92 || c > 98 {
			t.Errorf("coverage %d: %.1f %%", i, c)
		}
	}
}

// noiseKinds are the colours of noise of the coverage study. Each fills e with
// noise of unit standard deviation.
var noiseKinds = []struct {
	name string
	make func(rng *rand.Rand, n int) []float64
}{
	{"white", func(rng *rand.Rand, n int) []float64 { return autoregressive(rng, n, 0) }},
	{"AR(1) 0.5", func(rng *rand.Rand, n int) []float64 { return autoregressive(rng, n, 0.5) }},
	{"AR(1) 0.9", func(rng *rand.Rand, n int) []float64 { return autoregressive(rng, n, 0.9) }},
	{"AR(1) -0.5", func(rng *rand.Rand, n int) []float64 { return autoregressive(rng, n, -0.5) }},
	{"band-limited to a tenth", bandLimited},
}

func autoregressive(rng *rand.Rand, n int, rho float64) []float64 {
	e := make([]float64, n)
	x := rng.NormFloat64()
	for i := range e {
		e[i] = x
		x = rho*x + math.Sqrt(1-rho*rho)*rng.NormFloat64()
	}
	return e
}

// bandLimited is white noise through two equal one-pole low-passes with a corner
// at a tenth of the Nyquist frequency, scaled to unit standard deviation.
func bandLimited(rng *rand.Rand, n int) []float64 {
	k := math.Exp(-math.Pi / 10)
	e := make([]float64, n+200)
	x1, x2, sum := 0.0, 0.0, 0.0
	for i := range e {
		x1 = k*x1 + (1-k)*rng.NormFloat64()
		x2 = k*x2 + (1-k)*x1
		e[i] = x2
	}
	e = e[200:]
	for _, v := range e {
		sum += v * v
	}
	scale := 1 / math.Sqrt(sum/float64(n))
	for i := range e {
		e[i] *= scale
	}
	return e
}

// TestStudyCoverage: 95 % intervals in coloured noise and behind an 8-bit converter.
func TestStudyCoverage(t *testing.T) {
	n := records(60)
	w := tabwriter.NewWriter(t.Output(), 0, 0, 2, ' ', 0)
	fmt.Fprintln(w, "noise\tcell\tsamples/cycle\tA/sigma\tT/tau\tsamples\t95% f\t95% tau\t95% Q\trefused\twarned")
	report := func(name string, c cell, make func(i int) []float64) {
		var s score
		a, omega := c.rates()
		wide := sym{n: 2}
		wide.set(0, 0, 1)
		wide.set(1, 1, 1)
		truth := quantitiesOf(a, omega, 1, &wide, 0)
		for i := range n {
			s.add(Analyze(channel(make(i), 0, 1), Options{}), &truth, &truth)
		}
		fmt.Fprintf(w, "%s\t%v\t%.1f\t%.1f\t%.1f\t%d\t%d\n", name, c, s.coverage(0), s.coverage(1), s.coverage(2), s.refused, s.warned)
		// Three standard errors of the short version.
		slack := 3 * math.Sqrt(95*5/float64(n))
		for k := range 3 {
			if p := s.coverage(k); p < 95-slack-1 {
				t.Errorf("%s, %v: coverage %.1f %%", name, c, p)
			}
		}
	}
	cells := []cell{{2, 40, 50, 5, 0}, {8, 20, 30, 4, 0.2}, {40, 20, 20, 3, 0}, {500, 20, 20, 3, 0}}
	if *studyRecords == 0 {
		cells = cells[1:3]
	}
	for _, kind := range noiseKinds {
		for _, c := range cells {
			report(kind.name, c, func(i int) []float64 {
				rng := rand.New(rand.NewPCG(uint64(i), 41))
				y, _ := c.record(rng)
				for k, e := range kind.make(rng, len(y)) {
					y[k] += e / c.r
				}
				return y
			})
		}
	}
	for _, c := range cells {
		report("8 bits, noise 0.5 step", c, func(i int) []float64 {
			rng := rand.New(rand.NewPCG(uint64(i), 43))
			y, _ := c.record(rng)
			const step = 1.0 / 100
			for k := range y {
				y[k] = step * math.Round((y[k]+0.5*step*rng.NormFloat64())/step)
			}
			return y
		})
	}
	w.Flush()
}
