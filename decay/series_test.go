package decay

import (
	"math"
	"testing"
)

// A mean of m samples of exp(-an) is again an exponential, with rate ma.
func TestAveragedKeepsExponentials(t *testing.T) {
	const a = 1e-3
	y := make([]float64, 1000)
	for i := range y {
		y[i] = math.Exp(-a * float64(i))
	}
	y[25] = math.NaN()
	means, m := series{y: y, dt: 1, gaps: true}.averaged(100)
	if m != 10 || means.len() != 100 || means.dt != 10 {
		t.Fatalf("%d means over %d samples", means.len(), m)
	}
	for i := 4; i < means.len(); i++ {
		if got := means.y[i] / means.y[i-1]; math.Abs(got-math.Exp(-a*10)) > 1e-12 {
			t.Errorf("mean %d is %g times the one before", i, got)
		}
	}
	if whole, m := (series{y: y}).averaged(1000); m != 1 || &whole.y[0] != &y[0] {
		t.Error("a short series is averaged")
	}
}
