package capture

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"strings"
)

// A layoutDesign is what was understood of the head, and what follows from it.
type layoutDesign struct {
	head     *head
	preamble preamble
	heading  heading
	columns  []column
	plan     plan
	opt      Options
	// timeWhy says where the unit of time came from; assumed is true when
	// nothing gave it.
	timeWhy string
	assumed bool
	unknown string // what the file gives as the unit of time, and nobody knows
}

// design decides the layout of a capture from the head.
func design(h *head, opt Options) (*layoutDesign, *Error) {
	d, err := newDesign(h, opt)
	if err != nil {
		return nil, err
	}
	assignRoles(h, d.columns, d.declared)
	return d, d.makePlan()
}

// newDesign reads what stands above the table and beside it, and its columns;
// these have no roles yet.
func newDesign(h *head, opt Options) (*layoutDesign, *Error) {
	d := &layoutDesign{head: h, opt: opt, preamble: preamble{d: h.dialect}}
	for _, l := range h.preambleLines() {
		d.preamble.readLine(l.number, d.preamble.cellsOf(l.text))
	}
	d.readBeside()
	d.heading = findNames(h, &d.preamble)
	if err := d.brokenRow(); err != nil {
		return nil, err
	}
	d.columns = newColumns(h, d.heading)
	return d, nil
}

// brokenRow refuses a line below the heading that holds a number where the
// samples are, and words as well, but is neither a comment nor an entry: a row
// that the search for the first row would pass over without a word.
func (d *layoutDesign) brokenRow() *Error {
	h := d.head
	heading := max(d.heading.namesLine, d.heading.unitsLine)
	if heading == 0 {
		return nil
	}
	for _, l := range h.lines[h.index(heading)+1 : h.first] {
		cells := h.split(l.text, nil)
		if isComment(l.text) || startsWithKey(cells) {
			continue
		}
		bad, numbers := -1, 0
		for i, k := range h.kinds[:min(len(h.kinds), len(cells))] {
			switch got := h.kindOf(cells[i]); {
			case !k.numeric():
			case got == k:
				numbers++
			case got == kindText && bad < 0:
				bad = i
			}
		}
		if numbers > 0 && bad >= 0 {
			return &Error{Err: ErrSyntax, Line: l.number, Column: bad + 1, Found: quote(string(cells[bad].text)), Expected: "a number"}
		}
	}
	return nil
}

// startsWithKey reports a line whose first cell is a key of a preamble.
func startsWithKey(cells []cell) bool {
	for _, c := range cells {
		if !c.blank() {
			_, _, ok := readKey(toUTF8(c.text))
			return ok
		}
	}
	return false
}

// readBeside reads metadata that stand in columns beside the first samples.
func (d *layoutDesign) readBeside() {
	var beside []cell
	d.head.eachRow(func(l line, cells []cell) {
		beside = append(beside[:0], cells...)
		for i, k := range d.head.kinds[:min(len(cells), len(d.head.kinds))] {
			if k.numeric() {
				beside[i] = cell{}
			}
		}
		if !allBlank(beside) {
			d.preamble.readLine(l.number, beside)
		}
	})
}

