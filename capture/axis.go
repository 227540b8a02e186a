package capture

import (
	"fmt"
	"math"
	"strconv"
)

// A clock is a whole time column: the regression over all its stamps, and what
// can be said of their evenness.
type clock struct {
	n               int
	start, interval float64 // of the least-squares line
	middle          float64 // its middle, in intervals from the start
	slopeU          float64 // standard uncertainty of the interval from the print, s
	off             float64 // bound of the departures from the line, s
	resolution      float64 // of the print, the coarsest in the record, s
	least, most     float64 // steps between neighbours
	zeroSteps       int
	typical         float64 // step: the median of those of the spans
	gaps            []gap
	lost            int // rows missing in the gaps
	spans           []span

	stamps []float64 // all of them, where they are not even
	runs   []run     // the stretches of them without a break
	ruled  bool      // they lie on a line but for samples that are missing
}

// A gap is a step of more than one interval.
type gap struct {
	row  int // of the sample behind it, from 0
	time float64
	lost int
}

// newClock joins the spans of a column.
func newClock(spans []span) *clock {
	c := &clock{spans: spans, least: math.Inf(1), most: math.Inf(-1)}
	digits, exp := uint64(0), math.MaxInt32
	for _, s := range spans {
		digits, exp = max(digits, s.digits), min(exp, s.exp)
		c.n += s.n
	}
	for i := range spans {
		s := &spans[i]
		c.resolution = math.Max(c.resolution, s.resolution(digits, exp))
		c.steps(s.least, s.most, s.zeroSteps, s.steps)
		if i > 0 {
			d := s.first - spans[i-1].last
			zero := 0
			if d == 0 {
				zero = 1
			}
			c.steps(d, d, zero, 1)
		}
	}
	c.regress()
	c.departures()
	c.findGaps()
	return c
}

// stretch makes seconds of stamps that were read in a unit of so many.
func stretch(spans []span, unit float64) {
	for i := range spans {
		s := &spans[i]
		s.unit = unit
		for _, t := range []*float64{&s.first, &s.last, &s.mean, &s.slope, &s.sxy, &s.off, &s.least, &s.most} {
			*t *= unit
		}
		for j := range s.stamps {
			s.stamps[j] *= unit
		}
	}
}

// exact says that the stamps were not rounded: a count of samples is what it is.
func exact(spans []span) {
	for i := range spans {
		spans[i].exp, spans[i].digits = math.MinInt32, 0
	}
}

func (c *clock) steps(least, most float64, zero, n int) {
	if n > 0 {
		c.least, c.most = math.Min(c.least, least), math.Max(c.most, most)
		c.zeroSteps += zero
	}
}

// regress fits the line over all stamps from the sums of the spans; every sum
// is about the span's own middle, so that nothing large is subtracted.
func (c *clock) regress() {
	origin := c.spans[0].first
	middle := float64(c.n-1) / 2
	sum, sxy := 0.0, 0.0
	row := 0
	for _, s := range c.spans {
		d := s.mean - origin
		sum += float64(s.n) * d
		at := float64(row) + float64(s.n-1)/2 - middle
		sxy += s.sxy + float64(s.n)*at*d
		row += s.n
	}
	c.middle = middle
	c.interval = sxy / sumOfSquares(c.n)
	c.slopeU = c.slopeError(sumOfSquares(c.n))
	c.start = origin + sum/float64(c.n) - c.interval*middle
}

// departures bounds the distance of any stamp from the line: the span's own
// plus that of its line, which is largest at an end.
func (c *clock) departures() {
	row := 0
	for _, s := range c.spans {
		half := float64(s.n-1) / 2
		a := math.Abs(s.at(-half) - c.at(row))
		b := math.Abs(s.at(half) - c.at(row+s.n-1))
		c.off = math.Max(c.off, s.off+math.Max(a, b))
		row += s.n
	}
}

func (c *clock) at(row int) float64 { return c.start + float64(row)*c.interval }

