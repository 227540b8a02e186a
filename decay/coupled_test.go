package decay

import (
	"math"
	"testing"
)

// TestCoupledCircuits integrates two equal series circuits coupled by k, the first
// charged, and finds both modes in its capacitor voltage. Equal tanks split to
// f0/sqrt(1+k) and f0/sqrt(1-k) (derived: two modes); with the resistance in both
// loops the modes decay at R/(2L(1+k)) and R/(2L(1-k)).
func TestCoupledCircuits(t *testing.T) {
	const l, c, r, k = 1e-3, 1e-9, 20.0, 0.04
	f0 := 1 / (2 * math.Pi * math.Sqrt(l*c))
	interval := 1 / f0 / 20
	y := coupledCircuits(l, r, c, k, interval, 6000)
	res := Analyze(channel(withNoise(y, 2e-3, 9), 0, interval), Options{})
	if res.Model != TwoMode || len(res.Modes) != 2 || !has(res, "second-mode") {
		t.Fatalf("model %s, %d modes, findings %v", res.Model, len(res.Modes), res.Findings)
	}
	for _, sign := range []float64{1, -1} {
		omega2, rate := 1/(l*(1+sign*k)*c), r/(2*l*(1+sign*k))
		want := math.Sqrt(omega2-rate*rate) / (2 * math.Pi)
		m := res.Modes[0]
		if math.Abs(res.Modes[1].DampedFrequency.Value-want) < math.Abs(m.DampedFrequency.Value-want) {
			m = res.Modes[1]
		}
		within(t, "fd", m.DampedFrequency.Value, want, 4*m.DampedFrequency.U)
		within(t, "decay rate", m.DecayRate.Value, rate, 4*m.DecayRate.U)
		within(t, "f0 by coupling", m.NaturalFrequency.Value, f0/math.Sqrt(1+sign*k), 4*m.NaturalFrequency.U+1e-7*f0)
	}
}

// coupledCircuits integrates
//
//	L q1” + M q2” + R q1' + q1/C = 0 and the same with 1 and 2 exchanged, M = kL,
//
// by the classical Runge-Kutta method, 40 steps a sample.
func coupledCircuits(l, r, c, k, interval float64, n int) []float64 {
	const sub = 40
	h := interval / sub
	type state [4]float64 // q1, q2, i1, i2
	det := l * l * (1 - k*k)
	slope := func(s state) state {
		v1, v2 := -r*s[2]-s[0]/c, -r*s[3]-s[1]/c
		return state{s[2], s[3], l * (v1 - k*v2) / det, l * (v2 - k*v1) / det}
	}
	step := func(s, d state, h float64) state {
		for i := range s {
			s[i] += h * d[i]
		}
		return s
	}
	s := state{c, 0, 0, 0}
	y := make([]float64, n)
	for i := range y {
		y[i] = s[0] / c
		for range sub {
			k1 := slope(s)
			k2 := slope(step(s, k1, h/2))
			k3 := slope(step(s, k2, h/2))
			k4 := slope(step(s, k3, h))
			for j := range s {
				s[j] += h / 6 * (k1[j] + 2*k2[j] + 2*k3[j] + k4[j])
			}
		}
	}
	return y
}
