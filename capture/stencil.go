package capture

import (
	"bytes"
	"math"
)

// Most rows of a record are printed alike: numbers of whatever width, and between them
// the same bytes as in the row before. A stencil keeps them. Where the processor has
// instructions for it, it reads the numbers of rows that fit a stencil sixteen bytes at a
// time; fastRow reads all others.

const (
	stencilsKept  = 4   // as many kinds of row as may take turns
	stencilParts  = 64  // of a row
	stencilDigits = 15  // of a number: they make a whole number that float64 holds
	stencilRows   = 256 // read in one go

	// What a stencil costs, in rows that it could be read faster in. Rows that fit earn the
	// credit for it, so that rows of ever other kinds cost little more than without.
	creditFirst = 64
	creditMost  = 256
	runCost     = 4
	stencilCost = 16
)

// A stencil is the layout of a row.
type stencil struct {
	parts   []rowPart
	numbers []numeral
	most    int // bytes that a row can hold
}

// A rowPart is a stretch of a row: a number, if it begins with one, and the bytes behind
// it up to the next.
type rowPart struct {
	number uint8 // 1 if there is one
	blanks uint8 // 1 if blanks may stand before it
	width  int   // of the last one, without its sign
	// stop is the byte behind the number and mark its decimal mark, as often as there is
	// room for.
	stop, mark [partBytes]byte
	powers     *float64 // for each number of decimal places, what the digits are divided by
	to         *float64
	places     *uint8
	// Each byte behind the number, after an exclusive or with fixed, must not be above its
	// limit.
	fixed, limit [partBytes]byte
	length       int // of what is behind the number
}

const partBytes = 32

// A numeral is a number of a row that is wanted.
type numeral struct {
	step  *step
	part  int
	exp   int  // its exponent where that stays the same,
	power int  // or the part that holds it, 0 without one
	whole bool // the part gives its digits, without decimal places and unit
}

// stencils are those that a worker has made, and room for the numbers read with them.
type stencils struct {
	list   []stencil
	last   int // the one that fitted last
	oldest int
	credit int
	room   []stencilRoom // for each part of a row
}

type stencilRoom struct {
	digits [stencilRows]float64
	places [stencilRows]uint8
}

// rows reads the rows from text[i] on that a stencil fits. It returns where they end, i
// when none fits, and how many they are. Only the last of them may have given an error.
func (t *stencils) rows(p *plan, c *chunk, i int) (next, n int) {
	if t.credit <= 0 || c.footer != nil {
		return i, 0
	}
	for try := range t.list {
		k := t.last + try
		if k >= len(t.list) {
			k -= len(t.list)
		}
		if size, n := t.read(&t.list[k], p, c, i); n > 0 {
			t.last, t.credit = k, min(t.credit+n-runCost, creditMost)
			return i + size, n
		}
		t.credit--
	}
	return i, 0
}

// read is rows for one stencil; it returns the bytes and the number of the rows.
func (t *stencils) read(s *stencil, p *plan, c *chunk, i int) (size, n int) {
	last := len(c.text) - s.most - partBytes - i
	if last < 0 {
		return 0, 0
	}
	for k := range s.parts {
		s.parts[k].to, s.parts[k].places = &t.room[k].digits[0], &t.room[k].places[0]
	}
	for _, v := range s.numbers {
		if v.step.op == opValue {
			s.parts[v.part].to = &c.dst[v.step.to][c.rows]
		}
	}
	size, n = readFitting(s.parts, &shapes, &c.text[i], last, min(stencilRows, c.lines-c.rows))
	good := n
	for k := range s.numbers {
		if v := &s.numbers[k]; v.step.op == opValue && v.whole {
			good = t.scale(v, c.dst[v.step.to][c.rows:][:good])
		}
	}
	if good = t.accept(s, p, c, good); good < n {
		size = 0
		for range good {
			size += bytes.IndexByte(c.text[i+size:], p.term) + 1
		}
	}
	return size, good
}

// exponent is the power of ten of the last digit of a number in row r; ok is false where
// what stands there is none.
func (t *stencils) exponent(v *numeral, r int) (e int, ok bool) {
	e = v.step.shift + v.exp - int(t.room[v.part].places[r])
	if v.power == 0 {
		return e, true
	}
	power := &t.room[v.power]
	return e + int(power.digits[r]), power.places[r] == 0 && math.Abs(power.digits[r]) < 1e6
}

// scale puts the exponents to samples. It returns for how many that is one exact
// operation.
func (t *stencils) scale(v *numeral, samples []float64) int {
	for r := range samples {
		e, ok := t.exponent(v, r)
		switch {
		case !ok:
			return r
		case uint(-e) < uint(len(exactPow10)):
			samples[r] /= exactPow10[-e]
		case uint(e) < uint(len(exactPow10)):
			samples[r] *= exactPow10[e]
		default:
			return r
		}
	}
	return len(samples)
}

// accept takes in the stamps of n rows whose samples are there already, up to the first
// that gives an error.
func (t *stencils) accept(s *stencil, p *plan, c *chunk, n int) int {
	even := n
	for k := range s.numbers {
		if v := &s.numbers[k]; v.step.op == opTime {
			even = t.evenly(v, &c.spans[v.step.to], even)
		}
	}
	for k := range c.spans {
		c.spans[k].goOn(even)
	}
	c.rows += even
	for r := even; r < n; r++ {
		for k := range s.numbers {
			if v := &s.numbers[k]; v.step.op == opTime {
				e, ok := t.exponent(v, r)
				if !ok {
					return r
				}
				c.now[v.step.to] = instant{d: wholeDecimal(t.room[v.part].digits[r], e)}
			}
		}
		c.rows++
		if p.accept(c); c.err != nil {
			return r + 1
		}
	}
	return n
}

// evenly returns how many of n stamps continue the progression that all so far are.
func (t *stencils) evenly(v *numeral, s *span, n int) int {
	before, step, ok := s.progresses()
	if !ok {
		return 0
	}
	for r, whole := range t.room[v.part].digits[:n] {
		e, ok := t.exponent(v, r)
		if !ok || e != s.run.exp || int64(whole)-before != step {
			return r
		}
		before += step
	}
	return n
}

// wholeDecimal is whole * 10^exp.
func wholeDecimal(whole float64, exp int) decimal {
	d := decimal{mant: uint64(math.Abs(whole)), exp: exp}
	if math.Signbit(whole) {
		d.sign = 1
	}
	return d
}

// learn makes a stencil of the row text[i:next], which fastRow has just read.
func (t *stencils) learn(p *plan, c *chunk, i, next int) {
	if !canReadFitting || t.credit <= 0 {
		return
	}
	t.credit -= stencilCost
	s, ok := p.stencil(c, i, next)
	if !ok {
		return
	}
	for len(t.room) < len(s.parts) {
		t.room = append(t.room, stencilRoom{})
	}
	if len(t.list) < stencilsKept {
		t.list = append(t.list, s)
		t.last = len(t.list) - 1
		return
	}
	t.list[t.oldest] = s
	t.last, t.oldest = t.oldest, (t.oldest+1)%stencilsKept
}
