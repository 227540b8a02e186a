package quantity

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.10g, want %.10g ± %g", what, got, want, tol)
	}
}

// gumH2 is the data of JCGM 100:2008, example H.2: five simultaneous readings of
// voltage (V), current (A) and phase (rad).
func gumH2(t *testing.T) *Joint {
	t.Helper()
	j, err := Means([]string{"V", "I", "phi"}, []string{"V", "A", "rad"},
		[]float64{5.007, 4.994, 5.005, 4.990, 4.999},
		[]float64{19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3},
		[]float64{1.0456, 1.0438, 1.0468, 1.0428, 1.0433})
	if err != nil {
		t.Fatal(err)
	}
	return j
}

func impedance(y, x []float64) {
	v, i, phi := x[0], x[1], x[2]
	y[0], y[1], y[2] = v*math.Cos(phi)/i, v*math.Sin(phi)/i, v/i
}

func impedanceJacobian(c *mat.Dense, x []float64) {
	v, i, phi := x[0], x[1], x[2]
	sin, cos := math.Sincos(phi)
	c.SetRow(0, []float64{cos / i, -v * cos / (i * i), -v * sin / i})
	c.SetRow(1, []float64{sin / i, -v * sin / (i * i), v * cos / i})
	c.SetRow(2, []float64{1 / i, -v / (i * i), 0})
}

func TestGUMExampleH2(t *testing.T) {
	in := gumH2(t)
	// Printed in table H.2.
	for i, want := range []Quantity{{Value: 4.9990, U: 0.0032}, {Value: 19.661e-3, U: 0.0095e-3}, {Value: 1.04446, U: 0.00075}} {
		near(t, in.Name(i), in.At(i).Value, want.Value, 1e-4*want.Value)
		near(t, "u of "+in.Name(i), in.At(i).U, want.U, 0.02*want.U)
	}
	near(t, "r(V, I)", in.Correlation(0, 1), -0.36, 0.005)
	near(t, "r(V, phi)", in.Correlation(0, 2), 0.86, 0.005)
	near(t, "r(I, phi)", in.Correlation(1, 2), -0.65, 0.005)

	names, units := []string{"R", "X", "Z"}, []string{"ohm", "ohm", "ohm"}
	for name, jacobian := range map[string]func(*mat.Dense, []float64){"analytic": impedanceJacobian, "numerical": nil} {
		t.Run(name, func(t *testing.T) {
			out, err := in.Propagate(names, units, impedance, jacobian)
			if err != nil {
				t.Fatal(err)
			}
			// Values printed in table H.3; uncertainties and correlations to full
			// precision from derived from the same data. The printed
			// u(X) = 0.295 is 0.2956 rounded down.
			for i, want := range []Quantity{{Value: 127.732, U: 0.07107141}, {Value: 219.847, U: 0.29558168}, {Value: 254.260, U: 0.23633613}} {
				near(t, names[i], out.At(i).Value, want.Value, 6e-4)
				near(t, "u of "+names[i], out.At(i).U, want.U, 1e-7)
			}
			near(t, "u(X) as printed", out.At(1).U, 0.295, 0.001)
			near(t, "r(R, X)", out.Correlation(0, 1), -0.58842978, 1e-7)
			near(t, "r(R, Z)", out.Correlation(0, 2), -0.48525922, 1e-7)
			near(t, "r(X, Z)", out.Correlation(1, 2), 0.99251165, 1e-7)
		})
	}
}

// The differences hold for values far from their uncertainty and for a value of zero.
func TestPropagateNumerically(t *testing.T) {
	in, err := Independent([]string{"a", "b"}, New(0, 1e-6, "s"), New(125e3, 1e-3, "Hz"))
	if err != nil {
		t.Fatal(err)
	}
	out, err := in.Propagate([]string{"phase"}, []string{"rad"}, func(y, x []float64) {
		y[0] = 2 * math.Pi * x[0] * x[1]
	}, nil)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "u of the phase", out.At(0).U, 2*math.Pi*0.125, 1e-9)
}

func TestJointErrors(t *testing.T) {
	one := []string{"a"}
	for name, make := range map[string]func() (*Joint, error){
		"lengths":      func() (*Joint, error) { return NewJoint(one, one, []float64{1, 2}, mat.NewSymDense(2, nil)) },
		"not a number": func() (*Joint, error) { return Independent(one, New(nan, 1, "")) },
		"unknown u":    func() (*Joint, error) { return Independent(one, New(1, nan, "")) },
		"negative":     func() (*Joint, error) { return NewJoint(one, one, []float64{1}, mat.NewSymDense(1, []float64{-1})) },
		"correlation": func() (*Joint, error) {
			return NewJoint([]string{"a", "b"}, []string{"", ""}, []float64{1, 2}, mat.NewSymDense(2, []float64{1, 1.1, 1.1, 1}))
		},
		"one observation": func() (*Joint, error) { return Means(one, one, []float64{1}) },
		"ragged": func() (*Joint, error) {
			return Means([]string{"a", "b"}, []string{"", ""}, []float64{1, 2}, []float64{1})
		},
		"infinite result": func() (*Joint, error) {
			in, _ := Independent(one, New(0, 1, ""))
			return in.Propagate(one, one, func(y, x []float64) { y[0] = 1 / x[0] }, nil)
		},
	} {
		if _, err := make(); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}

func TestEn(t *testing.T) {
	// (10.3 - 10.0) / sqrt(0.4^2 + 0.3^2) = 0.6, with U = 2u (derived: ISO 13528).
	a, b := New(10.3, 0.2, "V"), New(10.0, 0.15, "V")
	near(t, "En", En(a, b, 0), 0.6, 1e-12)
	near(t, "En turned round", En(b, a, 0), -0.6, 1e-12)
	// A shared component of 0.12: U^2 = 4 (0.04 + 0.0225 - 2*0.0144).
	near(t, "En with a shared part", En(a, b, 0.0144), 0.3/math.Sqrt(4*(0.0625-0.0288)), 1e-12)
	near(t, "two exact equals", En(New(1, 0, ""), New(1, 0, ""), 0), 0, 0)
	if got := En(New(1, 0, ""), New(2, 0, ""), 0); !math.IsInf(got, -1) {
		t.Errorf("two exact values that differ: got %g", got)
	}
	if got := En(New(1, nan, ""), New(2, 1, ""), 0); !math.IsNaN(got) {
		t.Errorf("unknown uncertainty: got %g", got)
	}
}
