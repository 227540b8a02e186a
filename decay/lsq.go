package decay

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// The least-squares core: separable problems y = sum_j beta_j phi_j(t; theta)
// solved by variable projection. The linear beta are eliminated at every theta
// (Golub and Pereyra 1973); the step in theta is the Gauss-Newton step of the
// full problem after that elimination, which is Kaufman's simplification (1975),
// damped after Levenberg and Marquardt.

// normal holds the normal equations of the full problem at one theta, with the
// linear parameters already at their optimum. The nonlinear parameters come
// first, then the linear ones.
type normal struct {
	jtj  *mat.SymDense // J'J, (k+m) x (k+m)
	jtr  []float64     // J'r, the gradient; its linear part is zero up to rounding
	beta []float64     // the linear parameters, m
	rss  float64       // r'r
}

// separable is a least-squares problem with k nonlinear parameters.
type separable interface {
	// at returns the normal equations at theta, false when they cannot be formed.
	at(theta []float64) (normal, bool)
	// valid reports whether theta means anything.
	valid(theta []float64) bool
	// size returns the number of data.
	size() int
}

// solution is where an iteration ended.
type solution struct {
	theta      []float64
	normal     normal
	stop       StopReason
	iterations int
}

// dof is the number of degrees of freedom that are left, at least 1.
func (s *solution) dof(n int) float64 {
	return math.Max(1, float64(n-len(s.theta)-len(s.normal.beta)))
}

const (
	iterationCap  = 60
	stepTolerance = 1e-6  // of the variance: a thousandth of the uncertainty
	roundingFloor = 1e-26 // of the signal's energy: nothing is left to gain
	lambdaLeast   = 1e-7
	lambdaMost    = 1e9
)

// minimise starts at theta and follows the damped Gauss-Newton steps down.
func minimise(p separable, theta []float64) solution {
	s := solution{theta: append([]float64(nil), theta...), stop: Singular}
	cur, ok := p.at(theta)
	if !p.valid(theta) || !ok {
		return s
	}
	s.normal = cur
	floor := roundingFloor * energy(cur)
	lambda := 0.0
	for s.iterations = 1; s.iterations <= iterationCap; s.iterations++ {
		step, gain, ok := reducedStep(s.normal, len(theta), lambda)
		if !ok {
			s.stop = Singular
			return s
		}
		small := gain <= stepTolerance*s.normal.rss/s.dof(p.size())+floor
		next := make([]float64, len(theta))
		for i := range next {
			next[i] = s.theta[i] + step[i]
		}
		trial, ok := normal{}, p.valid(next)
		if ok {
			trial, ok = p.at(next)
		}
		switch {
		case ok && trial.rss <= s.normal.rss:
			s.theta, s.normal = next, trial
			lambda = shrink(lambda)
			if small {
				s.stop = Converged
				return s
			}
		case small:
			s.stop = Converged
			return s
		default:
			lambda = grow(lambda)
			if lambda > lambdaMost {
				s.stop = NoProgress
				if !p.valid(next) {
					s.stop = LeftDomain
				}
				return s
			}
		}
	}
	s.stop = IterationCap
	return s
}

func shrink(lambda float64) float64 {
	if lambda <= lambdaLeast {
		return 0
	}
	return lambda / 10
}

func grow(lambda float64) float64 { return math.Max(lambdaLeast*1e3, lambda*10) }

// energy is the scale of the data: what the linear parameters explain and what is left.
func energy(n normal) float64 {
	k := n.jtj.SymmetricDim() - len(n.beta)
	e := n.rss
	for i, b := range n.beta {
		e += b * b * n.jtj.At(k+i, k+i)
	}
	return e
}

// reducedStep solves for the step of the k nonlinear parameters, with the linear
// ones eliminated by the Schur complement and Marquardt's damping lambda times
// the diagonal. gain is step' S step, the squared step in units of the data.
func reducedStep(n normal, k int, lambda float64) (step []float64, gain float64, ok bool) {
	s, ok := schur(n.jtj, k)
	if !ok {
		return nil, 0, false
	}
	damped := mat.NewSymDense(k, nil)
	damped.CopySym(s)
	for i := range k {
		damped.SetSym(i, i, s.At(i, i)*(1+lambda))
	}
	x, ok := solveSym(damped, n.jtr[:k])
	if !ok {
		return nil, 0, false
	}
	v := mat.NewVecDense(k, x)
	return x, mat.Inner(v, s, v), true
}

// schur returns A11 - A12 inv(A22) A21 for the first k parameters.
func schur(a *mat.SymDense, k int) (*mat.SymDense, bool) {
	n := a.SymmetricDim()
	out := mat.NewSymDense(k, nil)
	if n == k {
		out.CopySym(a)
		return out, true
	}
	inv, ok := invertSym(a.SliceSym(k, n))
	if !ok {
		return nil, false
	}
	for i := range k {
		for j := i; j < k; j++ {
			sum := a.At(i, j)
			for p := k; p < n; p++ {
				for q := k; q < n; q++ {
					sum -= a.At(i, p) * inv.At(p-k, q-k) * a.At(q, j)
				}
			}
			out.SetSym(i, j, sum)
		}
	}
	return out, true
}

// solveSym solves a x = b for a symmetric positive definite a, after scaling its
// diagonal to one so that units do not spoil the conditioning.
func solveSym(a mat.Symmetric, b []float64) ([]float64, bool) {
	var chol mat.Cholesky
	scale, ok := factorise(&chol, a)
	if !ok {
		return nil, false
	}
	n := len(scale)
	rhs := mat.NewVecDense(n, nil)
	for i := range n {
		rhs.SetVec(i, b[i]*scale[i])
	}
	x := mat.NewVecDense(n, nil)
	if err := chol.SolveVecTo(x, rhs); err != nil && !isCondition(err) {
		return nil, false
	}
	out := make([]float64, n)
	for i := range n {
		out[i] = x.AtVec(i) * scale[i]
		if math.IsNaN(out[i]) || math.IsInf(out[i], 0) {
			return nil, false
		}
	}
	return out, true
}

// invertSym inverts a symmetric positive definite matrix with the same scaling.
func invertSym(a mat.Symmetric) (*mat.SymDense, bool) {
	var chol mat.Cholesky
	scale, ok := factorise(&chol, a)
	if !ok {
		return nil, false
	}
	inv := mat.NewSymDense(len(scale), nil)
	if err := chol.InverseTo(inv); err != nil && !isCondition(err) {
		return nil, false
	}
	for i := range scale {
		for j := i; j < len(scale); j++ {
			inv.SetSym(i, j, inv.At(i, j)*scale[i]*scale[j])
		}
	}
	return inv, true
}

func factorise(chol *mat.Cholesky, a mat.Symmetric) (scale []float64, ok bool) {
	n := a.SymmetricDim()
	scale = make([]float64, n)
	for i := range n {
		d := a.At(i, i)
		if !(d > 0) || math.IsInf(d, 0) {
			return nil, false
		}
		scale[i] = 1 / math.Sqrt(d)
	}
	scaled := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			scaled.SetSym(i, j, a.At(i, j)*scale[i]*scale[j])
		}
	}
	return scale, chol.Factorize(scaled)
}

// isCondition tells gonum's warning of a bad condition number from a failure.
func isCondition(err error) bool {
	_, ok := err.(mat.Condition)
	return ok
}
