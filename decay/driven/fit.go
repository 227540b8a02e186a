package driven

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/mat"

	"dieaway/capture"
)

// The parameters of a fit, in this order: 2Q ln f0 (so that a unit of it is half
// a bandwidth), ln Q, ln gain, and where they are free the phase of the source
// and the coil's share of the resistance.
const (
	parF0 = iota
	parQ
	parGain
	parPhase
	parRest
	parMost
)

// A state is the fitted curve and the phase of the source against the rows'.
type state struct {
	curve
	phase float64 // rad
	sign  float64 // of the rows' phases: -1 when they count the other way
	free  []int   // parameters that are fitted
}

func newState(c curve, d *rows) state {
	s := state{curve: c, sign: 1, free: []int{parF0, parQ, parGain}}
	if d.phi == nil {
		return s
	}
	s.free = append(s.free, parPhase)
	var plus, minus complex128
	for i, f := range d.f {
		h, _, _, _ := c.form(f)
		plus += cmplx.Rect(d.m[i], d.phi[i]) * cmplx.Conj(h)
		minus += cmplx.Rect(d.m[i], -d.phi[i]) * cmplx.Conj(h)
	}
	s.phase = cmplx.Phase(plus)
	if cmplx.Abs(minus) > cmplx.Abs(plus) {
		s.sign, s.phase = -1, cmplx.Phase(minus)
	}
	return s
}

// residual is what the curve leaves of row i: along its own direction in the
// complex plane and across it. Without phase there is only the first.
func (s *state) residual(d *rows, i int) (along, across float64) {
	h, _, _, _ := s.form(d.f[i])
	if d.phi == nil {
		return d.m[i] - s.gain*modulus(h), 0
	}
	z := cmplx.Rect(d.m[i], s.sign*d.phi[i]-s.phase) * cmplx.Conj(direction(h))
	return real(z) - s.gain*modulus(h), imag(z)
}

// gradient is the derivative of the curve at f by the parameters, turned to the
// direction of the curve: its real part is along, its imaginary part across it.
func (s *state) gradient(f float64) (g [parMost]complex128) {
	h, byF0, byQ, byRest := s.form(f)
	turn := complex(s.gain, 0) * cmplx.Conj(direction(h))
	size := s.gain * modulus(h)
	g[parF0] = byF0 * turn / complex(2*s.q, 0)
	g[parQ] = byQ * turn
	g[parGain] = complex(size, 0)
	g[parPhase] = complex(0, size)
	g[parRest] = byRest * turn
	return g
}

// weights are the reciprocal standard deviations of the rows, along and across
// the curve; zero leaves a row out.
type weights struct{ along, across []float64 }

// sums are the normal equations under way: J'WJ, J'Wr and the weighted sum of squares.
type sums struct {
	jtj  [parMost][parMost]float64
	jtr  [parMost]float64
	cost float64
}

func (n *sums) add(row []float64, r float64) {
	for i, x := range row {
		for k := 0; k <= i; k++ {
			n.jtj[i][k] += x * row[k]
		}
		n.jtr[i] += x * r
	}
	n.cost += r * r
}

// normal returns J'WJ, J'Wr and the weighted sum of squares.
func (s *state) normal(d *rows, w weights) (jtj *mat.SymDense, jtr *mat.VecDense, cost float64) {
	var n sums
	var room [parMost]float64
	row := room[:len(s.free)]
	for i, f := range d.f {
		if w.along[i] == 0 {
			continue
		}
		g := s.gradient(f)
		along, across := s.residual(d, i)
		for k, par := range s.free {
			row[k] = real(g[par]) * w.along[i]
		}
		n.add(row, along*w.along[i])
		if d.phi == nil {
			continue
		}
		for k, par := range s.free {
			row[k] = imag(g[par]) * w.across[i]
		}
		n.add(row, across*w.across[i])
	}
	p := len(s.free)
	jtj, jtr = mat.NewSymDense(p, nil), mat.NewVecDense(p, nil)
	for i := range p {
		jtr.SetVec(i, n.jtr[i])
		for k := 0; k <= i; k++ {
			jtj.SetSym(i, k, n.jtj[i][k])
		}
	}
	return jtj, jtr, n.cost
}

