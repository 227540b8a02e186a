package decay

import "math/cmplx"

// byNodes describes a basis of the constant and of the real and imaginary parts of
// functions near exp(jwt), whose sums follow from few of their values.
type byNodes struct {
	sums *nodal
	// fastest is the angular frequency, per interval, by which the functions depart
	// from exp(jwt) at most.
	fastest func(theta []float64, w float64) float64
	// corner is the time, in intervals, at which they are not smooth; +Inf for none.
	corner func(theta []float64) float64
}

// nodeGram collects sums of products with pairs of functions h_m, m from 0 on.
type nodeGram struct {
	n, sum     float64
	y, one     [nodePairs]complex128
	same, twin [nodePairs][nodePairs]complex128 // with conj h_l, with h_l, l <= m
}

// nodePairs are those of the widest basis.
const nodePairs = (parametersMost - 1) / 2

// gramByNodes is the inner products of the basis at theta; false where the functions
// depart too far from what was summed up.
func (d *design) gramByNodes(theta []float64) (g gram, ok bool) {
	b := d.nodes
	if b == nil || b.sums == nil {
		return g, false
	}
	m := d.s.spacing()
	top := b.sums.level(m*b.fastest(theta, b.sums.w/m), nodeReach)
	if top < 0 {
		return g, false
	}
	from := d.s.from
	corner := b.corner(theta)/m + float64(from)
	g.g.n = d.width
	eval := func(t float64, f *[parametersMost]float64) { d.eval(theta, t, f) }
	halves(d.s.len(), func(first, last int) func() {
		var own gram
		var sums nodeGram
		b.sums.cover(from+first, from+last, top, corner, func(j, at int, s *nodeSums) {
			sums.add(s)
			half := float64(b.sums.levels[j].length) / 2
			middle := float64(at-from) + half - 0.5
			var f [parametersMost]float64
			for i, x := range nodeAt {
				eval((middle+x*half)*m, &f)
				sums.addNode(s, i, &f, d.width/2)
			}
		}, func(at, to int) { own.add(d.s, at-from, to-from, d.ref, d.width, eval) })
		return func() {
			g.join(&own)
			sums.into(&g, d.width/2)
		}
	})
	g.mirror()
	return g, true
}

func (s *nodeGram) add(b *nodeSums) {
	s.n += float64(b.held.n)
	s.sum += b.sum
}

// addNode adds node i of a block, at which the basis of pairs has the values f.
func (s *nodeGram) addNode(b *nodeSums, i int, f *[parametersMost]float64, pairs int) {
	var h [nodePairs]complex128
	for m := range pairs {
		h[m] = complex(f[1+2*m], f[2+2*m])
	}
	y, one, square, smooth := b.y[i], b.held.one[i], b.held.square[i], real(b.held.smooth[i])
	for m, x := range h[:pairs] {
		s.y[m] += y * x
		s.one[m] += one * x
		u, v := complex(smooth*real(x), smooth*imag(x)), square*x
		same, twin := s.same[m][:m+1], s.twin[m][:m+1]
		for l, z := range h[:m+1] {
			same[l] += u * cmplx.Conj(z)
			twin[l] += v * z
		}
	}
}

// into adds the sums to those below the diagonal of g. With products P = h_m conj h_l
// and Q = h_m h_l, Re h_m Re h_l = Re(P + Q)/2, Im h_m Im h_l = Re(P - Q)/2,
// Re h_m Im h_l = Im(Q - P)/2 and Im h_m Re h_l = Im(Q + P)/2.
func (s *nodeGram) into(g *gram, pairs int) {
	add := func(a, b int, x float64) { g.g.v[a*parametersMost+b] += x }
	g.b[0] += s.sum
	add(0, 0, s.n)
	for m := range pairs {
		re, im := 1+2*m, 2+2*m
		g.b[re] += real(s.y[m])
		g.b[im] += imag(s.y[m])
		add(re, 0, real(s.one[m]))
		add(im, 0, imag(s.one[m]))
		for l := range m + 1 {
			p, q := s.same[m][l], s.twin[m][l]
			add(re, 1+2*l, real(q+p)/2)
			add(im, 2+2*l, real(p-q)/2)
			add(im, 1+2*l, imag(q+p)/2)
			if l < m {
				add(re, 2+2*l, imag(q-p)/2)
			}
		}
	}
}
