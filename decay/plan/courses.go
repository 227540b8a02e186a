package plan

import (
	"math"

	"dieaway/decay/quantity"
)

// Courses are what other records would give, for charts: each weighed as the plan's own.
type Courses struct {
	// Record are record lengths at the plan's sample rate, as far as the memory
	// reaches, RecordSteps those of them that scopes have.
	Record, RecordSteps []Setting
	// Full are record lengths whose samples fill the memory.
	Full []Setting
	// Rate are sample rates at the plan's record length, as far as the memory reaches,
	// RateSteps those of them that scopes have.
	Rate, RateSteps []Setting
}

// The stretch of a decay, in time constants, that courses cover.
const courseFrom, courseTo = 0.3, 8.0

// Courses returns courses of up to n settings each; nil where the plan expects nothing.
func (p *Plan) Courses(n int) *Courses {
	s := &p.Setting
	if s.Expected == nil {
		return nil
	}
	tau, memory := p.Ring.TimeConstant(), float64(p.Wish.Memory)*(1+1e-9)
	shortest, longest := courseFrom*tau/(1-before), math.Max(courseTo*tau/(1-before), 1.2*s.Record)
	slowest := 2.1 * p.Ring.DampedFrequency() // slower samples do not tell the frequency
	fits := func(record float64) bool { return record*s.SampleRate <= memory }
	c := &Courses{}
	add := func(to *[]Setting, record, rate float64) {
		if other, ok := p.again(record, rate, s.Averages); ok {
			*to = append(*to, other)
		}
	}
	for _, record := range even(shortest, longest, n) {
		if fits(record) {
			add(&c.Record, record, s.SampleRate)
		}
		if rate := float64(p.Wish.Memory) / record; rate > slowest {
			add(&c.Full, record, rate)
		}
	}
	for _, record := range steps(shortest, longest) {
		if fits(record) {
			add(&c.RecordSteps, record, s.SampleRate)
		}
	}
	fastest := math.Max(s.SampleRate, memory/s.Record)
	for _, l := range even(math.Log(slowest), math.Log(fastest), n) {
		add(&c.Rate, s.Record, math.Exp(l))
	}
	for _, rate := range steps(slowest, fastest) {
		add(&c.RateSteps, s.Record, rate)
	}
	return c
}

// even returns n numbers from lo to hi.
func even(lo, hi float64, n int) (out []float64) {
	for i := range n {
		out = append(out, lo+(hi-lo)*float64(i)/float64(n-1))
	}
	return out
}

// steps returns the steps of 1-2-5 from lo to hi.
func steps(lo, hi float64) (out []float64) {
	for x := quantity.StepUp(lo); x <= hi*(1+1e-9); x = quantity.StepUp(1.1 * x) {
		out = append(out, x)
	}
	return out
}
