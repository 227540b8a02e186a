package capture

import (
	"math"
	"slices"
)

// A span is the time column of one chunk. Stamps that lie on a straight line
// to within their printed resolution are kept as that line, so that a deep
// record costs no memory for its time; all others are kept.
type span struct {
	n           int
	first, last float64 // stamps, in seconds
	mean, slope float64 // of the least-squares line: t(i) = mean + slope*(i - (n-1)/2)
	sxy         float64 // sum of (i - (n-1)/2) * (t - mean)
	off         float64 // largest departure of a stamp from the line

	exp    int    // power of ten of the last printed digit, the least of all stamps
	digits uint64 // largest mantissa printed: tells the number of significant digits

	steps      int     // steps between neighbours
	least      float64 // smallest and largest step
	most       float64
	stamps     []float64 // nil once the line stands for them
	zeroSteps  int
	sumSquares float64 // of the departures of the stamps from the line
}

// begin starts a span in the room of a buffer.
func (s *span) begin(room []float64) {
	*s = span{exp: math.MaxInt32, stamps: room[:0]}
}

// add takes the stamp of row i: t = d * 10^shift, in seconds.
func (s *span) add(t float64, d decimal, shift, i int) {
	if e := d.exp + shift; e < s.exp {
		s.exp = e
	}
	if d.mant > s.digits {
		s.digits = d.mant
	}
	s.put(t, i)
}

// addClock takes a clock time, counted from the whole second zero.
func (s *span) addClock(t stamp, zero int64, i int) {
	s.exp = min(s.exp, -t.places)
	s.put(t.since(zero), i)
}

// put sets the stamp of row i; a row that was read again replaces it.
func (s *span) put(t float64, i int) {
	if i < len(s.stamps) {
		s.stamps[i] = t
	} else {
		s.stamps = append(s.stamps, t)
	}
}

// finish sums the n stamps up.
func (s *span) finish(n int) {
	s.stamps = s.stamps[:n]
	if s.n = n; n == 0 {
		return
	}
	s.first, s.last = s.stamps[0], s.stamps[n-1]
	s.line()
	s.depart()
}

// line fits t(i) = mean + slope*(i - (n-1)/2), in steps from the first stamp so
// that a late start costs no digits.
func (s *span) line() {
	half := float64(s.n-1) / 2
	sum, sxy := 0.0, 0.0
	s.least, s.most = math.Inf(1), math.Inf(-1)
	before := s.first
	for i, t := range s.stamps {
		d := t - s.first
		sum += d
		sxy += (float64(i) - half) * d
		if i > 0 {
			step := t - before
			if step < s.least {
				s.least = step
			}
			if step > s.most {
				s.most = step
			}
			if step == 0 {
				s.zeroSteps++
			}
		}
		before = t
	}
	s.steps = s.n - 1
	s.mean = s.first + sum/float64(s.n)
	s.sxy = sxy
	if s.n > 1 {
		s.slope = sxy / sumOfSquares(s.n)
	}
}

// sumOfSquares of i - (n-1)/2 for i = 0 … n-1.
func sumOfSquares(n int) float64 {
	f := float64(n)
	return f * (f*f - 1) / 12
}

func (s *span) depart() {
	half := float64(s.n-1) / 2
	for i, t := range s.stamps {
		d := math.Abs(t - s.at(float64(i)-half))
		s.sumSquares += d * d
		if d > s.off {
			s.off = d
		}
	}
}

func (s *span) at(fromMiddle float64) float64 { return s.mean + s.slope*fromMiddle }

// release gives the buffer of stamps back when the line stands for them:
// departures stay within the rounding of the print, or are negligible against
// the interval.
func (s *span) release() []float64 {
	tolerance := math.Max(0.55*s.resolution(s.digits, s.exp), negligible*s.slope)
	if s.n < 3 || s.off > tolerance || s.oddSteps() {
		if s.n == 0 {
			return s.stamps
		}
		return nil
	}
	room := s.stamps
	s.stamps = nil
	return room
}

// oddSteps reports one or two steps unlike all others in a coarse print: a
// missing row that the rounding of the print would hide.
func (s *span) oddSteps() bool {
	q := s.resolution(s.digits, s.exp)
	if s.most-s.least < 0.5*q || q < 0.1*s.slope {
		return false
	}
	return countOdd(s.stamps, medianStep(s.stamps), q) <= 2
}

// countOdd counts the steps that differ from the typical one by more than half
// the resolution q.
func countOdd(stamps []float64, typical, q float64) int {
	odd := 0
	for i := 1; i < len(stamps); i++ {
		if math.Abs(stamps[i]-stamps[i-1]-typical) > 0.5*q {
			odd++
		}
	}
	return odd
}

// medianStep is the median of the steps between neighbours.
func medianStep(stamps []float64) float64 {
	if len(stamps) < 2 {
		return 0
	}
	steps := make([]float64, len(stamps)-1)
	for i := range steps {
		steps[i] = stamps[i+1] - stamps[i]
	}
	slices.Sort(steps)
	return steps[len(steps)/2]
}

// negligible is the departure from even time, in intervals, that no fit can
// tell: at 5 samples a cycle it is 0.00006 cycles.
const negligible = 3e-4

// resolution is the step between neighbouring printable times near the end of
// the span that is larger in magnitude. A column printed to fixed places has
// the step of its last place; one printed to significant digits, which shows
// trailing zeros or drops them, has that of the digits there.
func (s *span) resolution(digits uint64, exp int) float64 {
	t := math.Max(math.Abs(s.first), math.Abs(s.last))
	q := math.Pow10(exp)
	if digits > 0 && t > 0 {
		shown := math.Floor(math.Log10(float64(digits))) + 1
		q = math.Max(q, math.Pow(10, math.Floor(math.Log10(t))+1-shown))
	}
	// Nothing is finer than the float64 itself.
	return math.Max(q, 4*(math.Nextafter(t, math.Inf(1))-t))
}
