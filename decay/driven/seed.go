package driven

import (
	"cmp"
	"math"
	"slices"

	"dieaway/capture"
)

// Starts are sought on a grid of natural frequencies and Q, with the gain by
// linear least squares at each: no hint is needed, and no peak, which a capacitor's
// voltage does not have below Q = 0.7.

const (
	startsKept   = 5
	gridPoints   = 25  // of frequency, over the span of the sweep
	broadQ       = 6.0 // up to here a resonance is wide enough for that grid
	smallestQ    = 0.45
	largestQ     = 1e7
	stepOfGridQ  = 1.5
	sharpestRows = 20.0 // bandwidths in a step between rows that a start may still have
)

// starts returns curves to start from, best first.
func starts(d *rows, part capture.Part) []curve {
	var all []scored
	for _, m := range [][]float64{d.m, d.smoothed()} {
		var these []scored
		for _, c := range candidates(d, m, part) {
			these = append(these, score(d, m, c))
		}
		slices.SortFunc(these, func(a, b scored) int { return cmp.Compare(a.cost, b.cost) })
		all = append(all, distinct(these)...)
	}
	var out []curve
	for _, s := range all {
		out = append(out, s.curve)
	}
	return out
}

type scored struct {
	curve
	cost float64
}

// distinct keeps the best that differ by more than a step of the grid.
func distinct(all []scored) []scored {
	var out []scored
	for _, s := range all {
		known := slices.ContainsFunc(out, func(o scored) bool {
			return math.Abs(math.Log(o.q/s.q)) < 0.5 && math.Abs(o.f0/s.f0-1)*s.q < 0.5
		})
		if !known && finite(s.cost) {
			if out = append(out, s); len(out) == startsKept {
				break
			}
		}
	}
	return out
}

// candidates are the curves of the grid: broad ones over the whole span, and ones
// of any Q at the strongest response.
func candidates(d *rows, m []float64, part capture.Part) []curve {
	var out []curve
	lo, hi := d.f[0], d.f[d.len()-1]
	for q := smallestQ; q < broadQ; q *= stepOfGridQ {
		for i := range gridPoints {
			f := lo * math.Pow(hi/lo, float64(i)/(gridPoints-1))
			out = append(out, curve{across: part, f0: f, q: q})
		}
	}
	at := extreme(m, part)
	peak := d.f[at]
	step := math.Inf(1)
	for _, k := range []int{at - 1, at + 1} {
		if k >= 0 && k < d.len() && d.f[k] != peak {
			step = math.Min(step, math.Abs(d.f[k]-peak))
		}
	}
	for q := 0.75; q < math.Min(largestQ, sharpestRows*peak/step); q *= stepOfGridQ {
		for _, shift := range []float64{0, -0.4, 0.4} {
			c := curve{across: part, f0: peak, q: q}
			if x, ok := c.peakAt(); ok {
				c.f0 = peak / x
			}
			if c.f0 += shift * step; c.f0 > 0 && (shift == 0 || step < 2*c.f0/q) {
				out = append(out, c)
			}
		}
	}
	return out
}

// score is how badly a curve follows m with the best gain.
func score(d *rows, m []float64, c curve) scored {
	var mm, mh, hh float64
	for i := range d.f {
		size, w := c.size(d.f[i]), 1.0
		switch {
		case d.dev != nil:
			w = 1 / sq(d.dev[i])
		case d.decibels && m[i] > 0:
			w = 1 / sq(m[i])
		}
		mm, mh, hh = mm+w*sq(m[i]), mh+w*m[i]*size, hh+w*sq(size)
	}
	c.gain = mh / hh
	return scored{c, mm - mh*c.gain}
}

// peakAt is where the response is greatest (least, for a notch), in parts of f0
// (derived: series circuit); false where it has no peak.
func (c *curve) peakAt() (x float64, ok bool) {
	switch s := 1 - 1/(2*c.q*c.q); {
	case c.across == capture.Resistor || c.across == capture.Both:
		return 1, true
	case !(s > 0):
		return math.NaN(), false
	case c.across == capture.Inductor:
		return 1 / math.Sqrt(s), true
	default:
		return math.Sqrt(s), true
	}
}
