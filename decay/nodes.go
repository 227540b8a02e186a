package decay

import (
	"math"
	"math/cmplx"
)

// Sums of samples with a function that is nearly exp(jwn) need not look at every
// sample. What a block of samples leaves of it, h(n) exp(-jwn), is smooth, so that its
// values at a few Gauss-Legendre nodes tell it everywhere in the block:
//
//	sum y(n) h(n) = sum_i Y_i h(t_i),  Y_i = sum_n y(n) l_i(n) exp(jw(n - t_i)),
//
// l_i the polynomial of Lagrange that is 1 at node t_i. The Y_i are summed up once and
// serve every h near w. A block in which h exp(-jwn) turns by x radians from its middle
// to its end is left with x^6/6!, times the monic Legendre polynomial, which is 0.07 at
// most; and where no sample is missing, only what that adds up to against h itself.
const (
	nodes     = 6
	nodeBlock = 64 // samples of the shortest blocks
	// nodeReach is x up to which the nodes stand for their block: the rest is less
	// than 1e-10.
	nodeReach = 0.1
)

// nodeAt are the nodes in units of half a block.
var nodeAt = [nodes]float64{
	-0.9324695142031521, -0.6612093864662645, -0.2386191860831969,
	0.2386191860831969, 0.6612093864662645, 0.9324695142031521,
}

// lagrange[i] holds the coefficients of l_i by rising powers.
var lagrange = func() (out [nodes][nodes]float64) {
	for i := range out {
		l := [nodes]float64{1}
		for j, at := range nodeAt {
			if j == i {
				continue
			}
			for k := nodes - 1; k >= 0; k-- { // l (x - at)/(nodeAt[i] - at)
				l[k] *= -at
				if k > 0 {
					l[k] += l[k-1]
				}
				l[k] /= nodeAt[i] - at
			}
		}
		out[i] = l
	}
	return out
}()

// lagrangeAt returns l_i(x).
func lagrangeAt(i int, x float64) float64 {
	l, sum := &lagrange[i], 0.0
	for k := nodes - 1; k >= 0; k-- {
		sum = sum*x + l[k]
	}
	return sum
}

// atNodes is what a block of samples comes to at each of the nodes.
type atNodes [nodes]complex128

// nodeWeights turn the samples of a shortest block into what they come to at its nodes,
// by their moments sum y x^k exp(jwq), q counted from the middle of the block and
// x = q over half its length.
type nodeWeights struct {
	// Real and imaginary parts of x^k exp(jwq) in the later half: before the middle
	// they are the same but for the sign.
	table [nodeBlock / 2][2 * nodes]float64
	turn  atNodes // exp(-jwt) at the nodes
}

func newNodeWeights(w float64) *nodeWeights {
	out := new(nodeWeights)
	for m := range out.table {
		q := float64(m) + 0.5
		sin, cos := math.Sincos(w * q)
		power := 1.0
		for k := range nodes {
			out.table[m][2*k], out.table[m][2*k+1] = power*cos, power*sin
			power *= q / (nodeBlock / 2)
		}
	}
	for i, at := range nodeAt {
		out.turn[i] = cmplx.Exp(complex(0, -w*at*(nodeBlock/2)))
	}
	return out
}

// sums are those of one block, y counted about ref.
func (w *nodeWeights) sums(y *[nodeBlock]float64, ref float64) (out atNodes) {
	var r0, i0, r1, i1, r2, i2, r3, i3, r4, i4, r5, i5 float64
	for m := range w.table {
		later, before, f := y[nodeBlock/2+m], y[nodeBlock/2-1-m], &w.table[m]
		sum, difference := later+before-2*ref, later-before
		r0 += sum * f[0]
		i0 += difference * f[1]
		r1 += difference * f[2]
		i1 += sum * f[3]
		r2 += sum * f[4]
		i2 += difference * f[5]
		r3 += difference * f[6]
		i3 += sum * f[7]
		r4 += sum * f[8]
		i4 += difference * f[9]
		r5 += difference * f[10]
		i5 += sum * f[11]
	}
	for i := range out {
		l := &lagrange[i]
		re := l[0]*r0 + l[1]*r1 + l[2]*r2 + l[3]*r3 + l[4]*r4 + l[5]*r5
		im := l[0]*i0 + l[1]*i1 + l[2]*i2 + l[3]*i3 + l[4]*i4 + l[5]*i5
		out[i] = w.turn[i] * complex(re, im)
	}
	return out
}

// nodeJoin turns what neighbouring blocks come to at their nodes into what all of them
// come to at those of the block that they make.
type nodeJoin [nodeJoined][nodes][nodes]complex128

const nodeJoined = 4

// newNodeJoin is for blocks of length samples and functions near w.
func newNodeJoin(w float64, length int) *nodeJoin {
	out, half := new(nodeJoin), float64(length)/2
	turn := func(x float64) complex128 { return cmplx.Exp(complex(0, w*half*x)) }
	for j, from := range nodeAt {
		for part := range nodeJoined {
			forward := turn(from + partMiddle(part))
			for i := range nodes {
				out[part][i][j] = forward * complex(lagrangeJoined[part][i][j], 0)
			}
		}
	}
	for i, at := range nodeAt {
		back := turn(-nodeJoined * at)
		for part := range nodeJoined {
			for j := range nodes {
				out[part][i][j] *= back
			}
		}
	}
	return out
}

// partMiddle is the middle of a part of a block, in units of half the part, from the
// middle of the block.
func partMiddle(part int) float64 { return float64(2*part - nodeJoined + 1) }

// lagrangeJoined[part][i][j] is l_i of a block at node j of one of its parts.
var lagrangeJoined = func() (out [nodeJoined][nodes][nodes]float64) {
	for part := range out {
		for i := range nodes {
			for j, from := range nodeAt {
				out[part][i][j] = lagrangeAt(i, (partMiddle(part)+from)/nodeJoined)
			}
		}
	}
	return out
}()

func (t *nodeJoin) sums(parts [nodeJoined]*atNodes) (out atNodes) {
	for part, from := range parts {
		for i := range out {
			to := &t[part][i]
			out[i] += to[0]*from[0] + to[1]*from[1] + to[2]*from[2] + to[3]*from[3] + to[4]*from[4] + to[5]*from[5]
		}
	}
	return out
}
