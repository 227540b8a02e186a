package capture

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// build makes the capture from the table.
func (d *layoutDesign) build(c *Capture, src *source, t *table) *Error {
	axes, err := d.axes(c, t)
	if err != nil {
		return err
	}
	d.finishRoles(t, axes)
	d.addChannels(c, t, axes)
	if ch := c.Channels[0]; len(c.Channels) == 1 && t.missing[d.plan.steps[ch.Column-1].to] == len(ch.Samples) {
		return &Error{Err: ErrNoData, Column: ch.Column, Found: fmt.Sprintf("%d samples missing or over range", len(ch.Samples)), Expected: "numbers"}
	}
	d.addFindings(c, t)
	c.Layout = d.layout(src, t.footer)
	return nil
}

// axes decides the time axis of every time column, or of a file without; nil
// for a time column of too few stamps beside others.
func (d *layoutDesign) axes(c *Capture, t *table) ([]*Axis, *Error) {
	if d.plan.times == 0 {
		a := d.bareAxis(t.rows)
		return []*Axis{a}, a.possible(0)
	}
	axes := make([]*Axis, d.plan.times)
	most := 0 // stamps of a column with samples beside it
	for k := range axes {
		n := 0
		for _, s := range t.spans[k] {
			n += s.n
		}
		if d.plan.samplesOn(k) {
			most = max(most, n)
		}
		if n < fewestRows {
			continue
		}
		d.joinPeakRows(c, t, k)
		a, err := d.axis(c, t, k)
		if err == nil {
			err = a.possible(d.timeColumn(k) + 1)
		}
		if err != nil {
			return nil, err
		}
		axes[k] = a
		for _, other := range axes[:k] {
			if other != nil && sameAxis(a, other) {
				axes[k] = other
			}
		}
	}
	if most < fewestRows {
		return nil, tooFew(most)
	}
	return axes, nil
}

// A record that is longer than thirty years, or sampled faster than light crosses an
// atom, was not captured: its times are no times, or their unit is another.
const (
	longestRecord    = 1e9   // s
	shortestInterval = 1e-18 // s
)

// possible refuses an axis that no record can have; column is that of its stamps,
// from 1, or 0.
func (a *Axis) possible(column int) *Error {
	e := &Error{Err: ErrNoTime, Column: column}
	switch length := a.Time(a.N-1) - a.Start; {
	case math.IsNaN(length) || math.IsInf(length, 0):
		e.Found, e.Expected = "stamps beyond all numbers", "times in seconds or parts of them"
	case !(length <= longestRecord):
		e.Found = fmt.Sprintf("%d samples over %.3g s", a.N, length)
		e.Expected = fmt.Sprintf("a record of %g s at most", longestRecord)
	case !(a.Interval >= shortestInterval):
		e.Found = fmt.Sprintf("samples %.3g s apart", a.Interval)
		e.Expected = fmt.Sprintf("%g s at least", shortestInterval)
	default:
		return nil
	}
	return e
}

func sameAxis(a, b *Axis) bool {
	if a.N != b.N || a.Start != b.Start || a.Interval != b.Interval || (a.Times == nil) != (b.Times == nil) {
		return false
	}
	return sameValues(a.Times, b.Times)
}

func (d *layoutDesign) addChannels(c *Capture, t *table, axes []*Axis) {
	for i := range d.columns {
		col := &d.columns[i]
		if col.Role != RoleChannel {
			continue
		}
		ch := &Channel{Number: len(c.Channels) + 1, Column: i + 1, Unit: col.unit.base, Samples: t.values[d.plan.steps[i].to], Axis: axes[max(0, d.plan.steps[i].axis)]}
		col.scaleCodes(ch)
		ch.Name = d.channelName(i, ch.Number)
		c.Channels = append(c.Channels, ch)
	}
}

// wholeNumbers reports samples without fractions, as raw codes are.
func wholeNumbers(v []float64) bool {
	for _, x := range v {
		if x != math.Trunc(x) && !math.IsNaN(x) {
			return false
		}
	}
	return true
}

