package quantity

import (
	"math/rand/v2"
	"slices"
	"testing"
)

// TestSpreadOfGUM: the five observations of V in JCGM 100:2008, example H.2: mean
// 4.9990, standard uncertainty of the mean 0.0032.
func TestSpreadOfGUM(t *testing.T) {
	var all []Quantity
	for _, v := range []float64{5.007, 4.994, 5.005, 4.990, 4.999} {
		all = append(all, New(v, 0.001, "V"))
	}
	s, err := SpreadOf(all)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "mean", s.Mean.Value, 4.9990, 1e-9)
	near(t, "u(mean)", s.Mean.U, 0.0032, 0.01)
	near(t, "median", s.Median, 4.999, 1e-12)
	near(t, "within", s.Within, 0.001, 1e-9)
	if s.N != 5 || s.Least != 4.990 || s.Most != 5.007 || len(s.Outliers) != 0 {
		t.Errorf("%+v", s)
	}
}

// TestSpreadSplits: coils that differ by 2 and are known to 1 spread by sqrt(5).
func TestSpreadSplits(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 1))
	var all []Quantity
	for range 20000 {
		all = append(all, New(100+2*rng.NormFloat64()+rng.NormFloat64(), 1, "Hz"))
	}
	s, err := SpreadOf(all)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "within", s.Within, 1, 1e-9)
	near(t, "own", s.Own, 2, 0.02)
	near(t, "between", s.Between, 2.236068, 0.02)
}

func TestSpreadOutliers(t *testing.T) {
	all := []Quantity{New(10, 0.1, ""), New(10.1, 0.1, ""), Unknown(""), New(9.9, 0.1, ""), New(10.05, 0.1, ""), New(9.95, 0.1, ""), New(12, 0.1, ""), New(12, 1, "")}
	s, err := SpreadOf(all)
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(s.Outliers, []int{6}) { // the last one is only badly known
		t.Errorf("outliers %v, want 6", s.Outliers)
	}
	if _, err := SpreadOf(all[:1]); err == nil {
		t.Error("a spread of one value")
	}
}
