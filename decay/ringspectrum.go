package decay

import (
	"math"
	"math/cmplx"
	"slices"

	"gonum.org/v1/gonum/dsp/fourier"

	"dieaway/capture"
)

// A RingSpectrum is the amplitude spectrum of the ring over the gate,
//
//	|Y(f)| = dt |sum (y_n - offset) exp(-j 2 pi f n dt)|,
//
// in the unit of the channel times s (which is that unit per Hz), beside that of
// the fitted curve over the same samples. About a resonance of long decay it is the
// Lorentzian A/2 / |alpha + j 2 pi (f - fd)|, A tau/2 high and as wide at half power
// as the bandwidth alpha/pi; a gate that ends before the ring has died widens it.
// Measured and fitted differ by the noise alone, where the model is right: Left is the
// spectrum of the residual, at the full resolution of the gate.
type RingSpectrum struct {
	Frequency              []float64 // Hz, rising
	Measured, Fitted, Left []float64
	// Bands are the stretches that are shown, each about one fitted resonance or
	// about several that lie close.
	Bands []Band
	// Noise is the rms that the noise alone has at the ring.
	Noise float64
	// Missing is how many samples the fitted curve stands in for.
	Missing int
}

// A Band is the part First to Last-1 of a spectrum, about resonances at Center with
// the half-power width Width, both in Hz.
type Band struct {
	First, Last   int
	Center, Width []float64
}

const (
	ringBlocks = 7600 // sums that the gate is reduced to
	ringPoints = 401
	ringWidths = 8 // bandwidths, or 1/length, to either side
)

// RingSpectrum returns the spectrum of the ring about each resonance that was
// fitted. A long gate is reduced to some thousand sums about each band, so that ten
// million samples cost one pass; what folds into the band thereby is the same in
// both. An error says why there is no spectrum.
func (d *Decay) RingSpectrum(ch *capture.Channel) (*RingSpectrum, error) {
	if err := d.spectral(ch); err != nil {
		return nil, err
	}
	bands := d.bands(ch.Axis.Interval)
	if len(bands) == 0 {
		return nil, errNoRing
	}
	out := &RingSpectrum{Noise: d.NoiseRMS * d.NoiseFactor * ch.Axis.Interval * math.Sqrt(float64(d.Used))}
	for _, b := range bands {
		low := d.baseband(ch, math.Pi*(b.from+b.to)*ch.Axis.Interval, blockSize(d.Last-d.First, ringBlocks))
		points := max(ringPoints/len(bands), ringPoints/4)
		step := (b.to - b.from) / float64(points-1)
		measured, fitted := low.transform(low.measured, b.from, step, points), low.transform(low.fitted, b.from, step, points)
		first := len(out.Frequency)
		for k := range points {
			out.Frequency = append(out.Frequency, b.from+float64(k)*step)
			out.Measured = append(out.Measured, cmplx.Abs(measured[k]))
			out.Fitted = append(out.Fitted, cmplx.Abs(fitted[k]))
			out.Left = append(out.Left, cmplx.Abs(measured[k]-fitted[k]))
		}
		out.Bands = append(out.Bands, Band{first, len(out.Frequency), b.center, b.width})
		out.Missing = low.missing
	}
	return out, nil
}

// blockSize is the samples of a block where n are reduced to about the given number.
func blockSize(n, blocks int) int { return max(1, (n+blocks-1)/blocks) }

// transform is that of the samples behind sums over blocks, times the interval, at
// frequencies in Hz. The sums have the transfer of a mean, sin(mx)/(m sin x) with x
// half the distance from the middle in radians a sample, which is taken out.
func (b *baseband) transform(sums []complex128, from, step float64, points int) []complex128 {
	away := func(f float64) float64 { return 2*math.Pi*f*b.dt - b.w }
	out := chirp(sums, away(from)*float64(b.m), 2*math.Pi*step*b.dt*float64(b.m), points)
	for k := range out {
		out[k] *= complex(b.dt/transfer(away(from+float64(k)*step), b.m), 0)
	}
	return out
}

// chirp returns sum x_n exp(-j(w + kd)n) for k = 0..points-1, by the chirp
// z-transform: with nk = (n^2 + k^2 - (k-n)^2)/2 it is a convolution (Rabiner,
// Schafer and Rader, Bell Syst. Tech. J. 48, 1969, p. 1249, from memory).
func chirp(x []complex128, w, d float64, points int) []complex128 {
	length := 1
	for length < len(x)+points-1 {
		length *= 2
	}
	wave := func(k int) complex128 { return cmplx.Exp(complex(0, d/2*float64(k)*float64(k))) }
	a, b := make([]complex128, length), make([]complex128, length)
	for n, v := range x {
		a[n] = v * cmplx.Exp(complex(0, -w*float64(n))) / wave(n)
	}
	for k := range max(points, len(x)) {
		v := wave(k)
		if k < points {
			b[k] = v
		}
		if k > 0 && k < len(x) {
			b[length-k] = v
		}
	}
	fft := fourier.NewCmplxFFT(length)
	fft.Coefficients(a, a)
	fft.Coefficients(b, b)
	for i := range a {
		a[i] *= b[i] / complex(float64(length), 0)
	}
	fft.Sequence(a, a)
	for k := range points {
		a[k] /= wave(k)
	}
	return a[:points]
}

// transfer is that of the mean of m samples at w radians a sample.
func transfer(w float64, m int) float64 {
	if s := math.Sin(w / 2); s != 0 && m > 1 {
		return math.Sin(w/2*float64(m)) / (float64(m) * s)
	}
	return 1
}

// span is a stretch of frequency, in Hz, with the resonances in it.
type band struct {
	from, to      float64
	center, width []float64
}

// bands are the stretches about the rings of the fit, joined where they overlap.
func (d *Decay) bands(dt float64) []band {
	l, ok := d.law.(exponentialLaw)
	rings := []term{{a: d.Quantities.DecayRate.Value, w: 2 * math.Pi * d.Quantities.DampedFrequency.Value}}
	if ok && l.companion != nil && l.companion.w > 0 {
		rings = append(rings, *l.companion)
	}
	least := 1 / (float64(d.Last-d.First) * dt)
	var all []band
	for _, r := range rings {
		f, width := r.w/(2*math.Pi), math.Abs(r.a)/math.Pi
		if half := ringWidths * math.Max(width, least); f > 0 {
			all = append(all, band{math.Max(0, f-half), math.Min(f+half, 0.5/dt), []float64{f}, []float64{width}})
		}
	}
	slices.SortFunc(all, func(x, y band) int { return int(math.Copysign(1, x.from-y.from)) })
	var out []band
	for _, b := range all {
		if n := len(out); n > 0 && b.from <= out[n-1].to {
			last := &out[n-1]
			last.to = math.Max(last.to, b.to)
			last.center, last.width = append(last.center, b.center...), append(last.width, b.width...)
			continue
		}
		out = append(out, b)
	}
	return out
}
