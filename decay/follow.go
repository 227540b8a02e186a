package decay

import "math"

// follower evaluates the curve of a fit at even samples, block by block: a constant
// and the real parts of (p - jq) z^n.
type follower struct {
	constant float64
	terms    []follow
}

// follow is one term, with the powers of its pole within a block and from block to
// block.
type follow struct {
	z            pole
	c            complex128
	re, im       [blockLength]float64
	farRe, farIm [blockLength]float64
}

// newFollower is of terms about a constant, for n samples in one go at most.
func newFollower(constant float64, n int, terms ...term) *follower {
	f := &follower{constant: constant, terms: make([]follow, len(terms))}
	for i := range f.terms {
		t := &f.terms[i]
		t.z, t.c = pole{terms[i].a, terms[i].w}, complex(terms[i].p, -terms[i].q)
		powerTable(t.z.at(1), &t.re, &t.im, min(n, blockLength))
		powerTable(t.z.at(blockLength), &t.farRe, &t.farIm, min(n/blockLength+1, blockLength))
	}
	return f
}

// residuals writes samples y less the curve to out, of the same length, which may be
// y itself; the first of them is at time n0.
func (f *follower) residuals(out, y []float64, n0 float64) {
	for far := 0; far < len(y); far += blockLength * blockLength {
		for i := range f.terms {
			t := &f.terms[i]
			root := t.c * t.z.at(n0+float64(far))
			for k, at := 0, far; at < min(far+blockLength*blockLength, len(y)); k, at = k+1, at+blockLength {
				end, c := min(at+blockLength, len(y)), root*complex(t.farRe[k], t.farIm[k])
				if i == 0 {
					t.first(out[at:end], y[at:end], f.constant, c)
				} else {
					t.next(out[at:end], c)
				}
			}
		}
	}
}

func (t *follow) first(out, y []float64, constant float64, c complex128) {
	re, im := real(c), imag(c)
	tr, ti, out := t.re[:len(y)], t.im[:len(y)], out[:len(y)]
	for m, v := range y {
		out[m] = v - constant - (re*tr[m] - im*ti[m])
	}
}

func (t *follow) next(out []float64, c complex128) {
	re, im := real(c), imag(c)
	tr, ti := t.re[:len(out)], t.im[:len(out)]
	for m := range out {
		out[m] -= re*tr[m] - im*ti[m]
	}
}

// residuals of the samples of s, whose sample 0 is n0 intervals after the start of the
// fitted window.
func (f *ringFit) residuals(s series, n0 float64) []float64 {
	out := make([]float64, s.len())
	f.residualsBy(s, s.len())(out, s, n0)
	return out
}

// residualsBy returns a function that writes the residuals of stretches of s of at most
// n samples.
func (f *ringFit) residualsBy(s series, n int) func(out []float64, part series, n0 float64) {
	if f.bend != nil && s.even() {
		if curve := newNodeFollower(f, s.spacing()); curve != nil {
			return func(out []float64, part series, n0 float64) { curve.residuals(out, part.y, n0) }
		}
	}
	if !s.even() || f.bend != nil {
		return func(out []float64, part series, n0 float64) {
			for i, v := range part.y {
				out[i] = v - f.value(n0+part.position(i))
			}
		}
	}
	m := s.spacing()
	terms := []term{{f.a * m, f.w * m, f.p, f.q}}
	if c := f.companion; c != nil {
		terms = append(terms, term{c.a * m, c.w * m, c.p, c.q})
	}
	curve := newFollower(f.offset(), n, terms...)
	return func(out []float64, part series, n0 float64) { curve.residuals(out, part.y, n0/m) }
}

// along visits the values of the curve at the samples of the fitted window s, in order.
func (f *ringFit) along(s series, visit func(i int, v float64)) {
	var buffer [residualBlock]float64
	residuals := f.residualsBy(s, residualBlock)
	for at := 0; at < s.len(); at += residualBlock {
		part := s.slice(at, min(at+residualBlock, s.len()))
		part.y = buffer[:part.len()]
		clear(part.y)
		residuals(part.y, part, s.position(at))
		for i, r := range part.y {
			visit(at+i, -r)
		}
	}
}

// departing visits, in order, the samples first to last-1 of s whose residual r is
// beyond limit; sample 0 is that of the fitted window. It returns the largest |r|, or
// infinity when visit was false, which ends it.
func (f *ringFit) departing(s series, first, last int, limit float64, visit func(i int, r float64) bool) (most float64) {
	var buffer [residualBlock]float64
	residuals := f.residualsBy(s, residualBlock)
	for at := first; at < last; at += residualBlock {
		part := s.slice(at, min(at+residualBlock, last))
		left := buffer[:part.len()]
		residuals(left, part, s.position(at))
		lo, hi, _ := span(left)
		most = max(most, -lo, hi)
		if hi <= limit && -lo <= limit {
			continue
		}
		for i, r := range left {
			if (r > limit || r < -limit) && !visit(at+i, r) {
				return math.Inf(1)
			}
		}
	}
	return most
}

// residualBlock is the number of samples looked at in one go: they stay close by.
const residualBlock = 1 << 11
