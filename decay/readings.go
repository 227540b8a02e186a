package decay

import (
	"math"

	"dieaway/decay/quantity"
)

const (
	readingSamples = 6   // samples per cycle below which nothing is read by eye
	readingPeaks   = 400 // extremes read; more are thinned out evenly
	readingNoise   = 5   // an extreme must stand this many of its own noise above the baseline
)

// unread is the reading of a record that allows none.
func unread() Readings {
	nan := math.NaN()
	return Readings{
		DampedFrequency: quantity.New(nan, nan, "Hz"),
		LogDecrement:    quantity.New(nan, nan, ""),
		Q:               quantity.New(nan, nan, ""),
		TimeConstant:    quantity.New(nan, nan, "s"),
		Baseline:        nan,
	}
}

// reader reads a decay as a careful person does, from extremes and crossings.
type reader struct {
	s       series
	period  float64 // s; tells only where to look
	width   int     // samples on either side that a local fit takes
	sigma   float64 // noise of one sample
	peaks   []extreme
	level   float64 // baseline
	uLevel  float64
	u       float64 // noise of one extreme
	bend    float64 // relative error of an extreme: the ring is no parabola
	skew    float64 // error of a crossing, s: nor is it a straight line
	spacing int     // half cycles from one extreme read to the next
}

// extreme is a maximum (sign +1) or minimum (-1) and the half cycle it lies in.
type extreme struct {
	t, v, sign float64
	half       float64
}

// read takes the classical readings of a decay whose period is roughly known,
// with noise sigma a sample: log decrement and Q from the peaks, damped frequency
// from the crossings of the baseline between them.
func read(s series, period, sigma float64) Readings {
	out := unread()
	spc := period / s.dt
	if !(spc >= readingSamples) || !(sigma > 0) {
		return out
	}
	r := &reader{s: s, period: period, width: max(1, int(spc/8)), sigma: sigma}
	r.u = sigma * vertexNoise(r.width)
	r.interpolation(spc)
	if !r.findPeaks() || !r.findBaseline() {
		return out
	}
	r.dropFaint()
	out.Baseline = r.level
	for _, p := range r.peaks {
		out.Peaks = append(out.Peaks, Point{p.t, p.v})
	}
	slope, ok := r.decrement(&out)
	if ok {
		r.crossings(&out, slope)
	}
	return out
}

// interpolation estimates what the local fits miss, from the first term of the
// Taylor series that they leave out over the angle theta on either side; part of
// it varies with where the samples fall.
func (r *reader) interpolation(spc float64) {
	theta := 2 * math.Pi * float64(r.width) / spc
	r.bend = 0.1 * theta * theta * theta * theta / 24
	r.skew = 0.1 * theta * theta / 2 * r.s.dt
}

// vertexNoise is the standard deviation of a parabola's value at its middle, by
// least squares over 2m+1 points of unit noise.
func vertexNoise(m int) float64 {
	n := float64(2*m + 1)
	return math.Sqrt(3 * (3*n*n - 7) / (4 * n * (n*n - 4)))
}

// findPeaks walks from extreme to extreme, half a period at a time.
func (r *reader) findPeaks() bool {
	first, ok := r.firstPeak()
	if !ok {
		return false
	}
	end := r.s.time(r.s.len() - 1)
	total := int(2 * (end - first.t) / r.period)
	r.spacing = 1
	if total > readingPeaks {
		r.spacing = (total/readingPeaks)&^1 + 1 // odd: maxima and minima in turn
	}
	r.peaks = append(r.peaks, first)
	last := first
	for k := r.spacing; k <= total; k += r.spacing {
		sign := first.sign
		if k%2 == 1 {
			sign = -sign
		}
		t, v, ok := r.vertex(last.t+(float64(k)-last.half)*r.period/2, sign)
		if !ok {
			break
		}
		last = extreme{t, v, sign, float64(k)}
		r.peaks = append(r.peaks, last)
	}
	return len(r.peaks) >= 3
}

// firstPeak is the first maximum or minimum with room on both sides.
func (r *reader) firstPeak() (extreme, bool) {
	start := r.s.time(0)
	reach := float64(r.width) * r.s.dt
	step := r.period / 16
	best, found := extreme{}, false
	for t := start + reach; t < start+reach+0.75*r.period; t += step {
		for _, sign := range []float64{1, -1} {
			tv, v, ok := r.vertex(t, sign)
			if ok && math.Abs(tv-t) <= step && tv >= start+reach {
				best, found = extreme{t: tv, v: v, sign: sign}, true
			}
		}
		if found {
			return best, true
		}
	}
	return best, false
}

