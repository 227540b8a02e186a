package decay

import (
	"math"
	"math/rand/v2"
	"testing"

	"dieaway/decay/quantity"
)

// correlation is that of two parameters by name.
func correlation(t *testing.T, p *quantity.Joint, a, b string) float64 {
	t.Helper()
	at := map[string]int{}
	for i := range p.Len() {
		at[p.Name(i)] = i + 1
	}
	if at[a] == 0 || at[b] == 0 {
		t.Fatalf("no %q or no %q among the parameters", a, b)
	}
	return p.Correlation(at[a]-1, at[b]-1)
}

// In the limit of many cycles and samples the bound has the correlations
// corr(alpha, A) = corr(-omega, phi) = m1/sqrt(m0 m2) with
// m_k the integral of x^k exp(-2x) from 0 to u, and none between the pairs (closed
// form, derived).
func TestCorrelationLimit(t *testing.T) {
	for _, u := range []float64{1, 3, 6} {
		const fd, tau = 1e5, 5e-3
		v := vector{fd: fd, tau: tau, amp: 0.5, phi: 1, sigma: 0.001, rate: 2e6, n: int(u * tau * 2e6)}
		r := Analyze(channel(v.samples(rand.New(rand.NewPCG(1, 3))), 0, 1/v.rate), Options{Model: Exponential})
		e := math.Exp(-2 * u)
		m0, m1, m2 := (1-e)/2, (1-e*(1+2*u))/4, (1-e*(1+2*u+2*u*u))/4
		want := m1 / math.Sqrt(m0*m2)
		p := r.Decays[0].Parameters
		for _, c := range []struct {
			a, b string
			want float64
		}{
			{ParameterRate, ParameterAmplitude, want}, {ParameterOmega, ParameterPhase, -want},
			{ParameterRate, ParameterOmega, 0}, {ParameterRate, ParameterPhase, 0},
			{ParameterAmplitude, ParameterOmega, 0}, {ParameterAmplitude, ParameterPhase, 0},
			{ParameterOffset, ParameterRate, 0}, {ParameterOffset, ParameterPhase, 0},
		} {
			if got := correlation(t, p, c.a, c.b); math.Abs(got-c.want) > 0.01 {
				t.Errorf("%g time constants: corr(%s, %s) = %.4f, want %.4f", u, c.a, c.b, got, c.want)
			}
		}
	}
}

// The exact bound of two vectors (derived): uncertainties of all parameters and
// correlations, which with tau in place of alpha have the opposite sign.
func TestParametersAtTheBound(t *testing.T) {
	for _, v := range vectors {
		y := v.samples(nil)
		s := series{y: y, dt: 1 / v.rate}
		f, ok := fitRing(s, 1/(v.tau*v.rate)*1.05, 2*math.Pi*v.fd/v.rate*1.0005, fine)
		if !ok {
			t.Fatal(v.name)
		}
		full, ok := f.fullCovariance(noise{rms: v.sigma, gain: 1, n: math.Inf(1)})
		if !ok {
			t.Fatal(v.name)
		}
		p := f.parameters(&full, "V", 0)
		for name, want := range map[string][2]float64{
			ParameterRate: {1 / v.tau, v.sdTau / (v.tau * v.tau)}, ParameterOmega: {2 * math.Pi * v.fd, 2 * math.Pi * v.sdF},
			ParameterAmplitude: {v.amp, v.sdA}, ParameterPhase: {v.phi, v.sdPhi}, ParameterOffset: {v.c, v.sdC},
		} {
			q, ok := p.Get(name)
			if !ok {
				t.Fatalf("%s: no %s", v.name, name)
			}
			within(t, v.name+" "+name, q.Value, want[0], 1e-6*math.Abs(want[0])+1e-9)
			near(t, v.name+" u of "+name, q.U, want[1], 1e-5)
		}
		for _, c := range []struct {
			vector, a, b string
			want         float64
		}{
			{"V1", ParameterRate, ParameterOmega, -0.0141}, {"V1", ParameterOmega, ParameterPhase, -0.7050},
			{"V1", ParameterRate, ParameterAmplitude, 0.7102}, {"V4", ParameterRate, ParameterOmega, 0.0952},
		} {
			if got := correlation(t, p, c.a, c.b); c.vector == v.name && math.Abs(got-c.want) > 6e-5 {
				t.Errorf("%s: corr(%s, %s) = %.5f, want %.4f", v.name, c.a, c.b, got, c.want)
			}
		}
	}
}

