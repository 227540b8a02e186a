package decay

import (
	"math"
	"sync"

	"gonum.org/v1/gonum/floats"
)

// A candidate is a damped ring of the bank, in samples, as two orthonormal
// functions that have no mean: what a ring of that rate and frequency explains of a
// window beyond a constant is the energy of its two projections.
type candidate struct {
	pole
	basis [2][]float64
}

// banks keeps the candidates by the length of the window, at most bankPoints of them.
var banks sync.Map // int -> []candidate

func bank(n int) []candidate {
	if list, ok := banks.Load(n); ok {
		return list.([]candidate)
	}
	var list []candidate
	for _, cycles := range []float64{0.5, 1.2, 3} {
		for _, u := range []float64{2.5, 6} {
			z := pole{u / float64(n), 2 * math.Pi * cycles / float64(n)}
			if c, ok := newCandidate(z, n); ok {
				list = append(list, c)
			}
		}
	}
	banks.Store(n, list)
	return list
}

// newCandidate is false where the window is too short to tell the functions apart.
func newCandidate(z pole, n int) (candidate, bool) {
	c, constant := candidate{pole: z}, make([]float64, n)
	for k := range c.basis {
		c.basis[k] = make([]float64, n)
	}
	for i := range n {
		v := z.at(float64(i))
		constant[i], c.basis[0][i], c.basis[1][i] = 1, real(v), imag(v)
	}
	return c, orthonormalise(constant, c.basis[0], c.basis[1])
}

// orthonormalise turns the functions into orthonormal ones that span the same, by
// the modified Gram-Schmidt process; false when one lies among those before it.
func orthonormalise(list ...[]float64) bool {
	for i, f := range list {
		before := floats.Dot(f, f)
		for _, e := range list[:i] {
			along := floats.Dot(f, e)
			for k := range f {
				f[k] -= along * e[k]
			}
		}
		left := floats.Dot(f, f)
		if !(left > singularPivot*before) {
			return false
		}
		for k := range f {
			f[k] /= math.Sqrt(left)
		}
	}
	return true
}

// explains is the energy of x, which has no mean, that the ring accounts for.
func (c *candidate) explains(x []float64) float64 {
	return sq(floats.Dot(x, c.basis[0])) + sq(floats.Dot(x, c.basis[1]))
}