// findGaps finds steps that are too long for one interval, rounding of the
// print allowed for. In a print coarser than the interval they cannot be told.
func (c *clock) findGaps() {
	c.typical = c.medianStep()
	limit := 1.5 * c.typical
	if c.resolution > 0.1*c.typical && !c.onGrid() {
		c.typical = (c.spans[len(c.spans)-1].last - c.spans[0].first) / float64(c.n-1)
		limit = 1.5*c.typical + c.resolution
		if c.resolution > c.typical {
			return
		}
	}
	if c.most < limit {
		return
	}
	row := 0
	before := math.NaN()
	for _, s := range c.spans {
		c.step(row, before, s.first, limit)
		if s.most > limit {
			for i := 1; i < len(s.stamps); i++ {
				c.step(row+i, s.stamps[i-1], s.stamps[i], limit)
			}
		}
		row += s.n
		before = s.last
	}
}

func (c *clock) step(row int, before, t, limit float64) {
	if d := t - before; d > limit {
		lost := int(math.Round(d/c.typical)) - 1
		c.gaps = append(c.gaps, gap{row, t, lost})
		c.lost += lost
	}
}

// medianStep is the median step of the first span that has enough of them.
func (c *clock) medianStep() float64 {
	for _, s := range c.spans {
		if s.even {
			return s.slope
		}
		if len(s.stamps) > 8 || len(c.spans) == 1 {
			return medianStep(s.stamps)
		}
	}
	return c.interval
}

// onGrid reports stamps printed in whole intervals, all but one or two steps
// being the same: a row is missing there. A print that rounds leaves such
// steps again and again.
func (c *clock) onGrid() bool {
	odd := 0
	for i, s := range c.spans {
		if s.even && s.most-s.least > 0.5*c.resolution {
			return false
		}
		odd += countOdd(s.stamps, c.typical, c.resolution)
		if i > 0 && math.Abs(s.first-c.spans[i-1].last-c.typical) > 0.5*c.resolution {
			odd++
		}
	}
	return c.typical > 0 && odd > 0 && odd <= 2 && c.n > 20
}

// even reports that a straight line gives every stamp to within what was
// printed.
func (c *clock) even() bool {
	return len(c.gaps) == 0 && c.off <= math.Max(c.resolution, negligible*c.interval)
}

// slopeError is the standard uncertainty of the interval from the rounding of the
// stamps, s: q/sqrt(12) each, sxx being the sum of the squares of their numbers
// about the middle; of those that share a printed time the errors go together,
// and count as one.
func (c *clock) slopeError(sxx float64) float64 {
	return c.resolution / math.Sqrt(12*sxx) * math.Sqrt(math.Max(1, c.resolution/c.interval))
}

// times returns every stamp; a span kept as its line is written out.
func (c *clock) times() []float64 {
	t := make([]float64, 0, c.n)
	for i := range c.spans {
		s := &c.spans[i]
		if !s.even {
			t = append(t, s.stamps...)
			s.stamps = nil
			continue
		}
		half := float64(s.n-1) / 2
		for j := range s.n {
			v := s.at(float64(j) - half)
			if n := len(t); n > 0 && v < t[n-1] {
				v = t[n-1] // two lines may meet within their rounding
			}
			t = append(t, v)
		}
	}
	return t
}

// shorten returns the number with the fewest digits within tol of v: the
// regression over 0, 0.2, 0.4 … gives 0.2 and not 0.19999999999999998.
func shorten(v, tol float64) float64 {
	tol = math.Max(tol, 1e-13*math.Abs(v))
	for digits := 1; digits < 16; digits++ {
		s, err := strconv.ParseFloat(strconv.FormatFloat(v, 'e', digits-1, 64), 64)
		if err == nil && math.Abs(s-v) <= tol {
			return s
		}
	}
	return v
}

// seconds writes a time for people, in the unit that suits it.
func seconds(t float64) string {
	a := math.Abs(t)
	if a == 0 {
		return "0 s"
	}
	for _, u := range []struct {
		name string
		size float64
	}{{"s", 1}, {"ms", 1e-3}, {"µs", 1e-6}, {"ns", 1e-9}, {"ps", 1e-12}} {
		if a >= u.size*0.9999999 || u.name == "ps" {
			return fmt.Sprintf("%.6g %s", t/u.size, u.name)
		}
	}
	return ""
}
