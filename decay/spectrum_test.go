package decay

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"dieaway/capture"
)

// measuredRing is an exponential ring of 125 kHz with what add adds to it, and its decay.
func measuredRing(t *testing.T, n int, dt, tau float64, add func(i int) float64) (*Decay, *capture.Channel) {
	t.Helper()
	y := make([]float64, n)
	for i := range y {
		s := float64(i) * dt
		y[i] = 0.03 + math.Exp(-s/tau)*math.Cos(2*math.Pi*125e3*s+0.4) + add(i)
	}
	ch := channel(y, 0, dt)
	from := 0.0
	r := Analyze(ch, Options{Model: Exponential, From: &from})
	if r.Status == Refused {
		t.Fatal(r.Findings)
	}
	return r.Decays[0], ch
}

func normal01(seed uint64) func() float64 {
	return rand.New(rand.NewPCG(seed, 12)).NormFloat64
}

// The density of a segment adds up to the mean square of the samples under the
// window, by Parseval's theorem, and on average to their variance.
func TestWelchParseval(t *testing.T) {
	const n, dt = 4000, 2e-7
	random := normal01(1)
	y := make([]float64, n)
	square := 0.0
	for i := range y {
		y[i] = random() + 2*math.Cos(0.7*float64(i))
		square += y[i] * y[i] / n
	}
	// One segment: exact.
	window, total := hann(512)
	want := 0.0
	for i, w := range window {
		want += w * w * y[i] * y[i] / total
	}
	one, _ := welch(n, dt, func(_, m int) []float64 { return y[:m] })
	if got := sum(one.power) * one.step; math.Abs(got/want-1) > 1e-12 {
		t.Errorf("one segment: %g, want %g", got, want)
	}
	all, _ := welch(n, dt, func(first, m int) []float64 { return y[first : first+m] })
	if got := sum(all.power) * all.step; math.Abs(got/square-1) > 0.02 { // the ends weigh less
		t.Errorf("all segments: %g, want %g", got, square)
	}
	if len(all.power) != 257 || math.Abs(all.step*512*dt-1) > 1e-12 {
		t.Errorf("%d lines %g Hz apart", len(all.power), all.step)
	}
}

func sum(x []float64) (s float64) {
	for _, v := range x {
		s += v
	}
	return s
}

// A tone of amplitude a at the middle of a line has the power a^2/2 within the
// equivalent noise bandwidth of the Hann window, 1.5 lines (Harris, Proc. IEEE 66,
// 1978, table 1, from memory).
func TestWelchTone(t *testing.T) {
	const n, dt, a = 8192, 1e-6, 0.3
	p, _ := welch(n, dt, func(first, m int) []float64 {
		y := make([]float64, m)
		for i := range y {
			y[i] = a * math.Sin(2*math.Pi*100/1024*float64(first+i)+1)
		}
		return y
	})
	if want := a * a / 2 / (1.5 * p.step); math.Abs(p.power[100]/want-1) > 1e-9 {
		t.Errorf("%g, want %g", p.power[100], want)
	}
}

// White noise keeps to the stated level, and 95 % of its lines to the stated band,
// by the meaning of both; at any length, and with samples missing.
func TestResidualSpectrumWhite(t *testing.T) {
	for _, c := range []struct {
		n     int
		holes bool
	}{{600, false}, {2500, false}, {2500, true}, {20000, false}, {400000, false}} {
		inside, lines, power := 0, 0, 0.0
		records := max(4, 40000/c.n)
		for seed := range records {
			random := normal01(uint64(seed))
			const duration, sigma = 500e-6, 0.002
			dt := duration / float64(c.n)
			d, ch := measuredRing(t, c.n, dt, 100e-6, func(i int) float64 {
				if v := sigma * random(); !c.holes || i%50 != 7 {
					return v
				}
				return math.NaN()
			})
			s, err := d.ResidualSpectrum(ch)
			if err != nil {
				t.Fatal(err)
			}
			if want := sigma * math.Sqrt(2*dt); math.Abs(s.White/want-1) > 5/math.Sqrt(2*float64(d.Used)) {
				t.Errorf("%d: level %g, want %g", c.n, s.White, want)
			}
			for i, f := range s.Frequency {
				if i > 0 && f <= s.Frequency[i-1] {
					t.Fatalf("%d: %g Hz follows %g Hz", c.n, f, s.Frequency[i-1])
				}
				if f < 0.3/(2*dt) && c.n < 1e5 {
					continue // where the fit has taken noise with it
				}
				lines++
				power += sq(s.Density[i] / s.White)
				if s.Density[i] > s.Low[i] && s.Density[i] < s.High[i] {
					inside++
				}
			}
		}
		t.Logf("%d samples, holes %v: %.1f %% of %d lines inside, power %.4f", c.n, c.holes, 100*float64(inside)/float64(lines), lines, power/float64(lines))
		// Six standard deviations of a share of 0.95, neighbours being correlated.
		if share := float64(inside) / float64(lines); math.Abs(share-0.95) > 6*math.Sqrt(0.0475*1.5/float64(lines)) {
			t.Errorf("%d samples, holes %v: %.2f %% of %d lines inside the band", c.n, c.holes, 100*share, lines)
		}
		if mean := power / float64(lines); math.Abs(mean-1) > 0.03 {
			t.Errorf("%d samples, holes %v: mean power %g of the level", c.n, c.holes, mean)
		}
	}
}

