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

// newPowers fills the table as far as n samples need it.
func newPowers(z pole, n int) *powers {
	t := &powers{z: z}
	n = min(n, blockLength)
	powerTable(z.at(1), &t.re, &t.im, n)
	for m := range n {
		t.mre[m], t.mim[m] = float64(m)*t.re[m], float64(m)*t.im[m]
	}
	return t
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
// y, counted about ref; first is a multiple of the block length.
func (t *powers) project(y []float64, first, last int, ref float64) (sum [2]complex128) {
	for at := first; at < last; at += blockLength {
		b := t.block(y[at:min(at+blockLength, last)], ref)
		base := t.z.at(float64(at))
		sum[0] += base * b[0]
		sum[1] += base * (complex(float64(at), 0)*b[0] + b[1])
	}
	return sum
}

func (t *powers) block(y []float64, ref float64) [2]complex128 {
	var sr, si, mr, mi float64
	re, im := t.re[:len(y)], t.im[:len(y)]
	mre, mim := t.mre[:len(y)], t.mim[:len(y)]
	for i, v := range y {
		v -= ref
		sr += v * re[i]
		si += v * im[i]
		mr += v * mre[i]
		mi += v * mim[i]
	}
	return [2]complex128{complex(sr, si), complex(mr, mi)}
}

// geometric returns sum n^k z^n over n = 0..count-1 for k = 0, 1, 2, with
// z = exp(-a + jw), summed block by block: closed forms lose all digits where z is
// near one.
func geometric(z pole, count int) (sum [3]complex128) {
	var re, im [blockLength]float64
	powerTable(z.at(1), &re, &im, min(count, blockLength))
	full := partial(&re, &im, min(blockLength, count))
	for at := 0; at < count; at += blockLength {
		b := full
		if count-at < blockLength {
			b = partial(&re, &im, count-at)
		}
		n := complex(float64(at), 0)
		base := complex(1, 0)
		if at > 0 {
			base = z.at(float64(at))
		}
		sum[0] += base * b[0]
		sum[1] += base * (n*b[0] + b[1])
		sum[2] += base * (n*n*b[0] + 2*n*b[1] + b[2])
	}
	return sum
}

func partial(re, im *[blockLength]float64, count int) [3]complex128 {
	var r, i [3]float64
	for m := range count {
		x := float64(m)
		r[0] += re[m]
		i[0] += im[m]
		r[1] += x * re[m]
		i[1] += x * im[m]
		r[2] += x * x * re[m]
		i[2] += x * x * im[m]
	}
	return [3]complex128{complex(r[0], i[0]), complex(r[1], i[1]), complex(r[2], i[2])}
}
