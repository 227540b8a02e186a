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

	steps     int     // steps between neighbours
	least     float64 // smallest and largest step
	most      float64
	stamps    []float64 // nil once the line stands for them
	zeroSteps int
	rows      int         // room wanted for the stamps
	run       progression // of all stamps so far, as long as it lasts
	even      bool        // the line stands for all stamps
	period    int64       // of clock times without a date, in seconds
	wraps     int64       // periods that have passed
	unit      float64     // seconds for which a printed 1 stands, where they are none; else 0
}

// An instant is one stamp: a printed number, its power of ten that of seconds;
// or, when real is set, the time itself and the power of ten it is printed to.
type instant struct {
	d    decimal
	real bool
	time float64 // in seconds
}

// instant is the stamp counted from the whole second zero.
func (s stamp) instant(zero int64) instant {
	return instant{real: true, time: s.since(zero), d: decimal{exp: -int(s.places)}}
}

// anew is the zero that the next clock time without a date counts from: one that
// is back by nearly a day, or without hours by nearly an hour, has begun anew.
func (s *span) anew(t stamp, zero int64) int64 {
	s.period = int64(t.period)
	if s.n > 0 {
		s.wraps += wraps(s.last, t.since(zero-s.wraps*s.period), s.period)
	}
	return zero - s.wraps*s.period
}

// wraps is the number of periods to add to a clock time for it to come shortly
// after the one before; 0 where that is not so.
func wraps(before, t float64, period int64) int64 {
	if !(t < before) {
		return 0
	}
	n := math.Ceil((before - t) / float64(period))
	if t+n*float64(period)-before > float64(period)/24 {
		return 0
	}
	return int64(n)
}

// follows reports whether the span comes after the time before, and puts it
// behind the midnights in between.
func (s *span) follows(before float64) bool {
	if s.period > 0 {
		n := wraps(before, s.first, s.period)
		s.wraps += n
		shift := float64(n * s.period)
		s.first += shift
		s.last += shift
		s.mean += shift
		for i := range s.stamps {
			s.stamps[i] += shift
		}
	}
	return s.first >= before
}

// seconds is the time as a number.
func (t *instant) seconds() float64 {
	if t.real {
		return t.time
	}
	return t.d.float(0, nil, 0)
}

// begin starts a span of up to rows stamps, in the room of a buffer.
func (s *span) begin(room []float64, rows int) {
	*s = span{exp: math.MaxInt32, stamps: room[:0], rows: rows}
}

// add takes the next stamp, and reports whether it is in order.
func (s *span) add(t *instant) bool {
	if s.n == s.run.n && s.run.starts(t) {
		s.n++
		s.run.n++
		return true
	}
	if len(s.stamps) == 0 {
		s.writeOut()
	}
	s.exp = min(s.exp, t.d.exp)
	s.digits = max(s.digits, t.d.mant)
	v, before := t.seconds(), s.last
	s.stamps = append(s.stamps, v)
	s.n++
	s.last = v
	return s.n == 1 || v >= before
}

// writeOut turns the progression so far into stamps: the next one breaks it.
func (s *span) writeOut() {
	if cap(s.stamps) < s.rows {
		s.stamps = make([]float64, 0, s.rows)
	}
	for i := range s.run.n {
		s.stamps = append(s.stamps, s.run.value(i))
	}
	if s.n > 0 {
		s.last = s.stamps[s.n-1]
		s.noteDigits()
	}
}

// noteDigits takes the print of the progression into account: the mantissas
// that are largest stand at its ends.
func (s *span) noteDigits() {
	first := s.run.last - int64(s.run.n-1)*s.run.step
	s.exp = min(s.exp, s.run.exp)
	s.digits = max(s.digits, magnitude(first), magnitude(s.run.last))
}

func magnitude(m int64) uint64 {
	if m < 0 {
		return uint64(-m)
	}
	return uint64(m)
}

// finish sums the stamps up.
func (s *span) finish() {
	if s.n == 0 {
		return
	}
	if s.run.n == s.n {
		s.finishRun()
		return
	}
	s.first = s.stamps[0]
	s.line()
	s.depart()
}

// finishRun is finish for a progression: its line is known.
func (s *span) finishRun() {
	n := s.n
	s.noteDigits()
	s.first, s.last = s.run.value(0), s.run.value(n-1)
	s.steps, s.mean = n-1, s.first
	if n > 1 {
		s.mean = s.first + (s.last-s.first)/2
		s.slope = (s.last - s.first) / float64(n-1)
		s.sxy = s.slope * sumOfSquares(n)
	}
	s.least, s.most = s.slope, s.slope
	s.even = true
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
		s.off = max(s.off, math.Abs(t-s.at(float64(i)-half)))
	}
}

func (s *span) at(fromMiddle float64) float64 { return s.mean + s.slope*fromMiddle }

// release gives the buffer of stamps back when the line stands for them:
// departures stay within the rounding of the print, or are negligible against
// the interval.
func (s *span) release() []float64 {
	room := s.stamps
	if s.n > 0 && !s.even {
		tolerance := max(0.55*s.resolution(s.digits, s.exp), negligible*s.slope)
		if s.n < 3 || s.off > tolerance || s.oddSteps() {
			return nil
		}
	}
	s.even, s.stamps = true, nil
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
	steps := make([]float64, 0, len(stamps)-1)
	for i := range stamps[1:] {
		if d := stamps[i+1] - stamps[i]; !math.IsNaN(d) {
			steps = append(steps, d)
		}
	}
	if len(steps) == 0 {
		return 0
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
	t, unit := math.Max(math.Abs(s.first), math.Abs(s.last)), 1.0
	if s.unit > 0 {
		unit = s.unit
	}
	q := math.Pow10(exp)
	if digits > 0 && t > 0 {
		shown := math.Floor(math.Log10(float64(digits))) + 1
		q = math.Max(q, math.Pow(10, math.Floor(math.Log10(t/unit))+1-shown))
	}
	q *= unit
	// Nothing is finer than the float64 itself.
	return math.Max(q, 4*(math.Nextafter(t, math.Inf(1))-t))
}
