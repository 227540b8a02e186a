package decay

import "slices"

// whole returns the samples with those that are not there at the reference level, where
// they add nothing to the sums with y.
func (p *poles) whole() []float64 {
	if p.solid == nil {
		p.solid = slices.Clone(p.s.y)
		for _, i := range p.missing {
			p.solid[i] = p.ref
		}
	}
	return p.solid
}

// takeOut corrects the sums for the samples that are not there.
func (p *poles) takeOut(g *gram, list []pole) {
	if len(p.missing) == 0 {
		return
	}
	basis := func(i int, f *[parametersMost]float64) { p.basis(list, p.s.position(i), f) }
	if p.s.len() >= parallelFrom {
		basis = p.basisAlong(list)
	}
	var f [parametersMost]float64
	f[0] = 1
	for _, i := range p.missing {
		basis(i, &f)
		for a, fa := range f[:g.g.n] {
			row := g.g.v[a*parametersMost:][:a+1]
			for b := range row {
				row[b] -= fa * f[b]
			}
		}
	}
	g.mirror()
}

// basisAlong returns a function that evaluates the basis at samples that rise.
func (p *poles) basisAlong(list []pole) func(i int, f *[parametersMost]float64) {
	m := p.s.spacing()
	walks := make([]*walk, len(list))
	for k, z := range list {
		walks[k] = newWalk(z.over(m), p.s.len())
	}
	return func(i int, f *[parametersMost]float64) {
		t := float64(i) * m
		for k, w := range walks {
			at, v := p.slot(k), w.at(i)
			if p.isRing(k) {
				f[at], f[at+1], f[at+2], f[at+3] = real(v), imag(v), t*real(v), t*imag(v)
			} else {
				f[at], f[at+1] = real(v), t*real(v)
			}
		}
	}
}
