// Package circuit says what a measured resonance means for the circuit: which
// component values follow from it, what source, fitted resistor and probe take of
// the loss and what remains for the coil, whether a ring-down and a driven sweep
// of one circuit agree, and whether limits are kept.
//
// Every circuit here is a coil with a resistance in series and a capacitor across
// both, with loads: resistance in the loop, and conductance and capacitance across
// the capacitor. That covers a series circuit with a source in its loop and a
// probe on its capacitor, and a parallel circuit with source, resistor and probe
// across it. Both are of second order, so that the formulas are exact at any Q.
package circuit

import "math"

// A Tank is a coil and a capacitor.
type Tank struct {
	// Inductance in H, Capacitance in F.
	Inductance, Capacitance float64
	// Resistance in series with the coil, in ohm: its own and whatever else
	// loses power and is not a [Load].
	Resistance float64
}

// A Load is what is connected to a tank; the zero value is nothing.
type Load struct {
	// Resistance in the loop, in ohm.
	Resistance float64
	// Conductance (S) and Capacitance (F) across the capacitor.
	Conductance, Capacitance float64
}

// Plus is both loads together.
func (a Load) Plus(b Load) Load {
	return Load{a.Resistance + b.Resistance, a.Conductance + b.Conductance, a.Capacitance + b.Capacitance}
}

// A Resonance is how a circuit rings by itself.
type Resonance struct {
	// NaturalFrequency f0 in Hz and DecayRate alpha of the amplitude in 1/s.
	NaturalFrequency, DecayRate float64
}

// Q returns pi f0/alpha.
func (r Resonance) Q() float64 { return math.Pi * r.NaturalFrequency / r.DecayRate }

// DampingRatio returns 1/(2Q).
func (r Resonance) DampingRatio() float64 { return r.DecayRate / (2 * math.Pi * r.NaturalFrequency) }

// Bandwidth returns alpha/pi = f0/Q in Hz.
func (r Resonance) Bandwidth() float64 { return r.DecayRate / math.Pi }

// TimeConstant returns 1/alpha in s.
func (r Resonance) TimeConstant() float64 { return 1 / r.DecayRate }

// DampedFrequency returns sqrt(f0^2 - (alpha/2pi)^2) in Hz; NaN when overdamped.
func (r Resonance) DampedFrequency() float64 {
	a := r.DecayRate / (2 * math.Pi)
	return math.Sqrt((r.NaturalFrequency - a) * (r.NaturalFrequency + a))
}

// Damped returns the resonance of a damped frequency fd in Hz and a decay rate in 1/s.
func Damped(fd, rate float64) Resonance {
	return Resonance{math.Hypot(fd, rate/(2*math.Pi)), rate}
}

// Loaded returns how the tank rings with the load connected. With R the sum of
// all resistance in the loop, G and C' conductance and capacitance across the
// capacitor, the voltage v on it follows
//
//	L C' v" + (R C' + L G) v' + (1 + R G) v = 0
//
// so that omega0^2 = (1 + R G)/(L C') and omega0/Q = 2 alpha = R/L + G/C'.
func (t Tank) Loaded(l Load) Resonance {
	r, c := t.Resistance+l.Resistance, t.Capacitance+l.Capacitance
	return Resonance{
		NaturalFrequency: math.Sqrt((1+r*l.Conductance)/(t.Inductance*c)) / (2 * math.Pi),
		DecayRate:        (r/t.Inductance + l.Conductance/c) / 2,
	}
}

// WithInductance returns the tank of inductance l (H) that rings like r under the
// load. C' is the larger root of beta L C'^2 - (1 + gamma L G) C' + L G^2 = 0 with
// beta = omega0^2 and gamma = 2 alpha: the conductance does not overdamp it.
func WithInductance(l float64, r Resonance, load Load) Tank {
	beta, gamma := r.coefficients()
	g := load.Conductance
	c := largerRoot(beta*l, 1+gamma*l*g, l*g*g)
	return Tank{l, c - load.Capacitance, l*(gamma-g/c) - load.Resistance}
}

// WithCapacitance returns the tank of capacitance c (F) that rings like r under
// the load: L = 1/(beta C' - (gamma - G/C') G).
func WithCapacitance(c float64, r Resonance, load Load) Tank {
	beta, gamma := r.coefficients()
	all := c + load.Capacitance
	rate := gamma - load.Conductance/all // R/L
	l := 1 / (beta*all - rate*load.Conductance)
	return Tank{l, c, l*rate - load.Resistance}
}

// WithResistance returns the tank of series resistance r0 (ohm) that rings like r
// under the load. C' is a root of R beta C'^2 - (1 + R G)(gamma C' - G) = 0: there
// are two circuits that ring alike, and shunt takes the one that loses more in the
// conductance than in the resistance, the smaller root.
func WithResistance(r0 float64, r Resonance, load Load, shunt bool) Tank {
	beta, gamma := r.coefficients()
	all, g := r0+load.Resistance, load.Conductance
	c := largerRoot(all*beta, (1+all*g)*gamma, (1+all*g)*g)
	if shunt {
		c = (1 + all*g) * g / (all * beta * c) // the product of the roots is known
	}
	return Tank{(1 + all*g) / (beta * c), c - load.Capacitance, r0}
}

// coefficients returns omega0^2 and 2 alpha.
func (r Resonance) coefficients() (beta, gamma float64) {
	w := 2 * math.Pi * r.NaturalFrequency
	return w * w, 2 * r.DecayRate
}

// largerRoot returns the larger root of a x^2 - b x + c = 0; NaN when there is none.
func largerRoot(a, b, c float64) float64 {
	return (b + math.Sqrt(b*b-4*a*c)) / (2 * a)
}
