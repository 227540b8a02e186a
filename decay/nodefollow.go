package decay

import "math"

// nodeFollower evaluates the ring of an amplitude law at even samples, block by block:
// the polynomial through its values at the nodes (see [nodes]), without exp(jwn), turned
// back by exp(jwn).
type nodeFollower struct {
	f       *ringFit
	spacing float64
	weights *nodeWeights
	corner  float64
}

// newNodeFollower is for samples of the given spacing, in intervals; nil where the law is
// too fast for nodes, or the window too short for them to pay.
func newNodeFollower(f *ringFit, spacing float64) *nodeFollower {
	w := f.w + f.bend.g/2
	if f.nodes == nil || f.bend.fastest(f.a, f.w, w)*spacing*nodeBlock/2 > nodeReach {
		return nil
	}
	return &nodeFollower{f, spacing, newNodeWeights(w * spacing), f.bend.law.stop(f.a, f.bend.b)}
}

// residuals writes samples y less the curve to out, of the same length; the first of
// them is at time n0.
func (n *nodeFollower) residuals(out, y []float64, n0 float64) {
	var curve [nodeBlock]float64
	offset := n.f.offset()
	for at := 0; at < len(y); at += nodeBlock {
		n.ring(n0+float64(at)*n.spacing, &curve)
		end := min(at+nodeBlock, len(y))
		part := out[at:end]
		for m, v := range y[at:end] {
			part[m] = v - offset - curve[m]
		}
	}
}

// ring writes the ring at the samples of a block, the first at time t.
func (n *nodeFollower) ring(t float64, out *[nodeBlock]float64) {
	if to := t + nodeBlock*n.spacing; n.corner >= t && n.corner <= to {
		for m := range out {
			out[m] = n.f.ring(t + float64(m)*n.spacing)
		}
		return
	}
	c := n.coefficients(t)
	for m := range n.weights.table {
		f := &n.weights.table[m]
		cos, sin, x := f[0], f[1], (float64(m)+0.5)/(nodeBlock/2)
		xx := x * x
		evenRe := real(c[0]) + xx*(real(c[2])+xx*real(c[4]))
		evenIm := imag(c[0]) + xx*(imag(c[2])+xx*imag(c[4]))
		oddRe := x * (real(c[1]) + xx*(real(c[3])+xx*real(c[5])))
		oddIm := x * (imag(c[1]) + xx*(imag(c[3])+xx*imag(c[5])))
		out[nodeBlock/2+m] = (evenRe+oddRe)*cos - (evenIm+oddIm)*sin
		out[nodeBlock/2-1-m] = (evenRe-oddRe)*cos + (evenIm-oddIm)*sin
	}
}

// coefficients are those of the polynomial, by rising powers of the time from the middle
// of the block in units of half its length.
func (n *nodeFollower) coefficients(t float64) (out atNodes) {
	f := n.f
	middle := t + (nodeBlock-1)/2.0*n.spacing
	for i, x := range nodeAt {
		u, phase := f.bend.at(f.a, f.w, middle+x*nodeBlock/2*n.spacing)
		sin, cos := math.Sincos(phase)
		h := complex(f.p, -f.q) * complex(u*cos, u*sin) * n.weights.turn[i]
		for k, l := range lagrange[i] {
			out[k] += complex(l*real(h), l*imag(h))
		}
	}
	return out
}