// vertex fits a parabola around t, moves to its vertex and fits again. sign tells
// whether a maximum (+1) or a minimum (-1) is wanted.
func (r *reader) vertex(t, sign float64) (tv, v float64, ok bool) {
	from := t
	for range 3 {
		c, ok := r.local(t, 2)
		if !ok || c[2]*sign >= 0 {
			return 0, 0, false
		}
		shift := -c[1] / (2 * c[2])
		if math.Abs(shift) > r.period/4 {
			return 0, 0, false
		}
		t += shift
		v = c[0] - c[1]*c[1]/(4*c[2])
		if math.Abs(shift) < r.s.dt/2 {
			break
		}
	}
	return t, v, math.Abs(t-from) < r.period/3
}

// local fits a polynomial of degree 1 or 2 in time, about t, to the samples within
// width of it. It needs all of the window to lie in the record.
func (r *reader) local(t float64, degree int) (c [3]float64, ok bool) {
	mid := r.s.nearest(t)
	if mid-r.width < 0 || mid+r.width >= r.s.len() {
		return c, false
	}
	var m [5]float64 // moments of x
	var b [3]float64
	for i := mid - r.width; i <= mid+r.width; i++ {
		y := r.s.y[i]
		if math.IsNaN(y) {
			continue
		}
		x := (r.s.time(i) - t) / r.s.dt
		p := 1.0
		for k := range 5 {
			m[k] += p
			if k < 3 {
				b[k] += p * y
			}
			p *= x
		}
	}
	c, ok = polynomial(m, b, degree)
	c[1] /= r.s.dt
	c[2] /= r.s.dt * r.s.dt
	return c, ok
}

// polynomial solves the normal equations of degree 1 or 2.
func polynomial(m [5]float64, b [3]float64, degree int) (c [3]float64, ok bool) {
	if degree == 1 {
		det := m[0]*m[2] - m[1]*m[1]
		if !(math.Abs(det) > 1e-12*m[0]*m[2]) {
			return c, false
		}
		return [3]float64{(b[0]*m[2] - b[1]*m[1]) / det, (m[0]*b[1] - m[1]*b[0]) / det}, true
	}
	d0 := m[2]*m[4] - m[3]*m[3]
	d1 := m[1]*m[4] - m[2]*m[3]
	d2 := m[1]*m[3] - m[2]*m[2]
	det := m[0]*d0 - m[1]*d1 + m[2]*d2
	if !(math.Abs(det) > 1e-12*m[0]*m[2]*m[4]) {
		return c, false
	}
	e1 := m[0]*m[4] - m[2]*m[2]
	e2 := m[0]*m[3] - m[1]*m[2]
	e3 := m[0]*m[2] - m[1]*m[1]
	return [3]float64{
		(b[0]*d0 - b[1]*d1 + b[2]*d2) / det,
		(-b[0]*d1 + b[1]*e1 - b[2]*e2) / det,
		(b[0]*d2 - b[1]*e2 + b[2]*e3) / det,
	}, true
}

// findBaseline takes the level about which three successive extremes shrink in one
// ratio, c = (x1 x3 - x2^2)/(x1 + x3 - 2 x2), weighted over all triples.
func (r *reader) findBaseline() bool {
	sw, sum := 0.0, 0.0
	for i := 2; i < len(r.peaks); i++ {
		x1, x2, x3 := r.peaks[i-2].v, r.peaks[i-1].v, r.peaks[i].v
		d := x1 + x3 - 2*x2
		if math.Abs(d) < 4*readingNoise*r.u {
			break
		}
		// The derivatives of c give its noise.
		c := (x1*x3 - x2*x2) / d
		g1, g2, g3 := (x3-c)/d, 2*(c-x2)/d, (x1-c)/d
		w := 1 / (g1*g1 + g2*g2 + g3*g3)
		sw += w
		sum += w * c
	}
	if sw == 0 {
		return false
	}
	r.level = sum / sw
	// Neighbouring triples share extremes: at most three times the variance.
	r.uLevel = r.u * math.Sqrt(3/sw)
	return true
}

// dropFaint ends the row of extremes at the first that the noise could have made.
func (r *reader) dropFaint() {
	for i, p := range r.peaks {
		if (p.v-r.level)*p.sign < readingNoise*r.u {
			r.peaks = r.peaks[:i]
			return
		}
	}
}

// nearest returns the index of the sample nearest to t, which may lie outside.
func (s series) nearest(t float64) int {
	if s.times == nil {
		return int(math.Round((t - s.t0) / s.dt))
	}
	lo, hi := 0, len(s.times)-1
	for lo < hi {
		mid := (lo + hi + 1) / 2
		if s.times[mid] <= t {
			lo = mid
		} else {
			hi = mid - 1
		}
	}
	if lo+1 < len(s.times) && s.times[lo+1]-t < t-s.times[lo] {
		return lo + 1
	}
	return lo
}
