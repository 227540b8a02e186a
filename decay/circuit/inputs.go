package circuit

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"dieaway/decay"
	"dieaway/decay/quantity"
)

// Inputs are independent sources of uncertainty and pairs that correlate, each
// bound to a variable: results are functions of the variables, and whatever two
// results share keeps them correlated.
type inputs struct {
	names   []string
	targets [][]*float64 // the variables that take the value
	values  []float64
	blocks  []block
}

// A block is a covariance of the inputs from first on.
type block struct {
	first int
	cov   *mat.SymDense
}

// add binds an input of its own. An exact value, and one of unknown uncertainty,
// which counts as exact, only sets the variable.
func (in *inputs) add(name string, q quantity.Quantity, target *float64) {
	if !(q.U > 0) {
		*target = q.Value
		return
	}
	in.bind(name, q.Value, target)
	in.blocks = append(in.blocks, block{len(in.values) - 1, mat.NewSymDense(1, []float64{q.U * q.U})})
}

// addPair binds two inputs with their covariance.
func (in *inputs) addPair(names [2]string, values [2]float64, cov *mat.SymDense, targets [2]*float64) {
	in.blocks = append(in.blocks, block{len(in.values), cov})
	for i := range 2 {
		in.bind(names[i], values[i], targets[i])
	}
}

func (in *inputs) bind(name string, value float64, target *float64) {
	*target = value
	in.names = append(in.names, name)
	in.values = append(in.values, value)
	in.targets = append(in.targets, []*float64{target})
}

// share gives another variable the value and the input of the variable of.
func (in *inputs) share(of, target *float64) {
	*target = *of
	for i := range in.targets {
		if in.targets[i][0] == of {
			in.targets[i] = append(in.targets[i], target)
		}
	}
}

// propagate returns the results that f writes into y from the bound variables.
func (in *inputs) propagate(results []result, f func(y []float64)) (*quantity.Joint, error) {
	n := len(in.values)
	cov := mat.NewSymDense(n, nil)
	for _, b := range in.blocks {
		for i := range b.cov.SymmetricDim() {
			for k := range i + 1 {
				cov.SetSym(b.first+i, b.first+k, b.cov.At(i, k))
			}
		}
	}
	joint, err := quantity.NewJoint(in.names, make([]string, n), in.values, cov)
	if err != nil {
		return nil, err
	}
	names, units := make([]string, len(results)), make([]string, len(results))
	for i, r := range results {
		names[i], units[i] = r.name, r.unit
	}
	out, err := joint.Propagate(names, units, func(y, x []float64) {
		in.set(x)
		f(y)
	}, nil)
	in.set(in.values)
	return out, err
}

func (in *inputs) set(x []float64) {
	for i, targets := range in.targets {
		for _, t := range targets {
			*t = x[i]
		}
	}
}

// A result is the name and unit of what is computed.
type result struct{ name, unit string }

// A measured resonance, bound to inputs: its own two figures and a clock.
type measured struct {
	fd, rate float64 // a ring-down's, Hz and 1/s
	f0, q    float64 // a sweep's
	clock    *float64
}

// resonance returns what was measured with the error of the clock put right: all
// frequencies and rates scale alike.
func (m *measured) resonance() Resonance {
	r := Damped(m.fd, m.rate)
	if m.q != 0 {
		r = Resonance{m.f0, math.Pi * m.f0 / m.q}
	}
	scale := 1 + *m.clock
	return Resonance{r.NaturalFrequency * scale, r.DecayRate * scale}
}

// addRingDown binds damped frequency and decay rate with what scatters them; the
// time base, whose relative standard uncertainty is timebase, is taken out of
// their uncertainties, because it has an input of its own.
func (in *inputs) addRingDown(m *measured, q *decay.Quantities, timebase float64) {
	own := func(q quantity.Quantity) float64 {
		return math.Sqrt(math.Max(0, q.U*q.U-q.Value*q.Value*timebase*timebase))
	}
	uf, ua := own(q.DampedFrequency), own(q.DecayRate)
	c := q.Correlation * uf * ua
	in.addPair([2]string{"damped frequency", "decay rate"}, [2]float64{q.DampedFrequency.Value, q.DecayRate.Value},
		mat.NewSymDense(2, []float64{uf * uf, c, c, ua * ua}), [2]*float64{&m.fd, &m.rate})
}

// addSweep binds natural frequency and Q of a sweep, likewise.
func (in *inputs) addSweep(m *measured, f0, q quantity.Quantity, correlation, timebase float64) {
	total := f0.U * f0.U
	uf := math.Sqrt(math.Max(0, total-f0.Value*f0.Value*timebase*timebase))
	c := correlation * f0.U * q.U // the clock does not enter Q
	c = math.Max(-uf*q.U, math.Min(uf*q.U, c))
	in.addPair([2]string{"natural frequency", "Q"}, [2]float64{f0.Value, q.Value},
		mat.NewSymDense(2, []float64{uf * uf, c, c, q.U * q.U}), [2]*float64{&m.f0, &m.q})
}
