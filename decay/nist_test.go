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

// certified is one parameter with its certified value and standard deviation.
type certified struct{ got, sd, want, wantSD float64 }

func checkCertified(t *testing.T, name string, list []certified, rss, wantRSS float64) {
	t.Helper()
	for i, c := range list {
		if d := digits(c.got, c.want); d < 6 {
			t.Errorf("%s: b%d = %.11g agrees with %.11g in %.1f digits", name, i+1, c.got, c.want, d)
		}
		if d := digits(c.sd, c.wantSD); c.wantSD > 0 && d < 5 {
			t.Errorf("%s: sd(b%d) = %.11g agrees with %.11g in %.1f digits", name, i+1, c.sd, c.wantSD, d)
		}
	}
	if d := digits(rss, wantRSS); d < 6 {
		t.Errorf("%s: residual sum of squares %.11g agrees in %.1f digits", name, rss, d)
	}
}

// deviations returns the standard deviations of all parameters of a solution.
func (s *solution) deviations(n int) []float64 {
	inv, ok := s.normal.jtj.inverse()
	out := make([]float64, inv.n)
	for i := range out {
		out[i] = math.NaN()
		if ok {
			out[i] = math.Sqrt(inv.At(i, i) * s.normal.rss / s.dof(n))
		}
	}
	return out
}

var enso = []float64{
	12.9, 11.3, 10.6, 11.2, 10.9, 7.5, 7.7, 11.7, 12.9, 14.3, 10.9, 13.7, 17.1, 14, 15.3, 8.5, 5.7, 5.5, 7.6, 8.6, 7.3, 7.6, 12.7, 11,
	12.7, 12.9, 13, 10.9, 10.4, 10.2, 8, 10.9, 13.6, 10.5, 9.2, 12.4, 12.7, 13.3, 10.1, 7.8, 4.8, 3, 2.5, 6.3, 9.7, 11.6, 8.6, 12.4,
	10.5, 13.3, 10.4, 8.1, 3.7, 10.7, 5.1, 10.4, 10.9, 11.7, 11.4, 13.7, 14.1, 14, 12.5, 6.3, 9.6, 11.7, 5, 10.8, 12.7, 10.8, 11.8, 12.6,
	15.7, 12.6, 14.8, 7.8, 7.1, 11.2, 8.1, 6.4, 5.2, 12, 10.2, 12.7, 10.2, 14.7, 12.2, 7.1, 5.7, 6.7, 3.9, 8.5, 8.3, 10.8, 16.7, 12.6,
	12.5, 12.5, 9.8, 7.2, 4.1, 10.6, 10.1, 10.1, 11.9, 13.6, 16.3, 17.6, 15.5, 16, 15.2, 11.2, 14.3, 14.5, 8.5, 12, 12.7, 11.3, 14.5, 15.1,
	10.4, 11.5, 13.4, 7.5, 0.6, 0.3, 5.5, 5, 4.6, 8.2, 9.9, 9.2, 12.5, 10.9, 9.9, 8.9, 7.6, 9.5, 8.4, 10.7, 13.6, 13.7, 13.7, 16.5,
	16.8, 17.1, 15.4, 9.5, 6.1, 10.1, 9.3, 5.3, 11.2, 16.6, 15.6, 12, 11.5, 8.6, 13.8, 8.7, 8.6, 8.6, 8.7, 12.8, 13.2, 14, 13.4, 14.8,
}

