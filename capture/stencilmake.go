package capture

import (
	"bytes"
	"math"
)

// A cut is where a number that fastRow has read begins and ends in the text.
type cut struct{ from, to int }

// stencil makes the stencil of the row text[i:next], which fastRow has read last. There
// is none for rows that hold stamps of other kinds than numbers, or numbers too long.
func (p *plan) stencil(c *chunk, i, next int) (s stencil, ok bool) {
	s.length = next - i
	if s.length > stencilMost {
		return s, false
	}
	row := c.text[i:next]
	fixed, limit := bytes.Clone(row), make([]byte, len(row))
	for k, b := range row {
		if b-'0' <= 9 {
			fixed[k], limit[k] = '0', 9
		}
	}
	for k := 0; k <= p.last; k++ {
		step := &p.steps[k]
		if step.op == opSkip {
			continue
		}
		if step.op == opClock {
			return s, false
		}
		from, to := c.cuts[k].from-i, c.cuts[k].to-i
		v, digits, ok := p.numeral(row[from:to], step)
		if !ok {
			return s, false
		}
		v.at += from
		v.column = int32(k)
		s.numbers = append(s.numbers, v)
		s.reach = min(s.reach, v.at)
		for at := from + digits; at < to; at++ { // the exponent stays as it is
			fixed[at], limit[at] = row[at], 0
		}
	}
	s.blocks = rowBlocks(fixed, limit)
	return s, len(s.numbers) > 0
}

// rowBlocks cuts what is known of a row into blocks; bytes behind it may be anything.
func rowBlocks(fixed, limit []byte) []rowBlock {
	blocks := make([]rowBlock, (len(fixed)+blockBytes-1)/blockBytes)
	for k := range blocks {
		at := k * blockBytes
		n := copy(blocks[k].fixed[:], fixed[at:])
		copy(blocks[k].limit[:], limit[at:])
		for j := n; j < blockBytes; j++ {
			blocks[k].limit[j] = math.MaxUint8
		}
	}
	return blocks
}

// numeral makes out a number of a row; its digits and mark are the first so many bytes
// of it, with its sign.
func (p *plan) numeral(number []byte, step *step) (v numeral, digits int, ok bool) {
	end := len(number)
	exp := step.shift
	if e := bytes.IndexAny(number, "eE"); e >= 0 {
		end = e
		power, _ := scanExponent(append(bytes.Clone(number[e+1:]), 0), 0)
		exp += power
	}
	first := 0
	if number[0] == '-' || number[0] == '+' {
		first = 1
	}
	if number[0] == '-' {
		v.sign = 1 << 63
	}
	v.at = end - numeralBytes
	count := 0
	for k := range v.pick {
		v.pick[k] = noDigit
	}
	for at := end - 1; at >= first; at-- {
		if number[at] == p.mark {
			exp -= end - 1 - at
			continue
		}
		if count == stencilDigits || at < v.at {
			return v, 0, false
		}
		count++
		v.pick[numeralBytes-count] = byte(at - v.at)
	}
	v.times, v.over = 1, 1
	switch limit := len(exactPow10); {
	case step.op == opTime:
		v.exp = int32(exp)
	case exp >= limit || -exp >= limit:
		return v, 0, false
	case exp > 0:
		v.times = exactPow10[exp]
	default:
		v.over = exactPow10[-exp]
	}
	return v, end, true
}
