package report

import (
	"math"
	"math/rand/v2"
	"testing"

	"dieaway/capture"
)

// However a record is cut into parts, they cover every sample once and in order.
func TestSegmentsCover(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for range 2000 {
		n := 1 + rng.IntN(5000)
		var windows []indexRange
		for at := 0; at < n && len(windows) < 4; {
			from := at + rng.IntN(n)
			to := from + 1 + rng.IntN(n)
			windows, at = append(windows, indexRange{from, to}), to
		}
		a := indexRange{rng.IntN(n), n}
		at := a.from
		for _, p := range segments(a, windows, 1+rng.IntN(50), 1+rng.IntN(50)) {
			if p.from != at || p.to <= p.from || p.bin < 1 {
				t.Fatalf("%+v after %d, of %+v with windows %v", p, at, a, windows)
			}
			at = p.to
		}
		if at != a.to {
			t.Fatalf("ends at %d of %d", at, a.to)
		}
	}
}

// A single spike in a million samples survives, and so do both edges of an oscillation.
func TestReduceKeepsExtremes(t *testing.T) {
	const n = 1_000_000
	axis := &capture.Axis{N: n, Interval: 1e-9}
	value := func(i int) float64 {
		switch i {
		case 777_777:
			return 9
		case 123_456:
			return math.NaN()
		}
		return math.Sin(2 * math.Pi * float64(i) / 40)
	}
	tr := reduce(axis, segments(indexRange{0, n}, nil, 500, 1), each(value))
	if len(tr.t) > 1000 {
		t.Errorf("%d points from 500 bins", len(tr.t))
	}
	lo, hi, _ := span(tr.v)
	if hi != 9 || lo > -0.999 {
		t.Errorf("from %g to %g, want -1 to 9", lo, hi)
	}
	for i := range tr.t {
		if i > 0 && tr.t[i] <= tr.t[i-1] {
			t.Fatalf("time runs backwards at point %d", i)
		}
		if k := int(math.Round(tr.t[i] / 1e-9)); value(k) != tr.v[i] {
			t.Fatalf("point %d is no sample", i)
		}
	}
}

// each makes a course of a function of the index.
func each(value func(i int) float64) values {
	return values{fill: func(out []float64, from int) {
		for k := range out {
			out[k] = value(from + k)
		}
	}}
}

func TestReduceGap(t *testing.T) {
	axis := &capture.Axis{N: 100, Interval: 1}
	tr := reduce(axis, []segment{{indexRange{0, 100}, 10}}, each(func(i int) float64 {
		if i >= 20 && i < 40 {
			return math.NaN()
		}
		return float64(i)
	}))
	gaps := 0
	for _, v := range tr.v {
		if math.IsNaN(v) {
			gaps++
		}
	}
	if gaps != 2 || len(tr.v) != 18 {
		t.Errorf("%d gaps in %d points, want one for each of the two empty bins and two for each of the other eight", gaps, len(tr.v))
	}
}

func TestColumn(t *testing.T) {
	c := column{values: []float64{0.0012345, -1e-9, math.NaN(), 12, math.Inf(1)}, factor: 1e3, places: 2}
	got, err := c.MarshalJSON()
	if want := "[1.23,0,null,12000,null]"; err != nil || string(got) != want {
		t.Errorf("got %s, %v, want %s", got, err, want)
	}
	c = column{values: []float64{0.00123456, 3}, factor: 1, leading: 3}
	if got, _ := c.MarshalJSON(); string(got) != "[0.00123,3]" {
		t.Errorf("got %s", got)
	}
}

func TestScaleFor(t *testing.T) {
	for _, c := range []struct {
		most   float64
		unit   string
		factor float64
		scaled string
	}{
		{0.02, "V", 1e3, "mV"}, {4e-4, "", 1e6, "×10⁻⁶"}, {4e-3, "", 1e3, "×10⁻³"}, {2e6, "counts", 1e-6, "×10⁶ counts"},
		{614, "counts", 1, "counts"}, {0, "", 1, ""},
	} {
		if s := scaleFor(-c.most/2, c.most, c.most/1000, c.unit); math.Abs(s.factor/c.factor-1) > 1e-12 || s.unit != c.scaled {
			t.Errorf("%g %s: got %g, %q, want %g, %q", c.most, c.unit, s.factor, s.unit, c.factor, c.scaled)
		}
	}
}

// Neighbouring samples stay apart on the page even late in a long record.
func TestTimesStayApart(t *testing.T) {
	l := loop07()
	l.samples, l.interval, l.start, l.tau = 20_000, 1e-9, 0.9, 1e-6
	r := l.ringDown()
	s := scaleFor(l.start, l.end(), l.interval/20, "s")
	a, b := round(r.Channel.Axis.Time(19_998)*s.factor, s.places), round(r.Channel.Axis.Time(19_999)*s.factor, s.places)
	if step := (b - a) / s.factor; math.Abs(step/l.interval-1) > 0.1 {
		t.Errorf("a step of %g becomes %g", l.interval, step)
	}
}