// makePlan turns roles into steps of the data pass.
func (d *layoutDesign) makePlan() *Error {
	// A unit of time makes a count of samples a time.
	if i := firstWithRole(d.columns, RoleIndex); i >= 0 && d.opt.TimeUnit != "" && !d.declared(i).ok && firstWithRole(d.columns, RoleTime) < 0 {
		d.columns[i].is(RoleTime, "whole numbers, and a unit of time is given")
		for k := range d.columns {
			d.columns[k].time = i
		}
	}
	d.plan = plan{dialect: d.head.dialect, term: d.head.term, steps: make([]step, len(d.columns))}
	timed := firstWithRole(d.columns, RoleTime) >= 0
	for i := range d.columns {
		c, s := &d.columns[i], &d.plan.steps[i]
		switch c.Role {
		case RoleTime:
			d.planTime(c, s)
		case RoleIndex:
			if timed || d.plan.times > 0 {
				continue
			}
			*s = step{op: opTime, to: d.plan.times, axis: d.plan.times}
			d.plan.times++
		case RoleChannel:
			d.planValue(i)
		default:
			continue
		}
		d.plan.last = i
	}
	d.pair()
	if d.plan.values == 0 {
		return d.noSamples()
	}
	if d.plan.times == 0 || !timed {
		return d.needInterval()
	}
	return nil
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

// noSamples refuses a table without channels. A column of words that begin as
// numbers do is shown.
func (d *layoutDesign) noSamples() *Error {
	for _, r := range d.head.sample {
		for i, c := range r.cells[:min(len(r.cells), len(d.columns))] {
			if d.columns[i].Role == RoleText && d.head.kindOf(c) == kindText && bytes.ContainsAny(c.text, "0123456789") {
				return &Error{Err: ErrSyntax, Line: r.line.number, Column: i + 1, Found: quote(string(c.text)), Expected: "a number"}
			}
		}
	}
	e := &Error{Err: ErrNoData, Found: d.whatThereIs(), Expected: "a column of voltage or current"}
	if firstWithRole(d.columns, RoleFrequency) >= 0 {
		e.Expected = "samples over time, not over frequency"
	}
	return e
}

// whatThereIs names the columns of a table without channels.
func (d *layoutDesign) whatThereIs() string {
	if len(d.columns) == 1 {
		return fmt.Sprintf("a %s column and nothing beside it", d.columns[0].Role)
	}
	var roles []string
	for _, c := range d.columns {
		roles = append(roles, string(c.Role))
	}
	return "columns of " + strings.Join(roles, ", ")
}

func (d *layoutDesign) planValue(i int) {
	c := &d.columns[i]
	if c.unit.base == "" && c.kind != kindQuantity {
		c.unit, _ = d.preamble.valueUnit(i, d.plan.values)
		if _, _, scaled := d.preamble.text(meansScale, i); scaled && c.whole {
			c.unit = unit{base: "counts"} // the unit is that of codes times the scale
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
	*s = step{op: opTime, to: d.plan.times, axis: d.plan.times, quantity: c.kind == kindQuantity}
	d.plan.times++
	if c.kind == kindStamp {
		s.op = opClock
		d.plan.dayFirst = d.dayFirst(c.Number - 1)
		d.plan.zero = d.firstSecond(c.Number - 1)
		d.timeWhy = "dates or clock times, counted from the first"
		return
	}
	if c.kind == kindQuantity {
		d.timeWhy = "each stamp has its unit"
		return
	}
	c.unit, d.timeWhy = d.timeUnit(c)
	c.Unit = unitName(c.unit)
	s.shift = c.unit.exp
}

// timeUnit looks for the unit of a time column: the caller's word, the header,
// the preamble, the declared interval against the steps of the column; seconds
// when nothing gives it.
func (d *layoutDesign) timeUnit(c *column) (unit, string) {
	if d.opt.TimeUnit != "" {
		if u, ok := parseUnit(d.opt.TimeUnit); ok && u.base == "s" {
			return u, "unit of time given"
		}
	}
	if c.unit.base == "s" {
		return c.unit, "unit of time in the header"
	}
	if u := d.preamble.timeUnit(c.Number - 1); u.base == "s" {
		return u, "unit of time in the preamble"
	}
	decl := d.declared(c.Number - 1)
	if exp, ok := decl.scaleOf(medianStep(c.values)); ok {
		return unit{"s", exp}, "unit of time implied by the declared interval of " + seconds(decl.value)
	}
	d.assumed = true
	if _, u := lastBrackets(c.Name); u != "" {
		d.unknown = u
	}
	return unit{base: "s"}, "seconds assumed"
}

// scaleOf returns the power of ten of the unit in which a step is like the
// declared interval.
func (decl declared) scaleOf(step float64) (exp int, ok bool) {
	if !decl.ok || !(step > 0) {
		return 0, false
	}
	for _, exp := range []int{0, -3, -6, -9, -12} {
		if r := decl.value / (step * math.Pow10(exp)); r > 0.5 && r < 2 {
			return exp, true
		}
	}
	return 0, false
}

// declared is the sampling interval that the caller or else the preamble gives.
func (d *layoutDesign) declared(col int) declared {
	if d.opt.Interval > 0 {
		return declared{value: d.opt.Interval, ok: true}
	}
	return d.preamble.interval(col)
}

// needInterval refuses a file without time whose interval nothing gives.
func (d *layoutDesign) needInterval() *Error {
	col := max(0, slices.IndexFunc(d.columns, func(c column) bool { return c.Role == RoleChannel }))
	if d.declared(col).ok {
		return nil
	}
	for _, m := range []meaning{meansInterval, meansRate} {
		if v, line := d.preamble.find(m); v != "" {
			return &Error{Err: ErrNoTime, Line: line, Found: quote(v) + " for the sampling interval or rate", Expected: "a number greater than zero with its unit, or --interval"}
		}
	}
	found := "no time column"
	if i := firstWithRole(d.columns, RoleIndex); i >= 0 {
		found = fmt.Sprintf("only a count of samples in column %d", i+1)
	}
	return &Error{Err: ErrNoTime, Found: found + ", and no sampling interval in the preamble", Expected: "one of them, or --interval"}
}

// dayFirst reports dates whose first number cannot be a month.
func (d *layoutDesign) dayFirst(col int) bool {
	first := true // common in most of the world, and of no weight within a day
	d.head.eachRow(func(_ line, cells []cell) {
		if col >= len(cells) {
			return
		}
		p := stampParser{b: cells[col].text}
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
func (d *layoutDesign) firstSecond(col int) int64 {
	zero, found := int64(0), false
	d.head.eachRow(func(_ line, cells []cell) {
		if found || col >= len(cells) {
			return
		}
		if s, ok := parseStamp(cells[col].text, d.plan.dayFirst); ok {
			zero, found = s.second, true
		}
	})
	return zero
}
