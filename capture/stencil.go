package capture

// Most rows of a record are printed alike: digits and all other bytes stand where they
// stood in the row before. A stencil keeps where. Rows that fit it hold the same cells,
// and the processor reads the sixteen digits of a number at a time where it has
// instructions for that; fastRow reads all others.

const (
	stencilsKept  = 8   // signs and widths vary: two channels need four for their signs
	stencilMost   = 512 // bytes of a row
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
	rowLayout
	reach int // where the first byte that is loaded lies, from the start of the row
}

// A rowLayout is what readFitting knows of a row.
type rowLayout struct {
	length  int        // of the row in bytes, with its line end
	blocks  []rowBlock // of all bytes of the row, and those behind it that the last one covers
	numbers []numeral
}

// A rowBlock tells what 32 bytes of a row must be: each byte, after an exclusive or with
// fixed, must not be above its limit.
type rowBlock struct{ fixed, limit [blockBytes]byte }

const blockBytes = 32

// A numeral is a number of a row: sign * digits * times / over.
type numeral struct {
	// pick names, for each of the sixteen digits of a whole number, the byte that holds it;
	// noDigit where there is none.
	pick        [numeralBytes]byte
	at          int     // of the first of the sixteen bytes, from the start of the row
	times, over float64 // powers of ten; both 1 for a stamp
	sign        uint64  // the top bit, for a negative number
	to          *float64
	exp         int32 // power of ten of a stamp, in seconds
	column      int32
}

const (
	numeralBytes = 16
	noDigit      = 0x80
)

// stencils are those that a worker has made, and room for the stamps of the rows read.
type stencils struct {
	list   []stencil
	last   int // the one that fitted last
	oldest int
	credit int
	stamps [][]float64 // for each time column, whole numbers
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
		if n = t.read(&t.list[k], p, c, i); n > 0 {
			t.last, t.credit = k, min(t.credit+n, creditMost)
			return i + n*t.list[k].length, n
		}
	}
	t.credit--
	return i, 0
}

// read is rows for one stencil; it returns the number of rows.
func (t *stencils) read(s *stencil, p *plan, c *chunk, i int) int {
	room := len(c.text) - i - blockBytes*len(s.blocks)
	if room < 0 || i+s.reach < 0 || c.text[i+s.length-1] != p.term {
		return 0
	}
	for k := range s.numbers {
		v := &s.numbers[k]
		if step := &p.steps[v.column]; step.op == opTime {
			v.to = &t.stamps[step.to][0]
		} else {
			v.to = &c.dst[step.to][c.rows]
		}
	}
	n := readFitting(&s.rowLayout, &c.text[i], min(room/s.length+1, stencilRows, c.lines-c.rows))
	return t.accept(s, p, c, n)
}

// accept takes in the stamps of n rows whose samples are there already, up to the first
// that gives an error.
func (t *stencils) accept(s *stencil, p *plan, c *chunk, n int) int {
	even := n
	for k := range s.numbers {
		if v := &s.numbers[k]; p.steps[v.column].op == opTime {
			to := p.steps[v.column].to
			even = c.spans[to].evenly(t.stamps[to][:even], int(v.exp))
		}
	}
	for k := range c.spans {
		c.spans[k].goOn(even)
	}
	c.rows += even
	for r := even; r < n; r++ {
		for k := range s.numbers {
			if v := &s.numbers[k]; p.steps[v.column].op == opTime {
				to := p.steps[v.column].to
				c.now[to] = instant{d: v.decimal(t.stamps[to][r])}
			}
		}
		c.rows++
		if p.accept(c); c.err != nil {
			return r + 1
		}
	}
	return n
}

// decimal is a stamp as it is printed.
func (v *numeral) decimal(whole float64) decimal {
	d := decimal{mant: uint64(whole), exp: int(v.exp)}
	if v.sign != 0 {
		d.mant, d.sign = uint64(-whole), 1
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
	if t.stamps == nil {
		t.stamps = make([][]float64, p.times)
		for k := range t.stamps {
			t.stamps[k] = make([]float64, stencilRows)
		}
	}
	if len(t.list) < stencilsKept {
		t.list = append(t.list, s)
		t.last = len(t.list) - 1
		return
	}
	t.list[t.oldest] = s
	t.last, t.oldest = t.oldest, (t.oldest+1)%stencilsKept
}
