package circuit

import (
	"errors"
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
	// Damping is the network that would damp this ring.
	Damping  DampingNetwork
	Findings []decay.Finding
}

// A Row is one ring-down of [Components].
type Row struct {
	Added                       quantity.Quantity // F or ohm
	NaturalFrequency, DecayRate quantity.Quantity // Hz, 1/s; as measured
	// Residual is what was measured over what the components say, less one: of the
	// natural frequency for added capacitors, of the decay rate for resistors.
	Residual quantity.Quantity
}

// FindComponents fits inductance, capacitance and series resistance to at least
// two ring-downs with different parts added, by generalised least squares: the
// parts, the loads of the bench file and its time base enter the covariance with
// what they move, so that what all rows share stays shared. b may be nil.
func FindComponents(b *Bench, rows []Added) (*Components, error) {
	f, err := newComponentFit(b, rows)
	if err != nil {
		return nil, err
	}
	for range 100 {
		if done, err := f.step(); done || err != nil {
			if err != nil {
				return nil, err
			}
			return f.components()
		}
	}
	return nil, errors.New("no coil and capacitor were found that ring like all captures: is the order of the added values that of the captures?")
}

// theta are the parameters: logarithms of L and C, which cannot be negative, and
// the resistance over the characteristic impedance of the start.
const parameters = 3

type componentFit struct {
	scene *scene
	rows  []Added
	// parts are the added values, bound to inputs; measured holds f0 and alpha.
	parts    []float64
	measured []measured
	theta    [parameters]float64
	scale    float64 // ohm of theta[2]
	cov      *mat.SymDense
}

func newComponentFit(b *Bench, rows []Added) (*componentFit, error) {
	if b == nil {
		b = emptyBench()
	}
	if b.Topology == Parallel && rows[0].Resistance.Known() {
		return nil, errors.New("resistors can be added in the loop of a series circuit only: the bench file says parallel")
	}
	f := &componentFit{rows: rows, parts: make([]float64, len(rows)), measured: make([]measured, len(rows))}
	f.scene = newScene(b)
	seen := map[float64]bool{}
	for i, r := range rows {
		if !r.Result.DampedFrequency.Known() || !r.Result.DecayRate.Known() {
			return nil, fmt.Errorf("capture %d does not ring", i+1)
		}
		f.scene.addRingDown(&f.measured[i], r.Result, b.RingDown.TimebaseU)
		f.measured[i].clock = &f.scene.clock
		f.scene.add(fmt.Sprintf("added %d", i+1), r.added(), &f.parts[i])
		seen[r.added().Value] = true
	}
	if len(seen) < 2 {
		return nil, errors.New("the added values are all the same: at least two different ones tell coil and capacitance apart")
	}
	f.scene.add(clock, quantity.New(0, b.RingDown.TimebaseU, ""), &f.scene.clock)
	return f, f.start()
}

func (r *Added) added() quantity.Quantity {
	if r.Resistance.Known() {
		return r.Resistance
	}
	return r.Capacitance
}

// load returns what loads the tank in row i: the set-up, the resistor, and the added part.
func (f *componentFit) load(i int) Load {
	l := f.scene.load(&f.scene.ringDown)
	if f.rows[i].Resistance.Known() {
		return l.Plus(Load{Resistance: f.parts[i]})
	}
	return l.Plus(Load{Capacitance: f.parts[i]})
}

func (f *componentFit) tank() Tank {
	return Tank{math.Exp(f.theta[0]), math.Exp(f.theta[1]), f.theta[2] * f.scale}
}

// start finds parameters from the two rows that lie furthest apart, as if nothing
// but the added part loaded the circuit: 1/omega0^2 = L (C + added) for capacitors,
// 2 alpha = (R + added)/L for resistors.
func (f *componentFit) start() error {
	lo, hi := 0, 0
	for i, x := range f.parts {
		if x < f.parts[lo] {
			lo = i
		}
		if x > f.parts[hi] {
			hi = i
		}
	}
	a, b := f.measured[lo].resonance(), f.measured[hi].resonance()
	w, step := 2*math.Pi*a.NaturalFrequency, f.parts[hi]-f.parts[lo]
	inductance := step / (2 * (b.DecayRate - a.DecayRate))
	if !f.rows[0].Resistance.Known() {
		inductance = (1/math.Pow(2*math.Pi*b.NaturalFrequency, 2) - 1/(w*w)) / step
	}
	load := f.load(lo)
	c := 1/(w*w*inductance) - load.Capacitance
	if !(inductance > 0) {
		if f.rows[0].Resistance.Known() {
			return errors.New("the ring does not die faster with the larger resistor: are the values in the order of the captures?")
		}
		return errors.New("the frequency does not fall with the larger capacitor: are the values in the order of the captures?")
	}
	if !(c > 0) {
		return fmt.Errorf("the added and loading capacitance of %s is more than all that rings: check the values and their order",
			quantity.Format(load.Capacitance, "F", 4))
	}
	f.theta[0], f.theta[1] = math.Log(inductance), math.Log(c)
	f.scale = math.Sqrt(inductance / c)
	f.theta[2] = (2*a.DecayRate*inductance - load.Resistance) / f.scale
	return nil
}

// residuals writes ln(measured/model) of f0 and alpha of each row to y.
func (f *componentFit) residuals(y []float64) {
	t := f.tank()
	for i := range f.rows {
		m, want := f.measured[i].resonance(), t.Loaded(f.load(i))
		y[2*i] = math.Log(m.NaturalFrequency / want.NaturalFrequency)
		y[2*i+1] = math.Log(m.DecayRate / want.DecayRate)
	}
}

