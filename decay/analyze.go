// Package decay turns the free decay of a resonant circuit into damped and
// natural frequency, time constant and Q, each with its uncertainty, and the
// reasons to distrust them. It knows no file, no flag and no page.
package decay

import (
	"cmp"
	"math"
	"slices"
	"strings"

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
	r := analyze(ch, s, opt)
	r.record = s.record
	return r
}

func analyze(ch *capture.Channel, s series, opt Options) *Result {
	first, last := limits(ch.Axis, opt)
	if why, unfit := unfit(s, first, last); unfit {
		return refused(nil, why)
	}
	a := &analysis{s: s.slice(first, last), unit: ch.Unit, opt: opt}
	// 1. Gates: each free decay, from its true start to where it has died, and the
	// model that accounts for it. Samples that are not the circuit's are left out.
	a.gates()
	if len(a.found) == 0 {
		return a.notRinging(nil, noRing()).shifted(first)
	}
	// 2. Noise and covariance of every decay, and what follows from rate and frequency.
	a.measure()
	// 3. Readings by crossings and peaks, which know nothing of the fit but what
	// else moves beside the ring.
	g, d, v := &a.found[a.best], a.decays[a.best], a.noises[a.best]
	r := &Result{Model: g.model(), Decays: a.decays, Best: a.best}
	r.Readings = read(g.ringOnly(a.s), d.period(), v.rms*v.factor(g.fit.w))
	// 4. Judgement: is it a decay at all, and can the numbers be trusted?
	if why, refuse := judge(a.s, g, d, v); refuse {
		return a.notRinging(r, why).shifted(first)
	}
	r.Quantities = a.combined()
	r.Modes = a.modes()
	r.Findings = slices.Concat(a.findings, doubts(g, d, v, a.opt.Model), compareReadings(d, r.Model, &r.Readings))
	return r.shifted(first).settle()
}

// analysis is the work on one channel, step by step.
type analysis struct {
	s        series
	unit     string
	opt      Options
	found    []gate
	decays   []*Decay
	noises   []noise
	best     int // the decay whose rate is known best
	findings []Finding
}

// gates finds the decays, and finds them anew without the samples that a limiter
// cut off or that stand alone far off the first fit.
func (a *analysis) gates() {
	a.found = findDecays(a.s, a.opt)
	if rails := railed(a.s); maybeClipped(a.found, a.s, rails) {
		a.dropClipped(rails)
	}
	a.dropGlitches()
	if len(a.found) > 0 && a.found[0].coarse {
		a.findings = append(a.findings, a.found[0].coarseFinding(a.s.step))
	}
}

// dropClipped leaves out the railed samples, and those in their shadow, where a fit
// without them runs past the rail.
func (a *analysis) dropClipped(rails []int) {
	free := a.s.without(rails)
	found := findDecays(free, a.opt)
	cut, ok := cutOff(found, a.s, rails)
	if !ok {
		return
	}
	free = free.without(shadowed(found, a.s, rails))
	if again := findDecays(free, a.opt); len(again) > 0 {
		found = again
	}
	a.s, a.found = free, found
	a.findings = append(a.findings, cut)
}

func (a *analysis) dropGlitches() {
	var list []int
	for i := range a.found {
		list = append(list, a.found[i].glitches(a.s)...)
	}
	if len(list) == 0 {
		return
	}
	clean := a.s.without(list)
	if found := findDecays(clean, a.opt); len(found) > 0 {
		a.s, a.found = clean, found
		a.findings = append(a.findings, glitchFinding(len(list)))
	}
}

// measure puts every gate into physical quantities.
func (a *analysis) measure() {
	for i := range a.found {
		g := &a.found[i]
		v := g.fit.noise()
		a.noises = append(a.noises, v)
		a.decays = append(a.decays, newDecay(a.s, g, v, a.unit, a.opt.TimebaseU))
		if rate := &a.decays[i].Quantities.DecayRate; rate.Value > 0 && !(rate.Relative() >= a.decays[a.best].Quantities.DecayRate.Relative()) {
			a.best = i
		}
	}
}

// combined is the result to quote: of the only decay, or of all that are sound.
func (a *analysis) combined() *Quantities {
	var rates, omegas []float64
	var covs []sym
	for i := range a.found {
		g := &a.found[i]
		cov, ok := g.fit.covariance(a.noises[i])
		if _, no := noDecay(g, a.decays[i], a.noises[i]); ok && !no {
			rates, omegas, covs = append(rates, g.fit.a), append(omegas, g.fit.w), append(covs, cov)
		}
	}
	if len(rates) < 2 {
		return &a.decays[a.best].Quantities
	}
	c, ok := combine(rates, omegas, covs)
	if !ok {
		return &a.decays[a.best].Quantities
	}
	a.findings = append(a.findings, severalDecays(len(rates), &c)...)
	cov := c.widened()
	q := quantitiesOf(c.a, c.w, a.s.dt, &cov, a.opt.TimebaseU)
	return &q
}

