package decay

import "math"

// normal solves for the linear parameters and forms the normal equations of the
// full problem from the inner products of the basis.
func (p *poles) normal(g *gram) (normal, bool) {
	where := p.linear()
	lin := sym{n: len(where)}
	rhs := make([]float64, len(where))
	for i, a := range where {
		rhs[i] = g.b[a]
		for j, b := range where[:i+1] {
			lin.set(i, j, g.g.At(a, b))
		}
	}
	beta, ok := solveSym(&lin, rhs)
	if !ok {
		return normal{}, false
	}
	out := normal{beta: beta, rss: p.yy}
	for i := range beta {
		out.rss -= beta[i] * rhs[i]
	}
	out.rss = math.Max(out.rss, 0)
	p.project(&out, g, p.columns(beta), where)
	return out, true
}

// linear lists the places of c, p_1, q_1, ..., d_1, ... in the basis.
func (p *poles) linear() []int {
	out := make([]int, 1, 1+2*p.rings+p.falls)
	for k := range p.rings {
		out = append(out, p.slot(k), p.slot(k)+1)
	}
	for l := range p.falls {
		out = append(out, p.slot(p.rings+l))
	}
	return out
}

// column is one column of the Jacobian as a combination of at most two functions
// of the basis.
type column struct {
	at [2]int
	x  [2]float64
}

// columns of the Jacobian, nonlinear parameters first. With y = p C + q S:
// dy/da = -p nC - q nS, dy/dw = q nC - p nS; with y = d E: dy/db = -d nE.
func (p *poles) columns(beta []float64) []column {
	out := make([]column, 0, parametersMost)
	for k := range p.rings {
		pk, qk, at := beta[1+2*k], beta[2+2*k], p.slot(k)+2
		out = append(out,
			column{[2]int{at, at + 1}, [2]float64{-pk, -qk}},
			column{[2]int{at, at + 1}, [2]float64{qk, -pk}})
	}
	for l := range p.falls {
		at := p.slot(p.rings+l) + 1
		out = append(out, column{[2]int{at, at}, [2]float64{-beta[1+2*p.rings+l], 0}})
	}
	for _, at := range p.linear() {
		out = append(out, column{[2]int{at, at}, [2]float64{1, 0}})
	}
	return out
}

// project fills J'J and J'r.
func (p *poles) project(out *normal, g *gram, cols []column, where []int) {
	out.jtj.n = len(cols)
	out.jtr = make([]float64, len(cols))
	var left [parametersMost]float64 // basis' r
	for i := range g.g.n {
		left[i] = g.b[i]
		for j, at := range where {
			left[i] -= g.g.At(i, at) * out.beta[j]
		}
	}
	for i, c := range cols {
		out.jtr[i] = c.x[0]*left[c.at[0]] + c.x[1]*left[c.at[1]]
		for j, d := range cols[:i+1] {
			sum := 0.0
			for a := range 2 {
				for b := range 2 {
					sum += c.x[a] * d.x[b] * g.g.At(c.at[a], d.at[b])
				}
			}
			out.jtj.set(i, j, sum)
		}
	}
}