// The time base is common to rate and frequency, so that it correlates them: with
// nothing else uncertain altogether.
func TestParametersShareTheTimeBase(t *testing.T) {
	v := vectors[0]
	v.sigma = 1e-6
	ch := channel(v.samples(rand.New(rand.NewPCG(2, 3))), 0, 1/v.rate)
	r := Analyze(ch, Options{TimebaseU: 1e-4})
	p := r.Decays[0].Parameters
	if c := correlation(t, p, ParameterRate, ParameterOmega); c < 0.999 {
		t.Errorf("correlation %g", c)
	}
	rate, _ := p.Get(ParameterRate)
	near(t, "u(alpha)", rate.U, r.Quantities.DecayRate.U, 1e-12)
}

// Each model has its parameters, and their uncertainties are those quoted.
func TestParametersOfModels(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 3))
	rec := func(y func(t float64) float64) []float64 {
		out := make([]float64, 6000)
		for i := range out {
			out[i] = y(float64(i)*1e-7) + 0.003*random.NormFloat64()
		}
		return out
	}
	damped := func(t, f, tau float64) float64 { return math.Exp(-t/tau) * math.Cos(2*math.Pi*f*t) }
	for name, c := range map[string]struct {
		y     []float64
		names []string
	}{
		"two modes": {rec(func(t float64) float64 { return damped(t, 125e3, 100e-6) + 0.4*damped(t, 190e3, 80e-6) }),
			[]string{ParameterRate2, ParameterOmega2, ParameterAmplitude2, ParameterPhase2}},
		"baseline": {rec(func(t float64) float64 { return damped(t, 125e3, 100e-6) + 0.5*math.Exp(-t/200e-6) }),
			[]string{ParameterBaselineRate, ParameterBaselineHeight}},
		"amplitude": {ringing(125e3, 60, 0.5, -0.004, 0.001, 6000, 1e-7, 1),
			[]string{ParameterGainedRate, ParameterGainedOmega}},
	} {
		r := Analyze(channel(c.y, 0, 1e-7), Options{})
		if r.Status == Refused {
			t.Fatal(r.Findings)
		}
		d := r.Decays[0]
		if d.Parameters == nil || d.Parameters.Len() != 5+len(c.names) {
			t.Fatalf("%s: parameters %v of %s", name, d.Parameters, r.Model)
		}
		for _, n := range c.names {
			if q, ok := d.Parameters.Get(n); !ok || !(q.U > 0) || !q.Known() {
				t.Errorf("%s: %s is %v", name, n, q)
			}
		}
		rate, _ := d.Parameters.Get(ParameterRate)
		size, _ := d.Parameters.Get(ParameterAmplitude)
		near(t, name+" u(alpha)", rate.U, d.Quantities.DecayRate.U, 1e-9)
		near(t, name+" u(A)", size.U, d.Amplitude.U, 1e-9)
		for _, n := range c.names {
			truth := map[string]float64{ParameterRate2: 1 / 80e-6, ParameterOmega2: 2 * math.Pi * 190e3, ParameterAmplitude2: 0.4,
				ParameterBaselineRate: 1 / 200e-6, ParameterBaselineHeight: 0.5}[n]
			if q, _ := d.Parameters.Get(n); truth != 0 && math.Abs(q.Value-truth) > 4*q.U {
				t.Errorf("%s: %s is %v, the truth %g", name, n, q, truth)
			}
		}
	}
}

// Two falls of rates r1, r2 have alpha = (r1 + r2)/2 and omega_0 = sqrt(r1 r2).
func TestParametersOverdamped(t *testing.T) {
	random := rand.New(rand.NewPCG(4, 3))
	const r1, r2 = 1 / 60e-6, 1 / 15e-6
	y := make([]float64, 4000)
	for i := range y {
		s := float64(i) * 1e-7
		y[i] = 2*math.Exp(-s*r1) - math.Exp(-s*r2) + 0.003*random.NormFloat64()
	}
	r := Analyze(channel(y, 0, 1e-7), Options{})
	if r.Model != Overdamped || r.Decays[0].Parameters == nil {
		t.Fatal(r.Model, r.Findings)
	}
	for name, want := range map[string]float64{ParameterRate: (r1 + r2) / 2, ParameterNaturalOmega: math.Sqrt(r1 * r2)} {
		if q, ok := r.Decays[0].Parameters.Get(name); !ok || math.Abs(q.Value-want) > 4*q.U {
			t.Errorf("%s is %v, want %g", name, q, want)
		}
	}
}
