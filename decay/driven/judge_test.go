package driven

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
)

// What the response was measured across is guessed where it can be told, and the
// guess is said.
func TestGuess(t *testing.T) {
	for _, w := range []struct {
		q    float64
		part capture.Part
	}{{2, capture.Capacitor}, {2, capture.Inductor}, {2, capture.Resistor}, {2, capture.Both}, {20, capture.Both}, {20, capture.Inductor}, {20, capture.Resistor}} {
		s := loop07(w.q)
		s.across, s.noise = w.part, 0.003
		s = s.linear(81, s.f0()/4, s.f0()*2)
		r := Analyze(s.sweep(newRand(7)), Options{})
		if r.Across != w.part || !r.Guessed || !strings.Contains(r.Why, "guessed") {
			t.Errorf("Q %g across the %s: guessed %q, %s", w.q, w.part, r.Across, r.Why)
		}
	}
	// A narrow sweep at high Q looks alike across all three: that is said, and the
	// size of a ratio is a hint.
	for _, w := range []struct {
		part, want capture.Part
		why        string
	}{{capture.Capacitor, capture.Capacitor, "greater than the source"}, {capture.Resistor, capture.Resistor, "nowhere greater than the source"}} {
		s := loop07(300)
		s.across, s.reference, s.noise = w.part, true, 0.002
		if w.part == capture.Capacitor {
			s.noise = 3
		}
		r := Analyze(s.span(41, 3).sweep(newRand(8)), Options{})
		if r.Across != w.want || !strings.Contains(r.Why, w.why) || !strings.Contains(r.Why, "move f_0 by up to") {
			t.Errorf("across the %s: %q, %s", w.part, r.Across, r.Why)
		}
	}
	named := loop07(5).span(61, 3).sweep(newRand(1))
	named.Part, named.Name = capture.Capacitor, "V_C"
	if r := Analyze(named, Options{}); r.Why != `by the name "V_C" of the column` {
		t.Error(r.Why)
	}
	if r := Analyze(named, Options{Across: capture.Inductor}); r.Guessed || r.Across != capture.Inductor {
		t.Errorf("across %s, guessed %v", r.Across, r.Guessed)
	}
}

// Rows far off do not move the result by more than its uncertainty, wherever they
// stand, and are named.
func TestOutliers(t *testing.T) {
	for _, phase := range []bool{false, true} {
		for seed := range uint64(8) {
			s := loop07(40)
			s.noise, s.phase = 0.2, phase
			s = s.span(81, 4)
			rng := newRand(100 + seed)
			sweep := s.sweep(rng)
			for range 3 {
				sweep.Magnitude[rng.IntN(81)] *= 3 + 5*rng.Float64()
			}
			sweep.Magnitude[3] = 400 // higher than the peak
			r := Analyze(sweep, Options{Across: capture.Capacitor})
			if r.Quantities == nil {
				t.Fatal(r.Findings)
			}
			q, f := r.Quantities.Q, r.Quantities.NaturalFrequency
			near(t, "Q", q.Value, 40, 4*q.U)
			near(t, "f0", f.Value, s.f0(), 4*f.U)
			if !strings.Contains(codes(r), "outliers") {
				t.Error(codes(r))
			}
		}
	}
}

// Relative noise, as of readings in dB, and stated deviations weigh the rows.
func TestWeights(t *testing.T) {
	s := loop07(10)
	s.relative, s.noise = true, 0.03
	s = s.linear(121, s.f0()/3, s.f0()*3)
	var free, stated, decibels float64
	const n = 30
	for seed := range uint64(n) {
		sweep := s.sweep(newRand(200 + seed))
		r := Analyze(sweep, Options{Across: capture.Capacitor})
		free += sq(r.Quantities.Q.Value - 10)
		for _, m := range sweep.Magnitude {
			sweep.Deviation = append(sweep.Deviation, 0.03*m)
		}
		r = Analyze(sweep, Options{Across: capture.Capacitor})
		stated += sq(r.Quantities.Q.Value - 10)
		near(t, "uncertainty over Q", r.Quantities.Q.U/10, 0.018, 0.003)
		sweep.Deviation, sweep.Decibels = nil, true
		r = Analyze(sweep, Options{Across: capture.Capacitor})
		decibels += sq(r.Quantities.Q.Value - 10)
	}
	// The deviations here follow the noise in each row, which costs a little.
	if math.Abs(free/decibels-1) > 0.3 || stated > 1.6*decibels || decibels/n > sq(0.25) {
		t.Errorf("mean squares of Q: %g free, %g with deviations, %g in dB", free/n, stated/n, decibels/n)
	}
}

