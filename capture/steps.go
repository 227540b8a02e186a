package capture

import (
	"fmt"
	"math"
	"slices"
)

// How the roles of columns become the steps of the data pass.

// makePlan turns roles into steps of the data pass.
func (d *layoutDesign) makePlan() *Error {
	// A unit of time makes a count of samples a time.
	if i := firstWithRole(d.columns, RoleIndex); i >= 0 && d.opt.TimeUnit != "" && !d.declared(i).ok && firstWithRole(d.columns, RoleTime) < 0 {
		d.columns[i].is(RoleTime, "whole numbers, and a unit of time is given")
		for k := range d.columns {
			d.columns[k].time = i
		}
	}
	d.plan = plan{dialect: d.head.dialect, term: d.head.term, wrapped: d.head.wrapped, steps: make([]step, len(d.columns))}
	d.plan.words = d.head.words()
	timed := firstWithRole(d.columns, RoleTime) >= 0
	for i := range d.columns {
		c, s := &d.columns[i], &d.plan.steps[i]
		switch {
		case c.part: // the clock time beside it is read with it
		case c.Role == RoleTime:
			d.planTime(c, s)
		case c.Role == RoleIndex:
			if timed || d.plan.times > 0 {
				continue
			}
			d.planStamps(s, stampColumn{column: i, printed: true})
		case c.Role == RoleChannel:
			d.planValue(i)
		default:
			continue
		}
		d.plan.last = i
	}
	if timed {
		d.plan.headings = d.headingLines()
		if err := d.tidy(); err != nil {
			return err
		}
	}
	d.plan.slow = d.plan.wrapped || slices.ContainsFunc(d.plan.steps, func(s step) bool { return s.quantity }) ||
		slices.ContainsFunc(d.plan.stamps, func(s stampColumn) bool { return s.parts != nil })
	d.pair()
	if d.plan.values == 0 {
		return d.noSamples()
	}
	if d.plan.times == 0 || !timed {
		return d.needInterval()
	}
	return nil
}

// words tells the columns that hold words.
func (h *head) words() []bool {
	words := make([]bool, len(h.kinds))
	for i, k := range h.kinds {
		words[i] = k == kindText
	}
	return words
}

// headingLines are the lines of names and of units.
func (d *layoutDesign) headingLines() []string {
	var lines []string
	for _, n := range []int{d.heading.namesLine, d.heading.unitsLine} {
		if n > 0 {
			lines = append(lines, string(d.head.lines[d.head.index(n)].text))
		}
	}
	return lines
}

// pair tells the columns of samples which stamps go with them.
func (d *layoutDesign) pair() {
	for i := range d.columns {
		if s := &d.plan.steps[i]; s.op == opValue && d.columns[i].time >= 0 {
			s.axis = d.plan.steps[d.columns[i].time].to
		} else if s.op == opValue && d.plan.times > 0 {
			s.axis = 0
		}
	}
}

func (d *layoutDesign) planValue(i int) {
	c := &d.columns[i]
	if c.unit.base == "" && c.kind != kindQuantity {
		c.unit, _ = d.preamble.valueUnit(i, d.plan.values)
	}
	if told := c.unit; c.kind == kindNumber && c.whole && (c.Unit == "" || told.base == "counts") {
		if s, ok := d.preamble.codes(i, told); ok {
			c.codes, c.unit = &s, unit{base: "counts"} // the unit is that of codes times the scale
		}
	}
	if c.unit.base == "s" || c.unit.base == "Sa/s" { // the unit of something else
		c.unit = unit{}
	}
	c.Unit = unitName(c.unit)
	d.plan.steps[i] = step{op: opValue, to: d.plan.values, axis: -1, shift: c.unit.exp, quantity: c.kind == kindQuantity}
	d.plan.values++
}

// planTime settles the unit of a time column.
func (d *layoutDesign) planTime(c *column, s *step) {
	if c.kind == kindStamp {
		d.planClock(c, s)
		d.timeWhy = "dates or clock times, counted from the first"
		return
	}
	at := d.planStamps(s, stampColumn{column: c.Number - 1})
	if c.kind == kindQuantity {
		s.quantity = true
		d.timeWhy = "each stamp has its unit"
		if d.opt.TimeUnit != "" {
			d.overruled = "each stamp has its unit, and --time-unit " + d.opt.TimeUnit + " is not used"
		}
		return
	}
	c.unit, d.timeWhy = d.timeUnit(c)
	c.Unit = unitName(c.unit)
	s.shift = c.unit.exp
	at.printed = c.unit.many > 0
}

