package driven

import (
	"fmt"
	"testing"

	"dieaway/capture"
)

// Without noise every form gives the circuit back, from Q 0.6 to 1e5, with no hint
// but what it is measured across, magnitude only and with phase.
func TestExact(t *testing.T) {
	for _, q := range []float64{0.6, 1, 2, 5, 20, 100, 1000, 1e4, 1e5} {
		for _, part := range []capture.Part{capture.Capacitor, capture.Inductor, capture.Resistor, capture.Both} {
			for _, phase := range []bool{false, true} {
				s := loop07(q)
				s.across, s.phase, s.phaseOffset, s.conjugate = part, phase, 2, q == 20
				s = s.span(101, 5)
				r := Analyze(s.sweep(newRand(1)), Options{Across: part})
				name := fmt.Sprintf("Q %g across the %s, phase %v: ", q, part, phase)
				if r.Quantities == nil {
					t.Errorf("%s%v", name, r.Findings)
					continue
				}
				near(t, name+"f0", r.Quantities.NaturalFrequency.Value, s.f0(), 1e-6*s.f0()/q)
				near(t, name+"Q", r.Quantities.Q.Value, q, 1e-6*q)
				if got := codes(r); got != "good" {
					t.Errorf("%s%s %v", name, got, r.Findings)
				}
			}
		}
	}
}

// A long sweep with a narrow resonance, and one with a wide one: starts are chosen
// by few of the rows.
func TestManyRows(t *testing.T) {
	for _, q := range []float64{0.8, 30, 20000} {
		s := loop07(q)
		s.noise = q / 100
		s = s.linear(30001, s.f0()*0.3, s.f0()*1.9)
		r := Analyze(s.sweep(newRand(5)), Options{Across: capture.Capacitor})
		if r.Quantities == nil {
			t.Errorf("Q %g: %v", q, r.Findings)
			continue
		}
		near(t, "Q", r.Quantities.Q.Value, q, 5*r.Quantities.Q.U)
		near(t, "f0", r.Quantities.NaturalFrequency.Value, s.f0(), 5*r.Quantities.NaturalFrequency.U)
	}
}
