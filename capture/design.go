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
	// timeWhy says where the unit of time came from; assumed is what was taken
	// when nothing gave it.
	timeWhy string
	assumed string
	unknown string // what the file gives as the unit of time, and nobody knows
	// overruled says which of two units was used, where file and caller give one each.
	overruled string
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
		cells := d.preamble.cellsOf(l.text)
		d.preamble.readLine(l.number, cells)
		d.preamble.readBelow(l.number-1, cells)
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

// like reports a step that in some unit of time is like the declared interval.
func (decl declared) like(step float64) bool {
	_, ok := decl.scaleOf(step)
	return ok
}

// declared is the sampling interval that the caller or else the preamble gives.
func (d *layoutDesign) declared(col int) declared {
	if d.opt.Interval > 0 {
		return declared{value: d.opt.Interval, ok: true}
	}
	return d.preamble.interval(col)
}

// doubtInterval refuses a declared interval that may not be that of the samples.
func (d *layoutDesign) doubtInterval(col int) *Error {
	if n := d.preamble.number(meansSegments, col, "", unit{}); n.ok && n.value > 1 {
		return &Error{Err: ErrNoTime, Line: n.line, Found: fmt.Sprintf("%.0f segments, and no time column that shows where they begin", n.value), Expected: "one record"}
	}
	if d.opt.Interval > 0 {
		return nil
	}
	if err := d.preamble.quarrel(col); err != nil {
		return err
	}
	first := d.declared(col)
	n := d.preamble.number(meansDecimation, col, "", unit{})
	index := firstWithRole(d.columns, RoleIndex)
	if n.ok && n.value > 1 && first.ok && (index < 0 || d.columns[index].stride(2) != n.value) {
		return &Error{Err: ErrNoTime, Line: n.line, Found: fmt.Sprintf("a decimation of %g, which the sampling interval of %s in line %d may or may not include", n.value, seconds(first.value), first.line),
			Expected: "--interval"}
	}
	return nil
}

// needInterval refuses a file without time whose interval nothing gives.
func (d *layoutDesign) needInterval() *Error {
	col := max(0, slices.IndexFunc(d.columns, func(c column) bool { return c.Role == RoleChannel }))
	if err := d.doubtInterval(col); err != nil {
		return err
	}
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
