package capture

import "math"

// What columns without names are, by their place and their values.

// assignCount finds a first column without a name that counts the rows, before one
// that rises or falls throughout and is larger.
func (t *sweepTable) assignCount() {
	if firstWithRole(t.columns, RoleFrequency) >= 0 || len(t.columns) < 3 || t.columns[0].Name != "" || !t.free(0) || !t.free(1) {
		return
	}
	count, f := &t.columns[0], &t.columns[1]
	_, last := extremes(count.values)
	if least, _ := extremes(f.values); count.counts() && count.values[0] <= 1 && f.steady() && least > last {
		count.is(RoleIndex, "whole numbers that count the rows")
	}
}

// guessFrequency takes the first column of numbers that rise or fall throughout; else
// the first, if its numbers differ and are not all negative.
func (t *sweepTable) guessFrequency() error {
	var free, steady []int
	for i := range t.columns {
		if t.free(i) {
			free = append(free, i)
			if t.columns[i].steady() {
				steady = append(steady, i)
			}
		}
	}
	if len(steady) > 0 && len(free) > 0 && steady[0] != free[0] {
		t.columns[steady[0]].is(RoleFrequency, "no column is named so, and it is the first that rises or falls throughout")
		return nil
	}
	if len(free) > 0 {
		c := &t.columns[free[0]]
		if lo, hi := extremes(c.values); hi > max(lo, 0) {
			c.is(RoleFrequency, "no column is named so, and it is the first of numbers")
			return nil
		}
	}
	return &Error{Err: ErrNoData, Found: "the columns " + t.listed(), Expected: "one of frequency, or --frequency"}
}

// steady reports positive values that rise from row to row, or fall from row to row.
func (c *column) steady() bool {
	up, down := 0, 0
	for i, v := range c.values {
		switch {
		case !(v > 0):
			return false
		case i > 0 && v > c.values[i-1]:
			up++
		case i > 0 && v < c.values[i-1]:
			down++
		}
	}
	return up > 2 && down == 0 || down > 2 && up == 0
}

func extremes(v []float64) (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for _, x := range v {
		if !math.IsNaN(x) {
			lo, hi = min(lo, x), max(hi, x)
		}
	}
	return lo, hi
}

// assignUnnamed reads a table of three columns without names whose third is no
// deviation as frequency, response and phase.
func (t *sweepTable) assignUnnamed() {
	var free []int
	for i := range t.columns {
		c := &t.columns[i]
		if c.Name != "" {
			return
		}
		if c.Role == "" {
			free = append(free, i)
		}
	}
	if len(free) != 2 {
		return
	}
	c := &t.columns[free[1]]
	if lo, hi := extremes(c.values); lo < 0 && hi <= 360 && lo >= -360 {
		c.is(RolePhase, "no names; the third column, and its numbers are negative")
	}
}
