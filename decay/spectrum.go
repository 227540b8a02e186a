package decay

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/stat/distuv"

	"dieaway/capture"
)

// A ResidualSpectrum is the one-sided amplitude spectral density of what the fit of
// a decay leaves, in the unit of the channel over the root of Hz: an interfering
// tone is a line in it, coloured noise a slope.
type ResidualSpectrum struct {
	Frequency, Density []float64 // Hz, rising
	// Low and High are the band that each line keeps to with a probability of 95 %
	// when the residual is white noise of its rms, whose density is White.
	Low, High []float64
	White     float64
	// Assumed is the density of the noise model that the uncertainties rest on.
	Assumed []float64
}

const (
	welchShare   = 8       // segments, side by side, that a gate is cut into
	welchLeast   = 32      // samples of a segment, at least
	welchMost    = 1 << 13 // and at most
	welchBudget  = 1 << 17 // samples transformed at each rate
	welchMissing = 0.05    // share of a segment that may be missing
	welchFewest  = 4       // segments
	// slower is the ratio of one rate to the next, clean the part of its frequencies
	// that a lower rate is used for: what folds into them is 30 dB down.
	slower = 128
	clean  = 1.0 / 32
)

var errHoles = errors.New("too many samples are missing")

// ResidualSpectrum averages the periodograms of overlapping segments of the gate
// under a Hann window (Welch, IEEE Trans. Audio Electroacoust. 15, 1967, p. 70, from
// memory). In a long record the segments are spread evenly over the gate, and low
// frequencies, for which they are too short, come from means over blocks of
// samples; 130,000 samples or so are transformed at each rate. An error says why
// there is no spectrum.
func (d *Decay) ResidualSpectrum(ch *capture.Channel) (*ResidualSpectrum, error) {
	if err := d.spectral(ch); err != nil {
		return nil, err
	}
	n, dt := d.Last-d.First, ch.Axis.Interval
	if n < (welchFewest+1)*welchLeast/2 {
		return nil, fmt.Errorf("the gate holds only %d samples", n)
	}
	out := &ResidualSpectrum{White: d.ResidualRMS * math.Sqrt(2*dt)}
	for _, m := range rates(n) {
		var p periodogram
		ok := false
		if m == 1 {
			p, ok = welch(n, dt, func(first, n int) []float64 { return d.residuals(ch, first, n) })
		} else {
			means := d.baseband(ch, 0, m).rest()
			p, ok = welch(len(means), float64(m)*dt, func(first, n int) []float64 { return means[first : first+n] })
		}
		if !ok {
			return nil, errHoles
		}
		out.add(&p, m)
	}
	for _, f := range out.Frequency {
		out.Assumed = append(out.Assumed, out.White*d.noise.factor(2*math.Pi*f*dt))
	}
	return out, nil
}

// rates lists the samples of a block, most first, that n samples are looked at in:
// so many that a segment of the slowest rate spans a good part of the gate.
func rates(n int) []int {
	out := []int{1}
	for m := 1; n/m > 2*welchShare*welchMost; {
		m *= min(slower, (n/m+2*welchMost-1)/(2*welchMost))
		out = append([]int{m}, out...)
	}
	return out
}

// add appends the lines of a rate of blocks of m samples behind those that a lower
// rate has shown already.
func (s *ResidualSpectrum) add(p *periodogram, m int) {
	x := distuv.ChiSquared{K: p.freedom}
	low, high := s.White*math.Sqrt(x.Quantile(0.025)/p.freedom), s.White*math.Sqrt(x.Quantile(0.975)/p.freedom)
	shown := 0.0
	if k := len(s.Frequency); k > 0 {
		shown = s.Frequency[k-1]
	}
	last := len(p.power) - 2 // the last line has half the degrees of freedom, and the first is the offset
	if m > 1 {
		last = int(clean * 2 * float64(len(p.power)-1))
	}
	for k := 1; k <= last; k++ {
		if f := float64(k) * p.step; f > shown {
			s.Frequency, s.Density = append(s.Frequency, f), append(s.Density, math.Sqrt(p.power[k]))
			s.Low, s.High = append(s.Low, low), append(s.High, high)
		}
	}
}

