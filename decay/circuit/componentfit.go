package circuit

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"dieaway/decay/quantity"
)

// theta are the parameters: logarithms of L and C, which cannot be negative, and
// the resistance over the characteristic impedance of the start.
const parameters = 3

// A componentFit is the fit of [FindComponents].
type componentFit struct {
	scene *scene
	rows  []Added
	// parts are the added values, bound to inputs; measured holds f0 and alpha.
	parts    []float64
	measured []measured
	theta    [parameters]float64
	scale    float64 // ohm of theta[2]
	cov      *mat.SymDense
	// scatter is the variance, beyond what is stated, of the residuals that the
	// added parts should not move; 0 unless they move.
	scatter float64
}

// resistors reports whether resistors were added, not capacitors.
func (f *componentFit) resistors() bool { return f.rows[0].Resistance.Known() }

// other returns the index of the residual of row i that the added parts should not
// move by themselves: that of the decay rate with capacitors, of f0 with resistors.
func (f *componentFit) other(i int) int {
	if f.resistors() {
		return 2 * i
	}
	return 2*i + 1
}

var errNoneRingsSo = errors.New("no coil and capacitor were found that ring like all captures: check the added values, their kind and their order")

// fit iterates until nothing moves.
func (f *componentFit) fit() error {
	for range 100 {
		if done, err := f.step(); done || err != nil {
			return err
		}
	}
	return errNoneRingsSo
}

// allowScatter looks whether the captures agree in what the added parts should not
// move. Where they do not, as with a loss that changes with frequency, it gives
// them the scatter that they show as a variance of its own: through their correlation
// with the other residuals they would pull the rest along.
func (f *componentFit) allowScatter() bool {
	y, cov, _, err := f.linearise()
	if err != nil {
		return false
	}
	if _, n := worst(f.table(y, cov), func(r *Row) quantity.Quantity { return r.Other }); n <= farOff {
		return false
	}
	for i := range f.rows {
		r := y[f.other(i)]
		f.scatter += r * r / float64(len(f.rows)-1)
	}
	return true
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
		return nil, nil, nil, errNoneRingsSo // with such parts nothing rings at all
	}
	y = make([]float64, n)
	cov = mat.NewSymDense(n, nil)
	for i := range n {
		y[i] = joint.At(i).Value
		for k := range i + 1 {
			cov.SetSym(i, k, joint.Covariance(i, k))
		}
	}
	for i := range f.rows {
		at := f.other(i)
		cov.SetSym(at, at, cov.At(at, at)+f.scatter)
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
