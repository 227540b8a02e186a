package capture

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// note adds a finding; what two time columns have in common is said once.
func (c *Capture) note(code Code, s Severity, message, remedy string) {
	f := newFinding(code, s, message, remedy)
	if !slices.Contains(c.Findings, f) {
		c.Findings = append(c.Findings, f)
	}
}

// newFinding makes sentences of message and remedy.
func newFinding(code Code, s Severity, message, remedy string) Finding {
	return Finding{code, s, sentence(message), sentence(remedy)}
}

// sentence begins with a capital and ends with a full stop.
func sentence(s string) string {
	r, n := utf8.DecodeRuneInString(s)
	s = string(unicode.ToUpper(r)) + s[n:]
	if !strings.HasSuffix(s, ".") {
		s += "."
	}
	return s
}

// addFindings says what is missing and what was left out.
func (d *layoutDesign) addFindings(c *Capture, t *table) {
	d.missing(c, t)
	d.parted(c, t)
	d.ignored(c)
	if from, to := d.head.numbersAbove(); to-from >= 19 {
		c.note(IgnoredColumns, Note, fmt.Sprintf("lines %d to %d hold numbers too and are not read; the samples begin in line %d", from, to, d.head.lines[d.head.first].number),
			"split the file if they are a record of their own")
	}
}

// missing counts the samples that the file does not hold.
func (d *layoutDesign) missing(c *Capture, t *table) {
	for _, ch := range c.Channels {
		if n := t.missing[d.plan.steps[ch.Column-1].to]; n > 0 {
			c.note(MissingSamples, Warning,
				fmt.Sprintf("%d of %d samples of %s are missing or over range, and left out", n, len(ch.Samples), ch.Name),
				"set the vertical scale so that the whole record is on screen")
		}
	}
	col := max(0, firstWithRole(d.columns, RoleChannel))
	every := 1.0 // so many are counted for each that is there
	if i := firstWithRole(d.columns, RoleIndex); i >= 0 && d.plan.steps[i].op == opTime {
		every = math.Round(c.Channels[0].Axis.Interval / d.declared(i).value)
	}
	if n := d.preamble.number(meansCount, col, "", unit{}); n.ok && n.value > every*float64(len(c.Channels[0].Samples)) && n.value < 1e12 {
		c.note(MissingSamples, Note, fmt.Sprintf("the preamble declares %.0f samples, and %d are there", n.value, len(c.Channels[0].Samples)),
			"see whether the file was cut off")
	}
}

// parted says that blank lines part samples whose time nothing gives.
func (d *layoutDesign) parted(c *Capture, t *table) {
	blanks := slices.DeleteFunc(slices.Compact(t.blanks), func(row int) bool { return row == 0 || row == t.rows })
	if n := len(blanks); n > 0 && n < t.rows/4 {
		c.note(UnevenTime, Warning, fmt.Sprintf("blank lines part the samples in %s, first before sample %d; they are read as one record without a break", plural(n, "place"), blanks[0]+1),
			"cut the file there if each part is a record of its own")
	}
}

// ignored lists the columns that are no channels.
func (d *layoutDesign) ignored(c *Capture) {
	var parts []string
	for i := range d.columns {
		col := &d.columns[i]
		switch col.Role {
		case RoleChannel, RoleTime, RoleMetadata:
			continue
		case RoleIndex:
			if d.plan.steps[i].op == opTime {
				continue
			}
		case RoleBlank:
			if col.Name == "" && col.kind == kindBlank {
				continue // separators doubled or at the end of the line
			}
		}
		name := ""
		if col.Name != "" {
			name = " " + strconv.Quote(col.Name)
		}
		parts = append(parts, fmt.Sprintf("%d%s (%s: %s)", col.Number, name, col.Role, col.Why))
	}
	if len(parts) > 0 {
		c.note(IgnoredColumns, Note, "columns not read as channels: "+strings.Join(parts, ", "), "nothing, unless one of them is a signal")
	}
}

// plural is a count with its noun.
func plural(n int, noun string) string {
	if n == 1 {
		return "1 " + noun
	}
	return fmt.Sprintf("%d %ss", n, noun)
}

func validHead(b []byte) bool {
	for cut := 0; cut < utf8.UTFMax && cut < len(b); cut++ {
		if utf8.Valid(b[:len(b)-cut]) {
			return true
		}
	}
	return len(b) == 0
}

// Channel returns the channel of that name, or of that number. Names count
// first, then the headings of the columns; capitals do not matter. The error
// lists the channels there are.
func (c *Capture) Channel(nameOrNumber string) (*Channel, error) {
	ask := strings.TrimSpace(nameOrNumber)
	for _, same := range []func(ch *Channel) bool{
		func(ch *Channel) bool { return ch.Name == ask },
		func(ch *Channel) bool { return strings.EqualFold(ch.Name, ask) },
		func(ch *Channel) bool { return ask != "" && strings.EqualFold(c.heading(ch), ask) },
		func(ch *Channel) bool { return strconv.Itoa(ch.Number) == ask },
	} {
		if i := slices.IndexFunc(c.Channels, same); i >= 0 {
			return c.Channels[i], nil
		}
	}
	var list []string
	for _, ch := range c.Channels {
		list = append(list, fmt.Sprintf("%d %q", ch.Number, ch.Name))
	}
	return nil, fmt.Errorf("no channel %q in %s, which has %s", nameOrNumber, c.File, strings.Join(list, ", "))
}

// heading is the name of the channel's column as the file gives it.
func (c *Capture) heading(ch *Channel) string {
	if ch.Column < 1 || ch.Column > len(c.Layout.Columns) {
		return ""
	}
	return c.Layout.Columns[ch.Column-1].Name
}
