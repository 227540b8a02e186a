package capture

import (
	"fmt"
	"slices"
	"strings"
)

// How the columns of a sweep are told apart: by the options, by unit and name,
// and only then by their place (frequency, response, deviation or phase).

// sweepWords are the words of a name that give its column a role.
var sweepWords = map[Role][]string{
	RoleFrequency: {"f", "freq", "frequency", "frequencies", "hz", "khz", "mhz", "ghz", "frequenz", "fréquence", "omega", "ω", "kreisfrequenz"},
	RolePhase:     {"pha", "phase", "phi", "φ", "deg", "degree", "degrees", "°", "rad", "radian", "radians", "angle", "arg", "theta", "θ"},
	RoleReal:      {"re", "real"},
	RoleImaginary: {"im", "imag", "imaginary"},
	RoleReference: {"vin", "uin", "vs", "us", "vg", "ug", "vsrc", "source", "input", "in", "ref", "reference", "generator", "gen", "drive", "v1", "u1", "ch1", "excitation"},
	RoleResponse: {"amp", "ampl", "amplitude", "gain", "mag", "magnitude", "db", "ratio", "response", "transfer", "h", "|h|", "out", "vout", "uout",
		"output", "v2", "u2", "ch2", "vc", "uc", "vl", "ul", "vr", "ur", "current"},
}

// partWords are folded names of voltages across a part.
var partWords = map[Part][]string{
	Capacitor: {"vc", "uc", "vcap", "ucap", "cap", "capacitor", "capacitorvoltage", "vcapacitor", "voltagecapacitor"},
	Inductor:  {"vl", "ul", "vcoil", "ucoil", "coil", "inductor", "inductorvoltage", "vinductor", "coilvoltage"},
	Resistor:  {"vr", "ur", "vres", "resistor", "resistorvoltage", "vresistor", "current", "i", "ir", "il", "iloop"},
	Both:      {"vlc", "ulc", "notch"},
}

// partOf is the part that a name says; of a ratio its numerator counts. It may
// be one word of the name ("capacitor voltage") or its last ("coil V_L").
func partOf(name string) Part {
	for _, part := range []Part{Both, Capacitor, Inductor, Resistor} {
		for i, w := range nameWords(name) {
			if slices.Contains(partWords[part], w) && (i == 0 || len(w) > 1) {
				return part
			}
		}
	}
	return ""
}

// nameWords are the folded name as a whole, its words, and neighbours of them
// joined, so that "source V_S" holds "vs".
func nameWords(name string) []string {
	all := words(strings.SplitN(name, "/", 2)[0])
	out := append([]string{bareName(name)}, all...)
	for i := 1; i < len(all); i++ {
		out = append(out, all[i-1]+all[i])
	}
	return out
}

// bareName is the folded name without the denominator of a ratio and without
// words for how a voltage was read.
func bareName(name string) string {
	name, _, _ = strings.Cut(name, "/")
	return fold(strings.Join(slices.DeleteFunc(words(name), func(w string) bool { return levels[w] > 0 }), " "))
}

// nameSays reports a name with a word for the role. "V_C" counts as "vc" too.
func nameSays(name string, r Role) bool {
	return slices.ContainsFunc(nameWords(name), func(w string) bool { return slices.Contains(sweepWords[r], w) })
}

// isRatio reports a name for something that was divided by the source already.
func isRatio(name string) bool {
	if strings.Contains(name, "/") {
		return true
	}
	return slices.ContainsFunc(words(name), func(w string) bool {
		return slices.Contains([]string{"gain", "ratio", "transfer", "h", "|h|"}, w)
	})
}

// sweepUnit mends the unit of a column of a sweep: "amp" is an amplitude rather
// than a current, and a word of the name may be the unit.
func (c *column) sweepUnit() {
	if fold(c.Name) == "amp" || fold(c.Name) == "a" {
		c.unit, c.Unit = unit{}, ""
	}
	if c.unit.base != "" && c.unit.base != "s" || strings.Contains(strings.ReplaceAll(strings.ToLower(c.Name), "π", "pi"), "pi rad") {
		return
	}
	for _, w := range strings.FieldsFunc(c.Name, func(r rune) bool { return strings.ContainsRune(" _-.,()[]/:", r) }) {
		if u, ok := parseUnit(w); ok && (u.base == "Hz" || turns[u.base] > 0 || decibels[u.base] > 0) {
			c.unit, c.Unit = u, unitName(u)
			return
		}
	}
}

// assign gives every column its role.
func (t *sweepTable) assign(opt SweepOptions) error {
	for i := range t.columns {
		t.columns[i].sweepUnit()
	}
	if err := t.assignAsked(opt); err != nil {
		return err
	}
	if err := t.assignNamed(); err != nil {
		return err
	}
	t.assignCount()
	assignDeviations(t.columns)
	if firstWithRole(t.columns, RoleFrequency) < 0 {
		if err := t.guessFrequency(); err != nil {
			return err
		}
	}
	t.assignUnnamed()
	t.pickResponse()
	t.pickReference()
	return nil
}

