package capture

import (
	"bytes"
	"math"
	"sync/atomic"
)

// An op is what the data pass does with a cell.
type op uint8

const (
	opSkip  op = iota
	opValue    // a sample
	opTime     // a stamp printed as a number
	opClock    // a stamp printed as date or clock time
)

// A step is what the data pass does with the cells of one column.
type step struct {
	op       op
	quantity bool // cells carry a unit of their own
	to       int  // index among the values or among the times
	axis     int  // index among the times of the one that goes with it, -1: none
	shift    int  // power of ten from the printed unit to the base unit
}

// A stampColumn is a time column.
type stampColumn struct {
	column  int         // from 0
	printed bool        // its stamps are shown to people as they are printed
	parts   *stampParts // columns that are read with it, nil for none
}

// A plan is the fixed layout that the data pass follows.
type plan struct {
	dialect
	term     byte
	wrapped  bool     // every line is in quotes as a whole
	slow     bool     // no row is one for fastRow
	words    []bool   // columns that hold words
	headings []string // lines that may stand between the rows again, on every page
	steps    []step
	last     int           // the last column that is not skipped
	values   int           // number of columns of samples
	times    int           // number of time columns
	stamps   []stampColumn // for each time column
	dayFirst bool
	zero     int64 // whole second that clock times are counted from
}

// A chunk is a run of whole lines and what the data pass made of it.
type chunk struct {
	text   []byte  // ends in the plan's term
	raw    []byte  // the bytes of the file among it that are not hashed yet
	buffer *[]byte // what text lies in, to be used again; nil for the head
	users  atomic.Int32
	line   int // number of its first line
	lines  int

	dst     [][]float64 // for each column of samples, room for as many as lines
	now     []instant   // the stamps of the row being read
	cells   []cell      // of the row being read by slowRow
	cuts    []cut       // for fastRow to tell where the numbers of each column stand, nil as a rule
	rows    int
	partial bool     // the row being read lacks some time columns with their samples
	absent  []bool   // for each time column, whether it is one of them
	holes   [][]hole // for each time column, the rows that lack it
	missing []int    // for each column of samples
	blanks  []int    // rows above each blank line, where nothing gives the time
	spans   []span
	first   int   // line of its first row
	fallen  []int // the time columns that fell in the row being read
	falls   []fall
	ends    [][2]string // for each time column, the first stamp and the last for people
	footer  *Error      // the first line that may be a footer
	err     *Error
}

// read follows the plan through the chunk. Rows printed like one before take the
// fastest way, others as the plan expects them take fastRow; any other goes to slowRow,
// which knows every exception.
func (p *plan) read(c *chunk, w *worker) {
	p.begin(c, w)
	line := c.line
	for i := 0; i < len(c.text); line++ {
		at := i
		if next, n := w.stencils.rows(p, c, i); n > 0 {
			if c.rows == n {
				c.first = line
			}
			line += n - 1
			if i = next; c.err != nil {
				at = bytes.LastIndexByte(c.text[:next-1], p.term) + 1
			}
		} else {
			i = p.readRow(c, w, i, line)
		}
		if c.err != nil && !p.fell(c, at, line) {
			break
		}
	}
	for k := range c.spans {
		c.spans[k].finish()
	}
	p.keepEnds(c)
}

// begin makes room for what the data pass makes of a chunk.
func (p *plan) begin(c *chunk, w *worker) {
	c.now = make([]instant, p.times)
	c.missing = make([]int, p.values)
	c.spans = make([]span, p.times)
	for k := range c.spans {
		c.spans[k].begin(w.stamps[k], c.lines)
	}
	w.stencils.credit = creditFirst
}

// readRow reads the row that starts at text[i], and returns where the next one starts.
func (p *plan) readRow(c *chunk, w *worker, i, line int) (next int) {
	ok := false
	if !p.slow {
		next = p.fastRow(c, i)
		ok = next >= 0
	}
	if ok {
		w.stencils.learn(p, c, i, next)
	} else {
		end := i + bytes.IndexByte(c.text[i:], p.term)
		ok = p.slowRow(c, c.text[i:end], line)
		next = end + 1
		if ok && c.partial {
			p.acceptPart(c, line)
			ok = false // it is booked
		}
	}
	if ok {
		if c.rows == 0 {
			c.first = line
		}
		c.rows++
		p.accept(c)
	}
	return next
}

