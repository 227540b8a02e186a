package quantity

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestTrendByHand: three values by hand. Unweighted line through (0, 1), (1, 3), (2, 2):
// slope 1/2, residuals -1/2, 1, -1/2, s^2 = 1.5 with one degree of freedom, u(slope) =
// sqrt(1.5/2); Student's t for one degree and 95 % is 12.706 (table of GUM G.2).
func TestTrendByHand(t *testing.T) {
	none := math.NaN()
	trend := trendOf([]float64{0, 1, 2}, []Quantity{New(1, none, "V"), New(3, none, "V"), New(2, none, "V")})
	near(t, "mean", trend.Mean.Value, 2, 1e-12)
	near(t, "u(mean)", trend.Mean.U, 1/math.Sqrt(3), 1e-12)
	near(t, "change", trend.Change.Value, 1, 1e-12)
	near(t, "u(change)", trend.Change.U, 2*math.Sqrt(0.75), 1e-12)
	near(t, "k", trend.K, 12.706, 1e-3)
	if trend.Drifts() || !math.IsNaN(trend.Birge) {
		t.Errorf("drifts %v, Birge ratio %g", trend.Drifts(), trend.Birge)
	}
}

// TestTrendKnownUncertainty: with u known and no scatter beyond it, u(mean) =
// u/sqrt(n) and u(slope) = u/sqrt(sum (x - mean)^2), here 0.1/sqrt(2), k = 2.
func TestTrendKnownUncertainty(t *testing.T) {
	trend := trendOf([]float64{2, 0, 1}, []Quantity{New(5.2, 0.1, ""), New(5, 0.1, ""), New(5.1, 0.1, "")})
	near(t, "mean", trend.Mean.Value, 5.1, 1e-12)
	near(t, "u(mean)", trend.Mean.U, 0.1/math.Sqrt(3), 1e-12)
	near(t, "change", trend.Change.Value, 0.2, 1e-12)
	near(t, "u(change)", trend.Change.U, 0.1*math.Sqrt2, 1e-12)
	if trend.K != 2 || trend.Drifts() {
		t.Errorf("k %g, drifts %v", trend.K, trend.Drifts())
	}
}

func TestTrendFew(t *testing.T) {
	if trend := trendOf([]float64{1}, []Quantity{Unknown("Hz")}); trend.N != 0 || trend.Mean.Known() || trend.Drifts() {
		t.Errorf("of nothing: %+v", trend)
	}
	trend := trendOf([]float64{1}, []Quantity{New(7, 0.5, "Hz")})
	if trend.Mean != New(7, 0.5, "Hz") || trend.Change.Known() || trend.Drifts() {
		t.Errorf("of one measurement: %+v", trend)
	}
	same := []Quantity{New(7, 0.5, ""), New(8, 0.5, ""), New(9, 0.5, "")}
	if trend = trendOf([]float64{1, 1, 1}, same); trend.Change.Known() || trend.Drifts() {
		t.Errorf("all at one time: %+v", trend)
	}
}

// TestTrendAsLine: the running sums give the line of all points at once, far from
// the origin too.
func TestTrendAsLine(t *testing.T) {
	random := rand.New(rand.NewPCG(6, 2))
	var x, y, w []float64
	var q []Quantity
	for i := range 1000 {
		u := 0.5 + random.Float64()
		v := 125e3 + 1e-3*float64(i) + u*random.NormFloat64()
		x, y, w, q = append(x, 1.7e12+1e7*float64(i)), append(y, v), append(w, 1/(u*u)), append(q, New(v, u, "Hz"))
	}
	f, err := Line(x, y, w)
	if err != nil {
		t.Fatal(err)
	}
	trend := trendOf(x, q)
	span := x[999] - x[0]
	near(t, "change", trend.Change.Value, f.Slope*span, 1e-9)
	near(t, "Birge ratio", trend.Birge, math.Sqrt(f.ChiSquare/998), 1e-9)
}

// trendOf counts all measurements.
func trendOf(at []float64, q []Quantity) *Trend {
	var s TrendSums
	for i := range q {
		s.Add(at[i], q[i])
	}
	return s.Trend(q[0].Unit)
}

// TestTrendErrorRate: of steady quantities 5 in 100 are said to drift, by the
// meaning of 95 %, whether u is known, twice too small, or unknown.
func TestTrendErrorRate(t *testing.T) {
	random := rand.New(rand.NewPCG(6, 1))
	for _, u := range []float64{1, 0.5, math.NaN()} {
		const trials = 2000
		drifts := 0
		for range trials {
			var at []float64
			var q []Quantity
			for i := range 8 {
				at, q = append(at, float64(i)), append(q, New(100+random.NormFloat64(), u, ""))
			}
			trend := trendOf(at, q)
			if trend.Drifts() {
				drifts++
			}
		}
		if rate := float64(drifts) / trials; rate < 0.02 || rate > 0.075 {
			t.Errorf("u %g: %.1f %% of steady quantities drift, expected about 5 %%", u, 100*rate)
		}
	}
}

// TestTrendOfSeconds: measurements seconds apart, in milliseconds since 1970 and with
// weights of 1e14, have the trend that they have when time begins with the first
// (the straight line does not care where time begins).
func TestTrendOfSeconds(t *testing.T) {
	const begin = 1796126304958
	var late, early []float64
	var q []Quantity
	for i, tau := range []float64{40.31e-6, 40.53e-6, 40.56e-6, 40.39e-6, 40.26e-6} {
		early, late = append(early, 1137*float64(i)), append(late, begin+1137*float64(i))
		q = append(q, New(tau, 0.1e-6+1e-9*float64(i), "s"))
	}
	got, want := trendOf(late, q), trendOf(early, q)
	near(t, "change", got.Change.Value, want.Change.Value, 1e-6)
	near(t, "u of the change", got.Change.U, want.Change.U, 1e-6)
}
