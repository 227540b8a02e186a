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
	// Result is nil when Err says why there is none.
	Result *circuit.Components
	Err    error
	// Device is the name of the circuit, "" when nobody gave one.
	Device string
}

// Status is the worst of the captures and of the components.
func (c *Components) Status() decay.Status {
	if c.Result == nil {
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
	Status      decay.Status       `json:"status"`
	Device      *string            `json:"device"`
	Inductance  quantity.Quantity  `json:"inductance_h"`
	Capacitance quantity.Quantity  `json:"capacitance_f"`
	Resistance  quantity.Quantity  `json:"resistance_ohm"`
	Rows        []jsonComponentRow `json:"rows"`
	ChiSquare   number             `json:"chi_square"`
	Degrees     int                `json:"degrees_of_freedom"`
	Damping     *jsonDamping       `json:"damping_network"`
	Findings    []capture.Finding  `json:"findings"`
	Error       *jsonError         `json:"error,omitempty"`
}

type jsonComponentRow struct {
	File             *string           `json:"file"`
	Added            number            `json:"added"`
	AddedU           number            `json:"added_u"`
	NaturalFrequency quantity.Quantity `json:"natural_frequency_hz"`
	DecayRate        quantity.Quantity `json:"decay_rate_per_s"`
	Residual         number            `json:"residual"`
	ResidualU        number            `json:"residual_u"`
}

type jsonDamping struct {
	Resistance  quantity.Quantity `json:"resistance_ohm"`
	Capacitance quantity.Quantity `json:"capacitance_f"`
	Most        quantity.Quantity `json:"most_capacitance_f"`
	Q           number            `json:"q"`
}

type jsonError struct {
	Message string `json:"message"`
}

// WriteJSON writes the components as one line of JSON, schema
// dieaway.components.v1. Without a result its numbers are null.
func (c *Components) WriteJSON(w io.Writer) error {
	if c.Result == nil && c.Err == nil {
		return errors.New("report: components without a result or an error")
	}
	out := &jsonComponents{Schema: schemaComponents, Status: c.Status(), Device: orNull(c.Device), Rows: []jsonComponentRow{},
		Inductance: unknown, Capacitance: unknown, Resistance: unknown, ChiSquare: number(unknown.Value), Findings: c.Findings()}
	for i, r := range c.RingDowns {
		out.Rows = append(out.Rows, c.rowJSON(i, r))
	}
	if res := c.Result; res != nil {
		out.Inductance, out.Capacitance, out.Resistance = res.Inductance, res.Capacitance, res.Resistance
		out.ChiSquare, out.Degrees = number(res.ChiSquare), res.Degrees
		out.Damping = &jsonDamping{res.Damping.Resistance, res.Damping.Capacitance, res.Damping.Most, number(res.Damping.Q)}
	} else {
		out.Error = &jsonError{c.Err.Error()}
	}
	return writeLine(w, out)
}

func (c *Components) rowJSON(i int, r *RingDown) jsonComponentRow {
	row := jsonComponentRow{File: orNull(r.file()), Added: number(c.Added[i].Value), AddedU: number(c.Added[i].U),
		NaturalFrequency: unknown, DecayRate: unknown, Residual: number(unknown.Value), ResidualU: number(unknown.U)}
	if r.Result != nil && !r.refused() {
		row.NaturalFrequency, row.DecayRate = r.Result.Quantities.NaturalFrequency, r.Result.Quantities.DecayRate
	}
	if c.Result != nil {
		row.Residual, row.ResidualU = number(c.Result.Rows[i].Residual.Value), number(c.Result.Rows[i].Residual.U)
	}
	return row
}

// WriteSummary writes the components for people: the values, a line for each
// capture, the damping network that follows, and the findings.
func (c *Components) WriteSummary(w io.Writer, style Style) error {
	s := newSummary(w, style)
	s.status(c.Status(), c.verdict())
	s.item("  ", prefixed(c.Device)+plural(len(c.RingDowns), "capture"))
	s.WriteString("\n")
	if r := c.Result; r != nil {
		for _, row := range []row{
			{"inductance", "L", "", "", r.Inductance}, {"own capacitance", "C", "", "", r.Capacitance},
			{"series resistance", "R", "", "", r.Resistance}} {
			s.quantity(row)
		}
		s.componentRows(c)
		s.damping(&r.Damping)
	}
	s.findings(c.Findings())
	return s.Flush()
}

func (c *Components) verdict() string {
	if c.Result == nil {
		return clean(c.Err.Error(), 0)
	}
	return verdictOf(c.Findings())
}

// componentRows writes a line for each capture.
func (s *summary) componentRows(c *Components) {
	s.WriteString("\n  added          natural frequency     decay rate          off by     of its u\n")
	for i, row := range c.Result.Rows {
		off := row.Residual
		fmt.Fprintf(s, "  %s %s %s %s %s\n", pad(row.Added.String(), 14), pad(row.NaturalFrequency.String(), 21),
			pad(row.DecayRate.String(), 19), pad(quantity.Percent(off.Value), 10), fmt.Sprintf("%+.1f", off.Value/off.U))
		s.item("    ", clean(c.RingDowns[i].file(), nameLength))
	}
	s.item(label("residuals"), fmt.Sprintf("chi-square %.3g with %s of freedom", c.Result.ChiSquare, plural(c.Result.Degrees, "degree")))
}

// damping writes the network for a node that rings when it should not.
func (s *summary) damping(d *circuit.DampingNetwork) {
	s.WriteString("\n")
	left := "nothing rings any more"
	if d.Q > 0 {
		left = fmt.Sprintf("a Q of %.2g is left", d.Q)
	}
	s.item(label("to damp it"), fmt.Sprintf("%s in series with %s to %s across the capacitance that rings; with the smaller one %s",
		quantity.Format(d.Resistance.Value, "ohm", 3), quantity.Format(d.Capacitance.Value, "F", 3), quantity.Format(d.Most.Value, "F", 3), left))
}
