package capture

import (
	"fmt"
	"io"
	"slices"
	"strings"
	"unicode"
)

// Explain writes what the reader understood of the file: encoding, preamble,
// separators, each column with its role and why, the channels, and the time
// axis with where it came from.
func (c *Capture) Explain(w io.Writer) error {
	var b strings.Builder
	c.Layout.explain(&b, c.File, c.SHA256)
	for _, ch := range c.Channels {
		fmt.Fprintf(&b, "  channel %-2d %s\n", ch.Number, ch.describe())
	}
	for _, a := range c.axes() {
		fmt.Fprintf(&b, "  time       %s\n", a.describe(c.onAxis(a)))
	}
	explainFindings(&b, c.Findings)
	_, err := io.WriteString(w, b.String())
	return err
}

// Explain writes what the reader understood of the table: encoding, preamble,
// separators, and each column with its role and why.
func (s *Sweep) Explain(w io.Writer) error {
	var b strings.Builder
	s.Layout.explain(&b, s.File, s.SHA256)
	lo, hi := s.Span()
	fmt.Fprintf(&b, "  sweep      %s from %s to %s\n", plural(len(s.Frequency), "row"), hertz(lo), hertz(hi))
	explainFindings(&b, s.Findings)
	_, err := io.WriteString(w, b.String())
	return err
}

func explainFindings(b *strings.Builder, all []Finding) {
	for _, f := range all {
		fmt.Fprintf(b, "  %-10s %s: %s\n", f.Severity, f.Code, f.Message)
	}
}

// explain writes how the file was understood.
func (l *Layout) explain(b *strings.Builder, file, sha256 string) {
	encoding := l.Encoding
	if l.Compressed {
		encoding += ", compressed with gzip"
	}
	fmt.Fprintf(b, "%s\n", strings.Map(func(c rune) rune {
		if unicode.IsControl(c) { // would drive a terminal
			return unicode.ReplacementChar
		}
		return c
	}, shownFile(file)))
	fmt.Fprintf(b, "  text       %s\n", encoding)
	fmt.Fprintf(b, "  SHA-256    %s\n", sha256)
	fmt.Fprintf(b, "  lines      %s\n", l.lines())
	fmt.Fprintf(b, "  separator  %s, decimal mark %q\n", l.Delimiter, l.DecimalMark)
	each := "column"
	if l.Sideways {
		each = "line  "
		fmt.Fprintf(b, "  table      on its side, a line for each channel\n")
	}
	for _, col := range l.Columns {
		fmt.Fprintf(b, "  %s %-3d %s\n", each, col.Number, col.describe())
	}
}

func (l Layout) lines() string {
	var parts []string
	line := "line"
	if l.Sideways {
		line = "column"
	}
	add := func(format string, n int) {
		if n > 0 {
			parts = append(parts, fmt.Sprintf(format, line, n))
		}
	}
	if l.Preamble > 0 {
		parts = append(parts, fmt.Sprintf("preamble to line %d", l.Preamble))
	}
	add("names in %s %d", l.HeaderLine)
	add("units in %s %d", l.UnitsLine)
	add("samples from %s %d on", l.FirstLine)
	add("words from %s %d on are not read", l.FooterLine)
	return strings.Join(parts, ", ")
}

func (col Column) describe() string {
	s := string(col.Role)
	if col.Name != "" {
		s += fmt.Sprintf(" %q", col.Name)
	}
	if col.Unit != "" {
		s += " in " + col.Unit
	}
	return s + ": " + col.Why
}

func (ch *Channel) describe() string {
	unit := ch.Unit
	if unit == "" {
		unit = "a unit the file does not tell"
	}
	return fmt.Sprintf("%q in %s, %d samples", ch.Name, unit, len(ch.Samples))
}

// axes returns the different time axes, in order of the channels.
func (c *Capture) axes() []*Axis {
	var axes []*Axis
	for _, ch := range c.Channels {
		if !slices.Contains(axes, ch.Axis) {
			axes = append(axes, ch.Axis)
		}
	}
	return axes
}

// onAxis returns the channels on an axis.
func (c *Capture) onAxis(a *Axis) []*Channel {
	var on []*Channel
	for _, ch := range c.Channels {
		if ch.Axis == a {
			on = append(on, ch)
		}
	}
	return on
}

func (a *Axis) describe(on []*Channel) string {
	var names []string
	for _, ch := range on {
		names = append(names, ch.Name)
	}
	kind := "even"
	if a.Times != nil {
		kind = "not even"
	}
	if a.Resolution > 0 {
		kind += ", printed to " + seconds(a.Resolution)
	}
	return fmt.Sprintf("%s: %d samples from %s, every %s, %s (%s)", strings.Join(names, ", "), a.N, seconds(a.Start), seconds(a.Interval), kind, a.Source)
}
