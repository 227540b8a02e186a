package driven

import (
	"math/cmplx"
	"testing"

	"dieaway/capture"
)

// TestResonating: what the fit of one sweep says of another circuit, by the
// impedances of that circuit.
func TestResonating(t *testing.T) {
	s := loop07(30).span(81, 4)
	s.noise = 1e-9
	r := Analyze(s.sweep(newRand(31)), Options{Across: capture.Capacitor})
	if r.Quantities == nil {
		t.Fatal(codes(r))
	}
	other := s
	other.coil, other.c = 25, 1.1*s.c
	predicted := r.Resonating(other.f0(), other.q())
	for _, f := range s.frequencies {
		v, _ := other.answer(f)
		m, phase := predicted(f)
		near(t, "magnitude", m, cmplx.Abs(v), 1e-6*cmplx.Abs(v))
		near(t, "phase", phase, cmplx.Phase(v), 1e-6)
	}
}
