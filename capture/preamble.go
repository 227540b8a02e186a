package capture

import (
	"bytes"
	"fmt"
	"math"
	"strings"
)

// An entry is one thing a preamble tells.
type entry struct {
	means  meaning
	line   int
	column int // of the key, from 0
	unit   unit
	values []located
	weak   bool // its unit tells, and not its key
}

// A located value is a text and the column it stands in, from 0.
type located struct {
	text   string
	column int
}

// A preamble is all that was understood of the lines above the samples and of
// the metadata beside them.
type preamble struct {
	d       dialect
	entries []entry
}

// readLine takes in the cells of one line of metadata.
func (p *preamble) readLine(number int, cells []cell) {
	var open *entry
	before := len(p.entries)
	for col, c := range cells {
		if c.blank() {
			continue
		}
		text := toUTF8(c.text)
		if e, rest, ok := readKey(text); ok {
			p.entries = append(p.entries, e)
			open = &p.entries[len(p.entries)-1]
			open.line, open.column = number, col
			if rest != "" {
				open.values = append(open.values, located{rest, col})
			}
			continue
		}
		if open == nil {
			if e, value, ok := p.findTold(text); ok {
				e.line, e.column, e.values, e.weak = number, col, []located{{value, col}}, true
				p.entries = append(p.entries, e)
			}
		} else {
			open.values = append(open.values, located{text, col})
		}
	}
	for i := range p.entries[before:] {
		p.entries[before+i].mend()
	}
}

// mend joins values that a comma tore: 250,000 Sa/s and 4,00E-06. Those of several
// channels have no zeros in front of their digits, and units of their own.
func (e *entry) mend() {
	for i := len(e.values) - 1; i > 0; i-- {
		a, b := &e.values[i-1], e.values[i]
		digits := digitsAt([]byte(b.text), 0)
		rest := b.text[digits:]
		whole := len(a.text) > 0 && digitsAt([]byte(strings.TrimLeft(a.text, "+-")), 0) == len(strings.TrimLeft(a.text, "+-"))
		thousands := digits == 3 && len(a.text) < 4 && (b.text[0] == '0' || rest != "" && rest[0] != '.' && b.column == a.column+1)
		exponent := digits > 0 && rest != "" && rest[0]|0x20 == 'e' && b.column == a.column+1
		if !whole || !thousands && !exponent {
			continue
		}
		a.text += "," + b.text
		e.values = append(e.values[:i], e.values[i+1:]...)
	}
}

// findTold looks for a sampling rate or the worth of a code in a sentence: the unit
// tells.
func (p *preamble) findTold(text string) (e entry, value string, ok bool) {
	w := strings.Fields(text)
	for i := range w {
		for _, try := range []string{w[i], strings.Join(w[i:min(i+2, len(w))], " ")} {
			try = strings.TrimRight(try, ".;)")
			for _, d := range []dialect{p.d, p.d.otherMark()} {
				if _, u, _, ok := d.quantity(cell{text: []byte(try)}); ok && u.base == "Sa/s" {
					return entry{means: meansRate}, try, true
				}
				if _, end := scanCell([]byte(try), d.mark); end > 0 {
					if e, ok := perKey(try[end:]); ok && e.means == meansScale {
						return e, try[:end], true
					}
				}
			}
		}
	}
	return e, "", false
}

// cellsOf cuts a line of the preamble. A comment mark is dropped; a line that
// is not cut as the samples are is cut at tabs, semicolons or commas.
func (p *preamble) cellsOf(text []byte) []cell {
	text = stripComment(text)
	d := p.d
	if d.delim == ' ' || bytes.IndexByte(text, d.delim) < 0 {
		for _, d.delim = range []byte("\t;,") {
			if bytes.IndexByte(text, d.delim) >= 0 && d.delim != d.mark {
				break
			}
		}
	}
	return d.split(text, nil)
}

// stripComment takes off the comment mark of a line, and keeps the cells: behind
// the mark a separator ends a blank one.
func stripComment(text []byte) []byte {
	if !isComment(text) {
		return text
	}
	text = bytes.TrimLeft(text, " \t")
	quote := bytes.HasPrefix(text, []byte{'"'})
	text = bytes.TrimLeft(bytes.TrimLeft(text, "\""), "#%/!")
	text = bytes.TrimLeft(text, " ")
	if quote {
		return append([]byte{'"'}, text...)
	}
	return text
}

// isComment reports a line that starts with a comment mark.
func isComment(text []byte) bool {
	text = bytes.TrimLeft(text, " \t\"")
	if len(text) > 1 && text[0] == '%' && bytes.IndexByte([]byte(",;\t|"), text[1]) >= 0 {
		return false // the unit of the first column
	}
	return len(text) > 0 && (text[0] == '#' || text[0] == '%' || text[0] == '!' || bytes.HasPrefix(text, []byte("//")))
}

// text returns the value of an entry for the column col (from 0), and the unit of
// its key.
func (p *preamble) text(m meaning, col int) (string, unit, bool) {
	if e, v := p.best(m, col); e != nil {
		return v.text, e.unit, true
	}
	return "", unit{}, false
}

// best returns the value for the column col (from 0): the one that stands in that
// column, else the nearest to its left, else the first; nil where there is none.
func (p *preamble) best(m meaning, col int) (of *entry, best *located) {
	rank := func(l *located) int {
		if l.column <= col {
			return 1000000 - (col - l.column)
		}
		return -l.column
	}
	for i := range p.entries {
		e := &p.entries[i]
		if e.means != m {
			continue
		}
		for j := range e.values {
			if v := &e.values[j]; best == nil || of.weak && !e.weak || of.weak == e.weak && rank(v) > rank(best) {
				of, best = e, v
			}
		}
	}
	return of, best
}

