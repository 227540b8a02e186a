package capture

import (
	"bytes"
	"fmt"
	"math"
	"strings"
)

// Several records in one text, each with times of its own, are refused: which of
// them is wanted, nobody can tell. The data pass goes on behind the first fall of
// the time, so that the refusal can say where they begin.

// A fall is a row whose time is before that of the row above it.
type fall struct {
	line, column int     // column counts the time columns from 0
	t, before    float64 // the stamp and that above it, in units of the stamps
	shown        string  // both for people
}

// mostFalls in a block of text are no beginnings of records any more.
const mostFalls = 256

// errFell stands for the fall of a row that is not booked yet.
var errFell = &Error{Err: ErrBackwards}

// fell books the falls of the row that starts at text[at]; it reports false for any
// other error.
func (p *plan) fell(c *chunk, at, line int) bool {
	if c.err != errFell {
		return false
	}
	for _, k := range c.fallen {
		s := c.spans[k].stamps
		f := fall{line: line, column: k, t: c.now[k].seconds(), before: s[len(s)-2]}
		found, after := seconds(f.t), seconds(f.before)
		if p.stamps[k].printed {
			found, _ = p.stampAt(c.text[at:], k)
			after = p.stampBefore(c.text[:at], k)
		}
		f.shown = found + " after " + after
		c.falls = append(c.falls, f)
	}
	c.fallen, c.err = c.fallen[:0], nil
	if len(c.falls) > mostFalls {
		k := c.falls[0].column
		r := records{falls: c.falls[:1], first: make([]float64, k+1)}
		r.first[k] = math.NaN()
		c.err = r.refusal()
	}
	return c.err == nil
}

// between decides what words with a row below them are: the heading of the next
// record where the time falls, else they break the table.
func (c *chunk) between() {
	if c.err == nil {
		c.err = c.footer
	}
	c.footer = nil
}

// stampAt shows the stamp of the line that text starts with as it is printed, and
// reports whether there is one.
func (p *plan) stampAt(text []byte, k int) (string, bool) {
	if end := bytes.IndexByte(text, p.term); end >= 0 {
		text = text[:end]
	}
	if text = bytes.TrimRight(text, lineRest); p.wrapped {
		text, _ = unwrap(text)
	}
	cells := p.split(text, nil)
	col, parts := p.stamps[k].column, p.stamps[k].parts
	if col >= len(cells) {
		return "", false
	}
	if p.steps[col].op == opClock {
		_, ok := p.stamp(cells, col, parts, p.dayFirst)
		return parts.shown(cells, col), ok
	}
	_, _, digits, _ := p.decimalOf(cells[col], p.steps[col])
	return quote(string(cells[col].text)), digits != nil
}

// stampBefore shows the last stamp in text.
func (p *plan) stampBefore(text []byte, k int) string {
	for len(text) > 0 {
		text = text[:len(text)-1]
		from := bytes.LastIndexByte(text, p.term) + 1
		if shown, ok := p.stampAt(text[from:], k); ok {
			return shown
		}
		text = text[:from]
	}
	return ""
}

// keepEnds notes for people the first and the last stamp of each time column.
func (p *plan) keepEnds(c *chunk) {
	c.ends = make([][2]string, p.times)
	for k := range c.ends {
		if !p.stamps[k].printed || c.spans[k].n == 0 {
			c.ends[k] = [2]string{seconds(c.spans[k].first), seconds(c.spans[k].last)}
			continue
		}
		for text := c.text; len(text) > 0; text = text[bytes.IndexByte(text, p.term)+1:] {
			if shown, ok := p.stampAt(text, k); ok {
				c.ends[k][0] = shown
				break
			}
		}
		c.ends[k][1] = p.stampBefore(c.text, k)
	}
}

// records looks for several records while the chunks are joined.
type records struct {
	falls  []fall
	footer *Error    // words below the samples so far
	first  []float64 // the first stamp of each time column
	ends   []string  // the last one for people
}

// add takes in the next chunk, which is not in t yet. It returns the first error in
// the text.
func (r *records) add(c *chunk, t *table) *Error {
	fell := r.seam(c, t)
	if r.footer != nil && c.rows > 0 {
		if !fell && len(r.falls) == 0 {
			return r.footer
		}
		r.footer = nil
	}
	if r.falls = append(r.falls, c.falls...); c.err != nil {
		if err := r.refusal(); err != nil {
			return err
		}
		return c.err
	}
	if r.footer == nil {
		r.footer = c.footer
	}
	return nil
}

// seam reports whether the time falls from the chunks so far to the next one.
func (r *records) seam(c *chunk, t *table) bool {
	fell := false
	for k := range c.spans {
		s := &c.spans[k]
		if s.n == 0 {
			continue
		}
		if n := len(t.spans[k]); n == 0 {
			r.first[k] = s.first
		} else if before := t.spans[k][n-1].last; !s.follows(before) {
			fell = true
			r.falls = append(r.falls, fall{c.first, k, s.first, before, c.ends[k][0] + " after " + r.ends[k]})
		}
		r.ends[k] = c.ends[k][1]
	}
	return fell
}

// refusal says where the time falls, nil where it does not. Where it falls back to
// the beginning each time, there are several records.
func (r *records) refusal() *Error {
	if len(r.falls) == 0 {
		return nil
	}
	f := r.falls[0]
	e := &Error{Err: ErrBackwards, Line: f.line, Found: f.shown, Expected: "a later time"}
	var lines []int
	for _, g := range r.falls {
		if g.column != f.column {
			continue
		}
		if first := r.first[f.column]; !(math.Abs(g.t-first) <= anew*(g.before-first)) {
			return e
		}
		lines = append(lines, g.line)
	}
	if len(lines) == 1 {
		e.Found += "; the time begins anew once"
		e.Expected = "one record: cut the file before this line"
		return e
	}
	e.Found += fmt.Sprintf("; the time begins anew %d times, in lines %s", len(lines), list(lines))
	e.Expected = "one record: cut the file before these lines"
	return e
}

// anew is how near to the first stamp of the text, in parts of its length, that of
// another record is: triggers differ.
const anew = 0.1

// list writes numbers for people, the first few of many.
func list(numbers []int) string {
	const most = 4
	var words []string
	for _, n := range numbers {
		words = append(words, fmt.Sprint(n))
	}
	if n := len(words); n > most+1 {
		words = append(words[:most], fmt.Sprintf("%d more", n-most))
	}
	last := len(words) - 1
	return strings.Join(words[:last], ", ") + " and " + words[last]
}