// A source that sags to a third at the resonance: the noise of the ratio is largest
// there, and the intervals hold all the same.
func TestNoiseOfRatio(t *testing.T) {
	s := scene{l: 1.62e-3, c: 1e-9, resistor: 30, source: 50, across: capture.Capacitor, reference: true, noise: 0.02, referenceNoise: 0.002}
	s = s.span(81, 4)
	const n = 60
	inside := 0
	for seed := range uint64(n) {
		r := Analyze(s.sweep(newRand(300+seed)), Options{Across: capture.Capacitor})
		if q := r.Quantities.Q; math.Abs(q.Value-s.q()) < 1.96*q.U {
			inside++
		}
	}
	if inside < 52 { // 57 of 60 are expected
		t.Errorf("%d of %d intervals hold Q", inside, n)
	}
}

// Order and repetition of the rows do not matter.
func TestOrder(t *testing.T) {
	s := loop07(25)
	s.noise, s.phase = 0.1, true
	s = s.span(61, 3)
	sweep := s.sweep(newRand(1))
	want := Analyze(sweep, Options{Across: capture.Capacitor}).Quantities
	shuffled := &capture.Sweep{Unit: "V", Cartesian: true}
	for _, i := range newRand(2).Perm(61) {
		shuffled.Frequency = append(shuffled.Frequency, sweep.Frequency[i])
		shuffled.Magnitude = append(shuffled.Magnitude, sweep.Magnitude[i])
		shuffled.Phase = append(shuffled.Phase, sweep.Phase[i])
	}
	r := Analyze(shuffled, Options{Across: capture.Capacitor})
	near(t, "Q", r.Quantities.Q.Value, want.Q.Value, 1e-9*want.Q.U)
	if !slices.IsSortedFunc(r.Points, func(a, b Point) int { return int(math.Copysign(1, a.Frequency-b.Frequency)) }) {
		t.Error("points not in order")
	}
	for _, p := range r.Points {
		m, phase := r.At(p.Frequency)
		near(t, "phase of a point", p.Phase, phase, 0.6)
		near(t, "magnitude of a point", p.Magnitude, m, 6*p.Deviation)
	}
	j, err := r.Quantities.Joint()
	if err != nil || math.Abs(j.Correlation(0, 1)-r.Quantities.Correlation) > 1e-12 {
		t.Errorf("joint: %v", err)
	}
}

