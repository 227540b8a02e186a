package capture

import (
	"fmt"
	"math"
)

// axis decides the time axis of the time column k, and adds to c what must be
// said of it.
func (d *layoutDesign) axis(c *Capture, t *table, k int) (*Axis, *Error) {
	col := d.timeColumn(k)
	decl := d.declared(col)
	switch c := &d.columns[col]; {
	case c.unit.many > 0:
		stretch(t.spans[k], c.unit.many)
	case c.Role == RoleIndex:
		stretch(t.spans[k], decl.value)
		exact(t.spans[k])
	}
	clk := newClock(t.spans[k])
	if clk.spans[len(clk.spans)-1].last <= clk.spans[0].first {
		if decl.ok {
			return d.frozenAxis(c, clk, col, decl), nil
		}
		return nil, &Error{Err: ErrNoTime, Column: col + 1, Found: seconds(clk.start) + " in every row", Expected: "a time that rises"}
	}
	if d.columns[col].Role == RoleIndex {
		return d.indexAxis(c, clk, col), nil
	}
	a := &Axis{N: clk.n, Resolution: clk.resolution}
	even := clk.even()
	if !even {
		clk.nominal()
	}
	d.contradiction(c, clk, decl)
	if even {
		clk.straight(a, decl, d.opt.Interval > 0)
		coarse(c, clk, a)
	} else {
		clk.crooked(a, decl, d.opt.Interval > 0)
		uneven(c, clk, a)
	}
	if d.columns[col].kind == kindStamp {
		a.countFromFirst()
		midnight(c, clk)
	}
	if d.assumed != "" {
		found, severity := "nothing in the file gives the unit of time", Note
		if d.columns[col].unit != (unit{base: "s"}) {
			severity = Warning
		}
		if d.unknown != "" {
			found, severity = fmt.Sprintf("the unit of time %s is not known", quote(d.unknown)), Warning
		}
		c.note(CoarseTime, severity, found+"; "+d.assumed, "give the unit with --time-unit if it is another")
		d.assumed = "" // said once
	}
	if d.overruled != "" {
		c.note(CoarseTime, Note, d.overruled, "leave --time-unit out if the file is right")
	}
	a.Source += "; " + d.timeWhy
	return a, nil
}

// frozenAxis makes the axis of stamps too coarse to differ within the record,
// where the interval is declared.
func (d *layoutDesign) frozenAxis(c *Capture, k *clock, col int, decl declared) *Axis {
	a := &Axis{N: k.n, Start: k.spans[0].first, Interval: decl.value, Resolution: k.resolution,
		Source: fmt.Sprintf("declared interval of %s; the time column shows the same time in every row", seconds(decl.value))}
	if d.columns[col].kind == kindStamp {
		a.Start = 0
	}
	c.note(CoarseTime, Note, fmt.Sprintf("times are printed to %s and never change; even sampling is taken from the declared interval of %s",
		seconds(k.resolution), seconds(decl.value)), "save the times with more digits if the record is not evenly sampled")
	return a
}

func (d *layoutDesign) timeColumn(k int) int {
	for i, s := range d.plan.steps {
		if (s.op == opTime || s.op == opClock) && s.to == k {
			return i
		}
	}
	return 0
}

// straight makes the axis of stamps that lie on a line.
func (k *clock) straight(a *Axis, decl declared, given bool) {
	k.settle(a, fmt.Sprintf("time column, regression over %d stamps", k.n), decl, given)
	a.Start = k.begin(a, decl)
}

// settle decides the interval: of that of the regression and the declared one
// that agrees with it the sharper is taken.
func (k *clock) settle(a *Axis, source string, decl declared, given bool) {
	a.Interval, a.IntervalU, a.Source = shorten(k.interval, 2*k.slopeU), k.slopeU, source
	if decl.ok && (given || k.agrees(decl) && decl.half < k.slopeU) {
		a.Interval, a.IntervalU = decl.value, 0
		a.Source = fmt.Sprintf("time column of %d stamps, with the declared interval of %s", k.n, seconds(decl.value))
	}
}

// begin is the time of the first sample: on the line about its middle, and the
// stamp itself where that is the same but for its print. With an interval that the
// stamps contradict the zero of time stays where it is among the samples, as the
// trigger's instant does not move with the scale; outside the record, the end that is
// nearest to it keeps its stamp.
func (k *clock) begin(a *Axis, decl declared) float64 {
	fixed := k.middle // number of the sample, with a fraction, that keeps its time
	if a.Interval == decl.value && !k.agrees(decl) {
		last := (k.spans[len(k.spans)-1].last - k.start) / k.interval
		fixed = math.Max(0, math.Min(-k.start/k.interval, last))
	}
	start := k.start + (k.interval-a.Interval)*fixed
	if first := k.spans[0].first; math.Abs(start-first) <= 0.05*k.resolution+1e-9*k.interval {
		return first
	}
	return start
}