// names of the residuals, which are ratios.
func (f *componentFit) residualNames() []result {
	return make([]result, 2*len(f.rows))
}

// step makes one Gauss-Newton step under the covariance that all inputs give the
// residuals, and tells when it no longer moves anything.
func (f *componentFit) step() (done bool, err error) {
	y, covariance, jacobian, err := f.linearise()
	if err != nil {
		return false, err
	}
	n := len(y)
	var chol mat.Cholesky
	if !chol.Factorize(covariance) {
		return false, errors.New("the uncertainties of the captures do not allow a fit: one of them is zero or unknown")
	}
	var weighted, normal mat.Dense
	if err := chol.SolveTo(&weighted, jacobian); err != nil {
		return false, fmt.Errorf("components: %w", err)
	}
	normal.Mul(jacobian.T(), &weighted)
	information := mat.NewSymDense(parameters, nil)
	for r := range parameters {
		for c := range r + 1 {
			information.SetSym(r, c, normal.At(r, c))
		}
	}
	var inner mat.Cholesky
	if !inner.Factorize(information) {
		return false, errors.New("the captures do not tell inductance, capacitance and resistance apart")
	}
	var right, move mat.VecDense
	right.MulVec(weighted.T(), mat.NewVecDense(n, y))
	if err := inner.SolveVecTo(&move, &right); err != nil {
		return false, fmt.Errorf("components: %w", err)
	}
	f.cov = mat.NewSymDense(parameters, nil)
	if err := inner.InverseTo(f.cov); err != nil {
		return false, fmt.Errorf("components: %w", err)
	}
	done = true
	for i := range parameters {
		d := math.Max(-1, math.Min(1, move.AtVec(i)))
		f.theta[i] += d
		done = done && math.Abs(d) <= 1e-3*math.Sqrt(f.cov.At(i, i))
	}
	return done, nil
}

// linearise returns the residuals, the covariance that the inputs give them, and
// the derivatives of the model by the parameters.
func (f *componentFit) linearise() (y []float64, cov *mat.SymDense, jacobian *mat.Dense, err error) {
	n := 2 * len(f.rows)
	joint, err := f.scene.propagate(f.residualNames(), f.residuals)
	if err != nil {
		return nil, nil, nil, fmt.Errorf("components: %w", err)
	}
	y = make([]float64, n)
	cov = mat.NewSymDense(n, nil)
	for i := range n {
		y[i] = joint.At(i).Value
		for k := range i + 1 {
			cov.SetSym(i, k, joint.Covariance(i, k))
		}
	}
	jacobian = mat.NewDense(n, parameters, nil)
	at := f.theta
	up, down := make([]float64, n), make([]float64, n)
	for p := range parameters {
		const h = 1e-6
		f.theta = at
		f.theta[p] += h
		f.residuals(up)
		f.theta[p] -= 2 * h
		f.residuals(down)
		for i := range n {
			jacobian.Set(i, p, (down[i]-up[i])/(2*h)) // residuals fall as the model rises
		}
	}
	f.theta = at
	return y, cov, jacobian, nil
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
	c.ChiSquare = chiSquare(y, cov)
	for i, r := range f.rows {
		c.Rows = append(c.Rows, f.row(i, &r, y, cov))
	}
	c.judge()
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

func (f *componentFit) row(i int, r *Added, y []float64, cov *mat.SymDense) Row {
	at := 2 * i
	if r.Resistance.Known() {
		at++
	}
	return Row{r.added(), r.Result.NaturalFrequency, r.Result.DecayRate, quantity.New(math.Expm1(y[at]), math.Sqrt(cov.At(at, at)), "")}
}

// farOff is how many uncertainties of its own a row may lie off the others.
const farOff = 3

// judge names the row that fits worst, if it does not fit (it pulls the others
// along), and a resistance below zero.
func (c *Components) judge() {
	worst, most := 0, 0.0
	for i, r := range c.Rows {
		if n := math.Abs(r.Residual.Value) / r.Residual.U; n > most {
			worst, most = i, n
		}
	}
	if r := c.Rows[worst]; most > farOff {
		c.Findings = append(c.Findings, decay.Finding{Code: capture.Outliers, Severity: capture.Warning,
			Message: fmt.Sprintf("Capture %d, with %s added, lies %s off the components found, %.3g times its uncertainty.",
				worst+1, r.Added, signed(r.Residual.Value), most),
			Remedy: "Check the part that was added and the order of the values, and give the tolerance of the parts (100p +- 1 %)."})
	}
	if r := c.Resistance; r.Value+2*r.U < 0 {
		c.Findings = append(c.Findings, decay.Finding{Code: capture.Loading, Severity: capture.Warning,
			Message: fmt.Sprintf("The series resistance comes out as %s: the bench file takes away more loss than there is.", r),
			Remedy:  "Check source, resistor and probe of the bench file."})
	}
}

// emptyBench stands for no bench file.
func emptyBench() *Bench {
	return &Bench{Topology: Series, RingDown: emptySetup(), Sweep: emptySetup(), Inductance: quantity.Unknown("H"),
		Capacitance: quantity.Unknown("F"), Resistor: quantity.Unknown("ohm"), CoilResistance: quantity.Unknown("ohm")}
}
