package quantity

import (
	"math"
	"math/rand/v2"
	"testing"
)

// JCGM 100:2008, example H.3: calibration of a thermometer, readings t in
// degrees Celsius and corrections b, reference 20 degrees.
func TestGUMExampleH3(t *testing.T) {
	temperature := []float64{21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511}
	correction := []float64{-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160}
	x := make([]float64, len(temperature))
	for i, v := range temperature {
		x[i] = v - 20
	}
	fit, err := Line(x, correction, nil)
	if err != nil {
		t.Fatal(err)
	}
	// To full precision from derived values; printed -0.1712(29), 0.00218(67), r = -0.930.
	near(t, "intercept", fit.Intercept, -0.17120379, 5e-9)
	near(t, "slope", fit.Slope, 0.0021826977, 5e-11)
	near(t, "u of the intercept", math.Sqrt(fit.VarIntercept), 0.0028776, 5e-8)
	near(t, "u of the slope", math.Sqrt(fit.VarSlope), 0.00066794, 5e-9)
	near(t, "correlation", fit.Correlation(), -0.93042960, 5e-9)
	b30, u30 := fit.At(10)
	near(t, "b(30)", b30, -0.1494, 5e-5)
	near(t, "u of b(30)", u30, 0.0041, 5e-5)
}

// Weights 1/u^2 give the scatter that they promise.
func TestLineWeights(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	x, y, w := make([]float64, 40), make([]float64, 40), make([]float64, 40)
	var sum, sum2, chi2 float64
	var fit LineFit
	const runs = 4000
	for range runs {
		for i := range x {
			u := math.Exp(-float64(i) / 20)
			x[i], w[i] = 1000+float64(i), 1/(u*u)
			y[i] = 3 - 0.5*x[i] + u*rng.NormFloat64()
		}
		var err error
		if fit, err = Line(x, y, w); err != nil {
			t.Fatal(err)
		}
		sum += fit.Slope
		sum2 += (fit.Slope + 0.5) * (fit.Slope + 0.5)
		chi2 += fit.ChiSquare
	}
	sd := math.Sqrt(fit.VarSlope)
	near(t, "mean slope", sum/runs, -0.5, 4*sd/math.Sqrt(runs))
	near(t, "scatter over u of the slope", math.Sqrt(sum2/runs)/sd, 1, 0.05) // 4 standard deviations of it
	near(t, "chi-square per degree of freedom", chi2/runs/float64(fit.Degrees), 1, 0.02)
}

func TestLineExact(t *testing.T) {
	x := []float64{1e9, 1e9 + 1, 1e9 + 2, 5}
	y := []float64{7, 9, 11, 1e6}
	fit, err := Line(x, y, []float64{1, 1, 1, 0}) // the last point has no weight
	if err != nil {
		t.Fatal(err)
	}
	near(t, "slope", fit.Slope, 2, 1e-9)
	if fit.Degrees != 1 || fit.ChiSquare > 1e-12 {
		t.Errorf("degrees %d, chi-square %g", fit.Degrees, fit.ChiSquare)
	}
	two, err := Line(x[:2], y[:2], []float64{1, 1})
	if err != nil || two.Slope != 2 || !math.IsNaN(two.Scaled().VarSlope) {
		t.Errorf("two points: %+v, %v", two, err)
	}
}

func TestLineErrors(t *testing.T) {
	for name, c := range map[string][3][]float64{
		"lengths":         {{1, 2}, {1}, nil},
		"too few":         {{1, 2}, {1, 2}, nil},
		"one abscissa":    {{2, 2, 2}, {1, 2, 3}, nil},
		"negative weight": {{1, 2, 3}, {1, 2, 3}, {1, -1, 1}},
		"all weights 0":   {{1, 2, 3}, {1, 2, 3}, {0, 0, 0}},
		"not finite":      {{1, 2, nan}, {1, 2, 3}, nil},
		"empty":           {nil, nil, nil},
	} {
		if fit, err := Line(c[0], c[1], c[2]); err == nil {
			t.Errorf("%s: no error, %+v", name, fit)
		}
	}
}
