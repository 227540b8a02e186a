package circuit

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"strings"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// rowsOf are ring-downs of p with capacitors (or resistors) added, by the poles of
// the impedances; scatter draws them anew within their uncertainties.
func rowsOf(p physical, resistors bool, values []float64, tolerance float64, scatter *rand.Rand) []Added {
	var rows []Added
	for _, x := range values {
		off := 0.0
		if scatter != nil {
			off = tolerance * x * scatter.NormFloat64()
		}
		with := p
		r := Added{Capacitance: quantity.New(x, tolerance*x, "F"), Resistance: quantity.Unknown("ohm")}
		if resistors {
			with.rf += x + off
			r.Capacitance, r.Resistance = quantity.Unknown("F"), quantity.New(x, tolerance*x, "ohm")
		} else {
			with.c += x + off
		}
		result, _ := physicalResult(&with)
		r.Result = result.Quantities
		if scatter != nil {
			fd, a := &r.Result.DampedFrequency, &r.Result.DecayRate
			fd.Value += fd.U * scatter.NormFloat64()
			a.Value += a.U * scatter.NormFloat64()
		}
		rows = append(rows, r)
	}
	return rows
}

// node is the switch node of a converter: stray inductance and capacitance with
// the probe on it.
var node = physical{rc: 0.8, l: 12e-9, c: 320e-12, rp: 10e6, cp: 9e-12}

func TestFindComponents(t *testing.T) {
	for _, c := range []struct {
		name      string
		p         physical
		resistors bool
		values    []float64
	}{
		{"switch node, capacitors", node, false, []float64{0, 220e-12, 470e-12, 1e-9}},
		{"antenna, two capacitors", reader, false, []float64{0, 100e-12}},
		{"antenna, resistors", reader, true, []float64{0, 10, 33}},
	} {
		t.Run(c.name, func(t *testing.T) {
			b := c.p.bench(c.p)
			got, err := FindComponents(b, rowsOf(c.p, c.resistors, c.values, 0, nil))
			if err != nil {
				t.Fatal(err)
			}
			closeTo(t, "inductance", got.Inductance.Value, c.p.l, 1e-7)
			closeTo(t, "capacitance", got.Capacitance.Value, c.p.c, 1e-7)
			closeTo(t, "resistance", got.Resistance.Value, c.p.rc, 1e-5)
			if got.Degrees != 2*len(c.values)-3 || len(got.Rows) != len(c.values) || !(got.ChiSquare < 1e-6) || len(got.Findings) != 0 {
				t.Errorf("%d degrees, %d rows, chi-square %g, %v", got.Degrees, len(got.Rows), got.ChiSquare, got.Findings)
			}
		})
	}
}

// TestComponentsScatter compares uncertainties with the scatter over 400 sets of
// captures whose measurements and parts are drawn within theirs, and the mean of
// chi-square with its degrees of freedom (5 % of scatter is 1.4 of its own).
func TestComponentsScatter(t *testing.T) {
	const n = 400
	rng := rand.New(rand.NewPCG(21, 1))
	b := node.bench(node)
	var sum, squares, u [3]float64
	chi := 0.0
	truth := [3]float64{node.l, node.c, node.rc}
	for range n {
		c, err := FindComponents(b, rowsOf(node, false, []float64{0, 220e-12, 470e-12, 1e-9}, 0.01, rng))
		if err != nil {
			t.Fatal(err)
		}
		chi += c.ChiSquare / n
		for i, q := range []quantity.Quantity{c.Inductance, c.Capacitance, c.Resistance} {
			d := q.Value/truth[i] - 1
			sum[i] += d / n
			squares[i] += d * d / n
			u[i] += q.Relative() / n
		}
	}
	for i, name := range []string{"inductance", "capacitance", "resistance"} {
		sd := math.Sqrt(squares[i] - sum[i]*sum[i])
		if !(math.Abs(u[i]/sd-1) < 0.12) || !(math.Abs(sum[i]) < 4*sd/math.Sqrt(n)) {
			t.Errorf("%s: mean uncertainty %.4g, scatter %.4g, mean error %.3g", name, u[i], sd, sum[i])
		}
	}
	if !(math.Abs(chi-5) < 4*math.Sqrt(2*5/float64(n))) {
		t.Errorf("mean chi-square %.3g of 5 degrees of freedom", chi)
	}
}

// TestComponentsSharedClock: an error of the time base is common to all rows; it
// enters L and C in full and the residuals not at all (L and C scale alike).
func TestComponentsSharedClock(t *testing.T) {
	b := node.bench(node)
	rows := rowsOf(node, false, []float64{0, 470e-12}, 0, nil)
	b.RingDown.TimebaseU = 1e-3
	for i := range rows {
		q := rows[i].Result
		q.DampedFrequency.U = math.Hypot(q.DampedFrequency.U, 1e-3*q.DampedFrequency.Value)
		q.DecayRate.U = math.Hypot(q.DecayRate.U, 1e-3*q.DecayRate.Value)
	}
	c, err := FindComponents(b, rows)
	if err != nil {
		t.Fatal(err)
	}
	// L = step of 1/omega0^2 over the step of capacitance: 2e-3 from the clock, and
	// C, a ratio of steps, nothing but the scatter of 1e-5.
	closeTo(t, "u(L)/L", c.Inductance.Relative(), 2e-3, 0.01)
	if !(c.Capacitance.Relative() < 2e-4) {
		t.Errorf("u(C)/C = %g, but the clock cancels", c.Capacitance.Relative())
	}
}

