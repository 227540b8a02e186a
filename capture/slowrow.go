package capture

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"unicode"
)

// slowRow reads a row of any kind, and reports whether it was one. Blank lines
// and comments are passed over; words at the end of the text are a footer.
func (p *plan) slowRow(c *chunk, text []byte, line int) bool {
	text = bytes.TrimRight(text, lineRest)
	if p.wrapped {
		text, _ = unwrap(text)
	}
	c.cells = p.split(text, c.cells[:0])
	cells := c.cells
	if p.passed(text, cells) || slices.Contains(p.headings, string(text)) {
		if p.times == 0 && allBlank(cells) {
			c.blanks = append(c.blanks, c.rows)
		}
		if p.times == 0 && isEntry(text) && c.footer == nil {
			c.footer = &Error{Err: ErrSyntax, Line: line, Found: quote(string(text)), Expected: "a number"}
		}
		return false
	}
	if !p.findAbsent(c, cells) {
		return false
	}
	bad, numbers := p.badCell(c, cells)
	if bad != nil {
		bad.Line = line
		if numbers > 0 && !p.closes(cells) || !wordy(text) {
			c.err = bad
		} else if c.footer == nil {
			c.footer = bad
		}
		return false
	}
	for k := 0; k <= p.last; k++ {
		s := p.steps[k]
		if s.op == opSkip || p.isAbsent(c, s) {
			if s.op == opValue {
				c.dst[s.to][c.rows] = math.NaN()
			}
			continue
		}
		d, shift, digits, _ := p.decimalOf(cells[k], s)
		switch s.op {
		case opValue:
			v := math.NaN()
			if digits != nil {
				v = d.float(shift, digits, p.mark)
			}
			if math.IsNaN(v) || math.IsInf(v, 0) {
				v = math.NaN()
				c.missing[s.to]++
			}
			c.dst[s.to][c.rows] = v
		case opTime:
			c.now[s.to] = instant{d: d, real: d.tooLong(), time: d.float(shift, digits, p.mark)}
			c.now[s.to].d.exp += shift
		case opClock:
			t, _ := p.stamp(cells, k, p.stamps[s.to].parts, p.dayFirst)
			zero := p.zero
			if t.period > 0 {
				zero = c.spans[s.to].anew(t, zero)
			}
			c.now[s.to] = t.instant(zero)
		}
	}
	return true
}

// closes reports a row whose first cell is a word where the table has none: Mean,
// 0.01. Below the samples it is a footer, numbers or not.
func (p *plan) closes(cells []cell) bool {
	first := slices.IndexFunc(cells, func(c cell) bool { return !c.blank() })
	if first < 0 || p.kindOf(cells[first]) != kindText || first < len(p.words) && p.words[first] {
		return false
	}
	word := []rune(toUTF8(cells[first].text))
	return len(word) > 1 && unicode.IsLetter(word[0]) && unicode.IsLetter(word[1])
}

// wordy reports a line with anything in it that no row of numbers has.
func wordy(text []byte) bool {
	return len(bytes.Trim(text, "0123456789+-.,;eE| \t\"")) > 0
}

// decimalOf reads a cell as the step wants it; digits are nil when there is none.
func (p *plan) decimalOf(x cell, s step) (d decimal, shift int, digits []byte, ok bool) {
	if x.blank() {
		return d, 0, nil, s.op == opValue
	}
	if d, digits, ok = p.number(x); ok && (!s.quantity || isZero(x)) {
		return d, s.shift, digits, true
	}
	if s.quantity {
		var u unit
		if d, u, digits, ok = p.quantity(x); ok {
			return d, u.exp, digits, true
		}
	}
	return d, 0, nil, s.op == opValue && missingMark(x.text)
}

// badCell returns the first thing wrong with a row, nil if none, and how many
// of its cells are numbers.
func (p *plan) badCell(c *chunk, cells []cell) (bad *Error, numbers int) {
	for k := 0; k <= p.last && k < len(cells); k++ {
		s := p.steps[k]
		if s.op == opSkip || p.isAbsent(c, s) {
			continue
		}
		var ok, found bool
		if s.op == opClock {
			_, ok = p.stamp(cells, k, p.stamps[s.to].parts, p.dayFirst)
			found = ok
		} else {
			_, _, digits, fine := p.decimalOf(cells[k], s)
			ok, found = fine, digits != nil
		}
		if found {
			numbers++
		}
		if !ok && bad == nil {
			bad = &Error{Err: ErrSyntax, Column: k + 1, Found: quote(string(cells[k].text)), Expected: s.expects()}
			if cells[k].blank() {
				bad.Found = "an empty cell"
			} else if s.op == opClock {
				bad.Found = p.stamps[s.to].parts.shown(cells, k)
			}
		}
	}
	if bad == nil && (p.lacks(c, len(cells)) || p.surplus(cells)) {
		bad = &Error{Err: ErrSyntax, Found: fmt.Sprintf("a row of %d cells", len(cells)), Expected: fmt.Sprintf("%d", len(p.steps))}
	}
	return bad, numbers
}

func (s step) expects() string {
	if s.quantity {
		return "a number with its unit"
	}
	switch s.op {
	case opTime:
		return "a time as a number"
	case opClock:
		return "a date or clock time"
	}
	return "a number"
}

// surplus reports cells with something in them beyond the last column.
func (p *plan) surplus(cells []cell) bool {
	if p.last < len(p.steps)-1 || len(cells) <= len(p.steps) {
		return false // text may hold separators
	}
	return !allBlank(cells[len(p.steps):])
}