// find returns the first value of an entry, and its line.
func (p *preamble) find(m meaning) (string, int) {
	for i := range p.entries {
		if e := &p.entries[i]; e.means == m && len(e.values) > 0 {
			return e.values[0].text, e.line
		}
	}
	return "", 0
}

// A declared number is a value the preamble gives, in SI units, and half a
// unit of its last printed digit; base is its unit, "" where none is given.
type declared struct {
	value, half float64
	ok          bool
	base        string
	line        int
}

// number returns the value of an entry as a number in base units; a value
// without a unit of its own has that of its key, else the default.
func (p *preamble) number(m meaning, col int, base string, def unit) declared {
	e, v := p.best(m, col)
	if e == nil {
		return declared{}
	}
	u := e.unit
	if u.base == "" {
		u = def
	}
	text := []byte(strings.TrimSpace(v.text))
	if plain, groups := dropGroups(text, ","); groups > 2 {
		text = plain
	}
	for _, d := range []dialect{p.d, p.d.otherMark()} {
		c := cell{text: text, quoted: true}
		n, digits, ok := d.number(c)
		own := u
		if !ok {
			n, own, digits, ok = d.quantity(c)
		}
		if !ok {
			n, own, digits, ok = d.ofKind(c, base)
		}
		if !ok || own.base != "" && own.base != base {
			continue
		}
		// With a prefix there is no need for thousands, and a count has no fractions.
		if p.d.ambiguous(c.text) && own.exp == 0 && m != meansCount {
			return declared{}
		}
		many := max(own.many, 1)
		return declared{many * n.float(own.exp, digits, d.mark), 0.5 * many * math.Pow10(n.exp+own.exp), true, own.base, e.line}
	}
	return declared{}
}

// ambiguous reports 1,234 where the decimal mark is a point, or 1.234 where it is
// a comma: a thousand, or a number printed with the other mark.
func (d dialect) ambiguous(text []byte) bool {
	_, groups := dropGroups(text, string(d.otherMark().mark))
	return groups == 2 && bytes.IndexByte(text, d.mark) < 0
}

// otherMark is the dialect with the other decimal mark: a preamble need not be
// printed as the samples are.
func (d dialect) otherMark() dialect {
	if d.mark == ',' {
		return dialect{d.delim, '.'}
	}
	return dialect{d.delim, ','}
}

// interval returns the sampling interval that the preamble declares for a
// column, directly or as a rate.
func (p *preamble) interval(col int) declared {
	if d := p.number(meansInterval, col, "s", p.timeUnit(col)); d.ok && d.value > 0 {
		return d
	}
	return p.rate(col)
}

// rate is the sampling interval that the preamble declares as a rate.
func (p *preamble) rate(col int) declared {
	for _, base := range []string{"Sa/s", "Hz"} {
		if d := p.number(meansRate, col, base, unit{base: base}); d.ok && d.value > 0 {
			d.value, d.half = 1/d.value, d.half/(d.value*d.value)
			return d
		}
	}
	return declared{}
}

// quarrel refuses intervals and rates that contradict each other: of which no key
// tells the right one, or of several channels.
func (p *preamble) quarrel(col int) *Error {
	best, _ := p.best(meansRate, col)
	var first declared
	for _, e := range p.entries {
		if e.means != meansInterval && e.means != meansRate || e.weak && (best == nil || !best.weak) {
			continue
		}
		for _, v := range e.values {
			one := e
			one.values = []located{v}
			d := (&preamble{d: p.d, entries: []entry{one}}).interval(col)
			if !d.ok {
				continue
			}
			if !first.ok {
				first = d
			}
			if math.Abs(d.value-first.value) > 0.01*first.value {
				return &Error{Err: ErrNoTime, Line: d.line, Found: fmt.Sprintf("a sampling interval of %s beside one of %s in line %d", seconds(d.value), seconds(first.value), first.line),
					Expected: "one interval, or --interval"}
			}
		}
	}
	return nil
}

// readBelow reads a line of values below a line of nothing but keys: start, increment.
func (p *preamble) readBelow(above int, cells []cell) {
	var keys []*entry
	for i := len(p.entries) - 1; i >= 0 && p.entries[i].line >= above; i-- {
		if e := &p.entries[i]; e.line == above {
			if keys = append(keys, e); len(e.values) > 0 || e.column >= len(cells) || cells[e.column].blank() {
				return
			}
		}
	}
	filled := 0
	for _, c := range cells {
		if !c.blank() {
			filled++
		}
	}
	if len(keys) < 2 || filled != len(keys) {
		return
	}
	for _, e := range keys {
		e.values = []located{{toUTF8(cells[e.column].text), e.column}}
	}
}

// timeUnit is the unit of time the preamble names, without base when it names none.
func (p *preamble) timeUnit(col int) unit {
	if text, _, ok := p.text(meansTimeUnit, col); ok {
		if u, ok := parseTimeUnit(text); ok {
			return u
		}
	}
	return unit{}
}

// valueUnit is the unit of the samples of a column that the preamble names. A list
// behind the key, "Units: V, A", is that of the channels in order, of which the
// column is one.
func (p *preamble) valueUnit(col, channel int) (unit, bool) {
	for _, e := range p.entries {
		if e.means == meansValueUnit && len(e.values) > 1 && e.values[0].column == e.column && channel < len(e.values) {
			return parseUnit(e.values[channel].text)
		}
	}
	text, u, ok := p.text(meansValueUnit, col)
	if !ok {
		return unit{}, false
	}
	if u.base != "" {
		return u, true
	}
	return parseUnit(text)
}
