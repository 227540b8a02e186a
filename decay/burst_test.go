package decay

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// burst is what a resonant circuit does in answer to a burst of drive that lasts from
// start for length seconds; its peak is 1.
type burst struct {
	f0, q                float64 // of the circuit
	drive, phase         float64 // Hz, rad
	start, length, noise float64
}

func (b *burst) samples(n int, dt float64, rng *rand.Rand) []float64 {
	const steps = 16 // a sample
	r := &resonator{w: 2 * math.Pi * b.f0 * dt, q: b.q, drive: func(t float64) float64 {
		if t = t*dt - b.start; t < 0 || t >= b.length {
			return 0
		}
		return math.Sin(2*math.Pi*b.drive*t + b.phase)
	}}
	y, peak := make([]float64, n), 0.0
	for i := range y {
		y[i] = r.x
		peak = math.Max(peak, math.Abs(r.x))
		for k := range steps {
			r.advance(float64(i)+float64(k)/steps, 1.0/steps)
		}
	}
	for i := range y {
		y[i] = y[i]/peak + b.noise*rng.NormFloat64()
	}
	return y
}

// The decay behind a burst is found wherever the burst begins and however long it
// lasts, and no driven sample pulls the numbers.
func TestBurst(t *testing.T) {
	const f0, records = 125e3, 40
	for _, c := range []struct {
		q, detuned, silence, cycles float64
	}{
		{20, 0, 0, 10}, {20, 0.03, 0, 10}, {20, 0, 0, 40}, {20, 0.03, 0, 40},
		{20, 0, 0.1, 10}, {20, 0.03, 0.1, 10}, {20, 0.1, 0.1, 10}, {20, 0.03, 0.1, 40},
		{80, 0.01, 0, 40}, {80, 0, 0, 80}, {80, 0.01, 0.1, 40}, {8, 0.05, 0, 10}, {8, 0.05, 0.1, 10},
	} {
		t.Run(fmt.Sprintf("Q %g, %g %% off, %g cycles behind %g", c.q, 100*c.detuned, c.cycles, c.silence), func(t *testing.T) {
			const n = 2500
			record := (c.cycles/f0 + 5*c.q/(math.Pi*f0)) / (1 - 1.1*c.silence)
			covered := 0
			for seed := range uint64(records) {
				rng := rand.New(rand.NewPCG(seed, 9))
				b := burst{f0: f0, q: c.q, drive: f0 * (1 + c.detuned*(1-0.2*rng.Float64())), phase: 2 * math.Pi * rng.Float64(),
					start: c.silence * record, length: (c.cycles + rng.Float64()) / f0, noise: 0.005}
				r := Analyze(channel(b.samples(n, record/n, rng), 0, record/n), Options{})
				if r.Status == Refused {
					t.Errorf("seed %d: refused: %v", seed, r.Findings)
				} else if q := r.Quantities.Q; math.Abs(q.Value-c.q) < 1.96*q.U {
					covered++
				}
			}
			// Of 40 intervals of 95 % fewer than 33 hold the truth once in 400 runs.
			if covered < 33 {
				t.Errorf("%d of %d intervals hold the truth", covered, records)
			}
		})
	}
}
