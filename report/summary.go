package report

import (
	"bufio"
	"fmt"
	"io"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// Style steers [RingDown.WriteSummary]; its zero value is plain text of 80 columns.
type Style struct {
	// Color marks verdict and severities with terminal colours. Whether the output
	// is a terminal and wants colour (NO_COLOR) is for the caller to say.
	Color bool
	// Width is the number of columns; 0 stands for 80.
	Width int
}

// WriteSummary writes the ring-down for people: the verdict, the results with
// their uncertainties, the gate, the noise, the readings and the findings.
func (r *RingDown) WriteSummary(w io.Writer, style Style) error {
	if err := r.check(); err != nil {
		return err
	}
	s := newSummary(w, style)
	switch {
	case r.Err != nil:
		s.unreadable(r.Err)
	case r.refused():
		s.head(r)
		s.refusal(r)
		s.limits(r.Limits)
	default:
		s.head(r)
		s.results(r)
		s.circuit(r.Circuit)
		s.limits(r.Limits)
		s.findings(r.Findings())
	}
	return s.Flush()
}

// A summary is text under way.
type summary struct {
	*bufio.Writer
	style Style
}

func newSummary(w io.Writer, style Style) *summary {
	if style.Width <= 0 {
		style.Width = 80
	}
	return &summary{Writer: bufio.NewWriter(w), style: style}
}

func (s *summary) unreadable(err error) {
	s.item(s.paint("unreadable", red)+": ", clean(err.Error(), 0))
}

func (s *summary) head(r *RingDown) {
	s.status(r.Status(), r.verdict(), r.Limits)
	s.item("  ", prefixed(r.Device)+r.source())
	s.WriteString("\n")
}

// status writes the verdict on a whole result; limits is nil without any.
func (s *summary) status(status decay.Status, verdict string, limits *circuit.Judgement) {
	color := map[decay.Status]string{decay.Good: green, decay.Doubtful: yellow, decay.Refused: red}[status]
	if status != decay.Refused {
		verdict += limitsToo(limits)
	}
	s.item(s.paint(string(status), color)+": ", verdict)
}

// prefixed returns the device's name before what follows it.
func prefixed(device string) string {
	if device == "" {
		return ""
	}
	return clean(device, nameLength) + ", "
}

// results writes everything that was measured.
func (s *summary) results(r *RingDown) {
	res := r.Result
	for _, row := range resultRows(res.Quantities) {
		s.quantity(row)
	}
	s.WriteString("\n")
	s.item(label("model"), modelName(res))
	s.record(r)
	shown := res.Decays[:min(len(res.Decays), mostDecays)]
	for i, d := range shown {
		if len(res.Decays) > 1 {
			fmt.Fprintf(s, "\n  decay %d\n", i+1)
			s.quantities(&d.Quantities)
		}
		s.decay(d, r.unit())
	}
	if more := len(res.Decays) - len(shown); more > 0 {
		fmt.Fprintf(s, "\n  and %s more\n", plural(more, "decay"))
	}
	for i, m := range res.Modes {
		fmt.Fprintf(s, "\n  mode %d\n", i+1)
		s.quantities(m)
	}
	s.readings(comparisons(res))
}

// decay writes the conditions of one decay.
func (s *summary) decay(d *decay.Decay, unit string) {
	s.item(label("gate"), gateLine(d))
	s.item(label("noise"), noiseLine(d, unit))
	for _, row := range shapeRows(d) {
		s.item(label(shortLabel(row)), row.Quantity.String())
	}
}

// quantities writes the chief results of one decay or mode.
func (s *summary) quantities(q *decay.Quantities) {
	for _, row := range resultRows(q)[:4] {
		s.quantity(row)
	}
}

func (s *summary) quantity(r row) {
	c := r.Columns()
	line := fmt.Sprintf("  %-18s %-6s %s", r.Label, r.Symbol(), pad(r.Quantity.String(), 22))
	if c.Relative != "" {
		line += " u " + c.Relative
	}
	s.WriteString(trimRight(line) + "\n")
}

func (s *summary) readings(all []comparison) {
	if len(all) == 0 {
		return
	}
	s.WriteString("\n  read without the fit  reading           fit               difference\n")
	for _, c := range all {
		s.WriteString(trimRight(fmt.Sprintf("  %-21s %s %s %s", c.Short, pad(c.Reading.String(), 17), pad(c.Fit.String(), 17), c.Difference())) + "\n")
	}
}

// findings writes each finding with its remedy.
func (s *summary) findings(all []capture.Finding) {
	for _, f := range all {
		s.WriteString("\n")
		s.item("  "+s.paint(string(f.Severity), severityColor[f.Severity])+" "+string(f.Code)+": ", clean(f.Message, 0))
		if f.Remedy != "" {
			s.item("    what to do: ", clean(f.Remedy, 0))
		}
	}
}

// record says what was measured.
func (s *summary) record(r *RingDown) {
	if line := r.channelLine(); line != "" {
		s.item(label("channel"), line)
	}
	s.item(label("record"), r.recordLine())
}

// refusal says what was seen in the record and what to do.
func (s *summary) refusal(r *RingDown) {
	s.record(r)
	if lo, hi, ok := span(r.Channel.Samples); ok {
		s.item(label("samples"), fmt.Sprintf("between %s and %s",
			quantity.Format(lo, r.unit(), 4), quantity.Format(hi, r.unit(), 4)))
	}
	s.findings(r.Findings())
}

// item writes text behind a head, wrapped, with the following lines indented.
func (s *summary) item(head, text string) {
	indent := min(4, visible(head))
	if isLabel(head) {
		indent = labelWidth
	}
	s.WriteString(head + wrap(text, visible(head), indent, s.style.Width) + "\n")
}

// shortLabel names a row of shapeRows in the width of a label.
func shortLabel(r row) string {
	switch r.Letter {
	case "A":
		return "amplitude"
	case "phi":
		return "phase"
	case "c":
		return "offset"
	default:
		return r.Letter + " at the start"
	}
}
