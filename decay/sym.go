package decay

import "math"

// parametersMost bounds the parameters of a model.
const parametersMost = 12

// sym is a symmetric matrix of up to parametersMost rows, kept on the stack: the
// fits solve systems of five unknowns tens of thousands of times.
type sym struct {
	n int
	v [parametersMost * parametersMost]float64
}

// At returns the element in row i and column j.
func (s *sym) At(i, j int) float64 { return s.v[i*parametersMost+j] }

// set writes the element and its mirror image.
func (s *sym) set(i, j int, x float64) {
	s.v[i*parametersMost+j] = x
	s.v[j*parametersMost+i] = x
}

// cholesky is the factor of a symmetric positive definite matrix whose diagonal
// was scaled to one first, so that units do not spoil the conditioning.
type cholesky struct {
	n     int
	l     [parametersMost * parametersMost]float64
	scale [parametersMost]float64
}

// singularPivot is the pivot of a matrix of unit diagonal that is all rounding.
const singularPivot = 1e-14

func factorise(a *sym) (c cholesky, ok bool) {
	c.n = a.n
	for i := range a.n {
		d := a.At(i, i)
		if !(d > 0) || math.IsInf(d, 0) {
			return c, false
		}
		c.scale[i] = 1 / math.Sqrt(d)
	}
	for i := range a.n {
		for j := range i + 1 {
			sum := a.At(i, j) * c.scale[i] * c.scale[j]
			for k := range j {
				sum -= c.l[i*parametersMost+k] * c.l[j*parametersMost+k]
			}
			if i != j {
				c.l[i*parametersMost+j] = sum / c.l[j*parametersMost+j]
			} else if !(sum > singularPivot) {
				return c, false
			} else {
				c.l[i*parametersMost+i] = math.Sqrt(sum)
			}
		}
	}
	return c, true
}

// solve overwrites b with the solution.
func (c *cholesky) solve(b []float64) {
	for i := range c.n {
		b[i] *= c.scale[i]
		for k := range i {
			b[i] -= c.l[i*parametersMost+k] * b[k]
		}
		b[i] /= c.l[i*parametersMost+i]
	}
	for i := c.n - 1; i >= 0; i-- {
		for k := i + 1; k < c.n; k++ {
			b[i] -= c.l[k*parametersMost+i] * b[k]
		}
		b[i] /= c.l[i*parametersMost+i]
	}
	for i := range c.n {
		b[i] *= c.scale[i]
	}
}

// solveSym returns the solution of a x = b.
func solveSym(a *sym, b []float64) ([]float64, bool) {
	c, ok := factorise(a)
	if !ok {
		return nil, false
	}
	x := append([]float64(nil), b[:a.n]...)
	c.solve(x)
	for _, v := range x {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, false
		}
	}
	return x, true
}

// inverse returns the inverse of a.
func (s *sym) inverse() (inv sym, ok bool) {
	c, ok := factorise(s)
	if !ok {
		return inv, false
	}
	inv.n = s.n
	for j := range s.n {
		var e [parametersMost]float64
		e[j] = 1
		c.solve(e[:s.n])
		for i := range j + 1 {
			inv.set(i, j, e[i])
		}
	}
	return inv, true
}

// schur returns A11 - A12 inv(A22) A21, the first k parameters with the others
// eliminated.
func (s *sym) schur(k int) (out sym, ok bool) {
	out.n = k
	rest := sym{n: s.n - k}
	for i := range rest.n {
		for j := range i + 1 {
			rest.set(i, j, s.At(k+i, k+j))
		}
	}
	c, ok := factorise(&rest)
	if !ok {
		return out, false
	}
	for j := range k {
		var x [parametersMost]float64
		for p := range rest.n {
			x[p] = s.At(k+p, j)
		}
		c.solve(x[:rest.n])
		for i := range j + 1 {
			sum := s.At(i, j)
			for p := range rest.n {
				sum -= s.At(i, k+p) * x[p]
			}
			out.set(i, j, sum)
		}
	}
	return out, true
}

// quadratic returns x' s x.
func (s *sym) quadratic(x []float64) float64 {
	sum := 0.0
	for i := range s.n {
		for j := range s.n {
			sum += x[i] * s.At(i, j) * x[j]
		}
	}
	return sum
}