// modes lists both rings of a two-mode decay, stronger first.
func (a *analysis) modes() []*Quantities {
	g := &a.found[a.best]
	if g.model() != TwoMode {
		return nil
	}
	full, ok := g.fit.fullCovariance(a.noises[a.best])
	if !ok {
		return nil
	}
	c := g.fit.companion
	cov := sym{n: 2}
	for i := range 2 {
		for j := range 2 {
			cov.set(i, j, full.At(2+i, 2+j))
		}
	}
	second := quantitiesOf(c.a, c.w, a.s.dt, &cov, a.opt.TimebaseU)
	return []*Quantities{&a.decays[a.best].Quantities, &second}
}

// notRinging measures what does not ring but tells its damping all the same, and
// refuses the rest.
func (a *analysis) notRinging(r *Result, why Finding) *Result {
	if why.Code == capture.Overdamped || fallsOnly(a.s) {
		if d, findings := overdampedDecay(a.s, a.opt.TimebaseU); d != nil {
			out := &Result{Model: Overdamped, Decays: []*Decay{d}, Readings: unread(), Quantities: &d.Quantities}
			out.Findings = append(a.findings, findings...)
			return out.settle()
		}
		why = bareExponential()
	}
	return refused(r, append(a.findings, why)...)
}

// AnalyzeCapture analyses the channel of c that rings: the only one, or the one
// whose ring is largest; one that is named as the source is taken only where
// no other rings nearly as well. It returns the channel it chose.
func AnalyzeCapture(c *capture.Capture, opt Options) (*capture.Channel, *Result) {
	var channel *capture.Channel
	var best *Result
	most := 0.0
	oneUnit := !slices.ContainsFunc(c.Channels, func(ch *capture.Channel) bool { return ch.Unit != c.Channels[0].Unit })
	for _, ch := range c.Channels {
		r := Analyze(ch, opt)
		p := r.prominence(oneUnit)
		if isSource(ch.Name) {
			p *= sourceShare
		}
		if best == nil || p > most {
			channel, best, most = ch, r, p
		}
	}
	return channel, best
}

// sourceShare weighs a channel whose name says that it is the source: it may ring
// along, but it is not what is to be measured.
const sourceShare = 0.1

// isSource reports whether a channel is named as the voltage of the source is.
func isSource(name string) bool {
	plain := strings.ToLower(strings.NewReplacer("_", "", " ", "", "-", "").Replace(name))
	switch plain {
	case "vs", "us", "es", "vin", "uin", "vg", "vgen", "source", "drive", "generator", "input", "excitation":
		return true
	}
	return false
}

// prominence ranks the channels of one capture: a measured decay before a refused
// one, then by the amplitude of the ring, or, where the channels differ in unit,
// by amplitude over noise.
func (r *Result) prominence(oneUnit bool) float64 {
	if r.Quantities == nil {
		return -1
	}
	d := r.Decays[r.Best]
	if oneUnit && d.Amplitude.Known() {
		return d.Amplitude.Value
	}
	return math.Pow(10, d.SNR/20)
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
func newDecay(s series, g *gate, v noise, unit string, timebase float64) *Decay {
	f := &g.fit
	d := &Decay{
		First: g.first, Last: g.last, From: s.time(g.first), To: s.time(g.last - 1),
		NoiseRMS: v.rms, ResidualRMS: math.Sqrt(f.rss / float64(f.n)),
		SNR:         20 * math.Log10(f.size()/v.rms),
		NoiseFactor: v.factor(f.w), Used: f.n, Stop: f.stop, Iterations: f.iterations,
		law: f.law(), noise: v, left: f.s.holes(),
	}
	if full, ok := f.fullCovariance(v); ok {
		cov := f.ringPart(&full)
		d.Quantities = quantitiesOf(f.a, f.w, s.dt, &cov, timebase)
		d.Amplitude, d.Phase, d.Offset = f.shape(&cov, unit)
		d.AtStart = f.atStart(&full, timebase)
		d.Parameters = f.parameters(&full, unit, timebase)
	} else {
		d.Quantities = quantitiesOf(math.NaN(), math.NaN(), s.dt, &sym{n: 2}, timebase)
	}
	d.Cycles = (d.To - d.From) * d.Quantities.DampedFrequency.Value
	return d
}

// period of the damped oscillation in s.
func (d *Decay) period() float64 { return 1 / d.Quantities.DampedFrequency.Value }

// model names the law that the decay was fitted with.
func (g *gate) model() Model {
	f := &g.fit
	switch {
	case f.bend != nil:
		return Amplitude
	case f.companion != nil && f.companion.w > 0 && !f.companion.steady(f.s.position(f.s.len()-1)):
		return TwoMode
	default:
		return Exponential
	}
}

// refused withholds the numbers of r, which may be nil, for the reasons given.
func refused(r *Result, reasons ...Finding) *Result {
	if r == nil {
		r = &Result{Model: Exponential, Readings: unread()}
	}
	r.Quantities, r.Modes = nil, nil
	r.Findings = append(r.Findings, reasons...)
	return r.settle()
}

// shifted counts the samples of the decays from the start of the record.
func (r *Result) shifted(first int) *Result {
	for _, d := range r.Decays {
		d.First, d.Last = d.First+first, d.Last+first
	}
	return r
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