func TestComponentsFindings(t *testing.T) {
	b := node.bench(node)
	rows := rowsOf(node, false, []float64{0, 220e-12, 470e-12, 1e-9}, 0.01, nil)
	rows[2].Capacitance.Value = 1.5 * 470e-12
	c, err := FindComponents(b, rows)
	if err != nil {
		t.Fatal(err)
	}
	if len(c.Findings) == 0 || c.Findings[0].Code != capture.Outliers || !strings.Contains(c.Findings[0].Message, "with 705.0(4.7) pF added, lies") {
		t.Errorf("a wrong part: %v", c.Findings)
	}
	b.RingDown.SourceResistance = quantity.New(5, 0.01, "ohm")
	c, err = FindComponents(b, rowsOf(node, false, []float64{0, 220e-12, 470e-12}, 0.01, nil))
	if err != nil {
		t.Fatal(err)
	}
	if len(c.Findings) != 1 || c.Findings[0].Code != capture.Loading {
		t.Errorf("a source that takes more than all: %v", c.Findings)
	}
}

func TestComponentsRefused(t *testing.T) {
	b := node.bench(node)
	good := rowsOf(node, false, []float64{0, 220e-12}, 0, nil)
	swapped := []Added{good[0], good[1]}
	swapped[0].Capacitance, swapped[1].Capacitance = good[1].Capacitance, good[0].Capacitance
	same := []Added{good[0], good[0]}
	still := []Added{good[0], good[1]}
	still[1].Result = &decay.Quantities{DampedFrequency: quantity.Unknown("Hz"), DecayRate: good[1].Result.DecayRate}
	parallel := *b
	parallel.Topology = Parallel
	for _, c := range []struct {
		b    *Bench
		rows []Added
		want string
	}{
		{b, swapped, "the frequency does not fall with the larger capacitor"},
		{b, same, "the added values are all the same"},
		{b, still, "capture 2 does not ring"},
		{&parallel, rowsOf(node, true, []float64{0, 1}, 0, nil), "in the loop of a series circuit only"},
	} {
		if got, err := FindComponents(c.b, c.rows); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("got %v, %v; want an error with %q", got, err, c.want)
		}
	}
}

// TestDampingNetwork: R = sqrt(L/C) and three to four times C (common practice),
// and the Q that is left, by Newton's method on the admittance of all branches.
func TestDampingNetwork(t *testing.T) {
	c, err := FindComponents(node.bench(node), rowsOf(node, false, []float64{0, 470e-12}, 0, nil))
	if err != nil {
		t.Fatal(err)
	}
	d := c.Damping
	closeTo(t, "resistance", d.Resistance.Value, math.Sqrt(node.l/node.c), 1e-6)
	closeTo(t, "capacitance", d.Capacitance.Value, 3*node.c, 1e-6)
	closeTo(t, "most capacitance", d.Most.Value, 4*node.c, 1e-6)
	r, cs := d.Resistance.Value, d.Capacitance.Value
	admittance := func(s complex128) complex128 {
		return s*complex(node.c, 0) + 1/(s*complex(node.l, 0)+complex(node.rc, 0)) + 1/(complex(r, 0)+1/(s*complex(cs, 0)))
	}
	s := complex(-0.3, 0.9) * complex(1/math.Sqrt(node.l*node.c), 0)
	for range 100 {
		h := s * 1e-6
		s -= admittance(s) / ((admittance(s+h) - admittance(s-h)) / (2 * h))
	}
	if cmplx.Abs(admittance(s)) > 1e-9*node.c*cmplx.Abs(s) {
		t.Fatalf("no zero of the admittance at %v", s)
	}
	closeTo(t, "Q that is left", d.Q, cmplx.Abs(s)/(-2*real(s)), 1e-5)
	if !(d.Q > 0.5 && d.Q < 2) {
		t.Errorf("Q that is left: %g", d.Q)
	}
}

// TestLossOverFrequency: a resistance that rises with the square root of the
// frequency (skin effect) moves neither L nor C; the resistance found is one of
// those there are, within a wider uncertainty, and a note says so.
func TestLossOverFrequency(t *testing.T) {
	rows := rowsOf(node, false, []float64{0, 220e-12, 470e-12}, 0.001, nil)
	for i, added := range []float64{0, 220e-12, 470e-12} {
		p := node
		p.c += added
		p.rc *= math.Sqrt(p.pole().NaturalFrequency / node.pole().NaturalFrequency)
		r, _ := physicalResult(&p)
		rows[i].Result = r.Quantities
	}
	c, err := FindComponents(node.bench(node), rows)
	if err != nil {
		t.Fatal(err)
	}
	inside(t, "inductance", c.Inductance, node.l, 2e-3)
	inside(t, "capacitance", c.Capacitance, node.c, 2e-3)
	if low := node.rc * math.Sqrt(51.4/80.1); !(c.Resistance.Value > low && c.Resistance.Value < node.rc && c.Resistance.U > 0.02) {
		t.Errorf("resistance %s, between %.3g and %.3g", c.Resistance, low, node.rc)
	}
	if len(c.Findings) != 1 || c.Findings[0].Severity != capture.Note || !strings.Contains(c.Findings[0].Message, "dies away") {
		t.Errorf("%v", c.Findings)
	}
}

// A frequency that moves with an added resistor is no resistor's doing.
func TestResistorThatDetunes(t *testing.T) {
	rows := rowsOf(reader, true, []float64{0, 10, 33}, 0.001, nil)
	q := rows[2].Result
	q.DampedFrequency.Value *= 0.999
	c, err := FindComponents(reader.bench(reader), rows)
	if err != nil {
		t.Fatal(err)
	}
	if len(c.Findings) != 1 || c.Findings[0].Severity != capture.Warning || !strings.Contains(c.Findings[0].Message, "a resistor does not do that") {
		t.Errorf("%v", c.Findings)
	}
}
