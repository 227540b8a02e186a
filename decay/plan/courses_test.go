package plan

import (
	"math"
	"testing"

	"dieaway/decay/quantity"
)

// relatives are the relative uncertainties of Q of a course.
func relatives(all []Setting) (out []float64) {
	for i := range all {
		out = append(out, all[i].relative())
	}
	return out
}

// TestCourses holds the courses against what is derived for many samples and cycles:
// the uncertainty goes down with the root of the sample rate; at a fixed rate a longer
// record tells more, by less and less; at a fixed memory the best record has u = 2.0175
// time constants.
func TestCourses(t *testing.T) {
	p := made(t, Wish{NaturalFrequency: 125e3, Q: 200, Amplitude: 1, Noise: 5e-3, Want: 1e-3})
	c := p.Courses(200)
	for i := range c.Rate {
		s, first := &c.Rate[i], &c.Rate[0]
		if i > 60 { // where a cycle has many samples
			near(t, "u by root of the rate", s.relative()*math.Sqrt(s.SampleRate), first.relative()*math.Sqrt(first.SampleRate), 0.03)
		}
		if s.Record != p.Setting.Record || float64(s.Samples) > float64(p.Wish.Memory) {
			t.Errorf("%+v", s)
		}
	}
	record := relatives(c.Record)
	for i := range record {
		if i > 0 && record[i] > record[i-1]*(1+1e-3) {
			t.Errorf("%g time constants tell less than %g: %g, %g", c.Record[i].TimeConstants, c.Record[i-1].TimeConstants, record[i], record[i-1])
		}
	}
	near(t, "the last of the record tells nothing", record[len(record)-1], record[len(record)-20], 1e-2)
	best := 0
	full := relatives(c.Full)
	for i := range full {
		if full[i] < full[best] {
			best = i
		}
	}
	near(t, "time constants of the best record that fills the memory", c.Full[best].TimeConstants, 2.0175, 0.05)
	near(t, "samples", float64(c.Full[best].Samples), float64(p.Wish.Memory), 1e-4)
	near(t, "first", c.Record[0].TimeConstants, courseFrom, 1e-6)
}

// TestCourseSteps: the plan's own setting is among the steps of both courses, with
// its own uncertainty; those steps are 1, 2 and 5.
func TestCourseSteps(t *testing.T) {
	for _, w := range []Wish{
		{NaturalFrequency: 125e3, Q: 40, Amplitude: 1, Noise: 8e-3, Bits: 8, Memory: 10000, Want: 2e-3},
		{NaturalFrequency: 125e3, Q: 0.7, Amplitude: 1, Noise: 1e-3, Want: 5e-3},
		{NaturalFrequency: 4e6, Q: 5e4, Amplitude: 1, Noise: 2e-3, Memory: 1_000_000, Want: 1e-9},
	} {
		p := made(t, w)
		c := p.Courses(50)
		found := 0
		for _, all := range [][]Setting{c.RecordSteps, c.RateSteps} {
			for i := range all {
				s := &all[i]
				near(t, "record", quantity.StepUp(s.Record), s.Record, 1e-9)
				near(t, "rate", quantity.StepUp(s.SampleRate), s.SampleRate, 1e-9)
				if s.Record == p.Setting.Record && s.SampleRate == p.Setting.SampleRate {
					found++
					near(t, "own uncertainty", s.relative(), p.Setting.relative(), 1e-12)
				}
			}
		}
		if found != 2 {
			t.Errorf("%+v: the plan is among %d of the two courses", w, found)
		}
	}
	if p := made(t, Wish{NaturalFrequency: 125e3, Q: 4e5, Amplitude: 1, Noise: 1e-3}); p.Courses(50) != nil {
		t.Error("courses of a plan that expects nothing")
	}
}
