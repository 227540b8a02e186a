package decay

import (
	"math"
	"math/cmplx"
	"testing"

	"dieaway/capture"
)

// The half-power width of the spectrum of a long decay is the bandwidth 1/(pi tau)
// and its height A tau/2: the Lorentzian A/2/|alpha + j 2 pi (f - fd)|. Off the
// resonance the image and the sampling count: of A exp(-alpha t) cos(2 pi fd t + phi),
// sampled, the transform is dt A/2 (exp(j phi)/(1 - z/v) + exp(-j phi)/(1 - z*/v)),
// z = exp((-alpha + j 2 pi fd) dt), v = exp(j 2 pi f dt), by the geometric series.
func TestRingSpectrumIsLorentzian(t *testing.T) {
	const tau, fd, phi = 1e-3, 125e3, 0.4
	for _, n := range []int{20000, 400000} {
		dt := 20 * tau / float64(n)
		random := normal01(1)
		d, ch := measuredRing(t, n, dt, tau, func(int) float64 { return 1e-6 * random() })
		s, err := d.RingSpectrum(ch)
		if err != nil {
			t.Fatal(err)
		}
		if len(s.Bands) != 1 || len(s.Frequency) < 300 || s.Missing != 0 {
			t.Fatalf("bands %v, %d points, %d missing", s.Bands, len(s.Frequency), s.Missing)
		}
		for name, v := range map[string][]float64{"measured": s.Measured, "fitted": s.Fitted} {
			for i, f := range s.Frequency {
				half := func(f0, phi float64) complex128 {
					return cmplx.Exp(complex(0, phi)) / (1 - cmplx.Exp(complex(-dt/tau, 2*math.Pi*(f0-f)*dt)))
				}
				want := dt / 2 * cmplx.Abs(half(fd, phi)+half(-fd, -phi))
				if math.Abs(v[i]/want-1) > 2e-4 {
					t.Errorf("%d samples, %s at %.1f Hz: %g V s, want %g", n, name, f, v[i], want)
				}
			}
			at, top := largest(v)
			if math.Abs(s.Frequency[at]-fd) > 30 || math.Abs(top/(tau/2)-1) > 1e-3 {
				t.Errorf("%d samples, %s: %g V s at %.1f Hz", n, name, top, s.Frequency[at])
			}
			width := crossing(s.Frequency, v, at, 1, top/math.Sqrt2) - crossing(s.Frequency, v, at, -1, top/math.Sqrt2)
			if want := 1 / (math.Pi * tau); math.Abs(width/want-1) > 3e-3 {
				t.Errorf("%d samples, %s: %g Hz wide at half power, want %g", n, name, width, want)
			}
		}
	}
}

func largest(v []float64) (at int, top float64) {
	for i, x := range v {
		if x > top {
			at, top = i, x
		}
	}
	return at, top
}

// crossing follows v from its top to where it falls below a level.
func crossing(f, v []float64, at, step int, level float64) float64 {
	for v[at+step] > level {
		at += step
	}
	return f[at] + (f[at+step]-f[at])*(v[at]-level)/(v[at]-v[at+step])
}

