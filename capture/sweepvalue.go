package capture

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"strings"
)

// How the columns of a sweep become frequencies, magnitudes and phases in SI units.

// decibels are the units of levels, with the level of 0 dB in the unit behind it.
var decibels = map[string]float64{"dB": 1, "dBc": 1, "dBFS": 1, "dBr": 1, "dBm": 1, "dBV": 1, "dBmV": 1e-3, "dBuV": 1e-6, "dBu": 0.7745966692414834}

// linearUnit is the unit of the values of a column on a linear scale. Of a power it is
// that of its root, which goes as the voltage.
func (c *column) linearUnit() string {
	switch c.unit.base {
	case "dBm":
		return "sqrt(mW)"
	case "dBV", "dBmV", "dBuV", "dBu":
		return "V"
	case "W":
		return "sqrt(W)"
	case "dB", "dBc", "dBFS", "dBr", "%", "1":
		return ""
	}
	return c.unit.base
}

// linear returns the values of a column in its base unit on a linear scale.
func (c *column) linear() []float64 {
	out := c.scaled()
	zero := decibels[c.unit.base]
	for i, v := range out {
		switch {
		case zero > 0:
			out[i] = zero * math.Pow(10, v/20)
		case c.unit.base == "%":
			out[i] = v / 100
		case c.unit.base == "W" && v >= 0:
			out[i] = math.Sqrt(v)
		}
	}
	return out
}

// angular reports a name for an angular frequency.
func angular(name string) bool {
	return slices.ContainsFunc(words(name), func(w string) bool {
		return slices.Contains([]string{"omega", "ω", "angular", "kreisfrequenz", "radian"}, w)
	})
}

// logarithmic reports a name for a logarithm.
func logarithmic(name string) bool {
	return slices.ContainsFunc(words(name), func(w string) bool {
		w = strings.TrimLeft(w, "0123456789*·×")
		return w == "log" || w == "log10" || w == "lg" || w == "ln" || strings.HasPrefix(w, "log|") || strings.HasPrefix(w, "lg|")
	})
}

func (t *sweepTable) frequencies(s *Sweep, opt SweepOptions) error {
	c := t.at(RoleFrequency)
	if logarithmic(c.Name) {
		return &Error{Err: ErrSyntax, Line: t.heading.namesLine, Column: c.Number, Found: quote(c.Name), Expected: "frequencies and not their logarithms"}
	}
	t.frequencyUnit(s, c, opt)
	s.Frequency = c.scaled()
	for i := range s.Frequency {
		if c.unit.base == "rad/s" {
			s.Frequency[i] /= 2 * math.Pi
		}
		if !(s.Frequency[i] > 0) {
			return &Error{Err: ErrSyntax, Line: t.lines[i], Column: c.Number, Found: shown(c.values[i]), Expected: "a frequency greater than zero"}
		}
	}
	if lo, hi := s.Span(); lo == hi {
		return &Error{Err: ErrTooFew, Column: c.Number, Found: fmt.Sprintf("%s in every row", hertz(lo)), Expected: "different frequencies"}
	}
	if clock := t.at(RoleTime); clock != nil {
		s.Clock = clock.scaled()
	}
	return nil
}

// frequencyUnit settles the unit of the frequencies: that of each cell, the caller's
// word, the heading, the preamble; else hertz, or radians a second under a name for
// those. The caller's word against that of the file is said in a finding.
func (t *sweepTable) frequencyUnit(s *Sweep, c *column, opt SweepOptions) {
	own, why := t.ownFrequencyUnit(c)
	given, ok := parseUnit(opt.FrequencyUnit)
	switch {
	case c.kind == kindQuantity && own.base != "":
		c.unit = unit{base: own.base}
		if ok {
			s.note(IgnoredColumns, "each frequency of the file has its unit, and --frequency-unit "+unitName(given)+" is not used", "leave --frequency-unit out")
		}
	case ok:
		s.unitGiven(own, given)
		c.unit = given
	case own.base != "":
		c.unit = own
		c.Why += why
	case angular(c.Name):
		c.unit = unit{base: "rad/s"}
		c.Why += "; radians a second assumed"
	default:
		c.unit = unit{base: "Hz"}
		c.Why += "; hertz assumed"
	}
	c.Unit = unitName(c.unit)
}

// ownFrequencyUnit is the unit of the frequencies that the file gives, without base
// when it gives none, and what is to be said of where it stands.
func (t *sweepTable) ownFrequencyUnit(c *column) (unit, string) {
	switch own := c.unit; {
	case own.base == "Sa/s" && angular(c.Name): // 1/s
		own.base = "rad/s"
		return own, ""
	case own.base == "Sa/s":
		own.base = "Hz"
		return own, ""
	case own.base == "Hz", own.base == "rad/s":
		return own, ""
	}
	told, _, _ := t.preamble.text(meansFrequencyUnit, c.Number-1)
	if told == "" {
		told, _, _ = t.preamble.text(meansTimeUnit, c.Number-1) // of the horizontal axis
	}
	if u, ok := parseUnit(told); ok && u.base == "Hz" {
		return u, "; unit in the preamble"
	}
	return unit{}, ""
}

// unitGiven says that the caller's unit of frequency is not that of the file.
func (s *Sweep) unitGiven(file, given unit) {
	if file.base != "" && unitName(file) != unitName(given) {
		s.note(IgnoredColumns, fmt.Sprintf("the file gives its frequencies in %s and --frequency-unit in %s; the given unit is used", unitName(file), unitName(given)),
			"leave --frequency-unit out if the file is right: all frequencies scale with it")
	}
}

