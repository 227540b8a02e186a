package decay

import (
	"errors"
	"math"
)

// A Prospect is a free decay that is yet to be recorded.
type Prospect struct {
	// NaturalFrequency in Hz and Q of the ring, above 1/2: below, nothing rings.
	NaturalFrequency, Q float64
	// Amplitude at the first sample and Noise, its standard deviation, white, in one unit.
	Amplitude, Noise float64
	// Phase of the ring at the first sample in rad.
	Phase float64
	// Interval in s of Samples from the start of the ring on.
	Interval float64
	Samples  int
	// TimebaseU is that of [Options].
	TimebaseU float64
}

// ErrNoProspect is returned where nothing can be told of a record.
var ErrNoProspect = errors.New("frequency and damping cannot be told from such a record")

// Bound returns the quantities of the ring with the smallest standard
// uncertainties that any unbiased method can reach: the Cramer-Rao bound of a
// damped sinusoid about an unknown constant, exact at any Q, from the Fisher matrix
// of rate, frequency, two amplitudes and constant. It takes no longer for many
// samples than for few.
func (r Prospect) Bound() (*Quantities, error) {
	w0 := 2 * math.Pi * r.NaturalFrequency * r.Interval
	a := w0 / (2 * r.Q)
	w := math.Sqrt((w0 - a) * (w0 + a))
	if !(a > 0) || !(w > 0 && w < math.Pi) || !(r.Noise > 0) || !(r.Amplitude > 0) || r.Samples < samplesLeast {
		return nil, ErrNoProspect
	}
	p := &poles{rings: 1, n: r.Samples}
	list := []pole{{a, w}}
	g := p.innerProducts(list, r.Samples)
	sin, cos := math.Sincos(r.Phase)
	n := normal{beta: []float64{0, r.Amplitude * cos, -r.Amplitude * sin}}
	n.fill(&g, p.columns(n.beta), p.linear())
	cov, ok := n.jtj.inverse()
	if !ok {
		return nil, ErrNoProspect
	}
	for i := range cov.v {
		cov.v[i] *= r.Noise * r.Noise
	}
	q := quantitiesOf(a, w, r.Interval, &cov, r.TimebaseU)
	return &q, nil
}
