package circuit

import (
	"math"
	"math/rand/v2"
	"testing"

	"dieaway/decay/quantity"
)

// TestComponentLine: through the poles of the impedances (which know no formula of
// the package) goes a line of slope L that meets zero at the capacitance, or one of
// slope 1/(2L) that meets zero at the resistance. A probe of 5 kohm makes the shunt
// count: it takes most of the loss of the antenna.
func TestComponentLine(t *testing.T) {
	shunted := reader
	shunted.rp = 5e3
	for _, c := range []struct {
		name      string
		p         physical
		resistors bool
		values    []float64
	}{
		{"switch node, capacitors", node, false, []float64{0, 220e-12, 470e-12}},
		{"shunted antenna, capacitors", shunted, false, []float64{0, 220e-12, 470e-12}},
		{"shunted antenna, resistors", shunted, true, []float64{0, 10, 33}},
	} {
		t.Run(c.name, func(t *testing.T) {
			got, err := FindComponents(c.p.bench(c.p), rowsOf(c.p, c.resistors, c.values, 0.01, nil))
			if err != nil {
				t.Fatal(err)
			}
			l := got.Line
			slope, own, setUp := c.p.l, got.Capacitance, c.p.cp
			if c.resistors {
				slope, own, setUp = 1/(2*c.p.l), got.Resistance, c.p.rs+c.p.rf
			}
			if l.Resistors != c.resistors || len(l.Points) != len(c.values) || math.Abs(l.Shunt*c.p.rp-1) > 1e-12 {
				t.Fatalf("%+v", l)
			}
			first, last := l.Points[0], l.Points[len(l.Points)-1]
			closeTo(t, "slope", (last.Y.Value-first.Y.Value)/(last.X.Value-first.X.Value), slope, 1e-6)
			closeTo(t, "set-up", l.SetUp, setUp, 1e-12)
			for i, p := range l.Points {
				closeTo(t, "known part", p.X.Value, c.values[i]+setUp, 1e-12)
				closeTo(t, "line", l.At(p.X.Value).Value, p.Y.Value, 1e-6)
				closeTo(t, "other figure", l.OtherAt(p.X.Value), p.Other.Value, 1e-6)
				// 1 % of the part, and nothing of the probe, whose value is exact.
				if want := 0.01 * c.values[i]; math.Abs(p.X.U-want) > 1e-9*want || !(p.Y.U > 0) || !(p.Other.U > 0) {
					t.Errorf("point %d: %+v", i, p)
				}
			}
			// The line is as uncertain there as what it meets zero at.
			end := l.At(-own.Value)
			if math.Abs(end.Value) > 1e-9*first.Y.Value {
				t.Errorf("%g at the intercept", end.Value)
			}
			closeTo(t, "uncertainty at the intercept", end.U, slope*own.U, 1e-6)
		})
	}
}

// TestComponentLineScatter: the stated uncertainty of the line, within the parts and
// at zero, is its scatter over sets whose measurements and parts are drawn within theirs
// (1/sqrt(2n) of scatter is 4 % of its own).
func TestComponentLineScatter(t *testing.T) {
	const n = 300
	rng := rand.New(rand.NewPCG(5, 8))
	b := node.bench(node)
	at := []float64{0, 300e-12, 1e-9}
	var off, u [3]float64
	for range n {
		c, err := FindComponents(b, rowsOf(node, false, []float64{0, 220e-12, 470e-12, 1e-9}, 0.01, rng))
		if err != nil {
			t.Fatal(err)
		}
		for i, x := range at {
			q, truth := c.Line.At(x), node.l*(node.c+x)
			off[i] += (q.Value - truth) * (q.Value - truth) / n
			u[i] += q.U * q.U / n
		}
	}
	for i, x := range at {
		if ratio := math.Sqrt(off[i] / u[i]); math.Abs(ratio-1) > 0.13 {
			t.Errorf("at %s the line scatters %.3g times what it states", quantity.Format(x, "F", 3), ratio)
		}
	}
}