// A tone in the residual stands out at its frequency and
// level, as high and as low ones do in a long record.
func TestResidualSpectrumTone(t *testing.T) {
	for _, c := range []struct {
		n    int
		tone float64 // Hz
	}{{2500, 1.1e6}, {2500, 700e3}, {600000, 40e6}, {600000, 900e3}} {
		const duration, sigma, a = 500e-6, 0.004, 0.006
		dt := duration / float64(c.n)
		random := normal01(3)
		d, ch := measuredRing(t, c.n, dt, 100e-6, func(i int) float64 {
			return sigma*random() + a*math.Sin(2*math.Pi*c.tone*float64(i)*dt)
		})
		s, err := d.ResidualSpectrum(ch)
		if err != nil {
			t.Fatal(err)
		}
		at := 0
		for i := range s.Density {
			if s.Density[i]/s.High[i] > s.Density[at]/s.High[at] {
				at = i
			}
		}
		if math.Abs(s.Frequency[at]-c.tone) > s.Frequency[at]-s.Frequency[at-1] || s.Density[at] < 1.5*s.High[at] {
			t.Errorf("%d samples: the highest line is at %g Hz, %g times the band; want %g Hz", c.n, s.Frequency[at], s.Density[at]/s.High[at], c.tone)
		}
		// The power in the lines around it, less that of the noise, is a^2/2.
		power := 0.0
		for i := max(1, at-3); i < min(at+4, len(s.Density)-1); i++ {
			power += (sq(s.Density[i]) - sq(sigma)*2*dt) * (s.Frequency[i] - s.Frequency[i-1])
		}
		if want := a * a / 2; math.Abs(power/want-1) > 0.1 {
			t.Errorf("%d samples, %g Hz: power %g, want %g", c.n, c.tone, power, want)
		}
	}
}

// Coloured noise shows as the density of its autoregression, which is what the
// uncertainties were told: for x(n) = rho x(n-1) + e(n) of unit variance
// (1 - rho^2)/|1 - rho exp(-jw)|^2 times that of white noise.
func TestResidualSpectrumColoured(t *testing.T) {
	const rho, sigma, n, dt = 0.8, 0.01, 20000, 2.5e-8
	random := normal01(4)
	last := 0.0
	d, ch := measuredRing(t, n, dt, 100e-6, func(int) float64 {
		last = rho*last + sigma*math.Sqrt(1-rho*rho)*random()
		return last
	})
	s, err := d.ResidualSpectrum(ch)
	if err != nil {
		t.Fatal(err)
	}
	sums, lines := [3]float64{}, [3]float64{}
	for i, f := range s.Frequency {
		w := 2 * math.Pi * f * dt
		want := s.White * math.Sqrt((1-rho*rho)/(1+rho*rho-2*rho*math.Cos(w)))
		if math.Abs(s.Assumed[i]/want-1) > 0.1 {
			t.Errorf("at %g Hz %g is assumed, the truth is %g", f, s.Assumed[i], want)
		}
		if k := int(3 * w / math.Pi); f > 400e3 && k < 3 {
			sums[k] += s.Density[i] / want
			lines[k]++
		}
	}
	for k := range sums {
		if mean := sums[k] / lines[k]; math.Abs(mean-1) > 0.05 {
			t.Errorf("third %d of the frequencies: %g of the true density", k+1, mean)
		}
	}
}

// What a limiter cut off and glitches, which the fit leaves out, are no noise.
func TestResidualSpectrumSpoilt(t *testing.T) {
	random := normal01(5)
	_, ch := measuredRing(t, 2500, 2e-7, 100e-6, func(i int) float64 {
		if i == 900 || i == 1400 {
			return 0.7
		}
		return 0.002 * random()
	})
	for i, v := range ch.Samples {
		ch.Samples[i] = math.Min(v, 0.8)
	}
	d := Analyze(ch, Options{}).Decays[0]
	if !slices.Contains(d.left, 900-d.First) || len(d.left) < 6 {
		t.Fatalf("left out: %v", d.left)
	}
	s, err := d.ResidualSpectrum(ch)
	if err != nil {
		t.Fatal(err)
	}
	for i := range s.Frequency {
		if s.Density[i] > 2*s.High[i] {
			t.Errorf("a line of %g at %g Hz, the band ends at %g", s.Density[i], s.Frequency[i], s.High[i])
		}
	}
}

// What cannot be had is withheld.
func TestSpectraWithheld(t *testing.T) {
	random := normal01(6)
	d, ch := measuredRing(t, 2500, 2e-7, 100e-6, func(int) float64 { return 0.002 * random() })
	uneven := *ch
	uneven.Axis = &capture.Axis{N: 2500, Interval: 2e-7, Times: make([]float64, 2500)}
	holes := *ch
	holes.Samples = slices.Clone(ch.Samples)
	for i := range holes.Samples {
		if i%3 == 0 {
			holes.Samples[i] = math.NaN()
		}
	}
	short := *d
	short.Last = short.First + 20
	for name, c := range map[string]struct {
		d  *Decay
		ch *capture.Channel
	}{"uneven": {d, &uneven}, "holes": {Analyze(&holes, Options{}).Decays[0], &holes}, "short": {&short, ch}, "no law": {&Decay{Last: 2500}, ch}} {
		if _, err := c.d.ResidualSpectrum(c.ch); err == nil {
			t.Errorf("%s: a spectrum of the residual", name)
		}
		if _, err := c.d.RingSpectrum(c.ch); err == nil {
			t.Errorf("%s: a spectrum of the ring", name)
		}
	}
}
