package circuit

import (
	"math"
	"testing"

	"dieaway/decay"
	"dieaway/decay/driven"
	"dieaway/decay/quantity"
)

// TestGuardBand looks at the acceptance limit, tolerance limit less U with k = 2
// (ILAC-G8:09/2019), and at the limit of failing, tolerance limit plus U (ISO
// 14253-1, from memory), on both sides of each. All figures are exact in binary.
func TestGuardBand(t *testing.T) {
	up := func(x float64) float64 { return math.Nextafter(x, math.Inf(1)) }
	down := func(x float64) float64 { return math.Nextafter(x, math.Inf(-1)) }
	const u = 0.25 // U is 0.5
	r := Range{Min: 10, Max: 20}
	for _, c := range []struct {
		x    float64
		rule Rule
		want Verdict
	}{
		{15, Guarded, Pass},
		{10.5, Guarded, Pass}, {down(10.5), Guarded, Undecided},
		{19.5, Guarded, Pass}, {up(19.5), Guarded, Undecided},
		{9.5, Guarded, Undecided}, {down(9.5), Guarded, Fail},
		{20.5, Guarded, Undecided}, {up(20.5), Guarded, Fail},
		{10, Simple, Pass}, {down(10), Simple, Fail},
		{20, Simple, Pass}, {up(20), Simple, Fail},
		{math.NaN(), Guarded, Undecided}, {math.NaN(), Simple, Undecided},
	} {
		if got := r.verdict(quantity.New(c.x, u, ""), c.rule); got != c.want {
			t.Errorf("%.17g, %s: got %s, want %s", c.x, c.rule, got, c.want)
		}
	}
	unknown := quantity.New(15, math.NaN(), "")
	if got := r.verdict(unknown, Guarded); got != Undecided {
		t.Errorf("unknown uncertainty, guarded: %s", got)
	}
	if got := r.verdict(unknown, Simple); got != Pass {
		t.Errorf("unknown uncertainty, simple: %s", got)
	}
	// An uncertainty that fills the tolerance lets nothing pass.
	if got := r.verdict(quantity.New(15, 3, ""), Guarded); got != Undecided {
		t.Errorf("wide uncertainty: %s", got)
	}
	open := Range{Min: math.NaN(), Max: 20}
	if got := open.verdict(quantity.New(-1e9, u, ""), Guarded); got != Pass {
		t.Errorf("no lower limit: %s", got)
	}
}

func TestJudge(t *testing.T) {
	q := &decay.Quantities{Q: quantity.New(32, 0.1, ""), NaturalFrequency: quantity.New(125e3, 10, "Hz")}
	ok := Range{"natural_frequency", "Hz", 124e3, 126e3}
	near, low := Range{"q", "", 31.9, math.NaN()}, Range{"q", "", 40, math.NaN()}
	for _, c := range []struct {
		ranges []Range
		q      *decay.Quantities
		want   Verdict
	}{
		{[]Range{ok}, q, Pass}, {[]Range{ok, near}, q, Undecided}, {[]Range{near, low, ok}, q, Fail}, {[]Range{low, near}, q, Fail},
		{[]Range{ok}, nil, Undecided},                            // refused
		{[]Range{{"inductance", "H", 1e-3, 2e-3}}, q, Undecided}, // nothing known of the circuit
	} {
		l := Limits{Guarded, c.ranges}
		if got := l.Judge(c.q, nil); got.Verdict != c.want || len(got.Checks) != len(c.ranges) {
			t.Errorf("%v: got %s with %d checks, want %s", c.ranges, got.Verdict, len(got.Checks), c.want)
		}
	}
	if j := (&Limits{}).Judge(q, nil); j != nil {
		t.Errorf("a judgement without limits: %v", j)
	}
}

// TestJudgeSweep: a sweep is held against all that a ring-down is, with the same
// relative uncertainties: tau = Q/(pi f0), alpha = pi f0/Q, delta = 2 pi zeta/sqrt(1 -
// zeta^2) (derived), worked out by hand for f0 = 125 kHz and Q = 25.
func TestJudgeSweep(t *testing.T) {
	q := &driven.Quantities{NaturalFrequency: quantity.New(125e3, 2, "Hz"), Q: quantity.New(25, 0.05, ""),
		Bandwidth: quantity.New(5e3, 10, "Hz"), DampingRatio: quantity.New(0.02, 4e-5, ""), DampedFrequency: quantity.New(124975, 2, "Hz")}
	for _, c := range []struct {
		key, unit string
		want      float64
	}{{"natural_frequency", "Hz", 125e3}, {"damped_frequency", "Hz", 124975}, {"q", "", 25}, {"bandwidth", "Hz", 5e3},
		{"damping_ratio", "", 0.02}, {"time_constant", "s", 63.6619772e-6}, {"decay_rate", "1/s", 15707.9633}, {"log_decrement", "", 0.125688846}} {
		l := Limits{Simple, []Range{{c.key, c.unit, c.want * (1 - 1e-6), c.want * (1 + 1e-6)}}}
		j := l.JudgeSweep(q, nil)
		if j.Verdict != Pass {
			t.Errorf("%s: %+v", c.key, j)
		}
		if u := j.Checks[0].Result.Relative(); c.unit != "Hz" && (u < 1.99e-3 || u > 2.01e-3) {
			t.Errorf("%s: relative uncertainty %g, want 2e-3", c.key, u)
		}
	}
	l := Limits{Guarded, []Range{{"unloaded_q", "", 30, math.NaN()}}}
	if j := l.JudgeSweep(q, nil); j.Verdict != Undecided {
		t.Errorf("unloaded Q without a bench file: %+v", j)
	}
	if j := l.JudgeSweep(nil, nil); j.Verdict != Undecided {
		t.Errorf("refused: %+v", j)
	}
}

// Components are held against the limits on components, and against no others.
func TestJudgeComponents(t *testing.T) {
	c := &Components{Inductance: quantity.New(1.62e-3, 1e-6, "H"), Capacitance: quantity.New(1e-9, 1e-12, "F"), Resistance: quantity.New(15, 0.1, "ohm")}
	q := Range{"q", "", 30, math.NaN()}
	coil, resistance := Range{"inductance", "H", 1.6e-3, 1.7e-3}, Range{"coil_resistance", "ohm", math.NaN(), 14}
	for _, k := range []struct {
		ranges []Range
		c      *Components
		want   Verdict
		checks int
	}{{[]Range{q, coil}, c, Pass, 1}, {[]Range{coil, resistance}, c, Fail, 2}, {[]Range{coil}, nil, Undecided, 1}} {
		l := Limits{Guarded, k.ranges}
		if j := l.JudgeComponents(k.c); j.Verdict != k.want || len(j.Checks) != k.checks {
			t.Errorf("%v: %+v, want %s", k.ranges, j, k.want)
		}
	}
	if j := (&Limits{Guarded, []Range{q}}).JudgeComponents(c); j != nil {
		t.Errorf("a judgement on what components do not tell: %+v", j)
	}
}