// residuals of n samples of the gate from first on, NaN where there is none or it
// was left out of the fit.
func (d *Decay) residuals(ch *capture.Channel, first, n int) []float64 {
	r := d.Residuals(ch, d.First+first, n)
	for i := range r {
		if d.spoilt(first+i, first+i+1) {
			r[i] = math.NaN()
		}
	}
	return r
}

// rest is the mean of each whole block less that of the curve; it is of blocks about
// zero frequency.
func (b *baseband) rest() []float64 {
	out := make([]float64, b.n/b.m)
	for k := range out {
		out[k] = real(b.measured[k]-b.fitted[k]) / float64(b.m)
	}
	return out
}

// periodogram is a one-sided power spectral density at multiples of step (Hz), from
// zero to half the sample rate, and the degrees of freedom of its chi-squared scatter.
type periodogram struct {
	step, freedom float64
	power         []float64
}

// welch averages over segments of n samples dt apart, which at returns: the power
// 2 dt |sum w y exp(-j 2 pi f n dt)|^2 / sum w^2 of each, the sum of the squared
// window w over the samples that are there. Zero and half the sample rate have no
// negative frequency to be counted with. Segments with many holes are left out.
func welch(n int, dt float64, at func(first, n int) []float64) (p periodogram, ok bool) {
	length := welchLength(n)
	count := max(1, min(1+2*(n-length)/length, welchBudget/length))
	stride := float64(n-length) / math.Max(1, float64(count-1))
	window, total := hann(length)
	fft := fourier.NewFFT(length)
	p = periodogram{step: 1 / (float64(length) * dt), power: make([]float64, length/2+1)}
	used := 0
	lines := make([]complex128, length/2+1)
	for k := range count {
		y := slices.Clone(at(int(float64(k)*stride), length))
		weight := windowed(y, window)
		if weight < (1-welchMissing)*total {
			continue
		}
		used++
		for i, c := range fft.Coefficients(lines, y) {
			p.power[i] += 2 * dt / weight * (real(c)*real(c) + imag(c)*imag(c))
		}
	}
	if used < welchFewest {
		return p, false
	}
	for i := range p.power {
		p.power[i] /= float64(used)
	}
	p.power[0] /= 2
	p.power[length/2] /= 2
	p.freedom = freedomOf(window, total, used, int(stride))
	return p, true
}

// welchLength is the length of a segment: a power of two.
func welchLength(n int) int {
	l := 1 << int(math.Round(math.Log2(float64(n)/welchShare)))
	return max(welchLeast, min(l, welchMost))
}

// hann returns the window and the sum of its squares.
func hann(n int) (window []float64, total float64) {
	for i := range n {
		w := 0.5 - 0.5*math.Cos(2*math.Pi*float64(i)/float64(n))
		window = append(window, w)
		total += w * w
	}
	return window, total
}

// windowed multiplies y by the window, with zero for what is missing, and returns
// the sum of the squared window over what is there.
func windowed(y, window []float64) (weight float64) {
	for i, w := range window {
		if v := y[i]; finite(v) {
			y[i] = v * w
			weight += w * w
		} else {
			y[i] = 0
		}
	}
	return weight
}

// freedomOf is that of the mean of count periodograms of white noise, stride apart,
// whose overlap correlates them: 2 count/(1 + 2 sum (1 - j/count) rho_j), rho_j the
// squared correlation of windows j strides apart (Welch 1967, from memory).
func freedomOf(window []float64, total float64, count, stride int) float64 {
	sum := 1.0
	for j := 1; j < count && j*stride < len(window); j++ {
		r := 0.0
		for i := j * stride; i < len(window); i++ {
			r += window[i] * window[i-j*stride]
		}
		sum += 2 * (1 - float64(j)/float64(count)) * sq(r/total)
	}
	return 2 * float64(count) / sum
}

// Inside is the share of the lines that lie in the band of white noise.
func (s *ResidualSpectrum) Inside() float64 {
	n := 0
	for i, v := range s.Density {
		if v >= s.Low[i] && v <= s.High[i] {
			n++
		}
	}
	return float64(n) / float64(len(s.Density))
}

// Strongest is the index of the line that stands furthest above its band, or comes
// closest to its edge.
func (s *ResidualSpectrum) Strongest() (at int) {
	for i, v := range s.Density {
		if v/s.High[i] > s.Density[at]/s.High[at] {
			at = i
		}
	}
	return at
}
