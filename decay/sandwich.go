package decay

import (
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
)

const (
	// sandwichSamples bounds the windows whose covariance in coloured noise is
	// computed in full; in longer ones the ring is so narrow a line that the
	// density at its frequency is all that counts.
	sandwichSamples = 1 << 14
	// unbiasSamples bounds those whose residual is short enough for the fit to
	// have taken a notable part of the noise with it.
	unbiasSamples = 1 << 12
	unbiasRounds  = 4
)

// coloured is the fit of a window seen in coloured noise: the covariance
// inv(J'J) J'SJ inv(J'J), S that of the noise (White 1980, from memory), with the
// products by S taken in the frequency domain.
type coloured struct {
	n, m   int
	fft    *fourier.FFT
	length int         // of the transforms
	j      [][]float64 // columns of the Jacobian
	jf     [][]complex128
	inv    sym
}

func newColoured(f *ringFit) (*coloured, bool) {
	inv, ok := f.normal.jtj.inverse()
	if !ok {
		return nil, false
	}
	c := &coloured{n: f.s.len(), m: inv.n, inv: inv}
	c.length = 2 * floorPower(c.n+256)
	c.fft = fourier.NewFFT(c.length)
	for range c.m {
		c.j = append(c.j, make([]float64, c.length))
	}
	var g [parametersMost]float64
	gradient := f.gradients()
	for i, y := range f.s.y {
		if math.IsNaN(y) {
			continue
		}
		gradient(f.s.position(i), &g)
		for k := range c.m {
			c.j[k][i] = g[k]
		}
	}
	for k := range c.m {
		c.jf = append(c.jf, c.fft.Coefficients(nil, c.j[k]))
	}
	return c, true
}

// density of noise v at every frequency of the transforms, in units of its variance.
func (c *coloured) density(v noise) []float64 {
	out := make([]float64, c.length/2+1)
	for i := range out {
		out[i] = sq(v.factor(2 * math.Pi * float64(i) / float64(c.length)))
	}
	return out
}

// meat returns J'SJ for unit variance.
func (c *coloured) meat(density []float64) sym {
	out := sym{n: c.m}
	for a := range c.m {
		for b := range a + 1 {
			sum := 0.0
			for i, s := range density {
				x, y := c.jf[a][i], c.jf[b][i]
				term := s * (real(x)*real(y) + imag(x)*imag(y))
				if i != 0 && i != c.length/2 {
					term *= 2
				}
				sum += term
			}
			out.set(a, b, sum/float64(c.length))
		}
	}
	return out
}

// sandwich returns inv(J'J) J'SJ inv(J'J) for unit variance.
func (c *coloured) sandwich(meat *sym) sym {
	out := sym{n: c.m}
	for a := range c.m {
		for b := range a + 1 {
			sum := 0.0
			for i := range c.m {
				for k := range c.m {
					sum += c.inv.At(a, i) * meat.At(i, k) * c.inv.At(k, b)
				}
			}
			out.set(a, b, sum)
		}
	}
	return out
}

// unbiased corrects the autocovariance of the residual r, to the order of v, for
// the noise that the fit took with it: with H the projection on the columns of J
// the residual has the covariance (I-H)S(I-H), and S is sought whose residual has
// the autocovariance that was observed.
func (c *coloured) unbiased(v noise, r []float64) noise {
	order := len(v.ar)
	observed := autocovariance(r, order)
	gamma := append([]float64(nil), observed...)
	for range unbiasRounds {
		next, ok := v.fromAutocovariance(gamma)
		if !ok {
			return v
		}
		v = next
		density := c.density(v)
		meat := c.meat(density)
		expected := c.residualAutocovariance(v.rms*v.rms, density, &meat, gamma)
		for k := range gamma {
			gamma[k] += observed[k] - expected[k]
		}
	}
	if next, ok := v.fromAutocovariance(gamma); ok && next.rms < unbiasMost*v.rms {
		return next
	}
	return v
}

// unbiasMost stops a correction that runs away on a record too short for it.
const unbiasMost = 2

// fromAutocovariance refits the autoregression, order unchanged.
func (v noise) fromAutocovariance(gamma []float64) (noise, bool) {
	if !(gamma[0] > 0) {
		return v, false
	}
	a, e := []float64{}, gamma[0]
	for k := 1; k < len(gamma); k++ {
		if a, e = levinson(a, e, gamma, k); !(e > 0) {
			return v, false
		}
	}
	v.ar, v.gain, v.rms, v.gamma = a, e/gamma[0], math.Sqrt(gamma[0]), append([]float64(nil), gamma...)
	return v, true
}

// residualAutocovariance is the expected biased autocovariance of the residual for
// noise of autocovariance gamma (variance first) and spectral density.
func (c *coloured) residualAutocovariance(variance float64, density []float64, meat *sym, gamma []float64) []float64 {
	z := make([][]float64, c.m) // SJ
	for k := range c.m {
		product := make([]complex128, len(density))
		for i, s := range density {
			product[i] = complex(s*variance/float64(c.length), 0) * c.jf[k][i]
		}
		z[k] = c.fft.Sequence(nil, product)
	}
	inner := c.sandwich(meat)
	out := make([]float64, len(gamma))
	for lag := range out {
		sum := float64(c.n-lag) * gamma[lag]
		for a := range c.m {
			for b := range c.m {
				w, v := c.inv.At(a, b), inner.At(a, b)*variance
				for i := 0; i+lag < c.n; i++ {
					sum -= w * (c.j[a][i]*z[b][i+lag] + z[a][i]*c.j[b][i+lag])
					sum += v * c.j[a][i] * c.j[b][i+lag]
				}
			}
		}
		out[lag] = sum / float64(c.n)
	}
	return out
}

// gradients returns a function that writes the derivatives of the curve by all
// parameters, in the order of the normal equations, n intervals after the start.
func (f *ringFit) gradients() func(n float64, g *[parametersMost]float64) {
	if f.bend != nil {
		theta := []float64{f.a, f.w, f.bend.b, f.bend.g}
		return func(n float64, g *[parametersMost]float64) {
			var h [parametersMost]float64
			f.bend.law.basis(theta, n, &h)
			for k := range 4 {
				g[k] = f.p*h[3+2*k] + f.q*h[4+2*k]
			}
			g[4], g[5], g[6] = 1, h[1], h[2]
		}
	}
	return func(n float64, g *[parametersMost]float64) {
		main := f.gradient(n)
		where := f.places()
		for i, k := range where {
			g[k] = main[i]
		}
		c := f.companion
		if c == nil {
			return
		}
		sin, cos := math.Sincos(c.w * n)
		e := math.Exp(-c.a * n)
		last := where[4]
		g[2] = -n * c.at(n)
		if c.w == 0 {
			g[last+1] = e
			return
		}
		g[3] = n * e * (c.q*cos - c.p*sin)
		g[last+1], g[last+2] = e*cos, e*sin
	}
}
