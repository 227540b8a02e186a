package driven

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// quantities puts the fit into physical quantities.
func (f *fitted) quantities(d *rows, opt Options, unit string) (*Quantities, bool) {
	cov, ok := f.covariance(d, f.plain(d))
	if !ok {
		return nil, false
	}
	// First-order autoregressive residuals carry (1 - rho)/(1 + rho) of the
	// information of as many independent ones on what is smooth.
	rho := f.correlation(d)
	cov.ScaleSym((1+rho)/(1-rho), cov)
	j, err := f.joint(cov, opt.TimebaseU)
	if err != nil {
		return nil, false
	}
	out, err := j.Propagate([]string{"f0", "Q", "B", "zeta", "peak gain"}, []string{"Hz", "", "Hz", "", unit},
		func(y, x []float64) {
			c := curve{across: f.across, f0: x[0], q: x[1], gain: x[2], rest: x[3]}
			y[0], y[1], y[2], y[3], y[4] = c.f0, c.q, c.f0/c.q, 1/(2*c.q), c.peakGain()
		}, nil)
	if err != nil {
		return nil, false
	}
	q := &Quantities{NaturalFrequency: out.At(0), Q: out.At(1), Bandwidth: out.At(2), DampingRatio: out.At(3),
		PeakGain: out.At(4), Correlation: out.Correlation(0, 1)}
	if !f.hasRest() && f.across == capture.Both {
		q.PeakGain.U = math.NaN() // an ideal notch is zero by the form alone
	}
	frequency := func(of func(c *curve) float64) quantity.Quantity {
		g, err := j.Propagate([]string{""}, []string{"Hz"}, func(y, x []float64) {
			y[0] = of(&curve{across: f.across, f0: x[0], q: x[1]})
		}, nil)
		if err != nil {
			return quantity.Unknown("Hz")
		}
		return g.At(0)
	}
	q.DampedFrequency = frequency(func(c *curve) float64 { return c.f0 * math.Sqrt(1-1/(4*c.q*c.q)) })
	q.PeakFrequency = frequency(func(c *curve) float64 {
		x, _ := c.peakAt()
		return c.f0 * x
	})
	if _, ok := f.peakAt(); !ok {
		q.PeakGain = quantity.Unknown(unit)
	}
	return q, true
}

func (f *fitted) hasRest() bool { return f.free[len(f.free)-1] == parRest }

// joint is f0 (Hz), Q, gain and rest with their covariance; timebase is the relative
// uncertainty of the frequencies.
func (f *fitted) joint(cov *mat.SymDense, timebase float64) (*quantity.Joint, error) {
	scale := map[int]float64{parF0: f.f0 / (2 * f.q), parQ: f.q, parGain: f.gain, parRest: 1}
	place := map[int]int{parF0: 0, parQ: 1, parGain: 2, parRest: 3}
	out := mat.NewSymDense(4, nil)
	for i, a := range f.free {
		for k, b := range f.free[:i+1] {
			if a != parPhase && b != parPhase {
				out.SetSym(place[a], place[b], cov.At(i, k)*scale[a]*scale[b])
			}
		}
	}
	out.SetSym(0, 0, out.At(0, 0)+sq(timebase*f.f0))
	return quantity.NewJoint([]string{"f0", "Q", "gain", "rest"}, []string{"Hz", "", "", ""}, []float64{f.f0, f.q, f.gain, f.rest}, out)
}

// peakGain is the response at the peak: Q/sqrt(1 - 1/(4Q^2)) of the source across
// capacitor and coil, all of it across the resistor (derived: series circuit).
func (c *curve) peakGain() float64 {
	x, ok := c.peakAt()
	if !ok {
		return 0
	}
	m, _ := c.at(c.f0 * x)
	return m
}
