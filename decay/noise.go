package decay

import (
	"math"
	"math/cmplx"
	"slices"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// noise describes what a fit leaves: its rms and its colour. Only the density at
// the damped frequency scatters the frequency and the time constant, so that the
// covariance of white noise is scaled by it.
type noise struct {
	rms float64 // standard deviation, corrected for the parameters fitted
	n   float64 // residuals it was estimated from
	ar  []float64
	// gain is the variance of the innovation over the variance of the noise.
	gain float64
	// gamma is the autocovariance that ar follows from, lags 0 to its order.
	gamma []float64
}

const (
	noiseSamples = 1 << 16 // enough to tell the colour; the rms comes from all
	orderMost    = 30
)

// noiseOf fits an autoregression to the residual r by the Yule-Walker equations,
// its order chosen by the Bayesian information criterion (Schwarz 1978, from
// memory): white noise keeps order zero and with it the plain covariance.
// Residuals that are NaN are left out.
func noiseOf(r []float64, rms float64) noise {
	out := noise{rms: rms, gain: 1, n: float64(len(r))}
	if len(r) > noiseSamples {
		r = r[:noiseSamples]
	}
	most := min(orderMost, len(r)/20)
	c := autocovariance(r, most)
	if most < 1 || !(c[0] > 0) {
		return out
	}
	n := float64(len(r))
	best := 0.0 // BIC of order 0 relative to itself
	a, e := []float64{}, c[0]
	for k := 1; k <= most; k++ {
		a, e = levinson(a, e, c, k)
		if !(e > 0) {
			break
		}
		if bic := n*math.Log(e/c[0]) + float64(k)*math.Log(n); bic < best {
			best = bic
			out.ar, out.gain, out.gamma = slices.Clone(a), e/c[0], c[:k+1]
		}
	}
	return out
}

// autocovariance returns the biased autocovariance of r at lags 0 to most.
func autocovariance(r []float64, most int) []float64 {
	clean := r
	if slices.ContainsFunc(r, math.IsNaN) {
		clean = slices.Clone(r)
		for i, v := range clean {
			if math.IsNaN(v) {
				clean[i] = 0
			}
		}
	}
	c := make([]float64, most+1)
	for k := range c {
		sum := 0.0
		for i := k; i < len(clean); i++ {
			sum += clean[i] * clean[i-k]
		}
		c[k] = sum / float64(max(1, len(clean)))
	}
	return c
}

// levinson extends the autoregression x(n) = sum a[j] x(n-1-j) + e(n) to order k.
func levinson(a []float64, e float64, c []float64, k int) ([]float64, float64) {
	reflection := c[k]
	for j, v := range a {
		reflection -= v * c[k-1-j]
	}
	reflection /= e
	next := make([]float64, k)
	for j, v := range a {
		next[j] = v - reflection*a[k-2-j]
	}
	next[k-1] = reflection
	return next, e * (1 - reflection*reflection)
}

// factor returns the square root of the noise density at angular frequency w
// (radians a sample) over that of white noise of the same rms.
func (v noise) factor(w float64) float64 {
	h := complex(1, 0)
	for j, a := range v.ar {
		h -= complex(a, 0) * cmplx.Exp(complex(0, -w*float64(j+1)))
	}
	return math.Sqrt(v.gain) / cmplx.Abs(h)
}

// freedom returns the effective degrees of freedom of the noise density at angular
// frequency w: 2 over the variance of its logarithm. parameters were fitted to the
// n residuals; the coefficients of the autoregression have the covariance
// (innovation variance/n) inv(Toeplitz gamma) (Mann and Wald 1943, from memory).
func (v noise) freedom(w float64, parameters int) float64 {
	n := math.Max(1, v.n-float64(parameters))
	order := len(v.ar)
	if order == 0 {
		return n
	}
	t := mat.NewSymDense(order, nil)
	h := complex(1, 0)
	for i := range order {
		for j := i; j < order; j++ {
			t.SetSym(i, j, v.gamma[j-i])
		}
		h -= complex(v.ar[i], 0) * cmplx.Exp(complex(0, -w*float64(i+1)))
	}
	d := mat.NewVecDense(order, nil) // of ln density by the coefficients
	for i := range order {
		d.SetVec(i, 2*real(cmplx.Exp(complex(0, -w*float64(i+1)))/h))
	}
	var chol mat.Cholesky
	x := mat.NewVecDense(order, nil)
	if !chol.Factorize(t) || chol.SolveVecTo(x, d) != nil {
		return n
	}
	return 2 / (2/n + v.gain*v.gamma[0]/n*mat.Dot(d, x))
}

// widening is the factor by which a standard uncertainty grows so that twice it
// covers 95 % although the noise is known with freedom degrees only: Student's
// quantile over that of the normal distribution (GUM G.3).
func widening(freedom float64) float64 {
	if freedom > 1e6 {
		return 1
	}
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: math.Max(1, freedom)}
	return math.Min(widestFactor, t.Quantile(0.975)/distuv.UnitNormal.Quantile(0.975))
}

const widestFactor = 4

// robustSigma estimates a standard deviation from the median of |r|
// (1.4826 median for a normal distribution). NaN is left out.
func robustSigma(r []float64) float64 {
	abs := make([]float64, 0, len(r))
	for _, v := range r {
		if !math.IsNaN(v) {
			abs = append(abs, math.Abs(v))
		}
	}
	return 1.4826 * median(abs)
}

// median reorders x; 0 for an empty slice.
func median(x []float64) float64 {
	if len(x) == 0 {
		return 0
	}
	m := len(x) / 2
	upper := selected(x, m)
	if len(x)%2 == 1 {
		return upper
	}
	return (slices.Max(x[:m]) + upper) / 2
}

// selected returns the k-th smallest of x and moves the smaller ones before it
// (quickselect, Hoare 1961): a full sort costs more than the fit it serves.
func selected(x []float64, k int) float64 {
	lo, hi := 0, len(x)-1
	for lo < hi {
		pivot := x[lo+(hi-lo)/2]
		i, j := lo, hi
		for i <= j {
			for x[i] < pivot {
				i++
			}
			for x[j] > pivot {
				j--
			}
			if i <= j {
				x[i], x[j] = x[j], x[i]
				i++
				j--
			}
		}
		switch {
		case k <= j:
			hi = j
		case k >= i:
			lo = i
		default:
			return x[k]
		}
	}
	return x[k]
}
