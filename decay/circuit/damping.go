package circuit

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/mat"

	"dieaway/decay/quantity"
)

// A DampingNetwork is a resistor and a capacitor in series, across the capacitance
// that rings: for a switch node that rings after each edge.
type DampingNetwork struct {
	// Resistance is sqrt(L/C), the characteristic impedance of the ring, ohm.
	Resistance quantity.Quantity
	// Capacitance is three times that of the node, F, and Most four times:
	// common practice, enough to let the resistor see the ring.
	Capacitance, Most quantity.Quantity
	// Q of the ring that is left with Resistance and Capacitance; 0 when nothing
	// rings any more.
	Q float64
}

const (
	leastTimes = 3
	mostTimes  = 4
)

// dampingNetwork chooses the network for a tank with the loads of its bench file.
func dampingNetwork(values *quantity.Joint, t Tank, s *scene) DampingNetwork {
	times := func(n float64) quantity.Quantity {
		c := values.At(1)
		return quantity.New(n*c.Value, n*c.U, "F")
	}
	n := DampingNetwork{Resistance: values.At(3), Capacitance: times(leastTimes), Most: times(mostTimes)}
	// The probe is gone when the network is fitted; what is in the circuit stays.
	n.Q = dampedQ(t, s.own(), n.Resistance.Value, n.Capacitance.Value)
	return n
}

// dampedQ returns the Q of the ring of a tank with resistance r and capacitance c
// in series across its capacitor. With the charge of both capacitors and the
// current of the coil as state, the ring is the complex pair of eigenvalues of
//
//	L di/dt = -(R i + v)    C dv/dt = i - G v - (v - w)/r    c dw/dt = (v - w)/r
func dampedQ(t Tank, load Load, r, c float64) float64 {
	all, own := t.Resistance+load.Resistance, t.Capacitance+load.Capacitance
	// In units of omega0 and of the characteristic impedance the matrix is balanced.
	z := math.Sqrt(t.Inductance / own)
	g := z / r
	a := mat.NewDense(3, 3, []float64{
		-all / z, -1, 0,
		1, -load.Conductance*z - g, g,
		0, g * own / c, -g * own / c,
	})
	var e mat.Eigen
	if !e.Factorize(a, mat.EigenNone) {
		return math.NaN()
	}
	q := 0.0
	for _, s := range e.Values(nil) {
		if imag(s) > 0 {
			q = math.Max(q, cmplx.Abs(s)/(-2*real(s)))
		}
	}
	return q
}