// agrees reports a declared interval that the stamps do not contradict, within
// what both are printed to.
func (k *clock) agrees(decl declared) bool {
	tolerance := math.Max(1.02*decl.half, math.Max(4*k.slopeU, 1e-6*k.interval))
	if !k.even() {
		tolerance = math.Max(tolerance, 0.02*k.interval)
	}
	return math.Abs(k.interval-decl.value) <= tolerance
}

func (d *layoutDesign) contradiction(c *Capture, k *clock, decl declared) {
	if !decl.ok || k.agrees(decl) {
		return
	}
	what := "the preamble declares"
	use := "the time column is used"
	if d.opt.Interval > 0 {
		what, use = "--interval gives", "the given interval is used"
		if !k.even() && !k.ruled {
			use = "the time column is used"
		}
	}
	c.note(CoarseTime, Warning, fmt.Sprintf("%s %s a sample, but the stamps are %s apart; %s", what, seconds(decl.value), seconds(k.interval), use),
		"find out which of the two is true: frequency and time constant scale with it")
}

// coarse says that the print of the stamps was too coarse to be taken as it
// is, where that is more than nothing.
func coarse(c *Capture, k *clock, a *Axis) {
	if k.off < 0.05*k.interval {
		return
	}
	severity := Note
	if a.IntervalU > 1e-4*a.Interval {
		severity = Warning
	}
	c.note(CoarseTime, severity,
		fmt.Sprintf("times are printed to %s, %.2g of the sampling interval of %s; even sampling is rebuilt (%s)",
			seconds(k.resolution), k.resolution/a.Interval, seconds(a.Interval), a.Source),
		"save the times with more digits if the record is not evenly sampled")
}

// midnight says that clock times went over midnight, or over a full hour.
func midnight(c *Capture, k *clock) {
	last := k.spans[len(k.spans)-1]
	if last.wraps == 0 {
		return
	}
	what := "a date pass midnight"
	if last.period < secondsOfDay {
		what = "hours pass the full hour"
	}
	c.note(UnevenTime, Note, fmt.Sprintf("clock times without %s; %d h are added after it", what, last.wraps*last.period/3600),
		"nothing, unless the rows are out of order")
}

// countFromFirst makes the first sample the zero of a clock time.
func (a *Axis) countFromFirst() {
	for i := range a.Times {
		a.Times[i] -= a.Start
	}
	a.Start = 0
}

// indexAxis makes the axis of a column that counts the samples, from zero or one,
// and of the declared start and interval; the stamps of k are the numbers times
// the interval.
func (d *layoutDesign) indexAxis(c *Capture, k *clock, col int) *Axis {
	decl := d.declared(col)
	start, source := d.declaredStart(col, decl.value)
	switch first := k.spans[0].first; {
	case first < 0 && start == 0:
		start, source = first, ", counted from the trigger"
	case first > 1.5*decl.value:
		start += first
	}
	a := &Axis{N: k.n, Start: start}
	source = fmt.Sprintf("count of samples in column %d, with the declared interval of %s%s", col+1, seconds(decl.value), source)
	if !k.even() {
		k.nominal()
		k.crooked(a, declared{}, false)
		uneven(c, k, a)
		for i, first := 0, a.Times[0]; i < len(a.Times); i++ {
			a.Times[i] = start + (a.Times[i] - first)
		}
		a.Start = start
	}
	every := math.Max(1, math.Round(k.interval/decl.value))
	a.Interval, a.IntervalU, a.Source = every*decl.value, 0, source
	if every > 1 && d.columns[col].mayCount() {
		c.note(CoarseTime, Note, fmt.Sprintf("the numbers of column %d rise by %g and have no unit; they are taken for the numbers of the samples, %s apart",
			col+1, every, seconds(decl.value)), "give the unit with --time-unit if they are times")
	}
	return a
}

// bareAxis makes the axis of a file without a time column.
func (d *layoutDesign) bareAxis(rows int) *Axis {
	col := max(0, firstWithRole(d.columns, RoleChannel))
	decl := d.declared(col)
	start, source := d.declaredStart(col, decl.value)
	from := "preamble"
	if d.opt.Interval > 0 {
		from = "given"
	}
	return &Axis{N: rows, Start: start, Interval: decl.value,
		Source: fmt.Sprintf("no time column; interval of %s (%s)%s", seconds(decl.value), from, source)}
}

// declaredStart is the time of the first sample as the preamble gives it,
// directly or by the number of samples before the trigger; else zero.
func (d *layoutDesign) declaredStart(col int, interval float64) (float64, string) {
	if s := d.preamble.number(meansStart, col, "s", d.preamble.timeUnit(col)); s.ok {
		return s.value, ", start declared"
	}
	if n := d.preamble.number(meansTrigger, col, "", unit{}); n.ok && n.value >= 0 && n.value == math.Trunc(n.value) {
		return -n.value * interval, ", start from the trigger's sample"
	}
	return 0, ", starting at zero"
}
