package driven

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"dieaway/capture"
)

// A scene is a whole series circuit and how it was swept. Its responses come from
// impedances, not from the form that is fitted.
type scene struct {
	l, c           float64 // H, F
	resistor       float64 // ohm, fitted
	coil           float64 // ohm, of the coil
	source         float64 // ohm, of the source
	across         capture.Part
	frequencies    []float64
	noise          float64 // standard deviation, in parts of the source's voltage
	relative       bool    // noise in proportion to the response
	phase          bool    // phase too: noise of both parts alike
	phaseOffset    float64 // rad
	conjugate      bool    // phase counted the other way
	referenceNoise float64
	reference      bool // the voltage at the circuit is measured, and divides out the source
}

// loop07 is a loop antenna of a tag reader with the given Q, at about 125 kHz.
func loop07(q float64) scene {
	s := scene{l: 1.62e-3, c: 1e-9, across: capture.Capacitor}
	s.resistor = math.Sqrt(s.l/s.c) / q
	return s
}

func (s scene) f0() float64 { return 1 / (2 * math.Pi * math.Sqrt(s.l*s.c)) }

// q is that of the loop, without the source where the reference divides it out.
func (s scene) q() float64 {
	r := s.resistor + s.coil + s.source
	if s.reference {
		r -= s.source
	}
	return math.Sqrt(s.l/s.c) / r
}

// span sets n frequencies over m half bandwidths to both sides.
func (s scene) span(n int, m float64) scene {
	f0 := s.f0()
	half := f0 / s.q() / 2
	return s.linear(n, math.Max(f0-m*half, f0/50), f0+m*half)
}

func (s scene) linear(n int, lo, hi float64) scene {
	s.frequencies = make([]float64, n)
	for i := range s.frequencies {
		s.frequencies[i] = lo + (hi-lo)*float64(i)/float64(n-1)
	}
	return s
}

// answer returns the voltage measured and that at the circuit, for 1 V of the source.
func (s scene) answer(f float64) (v, at complex128) {
	w := 2 * math.Pi * f
	zl, zc := complex(s.coil, w*s.l), complex(0, -1/(w*s.c))
	i := 1 / (complex(s.source+s.resistor, 0) + zl + zc)
	v = map[capture.Part]complex128{capture.Capacitor: i * zc, capture.Inductor: i * zl,
		capture.Resistor: i * complex(s.resistor, 0), capture.Both: i * (zl + zc)}[s.across]
	return v, i * (complex(s.resistor, 0) + zl + zc)
}

// sweep measures the scene.
func (s scene) sweep(rng *rand.Rand) *capture.Sweep {
	out := &capture.Sweep{Unit: "V", Cartesian: s.phase}
	for _, f := range s.frequencies {
		v, at := s.answer(f)
		sigma := s.noise
		if s.relative {
			sigma *= cmplx.Abs(v)
		}
		out.Frequency = append(out.Frequency, f)
		if s.reference {
			out.Reference = append(out.Reference, cmplx.Abs(at)+s.referenceNoise*rng.NormFloat64())
		}
		if !s.phase {
			out.Magnitude = append(out.Magnitude, math.Abs(cmplx.Abs(v)+sigma*rng.NormFloat64()))
			continue
		}
		if s.reference {
			v *= cmplx.Rect(1, -cmplx.Phase(at))
		}
		v += complex(sigma*rng.NormFloat64(), sigma*rng.NormFloat64())
		phase := cmplx.Phase(v) + s.phaseOffset
		if s.conjugate {
			phase = -phase
		}
		out.Magnitude, out.Phase = append(out.Magnitude, cmplx.Abs(v)), append(out.Phase, math.Remainder(phase, 2*math.Pi))
	}
	return out
}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s is %.10g, want %.10g within %.2g", what, got, want, tolerance)
	}
}

func codes(r *Result) string {
	s := string(r.Status)
	for _, f := range r.Findings {
		s += " " + string(f.Code)
	}
	return s
}

func newRand(seed uint64) *rand.Rand { return rand.New(rand.NewPCG(1, seed)) }
