package quantity

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/diff/fd"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
)

// A Joint is several quantities with their covariance: what one measurement
// says of all its results together.
type Joint struct {
	names, units []string
	values       []float64
	cov          *mat.SymDense
}

// NewJoint returns the joint estimate of len(values) quantities. names and
// units have the length of values; cov is their covariance, of that order, in
// the product of the units. Everything is copied. A covariance that is not
// finite, has a negative variance or a correlation beyond 1 is an error.
func NewJoint(names, units []string, values []float64, cov mat.Symmetric) (*Joint, error) {
	n := len(values)
	if len(names) != n || len(units) != n || cov.SymmetricDim() != n {
		return nil, fmt.Errorf("joint estimate of %d values: %d names, %d units, covariance of order %d",
			n, len(names), len(units), cov.SymmetricDim())
	}
	j := &Joint{names: append([]string{}, names...), units: append([]string{}, units...),
		values: append([]float64{}, values...), cov: mat.NewSymDense(n, nil)}
	j.cov.CopySym(cov)
	return j, j.check()
}

func (j *Joint) check() error {
	for i, x := range j.values {
		if !finite(x) || !(j.cov.At(i, i) >= 0) {
			return fmt.Errorf("joint estimate: %s is %g with variance %g", j.names[i], x, j.cov.At(i, i))
		}
		for k := range i {
			bound := math.Sqrt(j.cov.At(i, i) * j.cov.At(k, k))
			if c := j.cov.At(i, k); !(math.Abs(c) <= bound*(1+1e-9)) || !finite(bound) {
				return fmt.Errorf("joint estimate: covariance %g of %s and %s exceeds the product %g of their uncertainties",
					c, j.names[k], j.names[i], bound)
			}
		}
	}
	return nil
}

// Independent returns the joint estimate of quantities that share nothing. An
// unknown value or uncertainty is an error.
func Independent(names []string, qs ...Quantity) (*Joint, error) {
	values, units := make([]float64, len(qs)), make([]string, len(qs))
	cov := mat.NewSymDense(max(1, len(qs)), nil)
	for i, q := range qs {
		values[i], units[i] = q.Value, q.Unit
		cov.SetSym(i, i, q.U*q.U)
	}
	return NewJoint(names, units, values, cov)
}

// Means returns the means of repeated observations made together, with the
// experimental covariance of the means (GUM 4.2.3 and equation 17).
// observations[i] holds the values of quantity i, all of one length of at least 2.
func Means(names, units []string, observations ...[]float64) (*Joint, error) {
	if len(observations) == 0 || len(observations[0]) < 2 {
		return nil, fmt.Errorf("means of repeated observations: fewer than 2 observations")
	}
	n := len(observations[0])
	rows := mat.NewDense(n, len(observations), nil)
	values := make([]float64, len(observations))
	for i, obs := range observations {
		if len(obs) != n {
			return nil, fmt.Errorf("means of repeated observations: %d of one quantity and %d of another", n, len(obs))
		}
		rows.SetCol(i, obs)
		values[i] = stat.Mean(obs, nil)
	}
	cov := mat.NewSymDense(len(observations), nil)
	stat.CovarianceMatrix(cov, rows, nil)
	cov.ScaleSym(1/float64(n), cov)
	return NewJoint(names, units, values, cov)
}

// Len returns the number of quantities.
func (j *Joint) Len() int { return len(j.values) }

// Name returns the name of quantity i.
func (j *Joint) Name(i int) string { return j.names[i] }

// At returns quantity i with its own standard uncertainty.
func (j *Joint) At(i int) Quantity {
	return Quantity{Value: j.values[i], U: math.Sqrt(j.cov.At(i, i)), Unit: j.units[i]}
}

// Get returns the quantity of that name; ok is false when there is none.
func (j *Joint) Get(name string) (q Quantity, ok bool) {
	for i, n := range j.names {
		if n == name {
			return j.At(i), true
		}
	}
	return Unknown(""), false
}

// Covariance returns the covariance of quantities i and k, in the product of their units.
func (j *Joint) Covariance(i, k int) float64 { return j.cov.At(i, k) }

// Correlation returns the correlation coefficient of quantities i and k (GUM
// equation 14), from -1 to 1; 0 when one of them is exact.
func (j *Joint) Correlation(i, k int) float64 {
	d := math.Sqrt(j.cov.At(i, i) * j.cov.At(k, k))
	if d == 0 {
		return 0
	}
	return math.Max(-1, math.Min(1, j.cov.At(i, k)/d))
}

// Propagate returns the quantities y = f(x) of the joint estimate x, with the
// covariance C V C' of the law of propagation of uncertainty (GUM 5.2.2, JCGM
// 102 6.2). f writes len(names) values to y and must not keep its arguments.
//
// jacobian writes the derivatives C[r][c] = dy[r]/dx[c] at x; when it is nil
// they are taken by central differences. Linear propagation holds while f is
// nearly straight over a few standard uncertainties. A result that is not
// finite is an error.
func (j *Joint) Propagate(names, units []string, f func(y, x []float64), jacobian func(c *mat.Dense, x []float64)) (*Joint, error) {
	y := make([]float64, len(names))
	x := append([]float64{}, j.values...)
	f(y, x)
	c := mat.NewDense(len(names), len(x), nil)
	if jacobian == nil {
		j.differences(c, f)
	} else {
		jacobian(c, x)
	}
	cov := mat.NewSymDense(len(names), nil)
	var cv, full mat.Dense
	cv.Mul(c, j.cov)
	full.Mul(&cv, c.T())
	for r := range names {
		for k := 0; k <= r; k++ {
			cov.SetSym(r, k, (full.At(r, k)+full.At(k, r))/2)
		}
	}
	return NewJoint(names, units, y, cov)
}

// differences writes the Jacobian of f by central differences. Each variable is
// first divided by a step of its own: its uncertainty is the natural one, and
// the cube root of the machine epsilon keeps a tiny one above rounding.
func (j *Joint) differences(c *mat.Dense, f func(y, x []float64)) {
	step, z := make([]float64, j.Len()), make([]float64, j.Len())
	for i, x := range j.values {
		step[i] = math.Max(1e-3*math.Sqrt(j.cov.At(i, i)), 6e-6*math.Abs(x))
		if step[i] == 0 {
			step[i] = 6e-6
		}
		z[i] = x / step[i]
	}
	x := make([]float64, j.Len())
	scaled := func(y, z []float64) {
		for i := range x {
			x[i] = z[i] * step[i]
		}
		f(y, x)
	}
	fd.Jacobian(c, scaled, z, &fd.JacobianSettings{Formula: fd.Central, Step: 1})
	c.Apply(func(_, k int, d float64) float64 { return d / step[k] }, c)
}
