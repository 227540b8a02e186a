package capture

import (
	"fmt"
	"math"
	"strings"
)

// How much a column looks like time.
const (
	noTime    = iota
	countTime // counts the samples
	evenTime  // rises in even steps, without a name
	clockTime // dates or clock times
	namedTime // its name or unit says time
)

// timeRank says how much a column looks like time, and why; first is the first
// column of numbers, and decl the declared sampling interval.
func (c *column) timeRank(first bool, decl declared) (int, string) {
	if c.kind == kindStamp {
		return clockTime, "dates or clock times"
	}
	if c.kind != kindNumber && c.kind != kindQuantity {
		return noTime, ""
	}
	rising, even := c.rises()
	says := exactTimeName(c.Name) && !weakTimeName(c.Name) || timeName(c.Name) && rising
	if deviationName(c.Name) {
		return noTime, ""
	}
	switch {
	case c.unit.base == "s" && (rising || timeName(c.Name)):
		return namedTime, "its unit is " + unitName(c.unit)
	case c.counts() && (!says || c.mayCount()):
		return countTime, "whole numbers that count the samples"
	case c.Name != "" && indexWord(c.Name) && c.stride(2) > 0:
		return countTime, fmt.Sprintf("its name is %q, and its whole numbers rise by %g from row to row", c.Name, c.stride(2))
	case first && c.mayCount() && decl.ok && c.stride(50) > 0 && !decl.like(c.stride(50)):
		return countTime, fmt.Sprintf("whole numbers that rise by %g, which in no unit of time is the declared interval", c.stride(50))
	case countUnit(c.Name) && c.stride(2) > 0:
		return countTime, fmt.Sprintf("its name is %q, and whole numbers that rise by %g", c.Name, c.stride(2))
	case says:
		return namedTime, fmt.Sprintf("its name is %q", c.Name)
	case rising && (even || first) && c.Name == "":
		return evenTime, "no name, and it rises from row to row"
	case rising && even && first:
		return evenTime, "the first column of numbers, and it rises in even steps"
	}
	return noTime, ""
}

// countUnit reports a name whose unit is samples: time (samples).
func countUnit(name string) bool {
	_, inside := lastBrackets(name)
	switch strings.ToLower(inside) {
	case "samples", "sample", "sa", "pts", "points", "point", "index":
		return true
	}
	return false
}

// rises reports values that hardly ever fall and end above their start, and
// whether nearly all steps are of like size.
func (c *column) rises() (rising, even bool) {
	var steps []float64
	last := math.NaN()
	sum, falls := 0.0, 0
	for _, v := range c.values {
		if d := v - last; !math.IsNaN(d) {
			steps = append(steps, d)
			sum += d
			if d < 0 {
				falls++
			}
		}
		if !math.IsNaN(v) {
			last = v
		}
	}
	if sum <= 0 || falls*50 > len(steps) {
		return false, false
	}
	mean, like := sum/float64(len(steps)), 0
	for _, d := range steps {
		if d > 0.2*mean && d < 5*mean {
			like++
		}
	}
	return true, like*10 >= len(steps)*8
}

// belies reports steps that are neither like the declared interval nor like
// each other, as those of a slowly rising voltage are.
func (c *column) belies(decl declared) bool {
	step := medianStep(c.values)
	if !decl.ok || decl.like(step) {
		return false
	}
	steady := 0
	for i, v := range c.values[1:] {
		if math.Abs(v-c.values[i]-step) <= 0.3*step {
			steady++
		}
	}
	return steady*10 < len(c.values)*8
}

// counts reports whole numbers that rise by one from row to row.
func (c *column) counts() bool { return c.stride(50) == 1 }

// stride is what whole numbers rise by from row to row, all but one in so many; 0
// where they do not. Of a count of samples it is more than 1 where only every so
// many is kept.
func (c *column) stride(many int) float64 {
	if !c.whole || c.kind != kindNumber || len(c.values) < 2 {
		return 0
	}
	step, misses := medianStep(c.values), 0
	for i, v := range c.values[1:] {
		if v-c.values[i] != step {
			misses++
		}
	}
	if misses*many > len(c.values) || !(step > 0) {
		return 0
	}
	return step
}

// mayCount reports a column whose name does not forbid that it counts the samples.
func (c *column) mayCount() bool {
	return c.Name == "" || weakTimeName(c.Name) || fold(c.Name) == "xaxis"
}

// assignSpectra finds columns of frequencies, and what goes with them: the
// columns to their right, up to the next one of time.
func assignSpectra(cols []column) {
	of := -1
	for i := range cols {
		c := &cols[i]
		if c.Role != "" || !c.kind.numeric() {
			continue
		}
		if rising, even := c.rises(); rising && even && (c.unit.base == "Hz" || len(c.Name) > 1 && nameSays(c.Name, RoleFrequency)) {
			of = i
			c.is(RoleFrequency, "its values rise, and its name or unit is that of a frequency")
		} else if of >= 0 && (c.unit.base == "s" || timeName(c.Name)) {
			of = -1
		} else if of >= 0 {
			c.is(RoleResponse, "it goes with the frequencies of column %d", of+1)
		}
	}
}

// assignTime finds the time columns: those that look most like time. Without
// names a second one must go on as the first does, or every second column must
// look like time.
func assignTime(cols []column, interval func(col int) declared) {
	ranks := make([]int, len(cols))
	whys := make([]string, len(cols))
	best, numeric := -1, 0
	for i := range cols {
		if !cols[i].kind.numeric() || cols[i].Role != "" {
			continue
		}
		ranks[i], whys[i] = cols[i].timeRank(numeric == 0, interval(i))
		if ranks[i] == evenTime && cols[i].belies(interval(i)) {
			ranks[i] = noTime // a channel that happens to rise
		}
		numeric++
		if ranks[i] != noTime && (best < 0 || ranks[i] > ranks[best]) {
			best = i
		}
	}
	if best < 0 || numeric == 1 && ranks[best] < clockTime {
		return
	}
	paired := inPairs(cols, ranks)
	for i := range cols {
		switch c := &cols[i]; {
		case ranks[i] == noTime:
		case ranks[i] == countTime:
			c.is(RoleIndex, "%s", whys[i])
		case ranks[i] == ranks[best] && (i == best || ranks[i] >= clockTime || paired || c.goesAs(&cols[best])):
			c.is(RoleTime, "%s", whys[i])
		case ranks[i] == clockTime:
			c.is(RoleText, "clock times beside a time column of numbers")
		}
	}
}

// goesAs reports a column that rises from row to row by as much as another does.
func (c *column) goesAs(other *column) bool {
	a, b := medianStep(c.values), medianStep(other.values)
	return math.Abs(a-b) <= 1e-3*b
}

// inPairs reports columns without names that alternate between looking like time
// and not: a time column for each channel, all of like length.
func inPairs(cols []column, ranks []int) bool {
	n, first := 0, 0.0
	for i := range cols {
		c := &cols[i]
		if c.Role != "" || !c.kind.numeric() {
			continue
		}
		if (ranks[i] == evenTime) != (n%2 == 0) || ranks[i] != evenTime && ranks[i] != noTime {
			return false
		}
		if step := medianStep(c.values); n == 0 {
			first = step
		} else if n%2 == 0 && (step > 100*first || first > 100*step) {
			return false
		}
		n++
	}
	return n > 2 && n%2 == 0
}
