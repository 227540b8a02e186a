package decay

// normal solves for the linear parameters and forms the normal equations of the
// full problem from the inner products of the basis.
func (p *poles) normal(g *gram) (normal, bool) {
	linear := p.linear()
	out, ok := g.project(linear, p.yy)
	if !ok {
		return out, false
	}
	out.fill(g, p.columns(out.beta), linear)
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
