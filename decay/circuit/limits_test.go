package circuit

import (
	"math"
	"testing"

	"dieaway/decay"
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
