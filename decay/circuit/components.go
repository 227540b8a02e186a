package circuit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// An Added is a known part that was added for one of several ring-downs.
type Added struct {
	// Capacitance across the capacitor, F, or Resistance in the loop, ohm, with
	// its uncertainty; the other is not Known. Unknown uncertainties count as none.
	Capacitance, Resistance quantity.Quantity
	// Result is that of the ring-down with it; it must not be refused.
	Result *decay.Quantities
}

// Components are a coil, its capacitance and its resistance, from how the ring
// moves with known parts added.
type Components struct {
	// Inductance (H), Capacitance (F) and Resistance (ohm) of the circuit without
	// the added parts and without what the bench file says was connected.
	Inductance, Capacitance, Resistance quantity.Quantity
	Rows                                []Row
	// ChiSquare is the sum of squared residuals in their uncertainties, Degrees
	// how many of them are free.
	ChiSquare float64
	Degrees   int
	// Line is what all rows lie on.
	Line *ComponentLine
	// Damping is the network that would damp this ring.
	Damping  DampingNetwork
	Findings []decay.Finding
}

// A Row is one ring-down of [Components].
type Row struct {
	Added                       quantity.Quantity // F or ohm
	NaturalFrequency, DecayRate quantity.Quantity // Hz, 1/s; as measured
	// Residual is what was measured over what the components say, less one: of the
	// natural frequency for added capacitors, of the decay rate for resistors. Other
	// is that of the other of the two.
	Residual, Other quantity.Quantity
}

// FindComponents fits inductance, capacitance and series resistance to at least
// two ring-downs with different parts added, by generalised least squares: the
// parts, the loads of the bench file and its time base enter the covariance with
// what they move, so that what all rows share stays shared. Where the captures do
// not agree in what the parts should not move (the loss, with capacitors), the
// scatter that they show counts as uncertainty of it. b may be nil.
func FindComponents(b *Bench, rows []Added) (*Components, error) {
	f, err := newComponentFit(b, rows)
	if err != nil {
		return nil, err
	}
	if err := f.fit(); err != nil {
		return nil, err
	}
	if f.allowScatter() {
		if err := f.fit(); err != nil {
			return nil, err
		}
	}
	return f.components()
}

// components returns the result of a fit that has settled.
func (f *componentFit) components() (*Components, error) {
	y, cov, _, err := f.linearise()
	if err != nil {
		return nil, err
	}
	t := f.tank()
	joint, err := quantity.NewJoint([]string{"ln L", "ln C", "R"}, make([]string, parameters), f.theta[:], f.cov)
	if err != nil {
		return nil, fmt.Errorf("components: %w", err)
	}
	values, err := joint.Propagate([]string{"inductance", "capacitance", "resistance", "impedance"}, []string{"H", "F", "ohm", "ohm"},
		func(y, x []float64) {
			y[0], y[1], y[2] = math.Exp(x[0]), math.Exp(x[1]), x[2]*f.scale
			y[3] = math.Exp((x[0] - x[1]) / 2)
		}, nil)
	if err != nil {
		return nil, fmt.Errorf("components: %w", err)
	}
	c := &Components{Inductance: values.At(0), Capacitance: values.At(1), Resistance: values.At(2), Degrees: len(y) - parameters,
		Damping: dampingNetwork(values, t, f.scene)}
	c.ChiSquare, c.Rows = chiSquare(y, cov), f.table(y, cov)
	if c.Line, err = f.line(); err != nil {
		return nil, err
	}
	c.judge(f.resistors())
	return c, nil
}

func chiSquare(y []float64, cov *mat.SymDense) float64 {
	var chol mat.Cholesky
	var x mat.VecDense
	v := mat.NewVecDense(len(y), y)
	if !chol.Factorize(cov) || chol.SolveVecTo(&x, v) != nil {
		return math.NaN()
	}
	return mat.Dot(v, &x)
}

