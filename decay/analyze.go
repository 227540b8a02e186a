// Package decay turns the free decay of a resonant circuit into damped and
// natural frequency, time constant and Q, each with its uncertainty, and the
// reasons to distrust them. It knows no file, no flag and no page.
package decay

import (
	"cmp"
	"math"
	"slices"

	"dieaway/capture"
)

// Options steer [Analyze]; the zero value lets the data decide everything.
type Options struct {
	// From and To override where the gate begins and ends, in s; nil finds them.
	From, To *float64
	// Model forces a model; "" chooses by evidence.
	Model Model
	// TimebaseU is the relative standard uncertainty of the scope's time base
	// (2e-5 for 20 ppm as one standard deviation); it enters frequencies and
	// times but not Q, damping ratio and decrement.
	TimebaseU float64
}

// Analyze finds the free decay in a channel, fits it, and says what it found.
// A record without a measurable decay is Refused, with the finding that says why.
func Analyze(ch *capture.Channel, opt Options) *Result {
	s := newSeries(ch)
	first, last := limits(ch.Axis, opt)
	if f, unfit := unfit(s, first, last); unfit {
		return refused(nil, f)
	}
	// 1. Gate and fit: the free decay, from its true start to where it has died.
	g, ok := findGate(s.slice(first, last), opt.From != nil, opt.To != nil, opt.Model)
	if !ok {
		if fallsOnly(s.slice(first, last)) {
			return refused(nil, bareExponential())
		}
		return refused(nil, noRing())
	}
	g.first, g.last = g.first+first, g.last+first
	// 2. Noise: what the fit leaves, its size and colour.
	window := s.slice(g.first, g.last)
	v := noiseOf(g.fit.residuals(window.slice(0, min(window.len(), noiseSamples)), 0), g.fit.sigma())
	// 3. Covariance, and everything that follows from rate and frequency.
	d := newDecay(s, g, v, ch.Unit, opt.TimebaseU)
	// 4. Readings by crossings and peaks, which know nothing of the fit but what
	// else moves beside the ring.
	readings := read(g.ringOnly(s), d.period(), v.rms*v.factor(g.fit.w))
	// 5. Judgement: is it a decay at all, and can the numbers be trusted?
	r := &Result{Model: d.model(), Decays: []*Decay{d}, Readings: readings}
	if why, refuse := judge(s.slice(first, last), &g, d, v); refuse {
		return refused(r, why)
	}
	r.Quantities = &d.Quantities
	r.Findings = append(doubts(&g, d, v), compareReadings(d, r.Model, &readings)...)
	return r.settle()
}

// AnalyzeCapture analyses the channel of c that rings: the only one, or the one
// whose decay stands out most. It returns the channel it chose.
func AnalyzeCapture(c *capture.Capture, opt Options) (*capture.Channel, *Result) {
	var channel *capture.Channel
	var best *Result
	for _, ch := range c.Channels {
		if r := Analyze(ch, opt); best == nil || r.prominence() > best.prominence() {
			channel, best = ch, r
		}
	}
	return channel, best
}

// prominence ranks the channels of one capture: a measured decay before a refused
// one, then the amplitude in units of the noise times the root of the samples
// that carry it.
func (r *Result) prominence() float64 {
	if r.Status == Refused || len(r.Decays) == 0 {
		return -1
	}
	return 1 / r.Decays[0].Quantities.DecayRate.Relative()
}

// limits turns the overrides of the gate into sample indices.
func limits(a *capture.Axis, opt Options) (first, last int) {
	last = a.N
	if opt.From != nil {
		first = a.Index(*opt.From)
	}
	if opt.To != nil {
		last = max(first, min(a.N, a.Index(*opt.To)))
	}
	return first, last
}

// newDecay puts the fit of a gate into physical quantities.
func newDecay(s series, g gate, v noise, unit string, timebase float64) *Decay {
	f := &g.fit
	d := &Decay{
		First: g.first, Last: g.last, From: s.time(g.first), To: s.time(g.last - 1),
		NoiseRMS: v.rms, ResidualRMS: math.Sqrt(f.rss / float64(f.n)),
		SNR:         20 * math.Log10(f.size()/v.rms),
		NoiseFactor: v.factor(f.w), Used: f.n, Stop: f.stop, Iterations: f.iterations,
		law: f.law(),
	}
	if cov, ok := f.covariance(v); ok {
		d.Quantities = quantitiesOf(f.a, f.w, s.dt, &cov, timebase)
		d.Amplitude, d.Phase, d.Offset = f.shape(&cov, unit)
		d.AtStart = f.atStart(v, timebase)
	}
	d.Cycles = (d.To - d.From) * d.Quantities.DampedFrequency.Value
	return d
}

// period of the damped oscillation in s.
func (d *Decay) period() float64 { return 1 / d.Quantities.DampedFrequency.Value }

// refused withholds the numbers of r, which may be nil, for the reasons given.
func refused(r *Result, reasons ...Finding) *Result {
	if r == nil {
		r = &Result{Model: Exponential, Readings: unread()}
	}
	r.Quantities = nil
	r.Findings = append(r.Findings, reasons...)
	return r.settle()
}

var weight = map[capture.Severity]int{capture.Fault: 0, capture.Warning: 1, capture.Note: 2}

// settle sorts the findings, gravest first, and draws the status from them.
func (r *Result) settle() *Result {
	slices.SortStableFunc(r.Findings, func(a, b Finding) int {
		return cmp.Compare(weight[a.Severity], weight[b.Severity])
	})
	r.Status = Good
	if len(r.Findings) > 0 {
		switch r.Findings[0].Severity {
		case capture.Fault:
			r.Status, r.Quantities = Refused, nil
		case capture.Warning:
			r.Status = Doubtful
		}
	}
	return r
}

// model names the law that the decay was fitted with.
func (d *Decay) model() Model {
	if _, ok := d.law.(bentLaw); ok {
		return Amplitude
	}
	if l, ok := d.law.(exponentialLaw); ok && l.companion != nil && l.companion.w > 0 {
		return TwoMode
	}
	return Exponential
}
