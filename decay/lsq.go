package decay

import "math"

// The least-squares core: separable problems y = sum_j beta_j phi_j(t; theta)
// solved by variable projection. The linear beta are eliminated at every theta
// (Golub and Pereyra 1973); the step in theta is the Gauss-Newton step of the
// full problem after that elimination, which is Kaufman's simplification (1975),
// damped after Levenberg and Marquardt.

// normal holds the normal equations of the full problem at one theta, with the
// linear parameters already at their optimum. The nonlinear parameters come
// first, then the linear ones.
type normal struct {
	jtj  sym       // J'J, (k+m) x (k+m)
	jtr  []float64 // J'r, the gradient; its linear part is zero up to rounding
	beta []float64 // the linear parameters, m
	rss  float64   // r'r
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
	fine          = 1e-8  // step left to a final fit, in variances: 1e-4 of the uncertainty
	coarse        = 1e-3  // step left to a trial
	roundingFloor = 1e-26 // of the signal's energy: nothing is left to gain
	roundingSlack = 1e-15 // of the signal's energy: the residual is no better known
	lambdaLeast   = 1e-7
	lambdaMost    = 1e9
)

// minimise starts at theta and follows the damped Gauss-Newton steps down to where
// the square of the next one is below tolerance, in units of the variance.
func minimise(p separable, theta []float64, tolerance float64) solution {
	s := solution{theta: append([]float64(nil), theta...), stop: Singular}
	cur, ok := p.at(theta)
	if !p.valid(theta) || !ok {
		return s
	}
	s.normal = cur
	floor, slack := roundingFloor*cur.energy(), roundingSlack*cur.energy()
	lambda := 0.0
	for s.iterations = 1; s.iterations <= iterationCap; s.iterations++ {
		step, gain, ok := reducedStep(&s.normal, len(theta), lambda)
		if !ok {
			s.stop = Singular
			return s
		}
		if gain <= tolerance*s.normal.rss/s.dof(p.size())+floor {
			s.stop = Converged
			return s
		}
		next := make([]float64, len(theta))
		for i := range next {
			next[i] = s.theta[i] + step[i]
		}
		trial, ok := normal{}, p.valid(next)
		if ok {
			trial, ok = p.at(next)
		}
		switch {
		case ok && trial.rss <= s.normal.rss+slack:
			s.theta, s.normal = next, trial
			lambda = shrink(lambda)
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
func (n *normal) energy() float64 {
	k := n.jtj.n - len(n.beta)
	e := n.rss
	for i, b := range n.beta {
		e += b * b * n.jtj.At(k+i, k+i)
	}
	return e
}

// reducedStep solves for the step of the k nonlinear parameters, with the linear
// ones eliminated and Marquardt's damping lambda times the diagonal. gain is
// step' S step, the squared step in units of the data.
func reducedStep(n *normal, k int, lambda float64) (step []float64, gain float64, ok bool) {
	s, ok := n.jtj.schur(k)
	if !ok {
		return nil, 0, false
	}
	damped := s
	for i := range k {
		damped.set(i, i, s.At(i, i)*(1+lambda))
	}
	x, ok := solveSym(&damped, n.jtr)
	if !ok {
		return nil, 0, false
	}
	return x, s.quadratic(x), true
}