// Whatever the law, the spectra are those of the samples and of the curve by the
// definition: the sum over all samples of the gate.
func TestRingSpectrumByDefinition(t *testing.T) {
	random := normal01(2)
	noise := func(s float64) float64 { return s * random() }
	rec := func(n int, dt float64, y func(t float64) float64) *capture.Channel {
		out := make([]float64, n)
		for i := range out {
			out[i] = y(float64(i) * dt)
		}
		return channel(out, 0, dt)
	}
	damped := func(t, f, tau, phase float64) float64 {
		return math.Exp(-t/tau) * math.Cos(2*math.Pi*f*t+phase)
	}
	holes := rec(30000, 2e-8, func(t float64) float64 { return damped(t, 125e3, 100e-6, 1) + noise(0.004) })
	for i := 500; i < 30000; i += 97 {
		holes.Samples[i] = math.NaN()
	}
	for name, c := range map[string]struct {
		ch    *capture.Channel
		model Model
		bands int
	}{
		"one":        {rec(30000, 2e-8, func(t float64) float64 { return 0.1 + damped(t, 125e3, 100e-6, 1) + noise(0.004) }), Exponential, 1},
		"few cycles": {rec(3000, 2e-8, func(t float64) float64 { return damped(t, 125e3, 10e-6, 1) + noise(0.002) }), Exponential, 1},
		"short":      {rec(4000, 2e-8, func(t float64) float64 { return damped(t, 125e3, 200e-6, 1) + noise(0.002) }), Exponential, 1},
		"two apart": {rec(30000, 2e-8, func(t float64) float64 {
			return damped(t, 125e3, 100e-6, 1) + 0.4*damped(t, 410e3, 60e-6, 0) + noise(0.004)
		}), TwoMode, 2},
		"two close": {rec(30000, 2e-8, func(t float64) float64 {
			return damped(t, 125e3, 100e-6, 1) + 0.4*damped(t, 150e3, 60e-6, 0) + noise(0.004)
		}), TwoMode, 1},
		"amplitude": {channel(ringing(125e3, 60, 0.5, -0.004, 0.001, 20000, 2e-8, 1), 0, 2e-8), Amplitude, 1},
		"holes":     {holes, Exponential, 1},
	} {
		r := Analyze(c.ch, Options{})
		if r.Model != c.model {
			t.Fatalf("%s: model %s, %v", name, r.Model, r.Findings)
		}
		d := r.Decays[0]
		s, err := d.RingSpectrum(c.ch)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if len(s.Bands) != c.bands {
			t.Errorf("%s: bands %v, want %d", name, s.Bands, c.bands)
		}
		dt := c.ch.Axis.Interval
		for i := 0; i < len(s.Frequency); i += 25 {
			var measured, fitted complex128
			for k := d.First; k < d.Last; k++ {
				v, _, _ := d.At(c.ch.Axis.Time(k))
				y := c.ch.Samples[k]
				if math.IsNaN(y) {
					y = v
				}
				z := cmplx.Exp(complex(0, -2*math.Pi*s.Frequency[i]*float64(k-d.First)*dt)) * complex(dt, 0)
				measured += complex(y-d.Offset.Value, 0) * z
				fitted += complex(v-d.Offset.Value, 0) * z
			}
			// What folds into the band from beside it: of the ring less than a
			// thousandth, the same in both, and of the noise a few hundredths.
			if e := math.Abs(s.Measured[i] - cmplx.Abs(measured)); e > 0.1*s.Noise+1e-3*s.Fitted[i] {
				t.Errorf("%s, measured at %.0f Hz: %g, by definition %g", name, s.Frequency[i], s.Measured[i], cmplx.Abs(measured))
			}
			if e := math.Abs(s.Fitted[i] - cmplx.Abs(fitted)); e > 0.01*s.Noise+1e-3*s.Fitted[i] {
				t.Errorf("%s, fitted at %.0f Hz: %g, by definition %g", name, s.Frequency[i], s.Fitted[i], cmplx.Abs(fitted))
			}
		}
	}
}

// What is left has the rms stated, and the magnitudes differ by half of its mean
// square, for they feel only the part along the curve.
func TestRingSpectrumNoise(t *testing.T) {
	along, left, n := 0.0, 0.0, 0
	for seed := range uint64(30) {
		random := normal01(seed)
		d, ch := measuredRing(t, 20000, 2.5e-8, 100e-6, func(int) float64 { return 0.01 * random() })
		s, err := d.RingSpectrum(ch)
		if err != nil {
			t.Fatal(err)
		}
		b := s.Bands[0]
		for i, f := range s.Frequency {
			// Beside the resonance, where the fit has not taken the noise with it.
			if math.Abs(f-b.Center[0]) > 2*b.Width[0] {
				along += sq((s.Measured[i] - s.Fitted[i]) / s.Noise)
				left += sq(s.Left[i] / s.Noise)
				n++
			}
		}
	}
	if mean := along / float64(n); math.Abs(mean-0.5) > 0.06 {
		t.Errorf("magnitudes differ by a mean square of %g of the noise, want 0.5", mean)
	}
	if mean := left / float64(n); math.Abs(mean-1) > 0.1 {
		t.Errorf("what is left has a mean square of %g of the noise, want 1", mean)
	}
}

// What does not ring has no spectrum of a ring, but one of what the fit leaves.
func TestSpectraOverdamped(t *testing.T) {
	random := normal01(7)
	y := make([]float64, 4000)
	for i := range y {
		s := float64(i) * 1e-7
		y[i] = 2*math.Exp(-s/60e-6) - math.Exp(-s/15e-6) + 0.003*random()
	}
	ch := channel(y, 0, 1e-7)
	r := Analyze(ch, Options{})
	if r.Model != Overdamped {
		t.Fatal(r.Model, r.Findings)
	}
	if _, err := r.Decays[0].RingSpectrum(ch); err == nil {
		t.Error("a spectrum of what does not ring")
	}
	if _, err := r.Decays[0].ResidualSpectrum(ch); err != nil {
		t.Error(err)
	}
}

func BenchmarkSpectra(b *testing.B) {
	const n = 10_000_000
	y := make([]float64, n)
	random := normal01(1)
	for i := range y {
		s := float64(i) * 5e-11
		y[i] = math.Exp(-s/100e-6)*math.Cos(2*math.Pi*125e3*s) + 0.01*random()
	}
	ch := channel(y, 0, 5e-11)
	d := Analyze(ch, Options{}).Decays[0]
	b.Run("ring", func(b *testing.B) {
		for b.Loop() {
			if _, err := d.RingSpectrum(ch); err != nil {
				b.Fatal(err)
			}
		}
	})
	b.Run("residual", func(b *testing.B) {
		for b.Loop() {
			if _, err := d.ResidualSpectrum(ch); err != nil {
				b.Fatal(err)
			}
		}
	})
}
