package decay

import (
	"math"
	"math/rand/v2"
	"testing"

	"dieaway/capture"
)

// TestUnevenTime: jittered stamps, a gap and lost samples are fitted at the true
// times; the result is that of the ring within its uncertainty, which is close to
// that of even samples.
func TestUnevenTime(t *testing.T) {
	const dt, records = 1e-6, 40
	for _, c := range []struct {
		name  string
		shift func(rng *rand.Rand, i int) (time float64, keep bool)
		lost  func(i int) bool
	}{
		{name: "jitter of a fifth", shift: func(rng *rand.Rand, i int) (float64, bool) {
			return float64(i) + 0.2*(rng.Float64()-0.5), true
		}},
		{name: "one row missing", shift: func(_ *rand.Rand, i int) (float64, bool) { return float64(i), i != 137 }},
		{name: "a gap of a tenth", shift: func(_ *rand.Rand, i int) (float64, bool) { return float64(i), i < 200 || i > 320 }},
		{name: "a tenth over range", lost: func(i int) bool { return i%10 == 3 }},
	} {
		t.Run(c.name, func(t *testing.T) {
			var q, f mean
			for seed := range uint64(records) {
				rng := rand.New(rand.NewPCG(seed, 61))
				ch := &capture.Channel{Name: "coil voltage", Unit: "V", Axis: &capture.Axis{Interval: dt}}
				for i := range kindN {
					at, keep := float64(i), true
					if c.shift != nil {
						at, keep = c.shift(rng, i)
					}
					if !keep {
						continue
					}
					v := math.Exp(-kindA*at)*math.Cos(kindW*at+1) + 0.01*rng.NormFloat64()
					if c.lost != nil && c.lost(i) {
						v = math.NaN()
					}
					ch.Samples = append(ch.Samples, v)
					if c.shift != nil {
						ch.Axis.Times = append(ch.Axis.Times, at*dt)
					}
				}
				ch.Axis.N = len(ch.Samples)
				r := Analyze(ch, Options{})
				if r.Status != Good {
					t.Fatalf("seed %d: %s, %v", seed, r.Status, r.Findings)
				}
				q.add(r.Quantities.Q.Value, r.Quantities.Q.U)
				f.add(r.Quantities.DampedFrequency.Value*dt, r.Quantities.DampedFrequency.U*dt)
			}
			root := math.Sqrt(records)
			within(t, "mean Q", q.value(), kindQ, 4*q.u/q.n/root)
			within(t, "mean fd", f.value(), kindFd, 4*f.u/f.n/root)
			near(t, "scatter over u of Q", q.scatter(), q.u/q.n, 0.4)
			near(t, "scatter over u of fd", f.scatter(), f.u/f.n, 0.4)
		})
	}
}

// TestTimebase: the uncertainty of the time base enters frequency and time
// constant, and leaves Q, damping ratio and decrement alone: a clock that is off
// scales fd by 1/(1+e) and tau by 1+e.
func TestTimebase(t *testing.T) {
	ch := channel(withNoise(kindRing(1, kindN), 1e-4, 1), 0, 1e-6)
	plain, clock := Analyze(ch, Options{}).Quantities, Analyze(ch, Options{TimebaseU: 1e-3}).Quantities
	within(t, "u(Q)", clock.Q.U, plain.Q.U, 0)
	within(t, "u(zeta)", clock.DampingRatio.U, plain.DampingRatio.U, 0)
	within(t, "u(delta)", clock.LogDecrement.U, plain.LogDecrement.U, 0)
	near(t, "u(fd)", clock.DampedFrequency.U, math.Hypot(plain.DampedFrequency.U, 1e-3*plain.DampedFrequency.Value), 1e-9)
	near(t, "u(tau)", clock.TimeConstant.U, math.Hypot(plain.TimeConstant.U, 1e-3*plain.TimeConstant.Value), 1e-9)
}

// TestOverrides: --from and --to bound the gate as they say.
func TestOverrides(t *testing.T) {
	ch := channel(withNoise(kindRing(1, kindN), 1e-3, 1), -2e-5, 1e-6)
	from, to := 3e-5, 4e-4
	r := Analyze(ch, Options{From: &from, To: &to})
	if r.Status != Good {
		t.Fatal(r.Status, r.Findings)
	}
	d := r.Decays[0]
	if d.First != 50 || d.Last != 420 {
		t.Errorf("gate [%d, %d), want [50, 420)", d.First, d.Last)
	}
	within(t, "Q", r.Quantities.Q.Value, kindQ, 4*r.Quantities.Q.U)
	empty := 1.0
	if r := Analyze(ch, Options{From: &empty}); r.Status != Refused {
		t.Errorf("a gate behind the record: %s", r.Status)
	}
}

// TestModels: a model can be forced.
func TestModels(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	two := channel(withNoise(kindOf(capture.SecondMode).make(rng), 0.01, 1), 0, 1e-6)
	for _, m := range []Model{Exponential, Amplitude, TwoMode} {
		if r := Analyze(two, Options{Model: m}); r.Model != m {
			t.Errorf("forced %s: %s", m, r.Model)
		}
	}
	if r := Analyze(two, Options{}); r.Model != TwoMode || len(r.Modes) != 2 {
		t.Errorf("chose %s with %d modes", r.Model, len(r.Modes))
	}
}

func kindOf(code capture.Code) kind {
	for _, k := range kinds {
		if k.code == code {
			return k
		}
	}
	panic("no kind " + code)
}

// TestChoosesChannel: the channel that rings is taken, whatever its place; one
// named as the source only where no other rings.
func TestChoosesChannel(t *testing.T) {
	ring := func(name string, size float64, seed uint64) *capture.Channel {
		y := kindRing(1, kindN)
		for i := range y {
			y[i] *= size
		}
		ch := channel(withNoise(y, 0.01, seed), 0, 1e-6)
		ch.Name = name
		return ch
	}
	quiet, coil, source := ring("spare", 0, 1), ring("coil voltage", 1, 2), ring("V_S", 3, 3)
	for _, c := range []struct {
		channels []*capture.Channel
		want     *capture.Channel
	}{
		{[]*capture.Channel{quiet, coil}, coil},
		{[]*capture.Channel{coil, quiet}, coil},
		{[]*capture.Channel{source, coil, quiet}, coil},
		{[]*capture.Channel{quiet, source}, source},
	} {
		if got, r := AnalyzeCapture(&capture.Capture{Channels: c.channels}, Options{}); got != c.want || r.Quantities == nil {
			t.Errorf("chose %s, %s", got.Name, r.Status)
		}
	}
}
