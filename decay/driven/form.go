package driven

import (
	"math"
	"math/cmplx"

	"dieaway/capture"
)

// A curve is a fitted response: gain times the form of what it is measured across.
type curve struct {
	across capture.Part
	f0, q  float64 // Hz, and Q of the whole loop
	gain   float64 // of the source, in the unit of the response
	rest   float64 // share of the loop's resistance that sits in the coil; for Both only
}

// at returns magnitude and phase at f hertz.
func (c *curve) at(f float64) (magnitude, phase float64) {
	if !(c.f0 > 0) {
		return math.NaN(), math.NaN()
	}
	h, _, _, _ := c.form(f)
	return c.gain * modulus(h), cmplx.Phase(h)
}

// form returns the response H for a gain of one and its derivatives by the
// relative frequency f0 dH/df0, by the relative Q, Q dH/dQ, and by rest.
//
// With x = f/f0 and D = 1 - x^2 + jx/Q the voltage is, in parts of the source's
// (derived: series circuit), across the capacitor 1/D, the coil -x^2/D, the
// resistor (jx/Q)/D, and across coil and capacitor together (1 - x^2 + j rest x/Q)/D.
func (c *curve) form(f float64) (h, byF0, byQ, byRest complex128) {
	x := f / c.f0
	// (f0-f)(f0+f) keeps the digits that 1 - x^2 loses near a sharp resonance.
	detuning := (c.f0 - f) / c.f0 * (1 + x)
	loss := x / c.q
	dF0, dQ := complex(2*x*x, -loss), complex(0, -loss) // f0 dD/df0, Q dD/dQ
	var n, nF0, nQ, nRest complex128
	switch c.across {
	case capture.Inductor:
		n, nF0 = complex(-x*x, 0), complex(2*x*x, 0)
	case capture.Resistor:
		n, nF0, nQ = complex(0, loss), complex(0, -loss), complex(0, -loss)
	case capture.Both:
		n, nF0 = complex(detuning, c.rest*loss), complex(2*x*x, -c.rest*loss)
		nQ, nRest = complex(0, -c.rest*loss), complex(0, loss)
	default:
		n = 1
	}
	// One division serves all four; complex division proper minds infinities.
	size := detuning*detuning + loss*loss
	inverse := complex(detuning/size, -loss/size)
	h = n * inverse
	return h, (nF0 - h*dF0) * inverse, (nQ - h*dQ) * inverse, nRest * inverse
}

// size returns |H| for a gain of one.
func (c *curve) size(f float64) float64 {
	h, _, _, _ := c.form(f)
	return modulus(h)
}

// modulus is |z| of numbers that are neither huge nor tiny.
func modulus(z complex128) float64 { return math.Sqrt(real(z)*real(z) + imag(z)*imag(z)) }

// direction is the unit number along z, 1 for zero.
func direction(z complex128) complex128 {
	if m := modulus(z); m > 0 {
		return complex(real(z)/m, imag(z)/m)
	}
	return 1
}
