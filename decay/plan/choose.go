package plan

import (
	"math"

	"dieaway/decay"
	"dieaway/decay/quantity"
)

const (
	divisions    = 8    // of the screen from top to bottom (common practice)
	headroom     = 1.1  // of the range over the swing of the ring
	averagesMost = 1024 // a power of two, as scopes have them (common practice)
	dither       = 0.5  // steps of noise that make averages see between the steps (derived)
	ratioLeast   = 5.0  // amplitude over noise from which fits reach the bound (derived)
)

// A comfort is how much of a decay a record holds and how finely.
type comfort struct{ timeConstants, perCycle float64 }

// comforts are tried in this order: what can be read by eye too, what is enough for
// a fit, and what just tells frequency and damping (common practice for the first).
var comforts = []comfort{{3, 10}, {1.5, 5}, {0.6, 2.6}}

// chooseRange takes the smallest vertical range of eight divisions of 1-2-5 that
// holds the ring.
func (p *Plan) chooseRange() {
	p.Setting.FullScale = p.Wish.FullScale
	if p.Wish.FullScale == 0 {
		p.Setting.FullScale = divisions * quantity.StepUp(2*headroom*p.Wish.Amplitude/divisions)
	}
}

// step is the height of a level of the converter in V, 0 without one.
func (p *Plan) step(fullScale float64) float64 {
	if p.Wish.Bits == 0 {
		return 0
	}
	return math.Ldexp(fullScale, -p.Wish.Bits)
}

// noise returns the standard deviation in V of a sample: noise and rounding,
// step/sqrt(12), of which averages take the first away and the second only where
// noise blurs the steps.
func (p *Plan) noise(fullScale float64, averages int) float64 {
	step := p.step(fullScale)
	rounding := step * step / 12
	if p.Wish.Noise >= dither*step {
		return math.Sqrt((p.Wish.Noise*p.Wish.Noise + rounding) / float64(averages))
	}
	return math.Sqrt(p.Wish.Noise*p.Wish.Noise/float64(averages) + rounding)
}

// set works out what a setting will give; it is false where nothing can be told.
func (p *Plan) set(record, rate float64, averages int, fullScale, amplitude float64) (Setting, bool) {
	s := Setting{Record: record, SampleRate: rate, Samples: int(math.Round(record * rate)), Averages: averages, FullScale: fullScale}
	after := record - s.Pretrigger()
	s.TimeConstants = after * p.Ring.DecayRate
	s.Cycles = after * p.Ring.DampedFrequency()
	s.PerCycle = rate / p.Ring.DampedFrequency()
	s.Noise = p.noise(fullScale, averages)
	r := decay.Prospect{NaturalFrequency: p.Ring.NaturalFrequency, Q: p.Ring.Q(), Amplitude: amplitude, Noise: s.Noise,
		Interval: 1 / rate, Samples: int(math.Floor(math.Min(after, p.readable(fullScale, amplitude))*rate + 1e-6)), TimebaseU: p.timebase()}
	for phase := range 4 { // the phase is not known beforehand: the worst counts
		r.Phase = float64(phase) * math.Pi / 4
		q, err := r.Bound()
		if err != nil {
			return s, false
		}
		if s.Expected == nil || q.Q.U > s.Expected.Q.U {
			s.Expected = q
		}
	}
	return s, true
}

// readable returns for how long the ring stays above five steps of the converter,
// in s, where no noise blurs them: below, its tail is biased (derived).
func (p *Plan) readable(fullScale, amplitude float64) float64 {
	step := p.step(fullScale)
	if p.Wish.Noise >= dither*step {
		return math.Inf(1)
	}
	return p.Ring.TimeConstant() * math.Max(0, math.Log(amplitude/(5*step)))
}

// again is set with the setting's own amplitude and range.
func (p *Plan) again(record, rate float64, averages int) (Setting, bool) {
	return p.set(record, rate, averages, p.Setting.FullScale, p.Wish.Amplitude)
}

// relative is the relative standard uncertainty of Q.
func (s *Setting) relative() float64 { return s.Expected.Q.Relative() }

// choose takes the setting with the fewest averages, then the most comfort, then
// the fewest samples, that gives what is wanted; the best there is when none does,
// and no expectation where the memory holds no record that tells anything.
func (p *Plan) choose() {
	best := Setting{}
	for averages := 1; averages <= averagesMost; averages *= 2 {
		if p.Wish.Amplitude/p.noise(p.Setting.FullScale, averages) < ratioLeast && averages < averagesMost {
			continue
		}
		for _, c := range comforts {
			s, found := p.cheapest(c, averages, &best)
			if found {
				p.Setting, p.Met = s, p.Wish.Amplitude/s.Noise >= ratioLeast
				return
			}
		}
	}
	if best.Expected != nil {
		p.Setting = best
	}
}

// reserve is what a fit, which has to find the decay first, costs at most over the
// bound (derived: 0.95 to 1.03 times).
const reserve = 1.05

// cheapest returns the setting of the fewest samples with the comfort, and keeps in
// best the one of smallest uncertainty that was seen.
func (p *Plan) cheapest(c comfort, averages int, best *Setting) (out Setting, found bool) {
	for _, record := range p.records(c) {
		for rate := quantity.StepUp(c.perCycle * p.Ring.DampedFrequency()); rate*record <= float64(p.Wish.Memory)*(1+1e-9); rate = quantity.StepUp(1.1 * rate) {
			s, ok := p.again(record, rate, averages)
			if !ok {
				continue
			}
			if best.Expected == nil || s.relative() < best.relative()*(1-1e-9) {
				*best = s
			}
			if reserve*s.relative() <= p.Wish.Want {
				if !found || s.Samples < out.Samples || s.Samples == out.Samples && s.relative() < out.relative() {
					out, found = s, true
				}
				break // faster costs more
			}
		}
	}
	return out, found
}

// records lists the record lengths in s that hold the decay with the comfort.
func (p *Plan) records(c comfort) (out []float64) {
	const most = 8 // time constants that a record may hold: beyond there is nothing
	tau := p.Ring.TimeConstant()
	shortest := math.Max(c.timeConstants*tau, 3/p.Ring.DampedFrequency()) / (1 - before)
	for t := quantity.StepUp(shortest); ; t = quantity.StepUp(1.1 * t) {
		if len(out) > 0 && t > most*tau/(1-before) {
			return out
		}
		out = append(out, t)
	}
}