// assignAsked does what the options say.
func (t *sweepTable) assignAsked(opt SweepOptions) error {
	for _, a := range []struct {
		role Role
		name string
	}{{RoleFrequency, opt.Frequency}, {RoleResponse, opt.Response}, {RoleReference, opt.Reference}, {RolePhase, opt.Phase}} {
		if a.name == "" || a.role == RoleReference && a.name == "none" {
			continue
		}
		i, err := t.asked(string(a.role), a.name)
		if err != nil {
			return err
		}
		if c := &t.columns[i]; c.Role != "" {
			return fmt.Errorf("%w for the %s: column %d is the %s already", ErrNoColumn, a.role, i+1, c.Role)
		}
		t.columns[i].is(a.role, "asked for")
	}
	return nil
}

// assignNamed gives roles by unit and name to columns that have none. Response
// and reference are weighed against each other later.
func (t *sweepTable) assignNamed() error {
	taken := func(r Role) bool { return firstWithRole(t.columns, r) >= 0 }
	for i := range t.columns {
		c := &t.columns[i]
		if c.Role != "" {
			continue
		}
		switch of := deviationOf(t.columns, i); {
		case c.kind == kindStamp:
			c.is(RoleTime, "dates or clock times")
		case deviationName(c.Name):
			c.is(RoleDeviation, "its name is %q", c.Name)
		case of >= 0:
			c.is(RoleDeviation, "its name is %q beside %q", c.Name, t.columns[of].Name)
		case (c.unit.base == "Hz" || c.unit.base == "rad/s" || nameSays(c.Name, RoleFrequency)) && !taken(RoleFrequency):
			c.is(RoleFrequency, "its name is %q", c.Name)
		case (turns[c.unit.base] > 0 || nameSays(c.Name, RolePhase)) && !taken(RolePhase):
			c.is(RolePhase, "its name is %q", c.Name)
		case t.isClock(i):
			c.is(RoleTime, "its name is %q", c.Name)
		case c.Name != "" && indexWord(c.Name) && c.whole:
			c.is(RoleIndex, "its name is %q", c.Name)
		}
	}
	if taken(RoleFrequency) {
		if err := t.assignComplex(); err != nil {
			return err
		}
	}
	for i := range t.columns {
		if c := &t.columns[i]; c.Role == "" && c.unit.base == "s" {
			c.is(RoleMetadata, "a time that does not rise from row to row; not used")
		}
	}
	return nil
}

// isClock reports a column of times that rise from row to row.
func (t *sweepTable) isClock(i int) bool {
	c := &t.columns[i]
	rising, _ := c.rises()
	return rising && (c.unit.base == "s" || exactTimeName(c.Name) && !weakTimeName(c.Name) || fold(c.Name) == "t")
}

// pickResponse chooses the response among the columns left, if real and
// imaginary parts are not the response.
func (t *sweepTable) pickResponse() {
	if firstWithRole(t.columns, RoleResponse) >= 0 || len(t.pairs) > 0 {
		return
	}
	best, rank := -1, 0.0
	for i := range t.columns {
		if c := &t.columns[i]; c.Role == "" {
			if r := c.responseRank() + c.meanRank(); r > rank {
				best, rank = i, r
			}
		}
	}
	if best < 0 {
		return
	}
	c := &t.columns[best]
	switch {
	case c.responseRank() >= rankNamed || c.meanRank() > 0:
		c.is(RoleResponse, "its name is %q", c.Name)
	default:
		c.is(RoleResponse, "the first column of numbers beside the frequency")
	}
}

// The ranks of columns that may be the response.
const (
	rankSource = 1 // named as a source
	rankPlain  = 2 // no word for anything
	rankNamed  = 3
	rankPart   = 4 // across a part of the circuit
	rankRatio  = 5 // divided by the source already
)

// meanRank puts a mean before what it is the mean of.
func (c *column) meanRank() float64 {
	if slices.ContainsFunc(words(c.Name), func(w string) bool { return slices.Contains([]string{"mean", "average", "avg", "mittelwert"}, w) }) {
		return 0.5
	}
	return 0
}

func (c *column) responseRank() float64 {
	switch {
	case c.unit.base == "dB" || isRatio(c.Name) || slices.Contains([]string{"amp", "db"}, fold(c.Name)):
		return rankRatio
	case partOf(c.Name) == Capacitor:
		return rankPart
	case partOf(c.Name) != "" || nameSays(c.Name, RoleResponse):
		return rankNamed
	case nameSays(c.Name, RoleReference):
		return rankSource
	}
	return rankPlain
}

// pickReference chooses the source among the columns left: one that was measured
// before one that only says what was set. The others are voltages.
func (t *sweepTable) pickReference() {
	best, measured := -1, false
	if firstWithRole(t.columns, RoleReference) < 0 {
		for i := range t.columns {
			c := &t.columns[i]
			if c.Role != "" || !nameSays(c.Name, RoleReference) {
				continue
			}
			if lo, hi := extremes(c.values); best < 0 || hi > lo && !measured {
				best, measured = i, hi > lo
			}
		}
	}
	if best >= 0 {
		t.columns[best].is(RoleReference, "its name is %q", t.columns[best].Name)
	}
	for i := range t.columns {
		if c := &t.columns[i]; c.Role == "" {
			c.is(RoleVoltage, "numbers beside the response")
		}
	}
}