func (s *state) cost(d *rows, w weights) (cost float64) {
	for i := range d.f {
		if w.along[i] == 0 {
			continue
		}
		along, across := s.residual(d, i)
		cost += sq(along * w.along[i])
		if d.phi != nil {
			cost += sq(across * w.across[i])
		}
	}
	return cost
}

func sq(x float64) float64 { return x * x }

// moved is the state a step of the parameters away.
func (s *state) moved(step *mat.VecDense) (state, bool) {
	out := *s
	for k, par := range s.free {
		x := step.AtVec(k)
		switch par {
		case parF0:
			out.f0 *= math.Exp(x / (2 * s.q))
		case parQ:
			out.q *= math.Exp(x)
		case parGain:
			out.gain *= math.Exp(x)
		case parPhase:
			out.phase += x
		case parRest:
			out.rest += x
		}
	}
	sound := out.f0 > 0 && out.q > 1e-3 && out.gain > 0 && out.q < 1e12 && finite(out.f0) && finite(out.gain) && math.Abs(out.rest) <= 1
	return out, sound
}

const (
	stepsMost = 100
	lambdaTop = 1e10
	stepSmall = 1e-7 // squared step in units of the variance where the iteration ends
)

// descend follows Gauss-Newton steps, damped after Levenberg and Marquardt, to
// the least weighted sum of squares.
func (s *state) descend(d *rows, w weights, most int) (iterations int) {
	lambda := 0.0
	jtj, jtr, cost := s.normal(d, w)
	for iterations = 1; iterations <= most; iterations++ {
		step, ok := solve(jtj, jtr, lambda)
		var next state
		nextCost := math.Inf(1)
		if ok {
			if next, ok = s.moved(step); ok {
				nextCost = next.cost(d, w)
			}
		}
		small := ok && mat.Inner(step, jtj, step) <= stepSmall*math.Max(cost, 1)/float64(d.len())
		if nextCost <= cost {
			*s = next
			if small {
				return iterations
			}
			lambda /= 10
			if lambda < 1e-7 {
				lambda = 0
			}
			jtj, jtr, cost = s.normal(d, w)
			continue
		}
		if lambda = math.Max(1e-4, lambda*10); small || lambda > lambdaTop {
			return iterations
		}
	}
	return iterations
}

// solve returns the step (J'WJ + lambda diag) x = J'Wr.
func solve(jtj *mat.SymDense, jtr *mat.VecDense, lambda float64) (*mat.VecDense, bool) {
	n := jtj.SymmetricDim()
	damped := mat.NewSymDense(n, nil)
	damped.CopySym(jtj)
	for i := range n {
		if !(jtj.At(i, i) > 0) {
			return nil, false
		}
		damped.SetSym(i, i, jtj.At(i, i)*(1+lambda))
	}
	var c mat.Cholesky
	x := mat.NewVecDense(n, nil)
	if !c.Factorize(damped) || c.SolveVecTo(x, jtr) != nil {
		return nil, false
	}
	return x, true
}

// covariance is the inverse of J'WJ, in the parameters of the fit.
func (s *state) covariance(d *rows, w weights) (*mat.SymDense, bool) {
	jtj, _, _ := s.normal(d, w)
	var c mat.Cholesky
	out := mat.NewSymDense(len(s.free), nil)
	if !c.Factorize(jtj) || c.InverseTo(out) != nil {
		return nil, false
	}
	return out, true
}

// freeRest lets the coil's share of the resistance vary, from where the notch
// does not reach zero.
func (s *state) freeRest(start float64) {
	if s.across == capture.Both {
		s.rest = math.Min(0.9, math.Max(start, 1e-3))
		s.free = append(append([]int{}, s.free...), parRest)
	}
}
