package capture

import (
	"bytes"
	"math"
)

// Most rows of a record are printed alike: digits and all other bytes stand where they
// stood in the row before, but for a sign. A stencil keeps where. Rows that fit it hold
// the same cells, and the processor reads all digits of a number at a time where it has
// instructions for that; fastRow reads all others.

const (
	stencilsKept  = 8   // as many widths of the cells as may take turns
	stencilParts  = 64  // of a row
	stencilDigits = 15  // of a number: they make a whole number that float64 holds
	stencilRows   = 256 // read in one go

	// Making a stencil costs as much as a few rows. It is paid from the credit that rows
	// which fit have earned, so that rows of ever other widths cost little more.
	creditFirst = 16
	creditMost  = 64
	stencilCost = 4
)

// A stencil is the layout of a row.
type stencil struct {
	parts   []rowPart
	numbers []numeral
	most    int // bytes of a row
}

// A rowPart is a stretch of a row that may begin with a sign and a number: the digits
// that pick names, times or over a power of ten.
type rowPart struct {
	// Each byte of the part, after an exclusive or with fixed, must not be above its limit.
	fixed, limit [partBytes]byte
	// pick tells for each digit of a number of sixteen which byte holds it, noDigit for none.
	pick        [16]byte
	times, over float64
	to          *float64
	length      int    // in bytes, without the sign
	signed      uint64 // 1 for a part that may begin with a minus sign or a byte of padding
	padding     byte   // a plus sign, or a blank; the minus sign where there is neither
}

const (
	partBytes = 32
	noDigit   = 0x80
)

// A numeral is a number of a row that is wanted.
type numeral struct {
	part  int
	step  *step
	exp   int // power of ten of its last digit, in base units
	power int // part that holds its exponent, 0 where that is counted in exp
	sign  int // of the exponent
}

// stencils are those that a worker has made, and room for the numbers read with them.
type stencils struct {
	list   []stencil
	last   int // the one that fitted last
	oldest int
	credit int
	room   [][stencilRows]float64 // for each part of a row
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
			t.last, t.credit = k, min(t.credit+n, creditMost)
			return i + size, n
		}
	}
	t.credit--
	return i, 0
}

// read is rows for one stencil; it returns the bytes and the number of the rows.
func (t *stencils) read(s *stencil, p *plan, c *chunk, i int) (size, n int) {
	last := len(c.text) - s.most - partBytes - i
	if last < 0 {
		return 0, 0
	}
	for k := range s.parts {
		s.parts[k].to = &t.room[k][0]
	}
	for _, v := range s.numbers {
		if v.step.op == opValue {
			s.parts[v.part].to = &c.dst[v.step.to][c.rows]
		}
	}
	size, n = readFitting(s.parts, &c.text[i], last, min(stencilRows, c.lines-c.rows))
	good := t.accept(s, p, c, t.scale(s, c, n))
	if good < n {
		size = 0
		for range good {
			size += bytes.IndexByte(c.text[i+size:], p.term) + 1
		}
	}
	return size, good
}

// scale puts the exponents of n rows to their samples. It returns for how many of the
// rows that is one exact operation.
func (t *stencils) scale(s *stencil, c *chunk, n int) int {
	for _, v := range s.numbers {
		if v.power == 0 {
			continue
		}
		samples := c.dst[v.step.to][c.rows:][:n]
		for r, power := range t.room[v.power][:n] {
			e := v.exp + v.sign*int(power)
			if uint(-e) < uint(len(exactPow10)) {
				samples[r] /= exactPow10[-e]
			} else if uint(e) < uint(len(exactPow10)) {
				samples[r] *= exactPow10[e]
			} else {
				n = r
				break
			}
		}
	}
	return n
}

// accept takes in the stamps of n rows whose samples are there already, up to the first
// that gives an error.
func (t *stencils) accept(s *stencil, p *plan, c *chunk, n int) int {
	even := n
	for _, v := range s.numbers {
		if v.step.op == opTime {
			even = c.spans[v.step.to].evenly(t.room[v.part][:even], v.exp)
		}
	}
	for k := range c.spans {
		c.spans[k].goOn(even)
	}
	c.rows += even
	for r := even; r < n; r++ {
		for _, v := range s.numbers {
			if v.step.op == opTime {
				c.now[v.step.to] = instant{d: wholeDecimal(t.room[v.part][r], v.exp)}
			}
		}
		c.rows++
		if p.accept(c); c.err != nil {
			return r + 1
		}
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
		t.room = append(t.room, [stencilRows]float64{})
	}
	if len(t.list) < stencilsKept {
		t.list = append(t.list, s)
		t.last = len(t.list) - 1
		return
	}
	t.list[t.oldest] = s
	t.last, t.oldest = t.oldest, (t.oldest+1)%stencilsKept
}
