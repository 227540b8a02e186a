package decay

import (
	"math"
	"testing"
)

// TestMGH17 fits two exponentials and a constant, the shape of an overdamped
// decay, to NIST StRD nonlinear regression MGH17 (certified): parameters, their
// standard deviations and the residual sum of squares, scored in matching digits.
func TestMGH17(t *testing.T) {
	y := []float64{.844, .908, .932, .936, .925, .908, .881, .850, .818, .784, .751, .718, .685, .658, .628, .603, .580,
		.558, .538, .522, .506, .490, .478, .467, .457, .448, .438, .431, .424, .420, .414, .411, .406}
	const step = 10 // of x
	p := newPoles(series{y: y, dt: step}, 0, 2)
	// The second certified start; the first, (1, 2) per unit of x, dies within a sample.
	sol := minimise(p, []float64{.01 * step, .02 * step}, 1e-18)
	if sol.stop == Singular || sol.stop == LeftDomain {
		t.Fatal(sol.stop)
	}
	rss := sol.normal.rss
	cov, ok := sol.normal.jtj.inverse()
	if !ok {
		t.Fatal("singular")
	}
	sd := func(i int) float64 { return math.Sqrt(cov.At(i, i) * rss / 28) }
	for _, c := range []struct {
		name                string
		got, want, gotSD    float64
		wantSD              float64
		digits, digitsForSD float64
	}{
		{"b1", p.ref + sol.normal.beta[0], 3.7541005211e-01, sd(2), 2.0723153551e-03, 6, 4},
		{"b2", sol.normal.beta[1], 1.9358469127e+00, sd(3), 2.2031669222e-01, 6, 4},
		{"b3", sol.normal.beta[2], -1.4646871366e+00, sd(4), 2.2175707739e-01, 6, 4},
		{"b4", sol.theta[0] / step, 1.2867534640e-02, sd(0) / step, 4.4861358114e-04, 6, 4},
		{"b5", sol.theta[1] / step, 2.2122699662e-02, sd(1) / step, 8.9471996575e-04, 6, 4},
	} {
		if d := digits(c.got, c.want); d < c.digits {
			t.Errorf("%s = %.11g agrees with %.11g in %.1f digits, want %g", c.name, c.got, c.want, d, c.digits)
		}
		if d := digits(c.gotSD, c.wantSD); d < c.digitsForSD {
			t.Errorf("sd(%s) = %.11g agrees with %.11g in %.1f digits, want %g", c.name, c.gotSD, c.wantSD, d, c.digitsForSD)
		}
	}
	if d := digits(rss, 5.4648946975e-05); d < 6 {
		t.Errorf("residual sum of squares %.11g: %.1f digits", rss, d)
	}
}

// digits is the number of matching digits, the log relative error of those who
// certify regression data.
func digits(got, want float64) float64 {
	if got == want {
		return 16
	}
	return -math.Log10(math.Abs(got-want) / math.Abs(want))
}
