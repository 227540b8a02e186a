package decay

import (
	"math"
	"math/rand/v2"
	"testing"
)

// ringing samples a ring of frequency f and Q that may depend on the amplitude, by
// small steps of its envelope and phase equations; A is the amplitude, in V:
// dA/dt = -A omega/(2Q) (1 + growth A), dphi/dt = omega (1 + shift A).
func ringing(f, q, growth, shift, noise float64, n int, interval float64, seed uint64) []float64 {
	random := rand.New(rand.NewPCG(seed, 6))
	y := make([]float64, n)
	a, phi, omega := 1.0, 0.3, 2*math.Pi*f
	const steps = 50
	for i := range y {
		y[i] = 0.02 + a*math.Cos(phi) + noise*random.NormFloat64()
		for range steps {
			h := interval / steps
			middle := a * (1 - h/2*omega/(2*q)*(1+growth*a))
			a -= h * middle * omega / (2 * q) * (1 + growth*middle)
			phi += h * omega * (1 + shift*middle)
		}
	}
	return y
}

// TestAlongSteady: of a ring whose Q and frequency are the same all along, 95 % of
// the stretches hold the true values within 2 u, by the meaning of u.
func TestAlongSteady(t *testing.T) {
	const f, q = 125e3, 40.0
	inside, all := 0, 0
	for seed := range uint64(20) {
		ch := channel(ringing(f, q, 0, 0, 0.005, 3000, 1e-7, seed), 0, 1e-7)
		r := Analyze(ch, Options{Model: Exponential})
		if r.Status == Refused {
			t.Fatal(r.Findings)
		}
		for _, l := range r.Decays[0].Along(ch) {
			all += 2
			for _, e := range []float64{(l.DampedFrequency.Value - f) / l.DampedFrequency.U, (l.Q.Value - q) / l.Q.U} {
				if math.Abs(e) < 2 {
					inside++
				}
			}
		}
	}
	if share := float64(inside) / float64(all); all < 200 || share < 0.91 || share > 0.985 {
		t.Errorf("%.1f %% of %d within 2 u", 100*share, all)
	}
}

// TestAlongAmplitude: where loss and frequency depend on the amplitude, each stretch
// shows what the equation has at its amplitude.
func TestAlongAmplitude(t *testing.T) {
	const f, q, growth, shift = 125e3, 60.0, 0.5, -0.004
	for _, model := range []Model{Amplitude, Exponential} { // an unfit model changes nothing
		ch := channel(ringing(f, q, growth, shift, 1e-4, 4000, 1e-7, 1), 0, 1e-7)
		r := Analyze(ch, Options{Model: model})
		if r.Status == Refused {
			t.Fatal(r.Findings)
		}
		points := r.Decays[0].Along(ch)
		if len(points) < 8 {
			t.Fatalf("%d points", len(points))
		}
		for _, l := range points {
			wantQ, wantF := q/(1+growth*l.Amplitude), f*(1+shift*l.Amplitude)
			if math.Abs(l.Q.Value/wantQ-1) > 0.02 || math.Abs(l.DampedFrequency.Value/wantF-1) > 3e-4 {
				t.Errorf("%s, at %.3f V: Q %.3f, want %.3f; f %.1f Hz, want %.1f Hz", model, l.Amplitude, l.Q.Value, wantQ, l.DampedFrequency.Value, wantF)
			}
		}
	}
}
