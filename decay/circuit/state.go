package circuit

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/mat"

	"dieaway/decay/quantity"
)

// A state holds the current of the coil times sqrt(L/C'), the voltage of the
// capacitor, and both of a second ring in units of what it adds to the probe: all
// in V, so that no unit makes one of them small beside another.
type state [4]float64

// A network is the state equation of a circuit with its set-up,
//
//	x' = A x + b u
//
// with u the voltage of the source. It is written down from Kirchhoff's laws: no
// closed form of a ring is in it. With current i of the coil and voltage v of the
// capacitor, C' = C + Cp, a series circuit is
//
//	L i' = u - (Rs + Rf + Rc) i - v      C' v' = i - v/Rp
//
// and a parallel one, whose coil current flows out of the capacitor,
//
//	L i' = v - Rc i                      C' v' = (u - v)/Rs - v/Rf - v/Rp - i
type network struct {
	a [4][4]float64
	b state
	// L, C', the coil's own and the fitted resistance.
	inductance, capacitance, coil, fitted float64
	parallel                              bool
}

// lacks is the error of a bench file that does not say enough for a simulation.
func (b *Bench) lacks(what string) error { return &BenchError{File: b.File, Err: errors.New(what)} }

// newNetwork returns the state equation of the bench's circuit in a set-up.
func newNetwork(b *Bench, at *Setup) (*network, error) {
	l, c := b.Inductance, b.Capacitance
	if !l.Known() || !c.Known() {
		return nil, b.lacks("inductance or capacitance under [circuit] is not given: a simulated circuit needs both")
	}
	n := &network{inductance: l.Value, capacitance: c.Value + orZero(at.ProbeCapacitance),
		coil: orZero(b.CoilResistance), fitted: orZero(b.Resistor), parallel: b.Topology == Parallel}
	w := 1 / math.Sqrt(n.inductance*n.capacitance)
	source, probe := orZero(at.SourceResistance), inverse(orZero(at.ProbeResistance))
	if n.parallel {
		if !(source > 0) {
			return nil, b.lacks("source_resistance is not given: nothing drives the parallel circuit")
		}
		across := inverse(source) + inverse(n.fitted) + probe
		n.a[0] = [4]float64{-n.coil / n.inductance, w}
		n.a[1] = [4]float64{-w, -across / n.capacitance}
		n.b[1] = 1 / (source * n.capacitance)
	} else {
		n.a[0] = [4]float64{-(source + n.fitted + n.coil) / n.inductance, -w}
		n.a[1] = [4]float64{w, -probe / n.capacitance}
		n.b[0] = w
	}
	if !(n.trace() < 0) {
		return nil, b.lacks("nothing takes power, so the circuit would ring for ever: give resistor, coil_resistance or source_resistance")
	}
	return n, nil
}

func orZero(q quantity.Quantity) float64 {
	if !q.Known() {
		return 0
	}
	return q.Value
}

// trace is the sum of the eigenvalues of the ring: -2 alpha.
func (n *network) trace() float64 { return n.a[0][0] + n.a[1][1] }

// determinant is the product of the eigenvalues: omega0^2.
func (n *network) determinant() float64 { return n.a[0][0]*n.a[1][1] - n.a[0][1]*n.a[1][0] }

// addMode puts a second ring beside the first: a tank of its own at the natural
// frequency f in Hz, driven by the same source, whose voltage comes to the probe
// with the given strength for each volt of the source:
//
//	p' = w (strength u - s) - (w/Q) p      s' = w p
func (n *network) addMode(f, q, strength float64) {
	w := 2 * math.Pi * f
	n.a[2] = [4]float64{0, 0, -w / q, -w}
	n.a[3] = [4]float64{0, 0, w, 0}
	n.b[2] = w * strength
}

// settled returns the state long after the source was set to one volt, where
// A x + b = 0. A second ring has come to rest at its strength.
func (n *network) settled() state {
	d := n.determinant()
	x := state{(n.a[0][1]*n.b[1] - n.a[1][1]*n.b[0]) / d, (n.a[1][0]*n.b[0] - n.a[0][0]*n.b[1]) / d}
	if n.a[3][2] != 0 {
		x[3] = n.b[2] / n.a[3][2]
	}
	return x
}

// matrix returns A times h.
func (n *network) matrix(h float64) *mat.Dense {
	m := mat.NewDense(4, 4, nil)
	for i, row := range n.a {
		for k, v := range row {
			m.Set(i, k, h*v)
		}
	}
	return m
}

// amplitude returns the voltage on the capacitor that all the energy of the ring
// would make, sqrt(v^2 + L i^2/C'): its envelope, but for a share below 1/(2Q).
func (x *state) amplitude() float64 { return math.Hypot(x[0], x[1]) }

// A propagator is exp(A h): the exact way of the state through a time h in which
// the source does not change.
type propagator [4][4]float64

func (n *network) propagator(h float64) *propagator {
	var e mat.Dense
	e.Exp(n.matrix(h))
	p := &propagator{}
	for i := range p {
		for k := range p[i] {
			p[i][k] = e.At(i, k)
		}
	}
	return p
}

func (p *propagator) apply(x state) (y state) {
	for i := range y {
		y[i] = p[i][0]*x[0] + p[i][1]*x[1] + p[i][2]*x[2] + p[i][3]*x[3]
	}
	return y
}

// A bent is a network whose loss and inductance depend on the amplitude, as with
// a magnetic core in its Rayleigh region: at the amplitude start the ring decays
// faster by the share growth and its frequency is moved by the share shift.
type bent struct {
	*network
	growth, shift, start float64
}

// slope is the right-hand side of the state equation about the settled state.
// Loss in the coil alone takes half of what it adds to the trace off the envelope.
func (n *bent) slope(x *state) (d state) {
	relative := x.amplitude() / n.start
	stiff := 1 + n.shift*relative // L falls with its square where the frequency rises
	for i := range d {
		d[i] = n.a[i][0]*x[0] + n.a[i][1]*x[1] + n.a[i][2]*x[2] + n.a[i][3]*x[3]
	}
	d[0] = d[0]*stiff*stiff + n.growth*relative*n.trace()*x[0]
	return d
}

// finest is the largest phase in rad of one Runge-Kutta step: it errs by finest^4/120
// of the phase, 1e-9 of it.
const finest = 0.018

// advance integrates over h seconds by the classical fourth-order Runge-Kutta method.
func (n *bent) advance(x state, h float64) state {
	steps := max(1, math.Ceil(h*math.Sqrt(n.determinant())/finest))
	h /= steps
	along := func(d *state, h float64) *state {
		return &state{x[0] + h*d[0], x[1] + h*d[1], x[2] + h*d[2], x[3] + h*d[3]}
	}
	for range int(steps) {
		k1 := n.slope(&x)
		k2 := n.slope(along(&k1, h/2))
		k3 := n.slope(along(&k2, h/2))
		k4 := n.slope(along(&k3, h))
		for i := range x {
			x[i] += h / 6 * (k1[i] + 2*k2[i] + 2*k3[i] + k4[i])
		}
	}
	return x
}
