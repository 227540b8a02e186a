package capture

import (
	"bytes"
	"math"
	"strings"
)

// A meaning is what an entry of a preamble tells.
type meaning int

const (
	meansNothing meaning = iota
	meansInterval
	meansRate
	meansStart
	meansTrigger // index of the sample at time zero
	meansTimeUnit
	meansValueUnit
	meansSource // name of the channel
	meansCount  // number of samples
	meansScale  // what a converter code is worth
)

// meanings gives the meaning of the keys of preambles, folded.
var meanings = map[string]meaning{}

func init() {
	for m, keys := range map[meaning]string{
		meansInterval: `sampleinterval samplinginterval sampleperiod samplingperiod samplingtime sampletime timeinterval
			timepersample secondspersample timestep timeincrement timedelta increment xincrement xinc xincr incr horizontalinterval deltat δt dt
			ts interval sp samplespacing timespacing tinc hresolution timeresolution
			abtastintervall abtastzeit abtastperiode périodeéchantillonnage périodedéchantillonnage`,
		meansRate: `samplerate samplingrate samplefrequency samplingfrequency samplingfreq fs samplespersecond sr acquisitionrate sampling
			abtastrate abtastfrequenz fréquencedéchantillonnage`,
		meansStart:     `start starttime t0 x0 tstart xstart tzero xzero xorigin timeorigin timezero firstsample timeoffirstsample horizontalstart xfirst`,
		meansTrigger:   `triggerpoint triggersample triggerindex triggerposition pretriggersamples pretriggerpoints`,
		meansTimeUnit:  `horizontalunits horizontalunit timeunit timeunits xunit xunits timebaseunit unitoftime`,
		meansValueUnit: `verticalunits verticalunit unit units yunit yunits voltageunit valueunit amplitudeunit channelunit einheit unité`,
		meansSource:    `source channel trace channelname tracename signal kanal`,
		meansCount:     `recordlength points samples numberofpoints numberofsamples recordsize memorylength npoints datapoints numpoints`,
		meansScale:     `ymult ymultiplier yincrement yinc voltspercount voltspercode voltsperlsb voltsperbit vcount vlsb lsb verticalmultiplier countscale`,
	} {
		for _, k := range strings.Fields(keys) {
			meanings[k] = m
		}
	}
}

// An entry is one thing a preamble tells.
type entry struct {
	means  meaning
	line   int
	column int // of the key, from 0
	unit   unit
	values []located
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
			if rate, ok := p.findRate(text); ok {
				p.entries = append(p.entries, entry{means: meansRate, line: number, column: col, values: []located{{rate, col}}})
			}
		} else {
			open.values = append(open.values, located{text, col})
		}
	}
}

// findRate looks for a sampling rate in a sentence: its unit tells.
func (p *preamble) findRate(text string) (string, bool) {
	w := strings.Fields(text)
	for i := range w {
		for _, try := range []string{w[i], strings.Join(w[i:min(i+2, len(w))], " ")} {
			if _, u, _, ok := p.d.quantity(cell{text: []byte(strings.TrimRight(try, ".;)"))}); ok && u.base == "Sa/s" {
				return strings.TrimRight(try, ".;)"), true
			}
		}
	}
	return "", false
}

// readKey reads "key", "key: value", "key = value" and "key value", the key
// with or without its unit in brackets.
func readKey(text string) (e entry, rest string, ok bool) {
	key := text
	if i := strings.IndexAny(text, ":="); i > 0 {
		key, rest = text[:i], strings.TrimSpace(text[i+1:])
	}
	for {
		name, u, _ := splitUnit(key)
		if m := meanings[fold(name)]; m != meansNothing && len(strings.TrimSpace(name)) < 40 {
			return entry{means: m, unit: u}, rest, true
		}
		// Shorten a free text by its last word, which may be the value.
		i := strings.LastIndexByte(strings.TrimSpace(key), ' ')
		if i < 0 || rest != "" && key == text {
			return entry{}, "", false
		}
		rest = strings.TrimSpace(key[i:] + " " + rest)
		key = key[:i]
		if !strings.ContainsAny(rest[:1], "0123456789+-.") && !isUnit(rest) {
			return entry{}, "", false
		}
	}
}

func isUnit(text string) bool {
	_, ok := parseUnit(text)
	return ok
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
	return len(text) > 0 && (text[0] == '#' || text[0] == '%' || text[0] == '!' || bytes.HasPrefix(text, []byte("//")))
}

// text returns the value of an entry for the column col (from 0): the one that
// stands in that column, else the nearest to its left, else the first.
func (p *preamble) text(m meaning, col int) (string, unit, bool) {
	var best *located
	var u unit
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
			if v := &e.values[j]; best == nil || rank(v) > rank(best) {
				best, u = v, e.unit
			}
		}
	}
	if best == nil {
		return "", u, false
	}
	return best.text, u, true
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
// unit of its last printed digit.
type declared struct {
	value, half float64
	ok          bool
}

// number returns the value of an entry as a number in base units; a value
// without a unit of its own has that of its key, else the default.
func (p *preamble) number(m meaning, col int, base string, def unit) declared {
	text, u, ok := p.text(m, col)
	if !ok {
		return declared{}
	}
	if u.base == "" {
		u = def
	}
	for _, d := range []dialect{p.d, p.d.otherMark()} {
		c := cell{text: []byte(strings.TrimSpace(text)), quoted: true}
		n, digits, ok := d.number(c)
		own := u
		if !ok {
			n, own, digits, ok = d.quantity(c)
		}
		if !ok || own.base != "" && own.base != base {
			continue
		}
		// With a prefix there is no need for thousands, and a count has no fractions.
		if p.d.ambiguous(c.text) && own.exp == 0 && m != meansCount {
			return declared{}
		}
		return declared{n.float(own.exp, digits, d.mark), 0.5 * math.Pow10(n.exp+own.exp), true}
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
	for _, base := range []string{"Sa/s", "Hz"} {
		if d := p.number(meansRate, col, base, unit{base: base}); d.ok && d.value > 0 {
			return declared{1 / d.value, d.half / (d.value * d.value), true}
		}
	}
	return declared{}
}

// timeUnit is the unit of time the preamble names, without base when it names none.
func (p *preamble) timeUnit(col int) unit {
	if text, _, ok := p.text(meansTimeUnit, col); ok {
		if u, ok := parseUnit(text); ok && u.base == "s" {
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
