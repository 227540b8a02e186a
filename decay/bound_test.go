package decay

import (
	"math"
	"math/rand/v2"
	"testing"
)

// vector is one of the exact Cramer-Rao test vectors.
type vector struct {
	name                              string
	fd, tau, amp, phi, c, sigma, rate float64
	n                                 int
	q                                 float64
	sdF, sdTau, sdA, sdPhi, sdC, sdQ  float64
}

// The bounds follow from the exact Fisher matrix of five parameters (derived values,
// derived; the theory is Hua and Sarkar 1990, Yao and Pandit 1995).
var vectors = []vector{
	{"V1", 1e4, 1e-3, 1, 0.3, 0.02, 0.01, 1e6, 5000, 31.419905, 2.009958e-1, 1.272254e-6, 9.017135e-4, 8.880708e-4, 1.414517e-4, 3.997787e-2},
	{"V2", 1e4, 1e-3, 1, 0.3, 0.02, 0.01, 1e6, 2000, 31.419905, 2.427828e-1, 1.535715e-6, 9.608813e-4, 9.455711e-4, 2.237995e-4, 4.825688e-2},
	{"V3", 1e4, 1e-3, 1, 0.3, 0.02, 0.01, 200e3, 1000, 31.419905, 4.493745e-1, 2.834045e-6, 2.001070e-3, 1.985200e-3, 3.162961e-4, 8.905627e-2},
	{"V4", 1000, 1.5e-3, 2, -1.1, -0.05, 0.02, 50e3, 400, 4.738841, 5.055674e-1, 6.821121e-6, 6.241431e-3, 3.493703e-3, 1.008852e-3, 2.121548e-2},
	{"V5", 1e5, 5e-3, 0.5, 1, 0, 0.005, 1e6, 20000, 1570.796406, 1.820112e-2, 2.859980e-6, 2.008828e-4, 4.014963e-4, 3.535534e-5, 8.984891e-1},
}

func (v vector) samples(rng *rand.Rand) []float64 {
	y := make([]float64, v.n)
	for i := range y {
		t := float64(i) / v.rate
		y[i] = v.c + v.amp*math.Exp(-t/v.tau)*math.Cos(2*math.Pi*v.fd*t+v.phi)
		if rng != nil {
			y[i] += v.sigma * rng.NormFloat64()
		}
	}
	return y
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol*math.Abs(want)) {
		t.Errorf("%s = %.9g, want %.9g within %.1g", what, got, want, tol)
	}
}

// TestBoundIsExact: the covariance of the fit is the Cramer-Rao bound, digit for
// digit, when the noise is as declared.
func TestBoundIsExact(t *testing.T) {
	for _, v := range vectors {
		t.Run(v.name, func(t *testing.T) {
			s := series{y: v.samples(nil), dt: 1 / v.rate}
			f, ok := fitRing(s, 1/(v.tau*v.rate)*1.05, 2*math.Pi*v.fd/v.rate*1.0005, fine)
			if !ok || f.stop != Converged {
				t.Fatalf("stop %v", f.stop)
			}
			cov, ok := f.covariance(noise{rms: v.sigma, gain: 1, n: math.Inf(1)})
			if !ok {
				t.Fatal("no covariance")
			}
			q := quantitiesOf(f.a, f.w, s.dt, &cov, 0)
			a, phi, c := f.shape(&cov, "V")
			near(t, "fd", q.DampedFrequency.Value, v.fd, 1e-10)
			near(t, "Q", q.Q.Value, v.q, 1e-7)
			near(t, "sd(fd)", q.DampedFrequency.U, v.sdF, 1e-6)
			near(t, "sd(tau)", q.TimeConstant.U, v.sdTau, 1e-6)
			near(t, "sd(Q)", q.Q.U, v.sdQ, 1e-6)
			near(t, "sd(A)", a.U, v.sdA, 1e-6)
			near(t, "sd(phi)", phi.U, v.sdPhi, 1e-6)
			near(t, "sd(c)", c.U, v.sdC, 1e-6)
		})
	}
}

// TestProspects: the bound of a record that was never made is that of the exact
// vectors (derived) at their natural frequency and Q.
func TestProspects(t *testing.T) {
	for _, v := range vectors {
		alpha := 1 / (2 * math.Pi * v.tau)
		p := Prospect{NaturalFrequency: math.Hypot(v.fd, alpha), Amplitude: v.amp, Noise: v.sigma, Phase: v.phi, Interval: 1 / v.rate, Samples: v.n}
		p.Q = math.Pi * p.NaturalFrequency * v.tau
		q, err := p.Bound()
		if err != nil {
			t.Fatalf("%s: %v", v.name, err)
		}
		near(t, v.name+" fd", q.DampedFrequency.Value, v.fd, 1e-12)
		near(t, v.name+" sd(fd)", q.DampedFrequency.U, v.sdF, 1e-6)
		near(t, v.name+" sd(tau)", q.TimeConstant.U, v.sdTau, 1e-6)
		near(t, v.name+" sd(Q)", q.Q.U, v.sdQ, 1e-6)
	}
}

// TestProspectWindows: what a shorter record costs at a fixed sample rate and at a
// fixed number of samples (derived, for many cycles and samples).
func TestProspectWindows(t *testing.T) {
	const f0, q, rate = 1e5, 1e4, 1.7e6
	tau := q / (math.Pi * f0)
	u := func(length, interval float64) float64 {
		p := Prospect{NaturalFrequency: f0, Q: q, Amplitude: 1, Noise: 0.01, Interval: interval, Samples: int(length * tau / interval)}
		b, err := p.Bound()
		if err != nil {
			t.Fatal(err)
		}
		return b.TimeConstant.U
	}
	whole, best := u(20, 1/rate), math.Inf(1)
	const n = 400000
	at := func(length float64) float64 { return u(length, length*tau/n) }
	for length := 1.8; length < 2.3; length += 0.01 {
		best = math.Min(best, at(length))
	}
	for _, w := range []struct{ length, f, g float64 }{
		{1, 2.04725, 1.19655}, {1.5, 1.44541, 1.03466}, {2, 1.20986, 1.00003}, {2.5, 1.10185, 1.01825}, {3, 1.04940, 1.06234},
		{4, 1.01109, 1.18190}, {5, 1.00230, 1.30992}, {8, 1.00001, 1.65315},
	} {
		near(t, "F", u(w.length, 1/rate)/whole, w.f, 2e-4)
		near(t, "G", at(w.length)/best, w.g, 2e-4)
	}
}

// TestProspectOfNothing: what cannot be measured has no bound.
func TestProspectOfNothing(t *testing.T) {
	good := Prospect{NaturalFrequency: 1e5, Q: 10, Amplitude: 1, Noise: 0.01, Interval: 1e-6, Samples: 1000}
	for name, spoil := range map[string]func(p *Prospect){
		"critical":        func(p *Prospect) { p.Q = 0.5 },
		"above half rate": func(p *Prospect) { p.Interval = 6e-6 },
		"no noise":        func(p *Prospect) { p.Noise = 0 },
		"no amplitude":    func(p *Prospect) { p.Amplitude = math.NaN() },
		"no samples":      func(p *Prospect) { p.Samples = 3 },
	} {
		p := good
		spoil(&p)
		if _, err := p.Bound(); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}