// shown prints a number of a cell for a message.
func shown(x float64) string {
	if math.IsNaN(x) {
		return "an empty cell"
	}
	return fmt.Sprintf("%g", x)
}

// hertz prints a frequency for a message.
func hertz(f float64) string {
	for _, p := range []struct {
		scale float64
		unit  string
	}{{1e9, "GHz"}, {1e6, "MHz"}, {1e3, "kHz"}} {
		if f >= p.scale {
			return fmt.Sprintf("%.6g %s", f/p.scale, p.unit)
		}
	}
	return fmt.Sprintf("%.6g Hz", f)
}

// response sets magnitude, and the phase that goes with real and imaginary parts.
func (t *sweepTable) response(s *Sweep) error {
	if c := t.at(RoleResponse); c != nil {
		return t.magnitude(s, c)
	}
	if len(t.pairs) > 0 {
		return t.complexResponse(s)
	}
	for i, c := range t.head.sample[0].cells {
		if i < len(t.columns) && t.columns[i].kind == kindText && bytes.ContainsAny(c.text, "ij") && bytes.ContainsAny(c.text, "0123456789") {
			return &Error{Err: ErrSyntax, Line: t.head.sample[0].line.number, Column: i + 1, Found: quote(string(c.text)), Expected: "numbers, real and imaginary part in columns of their own"}
		}
	}
	return &Error{Err: ErrNoData, Found: "the columns " + t.listed(), Expected: "a magnitude of the response, or --response"}
}

func (t *sweepTable) magnitude(s *Sweep, c *column) error {
	s.Name, s.Part = c.Name, partOf(c.Name)
	lo, hi := extremes(c.values)
	switch {
	case c.unit.base != "":
	case logarithmic(c.Name):
		c.unit, c.Unit = unit{base: "dB"}, "dB"
		c.Why += "; a logarithm is taken for dB"
	case lo < 0 && c.responseRank() == rankRatio:
		c.unit, c.Unit = unit{base: "dB"}, "dB"
		c.Why += "; negative numbers are taken for dB"
	}
	s.Unit, s.Decibels = c.linearUnit(), decibels[c.unit.base] > 0
	if s.Decibels && isLoss(c.Name) && hi > 0 {
		for i := range c.values {
			c.values[i] = -c.values[i]
		}
		c.Why += "; a loss, of which more is less response"
	}
	s.Magnitude = c.linear()
	for i, v := range s.Magnitude {
		if v < 0 {
			return &Error{Err: ErrSyntax, Line: t.lines[i], Column: c.Number, Found: shown(c.values[i]),
				Expected: "a magnitude, which is not negative (name a column in dB so: \"gain (dB)\")"}
		}
	}
	return t.someValues(s, c)
}

// isLoss reports a name for how much weaker something became.
func isLoss(name string) bool {
	return slices.ContainsFunc(words(name), func(w string) bool {
		return slices.Contains([]string{"loss", "attenuation", "atten", "dämpfung", "affaiblissement"}, w)
	})
}

// someValues refuses a response of which too little is there.
func (t *sweepTable) someValues(s *Sweep, c *column) error {
	n := 0
	for _, v := range s.Magnitude {
		if !math.IsNaN(v) {
			n++
		}
	}
	if n < sweepRows {
		return &Error{Err: ErrTooFew, Column: c.Number, Found: fmt.Sprintf("%d values of the response", n), Expected: fmt.Sprintf("at least %d", sweepRows)}
	}
	return nil
}

// turns are units of phase, in radians.
var turns = map[string]float64{"rad": 1, "deg": math.Pi / 180, "cycles": 2 * math.Pi, "gon": math.Pi / 200}

func (t *sweepTable) phase(s *Sweep) {
	c := t.at(RolePhase)
	if c == nil || s.Phase != nil {
		return
	}
	unknown := c.phaseUnit()
	if unknown != "" {
		c.Why += fmt.Sprintf("; not used, as its unit %s is not known", quote(unknown))
		return
	}
	s.Phase = c.scaled()
	for i := range s.Phase {
		s.Phase[i] *= turns[c.unit.base]
	}
}

// phaseUnit settles the unit of a phase; it returns what the name gives as one that
// nobody knows.
func (c *column) phaseUnit() (unknown string) {
	if turns[c.unit.base] > 0 {
		return ""
	}
	name, inside := lastBrackets(c.Name)
	if strings.HasPrefix(c.Name, name+"(") {
		inside = "" // arg(Z) gives no unit
	}
	if _, under, found := strings.Cut(c.Name, "/"); found && inside == "" {
		inside = under
	}
	switch inside = strings.ToLower(strings.ReplaceAll(strings.ReplaceAll(inside, " ", ""), "π", "pi")); inside {
	case "pi", "pirad", "rad/pi", "*pi":
		c.unit = unit{base: "rad", many: math.Pi}
	case "2pi", "2*pi", "(2pi)", "(2*pi)":
		c.unit = unit{base: "cycles"}
	case "":
		c.unit = unit{base: "rad"}
		if lo, hi := extremes(c.values); hi > 7 || lo < -7 {
			c.unit = unit{base: "deg"}
		}
		c.Why += "; " + map[string]string{"deg": "degrees, as no radians are so many", "rad": "radians assumed"}[c.unit.base]
	default:
		return inside
	}
	c.Unit = unitName(c.unit)
	return ""
}
