package capture

import (
	"fmt"
	"strconv"
	"strings"
	"unicode/utf8"
)

func (c *Capture) note(code Code, s Severity, message, remedy string) {
	c.Findings = append(c.Findings, Finding{code, s, message, remedy})
}

// addFindings says what was left out.
func (d *layoutDesign) addFindings(c *Capture, t *table) {
	for i := range d.columns {
		if d.columns[i].Role != RoleChannel {
			continue
		}
		if n := t.missing[d.plan.steps[i].to]; n > 0 {
			c.note(MissingSamples, Warning,
				fmt.Sprintf("%d of %d samples of %s are missing or over range, and left out", n, t.rows, d.channelName(i, i)),
				"set the vertical scale so that the whole record is on screen")
		}
	}
	var parts []string
	last := len(d.columns) - 1
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
			if i == last && col.Name == "" {
				continue // a separator at the end of the line
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

// Channel returns the channel of that name, or of that number; names count
// first, and capitals do not. The error lists the channels there are.
func (c *Capture) Channel(nameOrNumber string) (*Channel, error) {
	for _, ch := range c.Channels {
		if ch.Name == nameOrNumber {
			return ch, nil
		}
	}
	for _, ch := range c.Channels {
		if strings.EqualFold(ch.Name, strings.TrimSpace(nameOrNumber)) {
			return ch, nil
		}
	}
	if n, err := strconv.Atoi(nameOrNumber); err == nil && n > 0 && n <= len(c.Channels) {
		return c.Channels[n-1], nil
	}
	var list []string
	for _, ch := range c.Channels {
		list = append(list, fmt.Sprintf("%d %q", ch.Number, ch.Name))
	}
	return nil, fmt.Errorf("no channel %q in %s, which has %s", nameOrNumber, c.File, strings.Join(list, ", "))
}
