package capture

import (
	"bytes"
	"math"
	"slices"
)

// A cut is where a number begins and ends in the text.
type cut struct{ from, to int }

// A stencilMaker takes a row to pieces.
type stencilMaker struct {
	stencil
	plan *plan
	row  []byte
	kept []bool // digits that must stay as they are
	at   int    // what lies before is in parts
}

// stencil makes the stencil of the row text[i:next], which fastRow has read. There is
// none for rows that hold stamps of other kinds than numbers, or numbers too long.
func (p *plan) stencil(c *chunk, i, next int) (s stencil, ok bool) {
	steps := p.steps[:p.last+1]
	if slices.ContainsFunc(steps, func(s step) bool { return s.op == opClock }) {
		return s, false
	}
	c.cuts = make([]cut, len(steps))
	p.fastRow(c, i)
	cuts := c.cuts
	c.cuts = nil
	m := stencilMaker{plan: p, row: c.text[i:next], kept: make([]bool, next-i)}
	for k := range steps {
		if steps[k].op != opSkip && !m.number(&steps[k], cuts[k].from-i, cuts[k].to-i) {
			return s, false
		}
	}
	m.text(len(m.row))
	return m.stencil, len(m.parts) <= stencilParts
}

// number begins a part with the number row[from:to]. It reports false for one that takes
// more than a stencil can.
func (m *stencilMaker) number(step *step, from, to int) bool {
	blanks := m.blanksBefore(from)
	m.text(blanks)
	text := m.row[from:to]
	end := len(text)
	v := numeral{step: step, part: len(m.parts)}
	if e := bytes.IndexAny(text, "eE"); e >= 0 {
		end = e
	}
	if !isShape(text[:end], m.plan.mark) || m.row[from+end] == m.plan.mark {
		return false
	}
	v.whole = end < len(text) || step.op == opTime || step.shift > 0 || stencilDigits-step.shift >= len(exactPow10)
	powers := &ones[0]
	if !v.whole {
		powers = &exactPow10[-step.shift]
	}
	m.begin(from, from+end, m.plan.mark, blanks < from, powers)
	switch {
	case end == len(text):
	case step.op == opTime: // its exponent stays: one that does not ends an even run of stamps
		v.exp, _ = scanExponent(append(bytes.Clone(text[end+1:]), 0), 0)
		for k := from + end; k < to; k++ {
			m.kept[k] = true
		}
	default: // the exponent is a number of its own
		m.text(from + end + 1)
		v.power = len(m.parts)
		m.begin(from+end+1, to, m.row[to], false, &ones[0])
	}
	m.numbers = append(m.numbers, v)
	return true
}

// ones are the powers of ten of no digits.
var ones = [stencilDigits + 1]float64{1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1}

// blanksBefore returns where the blanks begin that may be fewer or more before a number:
// all of them, but for the one that parts two cells.
func (m *stencilMaker) blanksBefore(from int) int {
	at := from
	for at > m.at && m.row[at-1] == ' ' {
		at--
	}
	if at < from && at > 0 && m.plan.delim == ' ' && m.row[at-1] != '\t' {
		at++
	}
	return at
}

// begin begins a part with the number row[from:to]; a mark that is the byte behind it
// is none.
func (m *stencilMaker) begin(from, to int, mark byte, blanks bool, powers *float64) {
	part := rowPart{number: 1, powers: powers, width: to - from}
	for k := range partBytes {
		part.stop[k], part.mark[k] = m.row[to], mark
	}
	if blanks {
		part.blanks = 1
	}
	m.parts = append(m.parts, part)
	m.most += partBytes + shapeMost // blanks and a sign, digits and a mark
	m.at = to
}

// text ends the part begun, at a byte of the row, or several where it is longer than one
// can be.
func (m *stencilMaker) text(to int) {
	if len(m.parts) == 0 {
		if to == 0 {
			return
		}
		m.parts = append(m.parts, rowPart{})
	}
	for {
		part := &m.parts[len(m.parts)-1]
		n := min(to-m.at, partBytes)
		part.set(m.row[m.at:m.at+n], m.kept[m.at:])
		m.most += n
		if m.at += n; m.at >= to {
			return
		}
		m.parts = append(m.parts, rowPart{})
	}
}

// set tells what stands behind the number of a part: digits in the places of digits, and
// these very bytes in all others and where they are kept.
func (part *rowPart) set(text []byte, kept []bool) {
	part.length = len(text)
	for k := range part.limit {
		switch {
		case k >= len(text):
			part.limit[k] = math.MaxUint8
		case text[k]-'0' <= 9 && !kept[k]:
			part.fixed[k], part.limit[k] = '0', 9
		default:
			part.fixed[k] = text[k]
		}
	}
}
