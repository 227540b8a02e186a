package plan

import (
	"fmt"
	"math"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// settled is the share of the amplitude, over the noise, that may be left of the
// transient that switching the source on made.
const settled = 0.1

// settle works out what the source has to do. The transient of its rise dies like
// the ring itself. A fall that lasts e takes 1 - sinc(f e) off the ring, (pi f e)^2/6.
func (p *Plan) settle() {
	noise := p.noise(p.Setting.FullScale, 1)
	p.Settle = p.Ring.TimeConstant() * math.Max(3, math.Log(p.Wish.Amplitude/(settled*noise)))
	p.EdgeMost = math.Sqrt(6*0.01) / (math.Pi * p.Ring.NaturalFrequency)
}

func (p *Plan) add(code capture.Code, severity capture.Severity, message, remedy string) {
	p.Findings = append(p.Findings, decay.Finding{Code: code, Severity: severity, Message: message, Remedy: remedy})
}

func (p *Plan) note(message string) {
	p.add(capture.Loading, capture.Note, upper(message)+".", "Mend the bench file, or quote the result as that of the circuit as it is connected.")
}

// judge says what will speak against the record.
func (p *Plan) judge() {
	s := &p.Setting
	if !p.Met {
		p.refuse()
	}
	if p.Wish.FullScale > 0 && p.Wish.FullScale < 2*p.Wish.Amplitude {
		p.add(capture.Clipped, capture.Warning, fmt.Sprintf("The range of %s does not hold a ring of %s either way.", volts(p.Wish.FullScale), volts(p.Wish.Amplitude)),
			fmt.Sprintf("Set %s or more.", volts(divisions*quantity.StepUp(2*headroom*p.Wish.Amplitude/divisions))))
	}
	if step := p.step(s.FullScale); p.Wish.Noise < dither*step {
		p.add(capture.CoarseLevels, capture.Note, fmt.Sprintf("Noise of less than half a step of %s does not blur the steps of the converter: the tail of the decay, below five of them, will not count.", volts(step)),
			"Use a smaller range or more bits; half a step of noise would make every sample count.")
	}
	if s.TimeConstants < 0.5 {
		p.add(capture.ShortRecord, capture.Warning, fmt.Sprintf("The memory holds %.2g time constants of the decay.", s.TimeConstants), "Use more memory.")
	}
	if s.Cycles < 2 {
		p.add(capture.FewCycles, capture.Warning, fmt.Sprintf("Only %.2g cycles ring within the record.", s.Cycles), "Nothing; a circuit of this Q has no more.")
	}
	if f := p.Forecast; f != nil {
		if off := f.Loaded.Q()/f.Free.Q() - 1; math.Abs(off) > p.Wish.Want {
			p.add(capture.Loading, capture.Note, fmt.Sprintf("Source and probe will change Q by %+.2g %% and the natural frequency by %+.2g %%: more than the uncertainty that is wanted.", 100*off, 100*(f.Loaded.NaturalFrequency/f.Free.NaturalFrequency-1)),
				"Measure with --bench, which takes them out, or load the circuit less.")
		}
	}
}

// refuse says how far the wish is from what can be had.
func (p *Plan) refuse() {
	s := &p.Setting
	if ratio := p.Wish.Amplitude / s.Noise; ratio < ratioLeast {
		p.add(capture.WeakSignal, capture.Fault, fmt.Sprintf("Even %d averages leave a ring of %s only %s times above the noise of %s.", s.Averages, volts(p.Wish.Amplitude), times(ratio), volts(s.Noise)),
			fmt.Sprintf("Shock %s times harder, or use a smaller range.", times(ratioLeast/ratio)))
		return
	}
	code := capture.WeakSignal
	if s.TimeConstants < 1.5 {
		code = capture.ShortRecord
	}
	lack := s.relative() / p.Wish.Want
	p.add(code, capture.Fault, fmt.Sprintf("No setting gives Q to %s: with %s samples and %d averages it is %s at best.", quantity.Percent(p.Wish.Want), quantity.Count(p.Wish.Memory), averagesMost, quantity.Percent(s.relative())),
		fmt.Sprintf("Ask for less, shock %s times harder, use a smaller range, or %s times the memory.", times(lack), times(lack*lack)))
}

// tooSmall says that the memory holds no record of the decay.
func (p *Plan) tooSmall() {
	c := comforts[len(comforts)-1]
	need := c.timeConstants * p.Ring.TimeConstant() / (1 - before) * c.perCycle * p.Ring.DampedFrequency()
	p.add(capture.ShortRecord, capture.Fault, fmt.Sprintf("A memory of %s samples holds too little of a decay with a Q of %s: it takes about %s samples to tell frequency and damping.",
		quantity.Count(p.Wish.Memory), quantity.Format(p.Ring.Q(), "", 3), times(2*need)),
		"Use more memory, or mix the ring down to a lower frequency.")
}

func volts(x float64) string { return quantity.Format(x, "V", 3) }

func times(x float64) string { return quantity.Format(x, "", 2) }

func upper(s string) string {
	if s == "" {
		return s
	}
	return string(s[0]-'a'+'A') + s[1:]
}

// compare lists what else there is, each cheaper or better.
func (p *Plan) compare() {
	s := &p.Setting
	slower, shorter := quantity.StepDown(0.9*s.SampleRate), quantity.StepDown(0.9*s.Record)
	if slower > 2.6*p.Ring.DampedFrequency() {
		p.offer(p.again(s.Record, slower, s.Averages))("cheaper", "sample slower", "fewer samples: u grows as the root of the rate")
	}
	if shorter*p.Ring.DecayRate*(1-before) > 0.5 {
		p.offer(p.again(shorter, s.SampleRate, s.Averages))("cheaper", "record for less time", "the tail tells little beyond two to three time constants")
	}
	if s.Averages > 1 {
		p.offer(p.again(s.Record, s.SampleRate, s.Averages/2))("cheaper", "half the averages", "less waiting")
	}
	if rate := quantity.StepDown(float64(p.Wish.Memory) / s.Record); rate > s.SampleRate {
		p.offer(p.again(s.Record, rate, s.Averages))("better", "use the whole memory", "more samples of the same decay")
	}
	if s.Averages*4 <= averagesMost {
		p.offer(p.again(s.Record, s.SampleRate, s.Averages*4))("better", "four times the averages", "half the noise, if shock and trigger repeat")
	}
	p.offer(p.set(s.Record, s.SampleRate, s.Averages, 2*s.FullScale, 2*p.Wish.Amplitude))("better", "shock twice as hard", "twice the ring over the same noise")
	if least := divisions * quantity.StepUp(2*headroom*p.Wish.Amplitude/divisions); p.Wish.Bits > 0 && least < 0.9*s.FullScale {
		p.offer(p.set(s.Record, s.SampleRate, s.Averages, least, p.Wish.Amplitude))("better", "a range of "+volts(least), "smaller steps of the converter")
	}
}

// offer returns what puts a setting on the list, if it is one.
func (p *Plan) offer(s Setting, ok bool) func(verdict, change, reason string) {
	return func(verdict, change, reason string) {
		if ok && (verdict == "cheaper" || s.relative() < p.Setting.relative()*(1-1e-6)) {
			p.Alternatives = append(p.Alternatives, Alternative{s, verdict, change, reason})
		}
	}
}
