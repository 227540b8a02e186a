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
		own, of := c.unit.base, t.columns[response].unit.base
		if own != "" && own != of && own != "%" && (decibels[own] == 0 || decibels[of] == 0) {
			continue
		}
		s.Deviation = c.scaled()
		for k, u := range s.Deviation {
			if !(u > 0) {
				s.Deviation = nil // a deviation of zero weighs nothing
				c.Why += fmt.Sprintf("; not used, as it is %s in line %d", shown(u), t.lines[k])
				return
			}
			switch {
			case own == "%" && of != "%":
				s.Deviation[k] = s.Magnitude[k] * u / 100
			case s.Decibels:
				s.Deviation[k] = s.Magnitude[k] * u * math.Ln10 / 20
			}
		}
		c.Why += "; rows are weighted by it"
		return
	}
}

// owner is the column that a column of deviations belongs to: by its name; else the
// next to its left, unless its unit is that of the only other one with such numbers.
func (t *sweepTable) owner(i int) int {
	if of := deviationOf(t.columns, i); of >= 0 {
		return of
	}
	left, alike, n := -1, -1, 0
	for k := range t.columns {
		switch c := &t.columns[k]; c.Role {
		case RoleDeviation, RoleBlank, RoleText:
		default:
			if k < i {
				left = k
			}
			if unit := t.columns[i].unit.base; unit != "" && unit == c.unit.base {
				alike, n = k, n+1
			}
		}
	}
	if n == 1 {
		return alike
	}
	return left
}

// level is how the voltage of a column was read, 0 when nothing says it.
func (c *column) level() float64 {
	if c.unit.level > 0 {
		return c.unit.level
	}
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
	if c == nil || s.Reference != nil {
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
	s.Reference = c.linear()
	if r := t.at(RoleResponse); r != nil && t.pairs == nil && r.linearUnit() != c.linearUnit() && r.unit.base != "" && c.unit.base != "" {
		s.Reference = nil
		c.Why += fmt.Sprintf("; not used, as it is in %s and the response in %s", c.Unit, r.Unit)
		return
	}
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
		s.note(IgnoredColumns, "columns not fitted: "+strings.Join(parts, ", "),
			"nothing, unless one of them is the response or the reference: name it with --response or --reference")
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

// note adds a finding of no weight.
func (s *Sweep) note(code Code, message, remedy string) {
	s.Findings = append(s.Findings, newFinding(code, Note, message, remedy))
}

func quoted(name string) string {
	if name == "" {
		return ""
	}
	return fmt.Sprintf("%q", name)
}
