package capture

import "slices"

// Channels that each have a time column of their own need not be of one length:
// the rows that a channel lacks hold nothing in its time column and in its
// samples, and count for the other channels only.

// A hole is a run of rows that lack a time column and its samples, counted from
// the first row of the chunk or of the table.
type hole struct{ from, to int }

// findAbsent finds the time columns that a row lacks. It reports false where the
// row has no other: it is as good as blank.
func (p *plan) findAbsent(c *chunk, cells []cell) bool {
	c.partial = false
	for k, s := range p.steps {
		if (s.op == opTime || s.op == opClock) && (k >= len(cells) || cells[k].blank()) && p.blankOn(s.to, cells) {
			if c.absent == nil {
				c.absent, c.holes = make([]bool, p.times), make([][]hole, p.times)
			}
			if !c.partial {
				clear(c.absent)
			}
			c.absent[s.to], c.partial = true, true
		}
	}
	if c.partial && !slices.Contains(c.absent, false) {
		c.partial = false
		return false
	}
	return true
}

// blankOn reports samples that go with a time column, all of them blank in a row.
func (p *plan) blankOn(axis int, cells []cell) bool {
	for k, s := range p.steps {
		if s.op == opValue && s.axis == axis && k < len(cells) && !cells[k].blank() {
			return false
		}
	}
	return p.samplesOn(axis)
}

// samplesOn reports a time column that has samples beside it.
func (p *plan) samplesOn(axis int) bool {
	return slices.ContainsFunc(p.steps, func(s step) bool { return s.op == opValue && s.axis == axis })
}

// isAbsent reports a column that the row being read lacks.
func (p *plan) isAbsent(c *chunk, s step) bool {
	return c.partial && s.axis >= 0 && c.absent[s.axis]
}

// lacks reports a row of n cells that is too short for what it holds.
func (p *plan) lacks(c *chunk, n int) bool {
	for _, s := range p.steps[min(n, p.last+1) : p.last+1] {
		if s.op != opSkip && !p.isAbsent(c, s) {
			return true
		}
	}
	return false
}

// acceptPart is accept for a row that lacks a time column: the row is booked among
// its holes.
func (p *plan) acceptPart(c *chunk, line int) {
	if c.rows == 0 {
		c.first = line
	}
	for k, gone := range c.absent {
		switch h := c.holes[k]; {
		case !gone:
			c.stamp(k)
		case len(h) > 0 && h[len(h)-1].to == c.rows:
			h[len(h)-1].to++
		default:
			c.holes[k] = append(h, hole{c.rows, c.rows + 1})
		}
	}
	c.rows++
	c.partial = false
	if c.footer != nil {
		c.between()
	}
}

// addHoles takes the holes of a chunk whose rows begin behind those of the table.
func (t *table) addHoles(c *chunk) {
	for k := range c.holes {
		for _, h := range c.holes[k] {
			t.holes[k] = append(t.holes[k], hole{t.rows + h.from, t.rows + h.to})
		}
	}
}

// close takes the holes out of the samples, so that those of every channel are
// as many as the stamps of its time column.
func (t *table) close(p *plan) {
	for _, s := range p.steps {
		if s.op != opValue || s.axis < 0 {
			continue
		}
		v := t.values[s.to]
		n, from := 0, 0
		for _, h := range t.holes[s.axis] {
			n += copy(v[n:], v[from:h.from])
			from = h.to
		}
		n += copy(v[n:], v[from:])
		t.values[s.to] = v[:n:n]
	}
}
