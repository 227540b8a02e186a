package decay

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestVectors: on simulated records of the five vectors the reported uncertainty
// is within 10 % of the Cramer-Rao bound, and the mean of 200 seeded fits is
// within its error of the truth (four standard errors, for seven numbers).
func TestVectors(t *testing.T) {
	const records = 200
	for _, v := range vectors {
		t.Run(v.name, func(t *testing.T) {
			var fd, tau, q mean
			for i := range records {
				rng := rand.New(rand.NewPCG(uint64(i), 17))
				r := Analyze(channel(v.samples(rng), 0, 1/v.rate), Options{})
				if r.Status == Refused {
					t.Fatalf("record %d refused: %v", i, r.Findings)
				}
				fd.add(r.Quantities.DampedFrequency.Value, r.Quantities.DampedFrequency.U)
				tau.add(r.Quantities.TimeConstant.Value, r.Quantities.TimeConstant.U)
				q.add(r.Quantities.Q.Value, r.Quantities.Q.U)
			}
			for _, c := range []struct {
				name        string
				m           mean
				truth, sdev float64
			}{{"fd", fd, v.fd, v.sdF}, {"tau", tau, v.tau, v.sdTau}, {"Q", q, v.q, v.sdQ}} {
				within(t, "mean "+c.name, c.m.value(), c.truth, 4*c.sdev/math.Sqrt(records))
				near(t, "u("+c.name+")", c.m.u/c.m.n, c.sdev, 0.10)
				// The scatter of 200 values is known to 5 %.
				near(t, "scatter of "+c.name, c.m.scatter(), c.sdev, 0.17)
			}
		})
	}
}

type mean struct{ n, sum, squares, first, u float64 }

func (m *mean) add(x, u float64) {
	if m.n == 0 {
		m.first = x
	}
	m.n++
	m.sum += x - m.first
	m.squares += (x - m.first) * (x - m.first)
	m.u += u
}

func (m *mean) value() float64 { return m.first + m.sum/m.n }

func (m *mean) scatter() float64 {
	return math.Sqrt((m.squares - m.sum*m.sum/m.n) / (m.n - 1))
}

// TestSineLimit: with a very long time constant the fit's frequency scatters as the
// four-parameter sine fit of IEEE Std 1057 does, var(omega) = 24 sigma^2/(A^2 N^3)
// per sample (from memory; Kay 1993 has the same).
func TestSineLimit(t *testing.T) {
	const n, sigma, w = 2000, 0.1, 0.37
	var f mean
	for i := range 200 {
		rng := rand.New(rand.NewPCG(uint64(i), 23))
		y := make([]float64, n)
		for k := range y {
			y[k] = math.Cos(w*float64(k)+1) + sigma*rng.NormFloat64()
		}
		fit, ok := fitRing(series{y: y, dt: 1}, 1e-5, w*1.0001, fine)
		if !ok {
			t.Fatal("no fit")
		}
		cov, ok := fit.covariance(noise{rms: fit.sigma(), gain: 1, n: math.Inf(1)})
		if !ok {
			t.Fatal("no covariance")
		}
		f.add(fit.w, math.Sqrt(cov.At(1, 1)))
	}
	want := math.Sqrt(24 * sigma * sigma / (n * n * n))
	near(t, "reported u(omega)", f.u/f.n, want, 0.02)
	near(t, "scatter of omega", f.scatter(), want, 0.17)
	within(t, "omega", f.value(), w, 4*want/math.Sqrt(200))
}
