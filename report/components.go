package report

import (
	"errors"
	"fmt"
	"io"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// schemaComponents names the form of the JSON; scripts depend on it.
const schemaComponents = "dieaway.components.v1"

// Components shows what several ring-downs with known parts added say of coil,
// capacitance and resistance.
type Components struct {
	// RingDowns are the captures in their order and Added the part of each.
	RingDowns []*RingDown
	Added     []quantity.Quantity
	// Result is nil when a capture could not be read, or when Refusal says why there
	// is none.
	Result  *circuit.Components
	Refusal error
	// Limits is how the result stands to the limits of the bench file, nil without any.
	Limits *circuit.Judgement
	// Device is the name of the circuit, "" when nobody gave one.
	Device string
	// Origin says how the result was made; the page shows it.
	Origin Origin
}

// Err says which captures could not be read, and why; nil when all were.
func (c *Components) Err() error {
	var all []error
	for _, r := range c.RingDowns {
		all = append(all, r.Err)
	}
	return allOf(all...)
}

// allOf says all errors in one line; nil when there is none.
func allOf(errs ...error) (all error) {
	for _, err := range errs {
		switch {
		case all == nil:
			all = err
		case err != nil:
			all = fmt.Errorf("%w; %w", all, err)
		}
	}
	return all
}

func (c *Components) check() error {
	if len(c.RingDowns) != len(c.Added) || c.Err() == nil && c.Result == nil && c.Refusal == nil {
		return errors.New("report: components without a result or a reason for none")
	}
	return nil
}

// Status is the worst of the captures and of the components; "" when a capture could
// not be read.
func (c *Components) Status() decay.Status {
	switch {
	case c.Err() != nil:
		return ""
	case c.Result == nil:
		return decay.Refused
	}
	return statusOf(decay.Good, c.Findings())
}

// Findings returns the findings of the components and the warnings of each
// capture, which name it, gravest first. It is not nil.
func (c *Components) Findings() []capture.Finding {
	all := []capture.Finding{}
	if c.Result != nil {
		all = append(all, c.Result.Findings...)
	}
	for _, r := range c.RingDowns {
		all = append(all, warningsOf(r.file(), r.Findings())...)
	}
	return gravest(all)
}

type jsonComponents struct {
	Schema      string             `json:"schema"`
	Status      string             `json:"status"`
	Device      *string            `json:"device"`
	Inductance  quantity.Quantity  `json:"inductance_h"`
	Capacitance quantity.Quantity  `json:"capacitance_f"`
	Resistance  quantity.Quantity  `json:"resistance_ohm"`
	Rows        []jsonComponentRow `json:"rows"`
	ChiSquare   number             `json:"chi_square"`
	Degrees     int                `json:"degrees_of_freedom"`
	Damping     *jsonDamping       `json:"damping_network"`
	Limits      *jsonLimits        `json:"limits,omitempty"` // with limits in the bench file
	Findings    []capture.Finding  `json:"findings"`
	Error       *jsonError         `json:"error,omitempty"`
}

type jsonComponentRow struct {
	File             *string           `json:"file"`
	SHA256           *string           `json:"sha256"`
	Added            number            `json:"added"`
	AddedU           number            `json:"added_u"`
	NaturalFrequency quantity.Quantity `json:"natural_frequency_hz"`
	DecayRate        quantity.Quantity `json:"decay_rate_per_s"`
	Q                quantity.Quantity `json:"q"`
	TimeConstant     quantity.Quantity `json:"time_constant_s"`
	Residual         number            `json:"residual"`
	ResidualU        number            `json:"residual_u"`
	Other            number            `json:"other_residual"`
	OtherU           number            `json:"other_residual_u"`
}

type jsonDamping struct {
	Resistance  quantity.Quantity `json:"resistance_ohm"`
	Capacitance quantity.Quantity `json:"capacitance_f"`
	Most        quantity.Quantity `json:"most_capacitance_f"`
	Q           number            `json:"q"`
}

// WriteJSON writes the components as one line of JSON, schema
// dieaway.components.v1. Without a result its numbers are null, and the error says why.
func (c *Components) WriteJSON(w io.Writer) error {
	if err := c.check(); err != nil {
		return err
	}
	out := &jsonComponents{Schema: schemaComponents, Status: string(c.Status()), Device: orNull(c.Device), Rows: []jsonComponentRow{},
		Inductance: unknown, Capacitance: unknown, Resistance: unknown, ChiSquare: number(unknown.Value),
		Limits: limitsJSON(c.Limits), Findings: c.Findings()}
	for i, r := range c.RingDowns {
		out.Rows = append(out.Rows, c.rowJSON(i, r))
	}
	reason := c.Refusal
	if err := c.Err(); err != nil {
		out.Status, reason = "unreadable", err
	}
	if res := c.Result; res != nil {
		out.Inductance, out.Capacitance, out.Resistance = res.Inductance, res.Capacitance, res.Resistance
		out.ChiSquare, out.Degrees = number(res.ChiSquare), res.Degrees
		out.Damping = &jsonDamping{res.Damping.Resistance, res.Damping.Capacitance, res.Damping.Most, number(res.Damping.Q)}
	} else {
		e := errorJSON(reason)
		out.Error = &e
	}
	return writeLine(w, out)
}

func (c *Components) rowJSON(i int, r *RingDown) jsonComponentRow {
	row := jsonComponentRow{File: orNull(r.file()), SHA256: orNull(r.sha256()), Added: number(c.Added[i].Value), AddedU: number(c.Added[i].U),
		NaturalFrequency: unknown, DecayRate: unknown, Q: unknown, TimeConstant: unknown}
	residual, other := unknown, unknown
	if r.Result != nil && !r.refused() {
		q := r.Result.Quantities
		row.NaturalFrequency, row.DecayRate, row.Q, row.TimeConstant = q.NaturalFrequency, q.DecayRate, q.Q, q.TimeConstant
	}
	if c.Result != nil {
		residual, other = c.Result.Rows[i].Residual, c.Result.Rows[i].Other
	}
	row.Residual, row.ResidualU, row.Other, row.OtherU = number(residual.Value), number(residual.U), number(other.Value), number(other.U)
	return row
}

// componentResults are the values found, and the resistor that would damp the ring.
func componentResults(r *circuit.Components) []row {
	return []row{
		{"inductance", "L", "", "", r.Inductance}, {"own capacitance", "C", "", "", r.Capacitance},
		{"series resistance", "R", "", "", r.Resistance}, {"resistor to damp it", "R", "", "d", r.Damping.Resistance}}
}

// WriteSummary writes the components for people: the values, a line for each
// capture, the damping network that follows, and the findings.
func (c *Components) WriteSummary(w io.Writer, style Style) error {
	if err := c.check(); err != nil {
		return err
	}
	s := newSummary(w, style)
	if err := c.Err(); err != nil {
		s.unreadable(err)
		return s.Flush()
	}
	s.status(c.Status(), c.verdict(), c.Limits)
	s.item("  ", prefixed(c.Device)+plural(len(c.RingDowns), "capture"))
	if r := c.Result; r != nil {
		s.WriteString("\n")
		for _, row := range componentResults(r)[:3] {
			s.quantity(row)
		}
		s.componentRows(c)
		s.WriteString("\n")
		s.item(label("to damp it"), dampingLine(&r.Damping))
	}
	s.limits(c.Limits)
	s.findings(c.Findings())
	return s.Flush()
}

func (c *Components) verdict() string {
	if c.Result == nil {
		return clean(c.Refusal.Error(), 0)
	}
	return verdictOf(c.Findings())
}

// componentRows writes a line for each capture.
func (s *summary) componentRows(c *Components) {
	s.WriteString("\n  added          natural frequency     decay rate          off by     of its u\n")
	for i, row := range c.Result.Rows {
		off := row.Residual
		fmt.Fprintf(s, "  %s %s %s %s %s\n", pad(row.Added.String(), 14), pad(row.NaturalFrequency.String(), 21),
			pad(row.DecayRate.String(), 19), pad(quantity.Percent(off.Value), 10), inU(off))
		s.item("    ", fileName(c.RingDowns[i].file(), nameLength))
	}
	s.item(label("residuals"), chiSquareLine(c.Result))
}

// inU is a residual in units of its standard uncertainty.
func inU(q quantity.Quantity) string { return fmt.Sprintf("%+.1f", round(q.Value/q.U, 1)) }

// chiSquareLine says how well the captures go together.
func chiSquareLine(r *circuit.Components) string {
	return fmt.Sprintf("chi-squared %.3g with %s of freedom", r.ChiSquare, plural(r.Degrees, "degree"))
}

// dampingLine says which network damps a node that rings when it should not.
func dampingLine(d *circuit.DampingNetwork) string {
	left := "nothing rings any more"
	if d.Q > 0 {
		left = fmt.Sprintf("a Q of %.2g is left", d.Q)
	}
	return fmt.Sprintf("%s in series with %s to %s across the capacitance that rings; with the smaller one %s",
		quantity.Format(d.Resistance.Value, "ohm", 3), quantity.Format(d.Capacitance.Value, "F", 3), quantity.Format(d.Most.Value, "F", 3), left)
}
