package capture

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// build makes the sweep from the table.
func (t *sweepTable) build(s *Sweep, src *source, opt SweepOptions) error {
	if err := t.assign(opt); err != nil {
		return err
	}
	s.Lines = t.lines
	if err := t.frequencies(s, opt); err != nil {
		return err
	}
	if err := t.response(s); err != nil {
		return err
	}
	t.phase(s)
	t.deviation(s)
	t.reference(s, opt)
	t.others(s)
	s.Layout = t.layout(src, t.footer)
	s.say()
	return nil
}

// at returns the column of a role, nil when there is none.
func (t *sweepTable) at(r Role) *column {
	if i := firstWithRole(t.columns, r); i >= 0 {
		return &t.columns[i]
	}
	return nil
}

// scaled returns the values of a column in its base unit.
func (c *column) scaled() []float64 {
	out := slices.Clone(c.values)
	for i := range out {
		if c.unit.exp < 0 {
			out[i] /= math.Pow10(-c.unit.exp)
		} else {
			out[i] *= c.unit.times()
		}
	}
	return out
}

func (t *sweepTable) frequencies(s *Sweep, opt SweepOptions) error {
	c := t.at(RoleFrequency)
	if u, ok := parseUnit(opt.FrequencyUnit); ok {
		c.unit = u
	} else if c.unit.base != "Hz" {
		c.unit = unit{base: "Hz"}
		c.Why += "; hertz assumed"
	}
	c.Unit = unitName(c.unit)
	s.Frequency = c.scaled()
	for i, f := range s.Frequency {
		if !(f > 0) {
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
	c, re, im := t.at(RoleResponse), t.at(RoleReal), t.at(RoleImaginary)
	switch {
	case c != nil:
		return t.magnitude(s, c)
	case re == nil || im == nil:
		return &Error{Err: ErrNoData, Found: "the columns " + t.listed(), Expected: "a magnitude of the response, or --response"}
	}
	s.setComplex(re.scaled(), im.scaled())
	s.Unit, s.Name = re.unit.base, strings.TrimSpace(re.Name)
	return t.someValues(s, re)
}

func (s *Sweep) setComplex(re, im []float64) {
	s.Cartesian = true
	s.Magnitude, s.Phase = make([]float64, len(re)), make([]float64, len(re))
	for i := range re {
		s.Magnitude[i], s.Phase[i] = math.Hypot(re[i], im[i]), math.Atan2(im[i], re[i])
	}
}

func (t *sweepTable) magnitude(s *Sweep, c *column) error {
	s.Name, s.Part, s.Unit = c.Name, partOf(c.Name), c.unit.base
	lo, _ := extremes(c.values)
	if c.unit.base == "" && lo < 0 && c.responseRank() == rankRatio {
		c.unit, c.Unit = unit{base: "dB"}, "dB"
		c.Why += "; negative numbers are taken for dB"
	}
	s.Magnitude = c.scaled()
	if c.unit.base == "dB" {
		s.Decibels, s.Unit = true, ""
		for i, v := range s.Magnitude {
			s.Magnitude[i] = math.Pow(10, v/20)
		}
		return t.someValues(s, c)
	}
	for i, v := range s.Magnitude {
		if v < 0 {
			return &Error{Err: ErrSyntax, Line: t.lines[i], Column: c.Number, Found: shown(c.values[i]),
				Expected: "a magnitude, which is not negative (name a column in dB so: \"gain (dB)\")"}
		}
	}
	return t.someValues(s, c)
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

func (t *sweepTable) phase(s *Sweep) {
	c := t.at(RolePhase)
	if c == nil || s.Phase != nil {
		return
	}
	s.Phase = slices.Clone(c.values)
	if c.unit.base != "deg" && c.unit.base != "rad" {
		c.unit = unit{base: "rad"}
		if lo, hi := extremes(c.values); hi > 7 || lo < -7 {
			c.unit = unit{base: "deg"}
		}
		c.Why += "; " + map[string]string{"deg": "degrees, as no radians are so many", "rad": "radians assumed"}[c.unit.base]
		c.Unit = c.unit.base
	}
	if c.unit.base == "deg" {
		for i := range s.Phase {
			s.Phase[i] *= math.Pi / 180
		}
	}
}

// deviation takes the column of deviations that belongs to the response: beside
// its name, else the next to its right.
func (t *sweepTable) deviation(s *Sweep) {
	response := firstWithRole(t.columns, RoleResponse)
	if response < 0 {
		return
	}
	for i := range t.columns {
		c := &t.columns[i]
		if c.Role != RoleDeviation || t.owner(i) != response {
			continue
		}
		if c.unit.base != "" && c.unit.base != t.columns[response].unit.base {
			continue
		}
		s.Deviation = c.scaled()
		for k, u := range s.Deviation {
			if !(u > 0) {
				s.Deviation = nil // a deviation of zero weighs nothing
				c.Why += fmt.Sprintf("; not used, as it is %s in line %d", shown(u), t.lines[k])
				return
			}
			if s.Decibels {
				s.Deviation[k] = s.Magnitude[k] * u * math.Ln10 / 20
			}
		}
		c.Why += "; rows are weighted by it"
		return
	}
}

// owner is the column that a column of deviations belongs to.
func (t *sweepTable) owner(i int) int {
	if of := deviationOf(t.columns, i); of >= 0 {
		return of
	}
	for k := i - 1; k >= 0; k-- {
		switch t.columns[k].Role {
		case RoleDeviation, RoleBlank, RoleText:
		default:
			return k
		}
	}
	return -1
}

// levels are words for how a voltage was read, as parts of the peak.
var levels = map[string]float64{"pp": 2, "vpp": 2, "pkpk": 2, "peaktopeak": 2, "p2p": 2, "rms": 1 / math.Sqrt2, "vrms": 1 / math.Sqrt2,
	"eff": 1 / math.Sqrt2, "peak": 1, "pk": 1, "vpk": 1}

// level is how the voltage of a column was read, 0 when nothing says it.
func (c *column) level() float64 {
	if strings.Contains(fold(c.Name), "peaktopeak") || strings.Contains(fold(c.Name), "pkpk") {
		return 2
	}
	for _, w := range words(c.Name) {
		if l := levels[w]; l > 0 {
			return l
		}
	}
	return 0
}

// reference sets the voltage of the source, unless the response was divided by it.
func (t *sweepTable) reference(s *Sweep, opt SweepOptions) {
	c := t.at(RoleReference)
	if c == nil {
		return
	}
	asked := opt.Reference != ""
	if r := t.at(RoleResponse); !asked && r != nil && r.responseRank() == rankRatio || opt.Reference == "none" {
		c.is(RoleVoltage, "%s; not used, as the response is a ratio already", c.Why)
		if opt.Reference == "none" {
			c.Why = "not wanted as reference"
		}
		return
	}
	s.Reference = c.scaled()
	if r := t.at(RoleResponse); r != nil && r.level() > 0 && c.level() > 0 && r.level() != c.level() {
		for i := range s.Reference {
			s.Reference[i] *= r.level() / c.level()
		}
		c.Why += "; brought to the scale of the response (peak, rms, peak to peak)"
	}
	for i, v := range s.Reference {
		if !(v > 0) {
			s.Reference = nil
			c.Why += fmt.Sprintf("; not used, as it is %s in line %d", shown(c.values[i]), t.lines[i])
			return
		}
	}
}

func (t *sweepTable) others(s *Sweep) {
	for i := range t.columns {
		c := &t.columns[i]
		if c.Role == RoleVoltage {
			s.Others = append(s.Others, SweepColumn{Number: c.Number, Name: c.Name, Unit: c.unit.base, Part: partOf(c.Name), Values: c.scaled()})
		}
	}
}

// say notes the columns that are not used, and values that are missing.
func (s *Sweep) say() {
	var parts []string
	for _, c := range s.Layout.Columns {
		unused := c.Role == RoleText || c.Role == RoleVoltage && partOf(c.Name) == "" || strings.Contains(c.Why, "not used")
		if unused {
			parts = append(parts, strings.TrimSpace(fmt.Sprintf("%d %s", c.Number, quoted(c.Name)))+" ("+c.Why+")")
		}
	}
	if len(parts) > 0 {
		s.Findings = append(s.Findings, newFinding(IgnoredColumns, Note, "columns not fitted: "+strings.Join(parts, ", "),
			"nothing, unless one of them is the response or the reference: name it with --response or --reference"))
	}
	missing := 0
	for _, v := range s.Magnitude {
		if math.IsNaN(v) {
			missing++
		}
	}
	if missing > 0 {
		s.Findings = append(s.Findings, newFinding(MissingSamples, Warning,
			fmt.Sprintf("%d of %s have no value of the response, and are left out", missing, plural(len(s.Magnitude), "row")),
			"measure these frequencies again"))
	}
}

func quoted(name string) string {
	if name == "" {
		return ""
	}
	return fmt.Sprintf("%q", name)
}
