package decay

import (
	"fmt"
	"math"
	"slices"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

var sprintf = fmt.Sprintf

const (
	stepSamples = 1 << 13 // samples that tell the steps of a converter
	glitchSigma = 7       // departure that makes a sample an outlier
	glitchShare = 0.02    // share of the samples beyond which it is the model that is wrong
	levelsTail  = 4       // steps of a converter without dither at which the tail is cut
	manySteps   = 50      // amplitude in steps from which rounding hardly moves the result
	ditherLeast = 0.4     // noise in steps from which a converter counts as dithered
)

// stepOf estimates the step of the converter: the smallest difference between
// levels that the samples take, provided that all others are multiples of it; 0
// when the samples know no steps.
func stepOf(y []float64) float64 {
	levels := slices.Clone(y[:min(len(y), stepSamples)])
	levels = slices.DeleteFunc(levels, math.IsNaN)
	slices.Sort(levels)
	levels = slices.Compact(levels)
	if len(levels) < 2 {
		return 0
	}
	span := levels[len(levels)-1] - levels[0]
	least := math.Inf(1)
	for i := 1; i < len(levels); i++ {
		if d := levels[i] - levels[i-1]; d > 1e-7*span {
			least = math.Min(least, d)
		}
	}
	for i := 1; i < len(levels); i++ {
		// Printed values are rounded: a tenth of a step is no new level.
		if d := (levels[i] - levels[i-1]) / least; d > 0.1 && math.Abs(d-math.Round(d)) > 0.1 {
			return 0
		}
	}
	return least
}

// without returns s with the samples listed taken out, in a copy.
func (s series) without(list []int) series {
	if len(list) == 0 {
		return s
	}
	out := s
	out.y = slices.Clone(s.y)
	out.gaps = true
	for _, i := range list {
		out.y[i] = math.NaN()
	}
	return out
}

// glitches returns the samples of the gate that stand alone far off the fit.
func (g *gate) glitches(s series) []int {
	window := s.slice(g.first, g.last)
	sample := window.thinned(noiseSamples)
	limit := glitchSigma * robustSigma(g.fit.residuals(sample, 0))
	if !(limit > 0) {
		return nil
	}
	var out []int
	for _, part := range g.unchecked(limit) {
		out = append(out, g.far(window, part[0], part[1], limit)...)
	}
	if float64(len(out)) > math.Max(1, glitchShare*float64(window.len())) {
		return nil
	}
	return out
}

// far returns the samples first to last-1 of the record that depart from the fit by
// more than limit; window is that of the gate.
func (g *gate) far(window series, first, last int, limit float64) (out []int) {
	halves(last-first, func(from, to int) func() {
		var own []int
		g.fit.departing(window, first+from-g.first, first+to-g.first, limit, func(i int, _ float64) bool {
			own = append(own, g.first+i)
			return true
		})
		return func() { out = append(out, own...) }
	})
	return out
}

func glitchFinding(n int) Finding {
	message := sprintf("%s samples lie far off the decay, more than %d times the noise; they were left out of the fit.", quantity.Count(n), glitchSigma)
	if n == 1 {
		message = sprintf("One sample lies far off the decay, more than %d times the noise; it was left out of the fit.", glitchSigma)
	}
	return note(capture.OutlierSamples, message,
		"Look at the residual: single spikes come from interference or a converter that slips.")
}

// cutCoarseTail cuts the tail of a gate at a few steps of a converter whose steps
// no noise blurs: below that the rounding follows the signal and pulls the rate.
func (g *gate) cutCoarseTail(s series) {
	g.coarse = s.step > 0 && g.fit.a > 0 && g.lateRMS() < ditherLeast*s.step
	if !g.coarse {
		return
	}
	if n := math.Log(g.fit.size()/(levelsTail*s.step)) / g.fit.a; n > 2*samplesLeast && n < float64(g.last-g.first) {
		g.last, g.cutCoarse = g.first+int(n), true
		g.refit(s, coarse)
	}
}

func (g *gate) coarseFinding(step float64) Finding {
	size := g.fit.size()
	message := sprintf("The amplitude is %s steps of the converter and what is left only %s: no noise blurs the steps; the tail below %d steps was left out.", figure(size/step, 3), figure(g.lateRMS()/step, 2), levelsTail)
	remedy := "Use a smaller vertical range or more bits; noise of half a step would blur the levels."
	if size > manySteps*step {
		return note(capture.CoarseLevels, message, remedy)
	}
	return warning(capture.CoarseLevels, message, remedy)
}