// TestENSO fits the NIST StRD nonlinear regression ENSO (certified) from both
// starts: two cycles of unknown period beside a known one.
func TestENSO(t *testing.T) {
	const tp = 2 * math.Pi
	d := &design{
		s: series{y: enso, dt: 1}, width: 11, linear: []int{0, 1, 2, 3, 4, 5, 6},
		derivative: [][]product{{{7, 3}, {8, 4}}, {{9, 5}, {10, 6}}},
		eval: func(th []float64, t float64, f *[parametersMost]float64) {
			x := t + 1
			f[2], f[1] = math.Sincos(tp * x / 12)
			for k, b := range th {
				f[4+2*k], f[3+2*k] = math.Sincos(tp * x / b)
				slope := tp * x / (b * b)
				f[7+2*k], f[8+2*k] = f[4+2*k]*slope, -f[3+2*k]*slope
			}
		},
		domain: func(th []float64) bool { return th[0] > 1 && th[1] > 1 },
	}
	d.prepare()
	for _, start := range [][]float64{{40, 25}, {44, 26}} {
		sol := minimise(d, start, 1e-20)
		sd, b := sol.deviations(d.n), sol.normal.beta
		checkCertified(t, "ENSO", []certified{
			{b[0], sd[2], 1.0510749193e+01, 1.7488832467e-01},
			{b[1], sd[3], 3.0762128085e+00, 2.4310052139e-01},
			{b[2], sd[4], 5.3280138227e-01, 2.4354686618e-01},
			{sol.theta[0], sd[0], 4.4311088700e+01, 9.4408025976e-01},
			{b[3], sd[5], -1.6231428586e+00, 2.8078369611e-01},
			{b[4], sd[6], 5.2554493756e-01, 4.8073701119e-01},
			{sol.theta[1], sd[1], 2.6887614440e+01, 4.1612939130e-01},
			{b[5], sd[7], 2.1232288488e-01, 5.1460022911e-01},
			{b[6], sd[8], 1.4966870418e+00, 2.5434468893e-01},
		}, sol.normal.rss, 7.8853978668e+02)
	}
}

// TestBoxBOD fits the NIST StRD nonlinear regression BoxBOD (certified). Its
// starts (1, 1) and (100, 0.75) are from memory; b1 is linear and needs none.
func TestBoxBOD(t *testing.T) {
	d := &design{
		s: series{y: []float64{109, 149, 149, 191, 213, 224}, times: []float64{1, 2, 3, 5, 7, 10}, dt: 1}, width: 3,
		linear: []int{1}, derivative: [][]product{{{2, 0}}},
		eval: func(th []float64, t float64, f *[parametersMost]float64) {
			x := t + 1
			e := math.Exp(-th[0] * x)
			f[1], f[2] = 1-e, x*e
		},
	}
	d.prepare()
	for _, start := range []float64{1, 0.75} {
		sol := minimise(d, []float64{start}, 1e-20)
		sd := sol.deviations(d.n)
		checkCertified(t, "BoxBOD", []certified{
			{sol.normal.beta[0], sd[1], 2.1380940889e+02, 1.2354515176e+01},
			{sol.theta[0], sd[0], 5.4723748542e-01, 1.0455993237e-01},
		}, sol.normal.rss, 1.1680088766e+03)
	}
}

// TestLanczos3 fits three exponentials to the data of Lanczos (1956), his sum of
// exponentials rounded to four decimals, as NIST StRD Lanczos3. Formula, starts
// and certified values are from memory.
func TestLanczos3(t *testing.T) {
	y := make([]float64, 24)
	for i := range y {
		x := 0.05 * float64(i)
		y[i] = math.Round((0.0951*math.Exp(-x)+0.8607*math.Exp(-3*x)+1.5576*math.Exp(-5*x))*1e4) / 1e4
	}
	d := &design{
		s: series{y: y, dt: 0.05}, width: 7, linear: []int{1, 2, 3},
		derivative: [][]product{{{4, 0}}, {{5, 1}}, {{6, 2}}},
		eval: func(th []float64, t float64, f *[parametersMost]float64) {
			x := 0.05 * t
			for k, b := range th {
				f[1+k] = math.Exp(-b * x)
				f[4+k] = -x * f[1+k]
			}
		},
		domain: func(th []float64) bool { return th[0] > 0 && th[0] < th[1] && th[1] < th[2] && th[2] < 30 },
	}
	d.prepare()
	for _, start := range [][]float64{{0.3, 5.5, 7.6}, {0.7, 4.2, 6.3}} {
		sol := minimise(d, start, 1e-20)
		b := sol.normal.beta
		checkCertified(t, "Lanczos3", []certified{
			{b[0], 0, 8.6816414977e-02, 0}, {sol.theta[0], 0, 9.5498101505e-01, 0},
			{b[1], 0, 8.4400777463e-01, 0}, {sol.theta[1], 0, 2.9515951832e+00, 0},
			{b[2], 0, 1.5825685901e+00, 0}, {sol.theta[2], 0, 4.9863565084e+00, 0},
		}, sol.normal.rss, 1.6117193594e-08)
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
