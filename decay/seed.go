package decay

import (
	"cmp"
	"math"
	"math/cmplx"
	"slices"
	"sync"

	"gonum.org/v1/gonum/dsp/fourier"
)

// A seed is a first estimate of decay rate and angular frequency, per sample of
// level 0, and the window that it was found in.
type seed struct {
	a, w        float64
	first, last int     // samples of level 0
	gain        float64 // logarithm of the likelihood ratio against a constant
}

const (
	windowMost  = 1 << 13 // samples in a transform
	windowLeast = 16
	bankPoints  = 256
)

// seeds proposes damped sinusoids that begin near sample first of level 0, best
// first. It needs no hint: windows of every length are tried at every rate, so
// that one of them matches the time constant of whatever rings there.
func (p *pyramid) seeds(first int) []seed {
	var out []seed
	for k, level := range p.levels {
		from := (first + scale(k) - 1) / scale(k)
		if from+windowLeast > level.len() {
			break
		}
		y := level.y[from:]
		least := windowLeast
		if k > 0 {
			least = windowMost / 2 // shorter ones were seen on the level below
		}
		for n := min(len(y), windowMost); n >= least; n = shorter(n) {
			window := y[:n]
			found := append(spectral(window), damped(window)...)
			for _, s := range found {
				m := float64(scale(k))
				s.a, s.w = s.a/m, s.w/m
				s.first, s.last = from*scale(k), (from+n)*scale(k)
				out = append(out, s)
			}
		}
	}
	slices.SortStableFunc(out, func(x, y seed) int { return cmp.Compare(y.gain, x.gain) })
	return out
}

// shorter returns the next window below n: powers of two.
func shorter(n int) int {
	p := 1
	for p*2 < n {
		p *= 2
	}
	return p
}

// spectral reads the strongest line of the spectrum of y. For a damped line the
// ratio R of neighbouring bins k and k+1 of an unwindowed transform gives its
// pole, z = (1-R)/(v(k) - R v(k+1)) with v(k) = exp(-2 pi j k/N) (Bertocco et al. 1994).
func spectral(y []float64) []seed {
	y = y[:smooth(len(y))]
	n := len(y)
	mean := 0.0
	for _, v := range y {
		mean += v / float64(n)
	}
	x := make([]float64, n)
	energy := 0.0
	for i, v := range y {
		x[i] = v - mean
		energy += x[i] * x[i]
	}
	if !(energy > 0) {
		return nil
	}
	c := transform(x)
	k := 1
	for i := 1; i < len(c)-1; i++ {
		if power(c[i]) > power(c[k]) {
			k = i
		}
	}
	if k+1 >= len(c) {
		return nil
	}
	share := math.Min(0.999, 2*power(c[k])/(float64(n)*energy))
	gain := -float64(n) * math.Log(1-share)
	if k > 1 && power(c[k-1]) > power(c[k+1]) {
		k--
	}
	v := func(i int) complex128 { return cmplx.Exp(complex(0, -2*math.Pi*float64(i)/float64(n))) }
	r := c[k+1] / c[k]
	z := (1 - r) / (v(k) - r*v(k+1))
	a, w := -math.Log(cmplx.Abs(z)), cmplx.Phase(z)
	if !(w > 0) || math.IsNaN(a) || math.IsInf(a, 0) {
		w = 2 * math.Pi * float64(k) / float64(n)
	}
	// A window that the ring fills tells little of its damping: keep it plausible.
	a = math.Min(math.Max(a, 0.05/float64(n)), w)
	return []seed{{a: a, w: w, gain: gain}}
}

// damped tries strongly damped rings, which have no line in the spectrum: a bank
// of frequencies and rates that scale with the window, on at most bankPoints means.
func damped(y []float64) []seed {
	m := (len(y) + bankPoints - 1) / bankPoints
	if slices.ContainsFunc(y, math.IsNaN) {
		y = filled(slices.Clone(y))
	}
	x := make([]float64, len(y)/max(1, m))
	mean := 0.0
	for i := range x {
		for _, v := range y[i*m : i*m+m] {
			x[i] += v / float64(m)
		}
		mean += x[i] / float64(len(x))
	}
	zero := 0.0
	for i := range x {
		x[i] -= mean
		zero += x[i] * x[i]
	}
	if !(zero > 0) {
		return nil
	}
	n := float64(len(x))
	best := seed{gain: math.Inf(-1)}
	for _, b := range bank(len(x)) {
		rss := math.Max(zero-b.explains(x), 1e-12*zero)
		if gain := n * math.Log(zero/rss); gain > best.gain {
			best = seed{a: b.a / float64(m), w: b.w / float64(m), gain: gain * float64(m)}
		}
	}
	if math.IsInf(best.gain, -1) {
		return nil
	}
	return []seed{best}
}

// smooth is the largest length up to n, within a fifth of it, whose transform is
// quick: a power of two times 4, 5 or 6.
func smooth(n int) int {
	p := max(1, floorPower(n)/4)
	for _, m := range []int{6, 5, 4} {
		if m*p <= n {
			return m * p
		}
	}
	return n
}

// plans keeps the tables of transforms by length: they cost more than a transform.
var plans sync.Map // int -> *sync.Pool of *fourier.FFT

// transform returns the discrete Fourier transform of x, bins 0 to len(x)/2.
func transform(x []float64) []complex128 {
	pool, _ := plans.LoadOrStore(len(x), &sync.Pool{})
	plan, ok := pool.(*sync.Pool).Get().(*fourier.FFT)
	if !ok {
		plan = fourier.NewFFT(len(x))
	}
	defer pool.(*sync.Pool).Put(plan)
	return plan.Coefficients(nil, x)
}

// power is the squared magnitude.
func power(c complex128) float64 { return real(c)*real(c) + imag(c)*imag(c) }

func sq(x float64) float64 { return x * x }