// channelName is the name of the column, without what it only shares with its
// time column; else what the preamble calls the source; else the number.
func (d *layoutDesign) channelName(i, number int) string {
	col := &d.columns[i]
	if name := col.Name; name != "" {
		if col.time >= 0 {
			name = commonEnd(d.columns[col.time].Name, name)
		}
		return name
	}
	if text, _, ok := d.preamble.text(meansSource, i); ok {
		return text
	}
	return fmt.Sprintf("channel %d", number)
}

// commonEnd returns what "TimeV_S" and "AmplitudeV_S" end in, when the first
// starts with the word time; else the name as it is.
func commonEnd(time, name string) string {
	if rest := strings.TrimLeft(time[min(4, len(time)):], " _-"); len(time) > 4 && strings.EqualFold(time[:4], "time") {
		if rest != "" && strings.HasSuffix(name, rest) {
			return rest
		}
	}
	return name
}

// finishRoles corrects the roles by all values, now that they are known.
func (d *layoutDesign) finishRoles(t *table, axes []*Axis) {
	var channels []int
	for i := range d.columns {
		if d.columns[i].Role == RoleChannel {
			channels = append(channels, i)
		}
	}
	kept := len(channels)
	drop := func(i int, r Role, why string, args ...any) {
		if kept > 1 {
			d.columns[i].is(r, why, args...)
			kept--
		}
	}
	values := func(i int) []float64 { return t.values[d.plan.steps[i].to] }
	channels = slices.DeleteFunc(channels, func(i int) bool {
		s := d.plan.steps[i]
		short := s.axis >= 0 && axes[s.axis] == nil
		if short {
			drop(i, RoleBlank, "%s in it only", plural(len(values(i)), "sample"))
		}
		return short
	})
	for k, i := range channels {
		switch v, s := values(i), d.plan.steps[i]; {
		case t.missing[s.to] == len(v):
			drop(i, RoleBlank, "not one sample in it can be read")
		case zerosAndOnes(v) && d.columns[i].whole:
			drop(i, RoleLogic, "it holds only 0 and 1")
		default:
			for _, j := range channels[:k] {
				a, b := d.columns[j].Name, d.columns[i].Name
				if d.columns[j].Role == RoleChannel && (b == "" || a == b) && sameValues(v, values(j)) {
					drop(i, RoleDuplicate, "the same samples as in column %d", j+1)
					break
				}
			}
		}
	}
	d.joinPeaks(channels, values)
}

// zerosAndOnes reports a column of both 0 and 1 and nothing else.
func zerosAndOnes(v []float64) bool {
	zero, one := false, false
	for _, x := range v {
		zero, one = zero || x == 0, one || x == 1
		if x != 0 && x != 1 && !math.IsNaN(x) {
			return false
		}
	}
	return zero && one
}

// layout sums up how the file was understood.
func (d *layoutDesign) layout(src *source, footer *Error) Layout {
	l := Layout{
		Encoding: src.encoding, Compressed: src.compressed,
		Preamble: d.head.lines[d.head.first].number - 1, HeaderLine: d.heading.namesLine, UnitsLine: d.heading.unitsLine,
		FirstLine: d.head.lines[d.head.first].number, Delimiter: d.head.name(), DecimalMark: string(d.head.mark),
	}
	if top := min(positive(l.HeaderLine, l.FirstLine), positive(l.UnitsLine, l.FirstLine)); top > 0 {
		l.Preamble = top - 1
	}
	if footer != nil {
		l.FooterLine = footer.Line
	}
	if len(d.columns) == 1 {
		l.Delimiter = "none"
	}
	if src.encoding == "UTF-8" && !validHead(d.head.bytes) {
		l.Encoding = "Latin-1"
	}
	for _, c := range d.columns {
		l.Columns = append(l.Columns, c.Column)
	}
	return l
}

func positive(n, otherwise int) int {
	if n > 0 {
		return n
	}
	return otherwise
}