// table returns the rows with their residuals.
func (f *componentFit) table(y []float64, cov *mat.SymDense) (rows []Row) {
	for i, r := range f.rows {
		residual := func(at int) quantity.Quantity {
			u := cov.At(at, at)
			if at == f.other(i) {
				u -= f.scatter
			}
			return quantity.New(math.Expm1(y[at]), math.Sqrt(u), "")
		}
		row := Row{r.added(), r.Result.NaturalFrequency, r.Result.DecayRate, residual(2 * i), residual(2*i + 1)}
		if f.resistors() {
			row.Residual, row.Other = row.Other, row.Residual
		}
		rows = append(rows, row)
	}
	return rows
}

// farOff is how many uncertainties of its own a row may lie off the others.
const farOff = 3

// worst returns the row whose residual is largest in its uncertainties.
func worst(rows []Row, residual func(r *Row) quantity.Quantity) (at int, most float64) {
	for i := range rows {
		q := residual(&rows[i])
		if n := math.Abs(q.Value) / q.U; n > most {
			at, most = i, n
		}
	}
	return at, most
}

// judge names the row that fits worst, if it does not fit (it pulls the others
// along), a loss that is not the same in all rows, and a resistance below zero.
func (c *Components) judge(resistors bool) {
	if i, n := worst(c.Rows, func(r *Row) quantity.Quantity { return r.Residual }); n > farOff {
		c.Findings = append(c.Findings, decay.Finding{Code: capture.Outliers, Severity: capture.Warning,
			Message: fmt.Sprintf("Capture %d, with %s added, lies %s off the components found, %s times its uncertainty.",
				i+1, c.Rows[i].Added, signed(c.Rows[i].Residual.Value), quantity.Format(n, "", 3)),
			Remedy: "Check the part that was added and the order of the values, and give the tolerance of the parts (100p +- 1 %)."})
	}
	if i, n := worst(c.Rows, func(r *Row) quantity.Quantity { return r.Other }); n > farOff {
		c.Findings = append(c.Findings, otherFinding(resistors, i, n, &c.Rows[i]))
	}
	if r := c.Resistance; r.Value+2*r.U < 0 {
		c.Findings = append(c.Findings, decay.Finding{Code: capture.Loading, Severity: capture.Warning,
			Message: fmt.Sprintf("The series resistance comes out as %s: the bench file takes away more loss than there is.", r),
			Remedy:  "Check source, resistor and probe of the bench file."})
	}
}

// otherFinding is about the figure that the added parts should not move by
// themselves: the decay rate with capacitors, the natural frequency with resistors.
func otherFinding(resistors bool, i int, n float64, r *Row) decay.Finding {
	if resistors {
		return decay.Finding{Code: capture.Outliers, Severity: capture.Warning,
			Message: fmt.Sprintf("Capture %d, with %s added, rings %s off the others, %s times its uncertainty, and a resistor does not do that.",
				i+1, r.Added, signed(r.Other.Value), quantity.Format(n, "", 3)),
			Remedy: "Look for what else changed: the resistor's own inductance, the leads, the probe."}
	}
	return decay.Finding{Code: capture.Outliers, Severity: capture.Note,
		Message: fmt.Sprintf("The loss is not the same in all captures: capture %d, with %s added, dies away %s off the resistance found, %s times its uncertainty. The resistance is a mean, and its uncertainty covers that.",
			i+1, r.Added, signed(r.Other.Value), quantity.Format(n, "", 3)),
		Remedy: "Nothing for inductance and capacitance; loss that changes with frequency (skin effect, core) does that, and so do losses of the added capacitors."}
}

// emptyBench stands for no bench file.
func emptyBench() *Bench {
	return &Bench{Topology: Series, RingDown: emptySetup(), Sweep: emptySetup(), Inductance: quantity.Unknown("H"),
		Capacitance: quantity.Unknown("F"), Resistor: quantity.Unknown("ohm"), CoilResistance: quantity.Unknown("ohm")}
}
