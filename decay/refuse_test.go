package decay

import (
	"math"
	"math/rand/v2"
	"testing"

	"dieaway/capture"
)

// TestRefusals: what is no free decay is refused, with the finding that says why,
// and its numbers are withheld.
func TestRefusals(t *testing.T) {
	const n = 2000
	for _, c := range []struct {
		name string
		y    func(k float64) float64
		want []capture.Code
	}{
		{"noise only", func(float64) float64 { return 0 }, []capture.Code{capture.NoDecay}},
		{"steady drive", func(k float64) float64 { return math.Cos(0.3*k + 1) }, []capture.Code{capture.DriveOn}},
		{"growing oscillation", func(k float64) float64 { return 0.2 * math.Exp(k/900) * math.Cos(0.3*k) }, []capture.Code{capture.NoDecay}},
		{"bare exponential", func(k float64) float64 { return math.Exp(-k / 300) }, []capture.Code{capture.Overdamped}},
		{"a step", func(k float64) float64 { return step(k - 700) }, []capture.Code{capture.NoDecay, capture.Overdamped, capture.DriveOn}},
	} {
		t.Run(c.name, func(t *testing.T) {
			for seed := range uint64(8) {
				rng := rand.New(rand.NewPCG(seed, 29))
				y := make([]float64, n)
				for k := range y {
					y[k] = c.y(float64(k)) + 0.02*rng.NormFloat64()
				}
				r := Analyze(channel(y, 0, 1e-6), Options{})
				if r.Status != Refused || r.Quantities != nil {
					t.Fatalf("seed %d: status %s", seed, r.Status)
				}
				named := false
				for _, code := range c.want {
					named = named || has(r, code)
				}
				if !named {
					t.Errorf("seed %d: findings %v, want one of %v", seed, r.Findings, c.want)
				}
			}
		})
	}
}

func step(x float64) float64 {
	if x < 0 {
		return 0
	}
	return 1
}

// TestTwoSamplesACycle: they only change sign, so that phase and amplitude are one
// number and the equations of the fit have no solution of their own, whatever its model.
// Where noise lets them have one, the warning is there.
func TestTwoSamplesACycle(t *testing.T) {
	named := 0
	for _, noise := range []float64{0, 1e-5, 1e-3, 4e-3} {
		for _, model := range []Model{"", Exponential, Amplitude, TwoMode} {
			for seed := range uint64(5) {
				y := make([]float64, 400)
				for i := range y {
					y[i] = math.Exp(-float64(i)/100) * math.Cos(math.Pi*float64(i)+0.3)
				}
				r := Analyze(channel(withNoise(y, noise, seed), 0, 1), Options{Model: model})
				if r.Status != Refused && !has(r, capture.SparseSamples) || (r.Quantities == nil) != (r.Status == Refused) {
					t.Errorf("noise %g, model %q, seed %d: %s, %v, %v", noise, model, seed, r.Status, r.Quantities, r.Findings)
				}
				if r.Status == Refused && r.Findings[0].Code == capture.SparseSamples {
					named++
				}
			}
		}
	}
	if named == 0 {
		t.Error("no refusal names the sampling")
	}
}