func TestFindings(t *testing.T) {
	noisy := func(q float64) scene {
		s := loop07(q)
		s.noise = q / 200
		return s
	}
	clocked := func(s scene, rate float64) *capture.Sweep {
		out := s.sweep(newRand(3))
		for _, f := range out.Frequency {
			out.Clock = append(out.Clock, (f-out.Frequency[0])/rate)
		}
		return out
	}
	flat := &capture.Sweep{Unit: "V"}
	rng := newRand(4)
	for i := range 60 {
		flat.Frequency = append(flat.Frequency, 1000+10*float64(i))
		flat.Magnitude = append(flat.Magnitude, 1+0.01*rng.NormFloat64())
	}
	b := loop07(50).f0() / 50
	f0 := loop07(50).f0()
	for _, w := range []struct {
		name  string
		sweep *capture.Sweep
		opt   Options
		want  string
	}{
		{"clean", noisy(50).span(61, 3).sweep(newRand(1)), Options{}, "good"},
		{"narrow", noisy(50).span(61, 0.8).sweep(newRand(1)), Options{Across: capture.Capacitor}, "doubtful narrow-sweep"},
		{"sparse", noisy(50).span(12, 4).sweep(newRand(1)), Options{Across: capture.Capacitor}, "doubtful sparse-sweep"},
		// One row in a bandwidth and a half: a half-power width read from it would be wrong by a third.
		{"so sparse that no half-power width is read", noisy(50).linear(9, f0-6.2*b, f0+5.8*b).sweep(newRand(1)), Options{Across: capture.Capacitor}, "doubtful sparse-sweep"},
		{"below the peak", noisy(50).linear(61, f0-6*b, f0-2*b).sweep(newRand(1)), Options{}, "refused narrow-sweep"},
		{"above the peak", noisy(50).linear(61, f0+2*b, f0+6*b).sweep(newRand(1)), Options{}, "refused narrow-sweep"},
		{"flat", flat, Options{}, "refused weak-signal"},
		{"too few rows", noisy(50).span(4, 3).sweep(newRand(1)), Options{}, "refused sparse-sweep"},
		{"short dwell", noisy(50).span(61, 3).sweep(newRand(1)), Options{Dwell: 3 / (math.Pi * b)}, "doubtful swept-too-fast"},
		{"dwell for one part in a hundred", noisy(50).span(61, 3).sweep(newRand(1)), Options{Dwell: 5 / (math.Pi * b)}, "good swept-too-fast"},
		{"long dwell", noisy(50).span(61, 3).sweep(newRand(1)), Options{Dwell: 7 / (math.Pi * b)}, "good"},
		{"fast by the clock", clocked(noisy(50).span(61, 3), 0.05*b*b), Options{}, "doubtful swept-too-fast"},
		{"slow by the clock", clocked(noisy(50).span(61, 3), 0.02*b*b), Options{}, "good"},
	} {
		r := Analyze(w.sweep, w.opt)
		if got := codes(r); got != w.want {
			t.Errorf("%s: %s, want %s: %v", w.name, got, w.want, r.Findings)
		}
		if (r.Quantities == nil) != (r.Status == decay.Refused) {
			t.Errorf("%s: status %s with quantities %v", w.name, r.Status, r.Quantities)
		}
		for _, f := range r.Findings {
			if f.Message == "" || f.Remedy == "" || strings.Contains(f.Message+f.Remedy, "NaN") || strings.Contains(f.Message, "%!") {
				t.Errorf("%s: %v", w.name, f)
			}
		}
	}
}

// Two resonances are not one: the rows leave the curve in waves, and that is said.
func TestSecondResonance(t *testing.T) {
	s, other := loop07(40).span(121, 6), loop07(40)
	other.l *= 0.96
	a := s.sweep(newRand(1))
	other.frequencies = s.frequencies
	for i, m := range other.sweep(newRand(1)).Magnitude {
		a.Magnitude[i] += 0.6*m + 0.02*newRand(uint64(i)).NormFloat64()
	}
	if r := Analyze(a, Options{}); r.Status == decay.Good {
		t.Errorf("%s: %v", codes(r), r.Quantities)
	}
}

// Whatever a table holds, there is an answer or a refusal.
func TestNoPanic(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 99))
	for range 200 {
		s := &capture.Sweep{Cartesian: rng.IntN(2) == 0, Decibels: rng.IntN(4) == 0}
		n := rng.IntN(12)
		if n > 0 && rng.IntN(2) == 0 {
			s.Phase = make([]float64, n)
		}
		for range n {
			s.Frequency = append(s.Frequency, math.Exp(30*rng.NormFloat64()))
			m := math.Exp(20 * rng.NormFloat64())
			switch rng.IntN(8) {
			case 0:
				m = 0
			case 1:
				m = math.NaN()
			case 2:
				m = math.Inf(1)
			}
			s.Magnitude = append(s.Magnitude, m)
		}
		r := Analyze(s, Options{Dwell: 1, MeterBandwidth: 10})
		if r.Status == "" || (r.Quantities != nil && !r.Quantities.Q.Known()) {
			t.Errorf("%v: %v", s, r)
		}
	}
}