// planStamps makes the step of one more time column.
func (d *layoutDesign) planStamps(s *step, at stampColumn) *stampColumn {
	*s = step{op: opTime, to: d.plan.times, axis: d.plan.times}
	d.plan.stamps = append(d.plan.stamps, at)
	d.plan.times++
	return &d.plan.stamps[len(d.plan.stamps)-1]
}

// planClock settles what a column of clock times counts from.
func (d *layoutDesign) planClock(c *column, s *step) {
	at := d.planStamps(s, stampColumn{c.Number - 1, true, c.parts})
	s.op = opClock
	d.plan.dayFirst = d.dayFirst(at)
	d.plan.zero = d.firstSecond(at)
}

// timeUnit looks for the unit of a time column: the caller's word, the header,
// the preamble, the declared interval against the steps of the column; seconds
// when nothing gives it.
func (d *layoutDesign) timeUnit(c *column) (unit, string) {
	own, why := c.unit, "unit of time in the header"
	if own.base != "s" {
		own, why = d.preamble.timeUnit(c.Number-1), "unit of time in the preamble"
	}
	if u, ok := parseUnit(d.opt.TimeUnit); ok && u.base == "s" {
		if own.base == "s" && unitName(own) != unitName(u) {
			d.overruled = fmt.Sprintf("the file gives its times in %s and --time-unit in %s; the given unit is used", unitName(own), unitName(u))
		}
		return u, "unit of time given"
	}
	if own.base == "s" {
		return own, why
	}
	if u, why := c.calendarUnit(); u.base == "s" {
		d.assumed = why
		return u, unitName(u) + " assumed"
	}
	decl := d.declared(c.Number - 1)
	if exp, ok := decl.scaleOf(medianStep(c.values)); ok {
		return unit{base: "s", exp: exp}, "unit of time implied by the declared interval of " + seconds(decl.value)
	}
	d.assumed = "seconds are assumed"
	if _, u := lastBrackets(c.Name); u != "" {
		d.unknown = u
	}
	return unit{base: "s"}, "seconds assumed"
}

// calendarUnit is the unit of numbers without one that look like dates: so many
// milliseconds or less since 1970, or under a heading that says date the days of a
// spreadsheet; and what is said of it.
func (c *column) calendarUnit() (unit, string) {
	for _, v := range c.values {
		if math.IsNaN(v) {
			continue
		}
		for _, exp := range []int{-3, -6, -9} {
			if s := v * math.Pow10(exp); s > 5e8 && s < 5e9 { // 1985 to 2128
				return unit{base: "s", exp: exp}, unitName(unit{base: "s", exp: exp}) + " since 1970 are assumed"
			}
		}
		if v > 20000 && v < 100000 && dateName(c.Name) {
			return day, "days are assumed, as spreadsheets count dates"
		}
		break
	}
	return unit{}, ""
}

// dateName reports a name that says date.
func dateName(name string) bool {
	switch fold(name) {
	case "date", "datetime", "dateandtime", "datum", "datumzeit", "fecha", "data", "day":
		return true
	}
	return false
}

// dayFirst reports dates whose first number cannot be a month.
func (d *layoutDesign) dayFirst(s *stampColumn) bool {
	first := true // common in most of the world, and of no weight within a day
	d.head.eachRow(func(_ line, cells []cell) {
		if s.column >= len(cells) {
			return
		}
		p := stampParser{b: s.parts.text(cells, s.column)}
		p.number()
		if p.i++; p.i < len(p.b) {
			if n, ok := p.number(); ok && n > 12 && n < 32 {
				first = false
			}
		}
	})
	return first
}

// firstSecond is the whole second of the first stamp of a column.
func (d *layoutDesign) firstSecond(s *stampColumn) int64 {
	zero, found := int64(0), false
	d.head.eachRow(func(_ line, cells []cell) {
		if found || s.column >= len(cells) {
			return
		}
		if t, ok := d.head.stamp(cells, s.column, s.parts, d.plan.dayFirst); ok {
			zero, found = t.second, true
		}
	})
	return zero
}
