package decay

// powers is the table z^m, m z^m of one pole z = exp(-a + jw). Within a block the
// sums over samples need no recursion; blocks are joined with an exact power of z.
type powers struct {
	z        pole
	re, im   [blockLength]float64
	mre, mim [blockLength]float64
}

// blockLength is the length of the table.
const blockLength = 128

// fill sets the table up for z, as far as n samples need it.
func (t *powers) fill(z pole, n int) {
	t.z = z
	n = min(n, blockLength)
	powerTable(z.at(1), &t.re, &t.im, n)
	for m := range n {
		t.mre[m], t.mim[m] = float64(m)*t.re[m], float64(m)*t.im[m]
	}
}

// powerTable fills z^m by halving, which keeps the error at a few units in the
// last place.
func powerTable(z complex128, re, im *[blockLength]float64, n int) {
	re[0], im[0] = 1, 0
	re[1], im[1] = real(z), imag(z)
	for m := 2; m < n; m++ {
		h, k := m/2, m-m/2
		re[m] = re[h]*re[k] - im[h]*im[k]
		im[m] = re[h]*im[k] + im[h]*re[k]
	}
}

// project returns sum y z^n and sum y n z^n over the samples first to last-1 of
// y, counted about ref; first is a multiple of the block length. The powers of z
// at the blocks come from a second table, renewed exactly once a table.
func (t *powers) project(y []float64, first, last int, ref float64) (sum [2]complex128) {
	var re, im [blockLength]float64
	powerTable(t.z.at(blockLength), &re, &im, min(blockLength, (last-first)/blockLength+1))
	const span = blockLength * blockLength
	for far := first; far < last; far += span {
		root := t.z.at(float64(far))
		for k, at := 0, far; at < min(far+span, last); k, at = k+1, at+blockLength {
			b := t.block(y[at:min(at+blockLength, last)], ref)
			base := root * complex(re[k], im[k])
			sum[0] += base * b[0]
			sum[1] += base * (complex(float64(at), 0)*b[0] + b[1])
		}
	}
	return sum
}

// block sums over one block. Two sets of sums let the additions overlap.
func (t *powers) block(y []float64, ref float64) [2]complex128 {
	var sr, si, mr, mi, tr, ti, nr, ni float64
	re, im := t.re[:len(y)], t.im[:len(y)]
	mre, mim := t.mre[:len(y)], t.mim[:len(y)]
	i := 0
	for ; i+1 < len(y); i += 2 {
		v, w := y[i]-ref, y[i+1]-ref
		sr += v * re[i]
		si += v * im[i]
		mr += v * mre[i]
		mi += v * mim[i]
		tr += w * re[i+1]
		ti += w * im[i+1]
		nr += w * mre[i+1]
		ni += w * mim[i+1]
	}
	if i < len(y) {
		v := y[i] - ref
		sr += v * re[i]
		si += v * im[i]
		mr += v * mre[i]
		mi += v * mim[i]
	}
	return [2]complex128{complex(sr+tr, si+ti), complex(mr+nr, mi+ni)}
}

// walk goes through the powers of a pole at numbers that rise, exact at the start of
// each block.
type walk struct {
	z      pole
	re, im [blockLength]float64
	root   complex128
	block  int
}

// newWalk is for powers below n.
func newWalk(z pole, n int) *walk {
	w := &walk{z: z, block: -1}
	powerTable(z.at(1), &w.re, &w.im, min(n, blockLength))
	return w
}

func (w *walk) at(n int) complex128 {
	if k := n / blockLength; k != w.block {
		w.block, w.root = k, w.z.at(float64(k*blockLength))
	}
	m := n % blockLength
	return w.root * complex(w.re[m], w.im[m])
}

// geometric returns sum n^k z^n over n = 0..count-1 for k = 0, 1, 2, with
// z = exp(-a + jw). Closed forms lose all digits where z is near one: a short run
// is summed term by term, and the sum over runs is a geometric one again, of
// z^geometricRun, with n = geometricRun b + m.
func geometric(z pole, count int) (sum [3]complex128) {
	if count <= geometricRun {
		return shortSum(z.at(1), count)
	}
	const l = geometricRun
	runs := count / l
	g, b := geometric(pole{z.a * l, z.w * l}, runs), shortSum(z.at(1), l)
	sum[0] = g[0] * b[0]
	sum[1] = l*g[1]*b[0] + g[0]*b[1]
	sum[2] = l*l*g[2]*b[0] + 2*l*g[1]*b[1] + g[0]*b[2]
	if rest := count - runs*l; rest > 0 {
		n := complex(float64(runs*l), 0)
		base, r := z.at(float64(runs*l)), shortSum(z.at(1), rest)
		sum[0] += base * r[0]
		sum[1] += base * (n*r[0] + r[1])
		sum[2] += base * (n*n*r[0] + 2*n*r[1] + r[2])
	}
	return sum
}

// geometricRun is short enough for powers by repeated multiplication to keep
// their digits.
const geometricRun = 16

func shortSum(z complex128, count int) (sum [3]complex128) {
	power := complex(1, 0)
	for m := range count {
		x := complex(float64(m), 0)
		sum[0] += power
		sum[1] += x * power
		sum[2] += x * x * power
		power *= z
	}
	return sum
}