// accept takes in the stamps of a row. Where its time is before that of the row above
// errFell says so.
func (p *plan) accept(c *chunk) {
	for k := range c.spans {
		c.stamp(k)
	}
	if c.footer != nil {
		c.between()
	}
}

// stamp takes in that of time column k.
func (c *chunk) stamp(k int) {
	s, t := &c.spans[k], &c.now[k]
	if s.run.goesOn(t) && s.n == s.run.n {
		s.run.n++
		s.n++
	} else if !s.add(t) {
		c.fallen, c.err = append(c.fallen, k), errFell
	}
}

// fastRow reads the row that starts at text[i] and returns where the next line
// starts, or -1 when the row is not as the plan expects it.
func (p *plan) fastRow(c *chunk, i int) int {
	b := c.text
	for k := 0; k <= p.last; k++ {
		s := &p.steps[k]
		for b[i] == ' ' {
			i++
		}
		switch s.op {
		case opSkip:
			i = p.skipCell(b, i)
		case opClock:
			if i = p.clockCell(c, s, i); i < 0 {
				return -1
			}
		default:
			quoted := b[i] == '"'
			if quoted {
				i++
			}
			d, end := scanDecimal(b, i, p.mark)
			if end < 0 {
				return -1
			}
			if c.cuts != nil {
				c.cuts[k] = cut{i, end}
			}
			if s.op == opTime {
				t := &c.now[s.to]
				t.d, t.real = d, d.tooLong()
				if t.d.exp += s.shift; t.real {
					t.time = d.float(s.shift, b[i:end], p.mark)
				}
			} else {
				v, exact := d.quick(s.shift)
				if !exact {
					if v = d.float(s.shift, b[i:end], p.mark); math.IsInf(v, 0) {
						return -1
					}
				}
				c.dst[s.to][c.rows] = v
			}
			if i = end; quoted {
				if b[i] != '"' {
					return -1
				}
				i++
			}
		}
		if k < p.last {
			if i = p.separator(b, i); i < 0 {
				return -1
			}
		}
	}
	return p.lineEnd(b, i)
}

// skipCell steps over a cell that is not read, up to a quote in it.
func (p *plan) skipCell(b []byte, i int) int {
	for b[i] != p.delim && b[i] != p.term && b[i] != '"' && (p.delim != ' ' || b[i] != '\t') {
		i++
	}
	return i
}

// clockCell reads a date or clock time; -1 when there is none.
func (p *plan) clockCell(c *chunk, s *step, i int) int {
	b, end := c.text, i
	for b[end] != p.delim && b[end] != p.term && b[end] != '\r' {
		end++
	}
	t, ok := parseStamp(bytes.TrimRight(b[i:end], " "), p.dayFirst)
	if !ok {
		return -1
	}
	zero := p.zero
	if t.period > 0 {
		zero = c.spans[s.to].anew(t, zero)
	}
	c.now[s.to] = t.instant(zero)
	return end
}

// separator steps over what parts two cells.
func (p *plan) separator(b []byte, i int) int {
	if p.delim == ' ' {
		if b[i] != ' ' && b[i] != '\t' {
			return -1
		}
		for b[i] == ' ' || b[i] == '\t' {
			i++
		}
		return i
	}
	for b[i] == ' ' {
		i++
	}
	if b[i] != p.delim {
		return -1
	}
	return i + 1
}

// lineEnd steps over the rest of a line behind the last cell that is read.
func (p *plan) lineEnd(b []byte, i int) int {
	if b[i] == p.term {
		return i + 1
	}
	if p.last < len(p.steps)-1 {
		if next := p.separator(b, i); next >= 0 {
			return next + bytes.IndexByte(b[next:], p.term) + 1
		}
	}
	for b[i] != p.term && (b[i] == '\r' || b[i] == ' ' || b[i] == p.delim) {
		i++
	}
	if b[i] == p.term {
		return i + 1
	}
	return -1
}
