// Package plan says what to set on a scope so that a ring-down will give its Q with
// a wanted uncertainty: record length, sample rate, averages, vertical range. It
// weighs settings by the exact bound of [decay.Prospect] and never promises less.
package plan

import (
	"errors"
	"fmt"
	"math"

	"dieaway/decay"
	"dieaway/decay/circuit"
)

// A Wish is what is expected of a circuit and what is wanted to be known.
type Wish struct {
	// NaturalFrequency in Hz and Q of the circuit by itself; with a Bench whose
	// components are complete either may be 0.
	NaturalFrequency, Q float64
	// Amplitude of the ring in V when the source lets go.
	Amplitude float64
	// Noise before the converter, standard deviation in V; Bits of the converter, and
	// its FullScale from end to end in V. Noise or Bits must be given; a FullScale of
	// 0 is chosen.
	Noise, FullScale float64
	Bits             int
	// Want is the wanted relative standard uncertainty of Q; 0 stands for one per mille.
	Want float64
	// Memory is how many samples a record may have; 0 stands for 100,000.
	Memory int
	// Bench says what loads the circuit, nil for nothing.
	Bench *circuit.Bench
}

// A Setting is one way to set the scope, and what it will give.
type Setting struct {
	// Record is the whole length in s, a tenth of it before the trigger; SampleRate in Hz.
	Record, SampleRate float64
	Samples, Averages  int
	// FullScale is the vertical range from end to end in V.
	FullScale float64
	// Expected are the quantities with the smallest uncertainties that any method can reach.
	Expected *decay.Quantities
	// Noise is what is left per sample, in V, of noise and converter after averaging.
	Noise float64
	// TimeConstants and Cycles of decay in the record, and samples in a cycle.
	TimeConstants, Cycles, PerCycle float64
}

// Pretrigger returns the time before the trigger in s.
func (s *Setting) Pretrigger() float64 { return before * s.Record }

// before is the share of a record before the trigger: one division of ten.
const before = 0.1

// An Alternative is another setting and what speaks for it.
type Alternative struct {
	Setting
	// Verdict is "cheaper" or "better"; Change and Reason are phrases.
	Verdict, Change, Reason string
}

// A Plan is what to set, what to expect, and what else there is.
type Plan struct {
	Wish Wish
	// Ring is the circuit as it will ring with source and probe connected.
	Ring circuit.Resonance
	// Forecast is what source and probe do; nil without a bench file that tells.
	Forecast *circuit.Forecast
	Setting  Setting
	// Met is false when no setting reaches what is wanted; Setting is the best then,
	// and its Expected nil where the memory is too small for any.
	Met          bool
	Alternatives []Alternative
	// Settle is how long the source must stand still before it lets go, in s, and
	// EdgeMost the longest fall of the source, in s, that takes less than one percent
	// off the ring.
	Settle, EdgeMost float64
	Findings         []decay.Finding
}

// Make finds the settings for a wish. Its error says what is wrong with the wish;
// one that no setting meets is a Plan that is not Met, with a fault that says so.
func Make(w Wish) (*Plan, error) {
	if w.Want == 0 {
		w.Want = 1e-3
	}
	if w.Memory == 0 {
		w.Memory = 100_000
	}
	p := &Plan{Wish: w}
	if err := p.check(); err != nil {
		return nil, err
	}
	if err := p.load(); err != nil {
		return nil, err
	}
	p.chooseRange()
	p.choose()
	p.settle()
	if p.Setting.Expected == nil {
		p.tooSmall()
		return p, nil
	}
	p.judge()
	p.compare()
	return p, nil
}

func (p *Plan) check() error {
	for _, v := range []struct {
		name string
		x    float64
	}{{"natural frequency", p.Wish.NaturalFrequency}, {"Q", p.Wish.Q}, {"noise", p.Wish.Noise}, {"full scale", p.Wish.FullScale}, {"amplitude", p.Wish.Amplitude}, {"wanted uncertainty", p.Wish.Want}} {
		if !(v.x >= 0) || math.IsInf(v.x, 0) {
			return fmt.Errorf("the %s is not a number above zero", v.name)
		}
	}
	switch {
	case p.Wish.Amplitude == 0:
		return errors.New("the expected amplitude is not given")
	case p.Wish.Noise == 0 && p.Wish.Bits == 0:
		return errors.New("neither noise nor bits of the converter are given: nothing would limit the uncertainty")
	case p.Wish.Bits < 0 || p.Wish.Bits > 32:
		return fmt.Errorf("a converter of %d bits: expected 1 to 32", p.Wish.Bits)
	case p.Wish.Want >= 0.5:
		return errors.New("a relative uncertainty of 50 % or more is nothing to plan for")
	case p.Wish.Memory < memoryLeast:
		return fmt.Errorf("a memory of %d samples is too small for a decay: expected %d or more", p.Wish.Memory, memoryLeast)
	case p.Wish.Bench == nil && (p.Wish.NaturalFrequency == 0 || p.Wish.Q == 0):
		return errors.New("natural frequency and Q are not given, and no bench file tells them")
	}
	return nil
}

// memoryLeast is the smallest memory that a plan is made for.
const memoryLeast = 50

// load finds how the circuit rings as it will be connected.
func (p *Plan) load() error {
	f0, q := p.Wish.NaturalFrequency, p.Wish.Q
	if p.Wish.Bench != nil {
		f, err := p.Wish.Bench.Forecast(f0, q)
		switch {
		case err == nil:
			p.Forecast, p.Ring = f, f.Loaded
		case f0 == 0 || q == 0:
			return fmt.Errorf("%s: %w", p.Wish.Bench.File, err)
		default:
			p.note(err.Error())
		}
	}
	if p.Forecast == nil {
		p.Ring = circuit.Resonance{NaturalFrequency: f0, DecayRate: math.Pi * f0 / q}
	}
	if !(p.Ring.Q() > 0.5) {
		return fmt.Errorf("with a Q of %.3g the circuit does not ring: there is no decay to record", p.Ring.Q())
	}
	return nil
}

// timebase is the relative uncertainty of the scope's clock, 0 when nobody told.
func (p *Plan) timebase() float64 {
	if p.Wish.Bench == nil {
		return 0
	}
	return p.Wish.Bench.RingDown.TimebaseU
}
