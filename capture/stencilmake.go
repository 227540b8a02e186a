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
	row          []byte
	fixed, limit []byte // of every byte of the row
	at           int    // what lies before is in parts
}

// stencil makes the stencil of the row text[i:next], which fastRow has read. There is
// none for rows that hold stamps of other kinds than numbers, or numbers too long.
func (p *plan) stencil(c *chunk, i, next int) (s stencil, ok bool) {
	steps := p.steps[:p.last+1]
	if next-i > stencilParts*partBytes || slices.ContainsFunc(steps, func(s step) bool { return s.op == opClock }) {
		return s, false
	}
	c.cuts = make([]cut, len(steps))
	p.fastRow(c, i)
	cuts := c.cuts
	c.cuts = nil
	m := stencilMaker{row: c.text[i:next], fixed: bytes.Clone(c.text[i:next]), limit: make([]byte, next-i)}
	for k, b := range m.row {
		if b-'0' <= 9 {
			m.fixed[k], m.limit[k] = '0', 9
		}
	}
	for k := range steps {
		if steps[k].op != opSkip && !m.number(p, &steps[k], cuts[k].from-i, cuts[k].to-i) {
			return s, false
		}
	}
	m.close(len(m.row))
	m.most = len(m.row) + len(m.parts)
	return m.stencil, len(m.parts) <= stencilParts
}

// number begins a part with the number row[from:to]. It reports false for one that takes
// more than whole numbers of float64.
func (m *stencilMaker) number(p *plan, step *step, from, to int) bool {
	first, padding := m.slot(p, from)
	text := m.row[first:to]
	end := len(text)
	n := numeral{step: step, exp: step.shift}
	if e := bytes.IndexAny(text, "eE"); e >= 0 {
		end = e
	}
	mark := bytes.IndexByte(text[:end], p.mark)
	if mark >= 0 {
		n.exp -= end - 1 - mark
	}
	n.part = m.begin(first, 1, padding)
	part := &m.parts[n.part]
	if !part.choose(text[:end], mark) {
		return false
	}
	if end < len(text) && !m.power(&n, text, first, end+1) {
		return false
	}
	m.numbers = append(m.numbers, n)
	switch limit := len(exactPow10); {
	case step.op == opTime || n.power > 0: // the whole number
	case n.exp >= limit || -n.exp >= limit:
		return false
	case n.exp > 0:
		part.times = exactPow10[n.exp]
	default:
		part.over = exactPow10[-n.exp]
	}
	return true
}

// slot tells where the digits of the number at from begin, and what may stand in their
// place before them where no minus sign does. All before it closes the part before.
func (m *stencilMaker) slot(p *plan, from int) (first int, padding byte) {
	first, padding = from, ' '
	place := from
	switch sign := m.row[from]; {
	case sign == '+':
		first, padding = from+1, '+'
	case sign == '-':
		first = from + 1
	case from > m.at && m.row[from-1] == ' ' && (p.delim != ' ' || from == 1 || isBlank(m.row[from-2])):
		place = from - 1 // and what parts the cells is before it
	}
	if place > 0 && m.row[place-1] == '"' {
		padding = '-' // nothing
	}
	m.close(place)
	return first, padding
}

func isBlank(b byte) bool { return b == ' ' || b == '\t' }

// power makes a part of the exponent whose sign or first digit is text[at], or keeps
// that of a stamp as it is: few change, and one that does breaks a progression.
func (m *stencilMaker) power(n *numeral, text []byte, first, at int) bool {
	value, _ := scanExponent(append(bytes.Clone(text[at:]), 0), 0)
	if n.step.op == opTime {
		n.exp += value
		for k := first + at; k < first+len(text); k++ {
			m.fixed[k], m.limit[k] = m.row[k], 0
		}
		return true
	}
	n.sign = 1
	if text[at] == '-' {
		n.sign = -1
	}
	if text[at]-'0' > 9 {
		at++
	}
	m.close(first + at)
	n.power = m.begin(first+at, 0, '-')
	return m.parts[n.power].choose(text[at:], -1)
}

// begin begins a part at a byte of the row, and returns its number.
func (m *stencilMaker) begin(at int, signed uint64, padding byte) int {
	m.at = at
	m.parts = append(m.parts, rowPart{times: 1, over: 1, signed: signed, padding: padding})
	part := &m.parts[len(m.parts)-1]
	for k := range part.pick {
		part.pick[k] = noDigit
	}
	return len(m.parts) - 1
}

// close ends the part that has been begun at a byte of the row, or several where it is
// longer than one can be.
func (m *stencilMaker) close(at int) {
	if len(m.parts) == 0 && at > 0 {
		m.begin(0, 0, '-')
	}
	for len(m.parts) > 0 {
		part := &m.parts[len(m.parts)-1]
		part.length = min(at-m.at, partBytes)
		copy(part.fixed[:], m.fixed[m.at:m.at+part.length])
		copy(part.limit[:], m.limit[m.at:m.at+part.length])
		for k := part.length; k < partBytes; k++ {
			part.limit[k] = math.MaxUint8
		}
		if m.at += part.length; m.at == at {
			return
		}
		m.begin(m.at, 0, '-')
	}
}

// choose picks the digits of a number that begins with the part; mark is where its
// decimal mark stands, negative where it has none.
func (part *rowPart) choose(number []byte, mark int) bool {
	count := 0
	for at := len(number) - 1; at >= 0; at-- {
		if at == mark {
			continue
		}
		if count == stencilDigits || at >= len(part.pick) {
			return false
		}
		count++
		part.pick[len(part.pick)-count] = byte(at)
	}
	return true
}
