package circuit

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"dieaway/decay/quantity"
)

// CapacitanceMost is the capacitance in F from which on a value is refused: nothing
// that rings has so much, and 12 for 12 pF is a slip of the pen.
const CapacitanceMost = 1

// A setter takes the value of one key.
type setter func(e entry) error

// keys returns all that a bench file may say.
func (p *benchParser) keys() map[string]setter {
	b := p.bench
	keys := map[string]setter{
		"device.name":                name(&b.Device),
		"circuit.topology":           b.topology,
		"circuit.inductance":         value(&b.Inductance, "H", aboveZero),
		"circuit.capacitance":        value(&b.Capacitance, "F", aboveZero),
		"circuit.resistor":           value(&b.Resistor, "ohm", notNegative),
		"circuit.coil_resistance":    value(&b.CoilResistance, "ohm", notNegative),
		"sweep.meter_bandwidth":      value(&b.Sweep.MeterBandwidth, "Hz", aboveZero),
		"limits.rule":                b.Limits.rule,
		"ringdown.timebase":          timebase(&b.RingDown),
		"sweep.timebase":             timebase(&b.Sweep),
		"limits":                     table,
		"device":                     table,
		"circuit":                    table,
		"ringdown":                   table,
		"sweep":                      table,
		"sweep.source_resistance":    value(&b.Sweep.SourceResistance, "ohm", notNegative),
		"sweep.probe_resistance":     value(&b.Sweep.ProbeResistance, "ohm", aboveZero),
		"sweep.probe_capacitance":    value(&b.Sweep.ProbeCapacitance, "F", notNegative),
		"ringdown.probe_resistance":  value(&b.RingDown.ProbeResistance, "ohm", aboveZero),
		"ringdown.source_resistance": value(&b.RingDown.SourceResistance, "ohm", notNegative),
		"ringdown.probe_capacitance": value(&b.RingDown.ProbeCapacitance, "F", notNegative),
	}
	for _, l := range limitKeys {
		keys["limits."+l.key] = b.Limits.begin(l)
		keys["limits."+l.key+".min"] = b.Limits.bound(l, false)
		keys["limits."+l.key+".max"] = b.Limits.bound(l, true)
	}
	return keys
}

// table takes a heading or an inline table, which says nothing by itself.
func table(e entry) error {
	if e.kind != kindTable {
		return fmt.Errorf("expected a table, found %s", e.shown())
	}
	return nil
}

func name(to *string) setter {
	return func(e entry) error {
		if e.kind != kindText || strings.TrimSpace(e.text) == "" {
			return fmt.Errorf("expected a name in quotes, found %s", e.shown())
		}
		*to = e.text
		return nil
	}
}

// value reads a quantity in unit that keeps within the range.
func value(to *quantity.Quantity, unit string, within func(x float64, e entry) error) setter {
	return func(e entry) error {
		q, err := e.quantity(unit)
		if err == nil {
			err = within(q.Value, e)
		}
		if err == nil && unit == "F" && q.Value >= CapacitanceMost {
			err = fmt.Errorf("expected a value below %g F such as \"47 nF\", found %s", float64(CapacitanceMost), e.shown())
		}
		*to = q
		return err
	}
}

func aboveZero(x float64, e entry) error {
	if !(x > 0) {
		return fmt.Errorf("expected a value above zero, found %s", e.shown())
	}
	return nil
}

func notNegative(x float64, e entry) error {
	if !(x >= 0) {
		return fmt.Errorf("expected a value that is not negative, found %s", e.shown())
	}
	return nil
}

func (b *Bench) topology(e entry) error {
	b.Topology = Topology(e.text)
	if b.Topology != Series && b.Topology != Parallel {
		return fmt.Errorf(`expected "series" or "parallel", found %s`, e.shown())
	}
	return nil
}

// timebase reads the relative uncertainty of a clock: a standard uncertainty, or
// the half-width of its tolerance with +- before it, which is taken as evenly
// distributed (GUM 4.3.7).
func timebase(to *Setup) setter {
	return func(e entry) error {
		if e.text == "shared" && strings.HasPrefix(e.key, "sweep.") {
			to.SharedClock = true
			return nil
		}
		text, divisor := strings.TrimSpace(e.text), 1.0
		for _, sign := range []string{"+-", "+/-", "±"} {
			if rest, ok := strings.CutPrefix(text, sign); ok {
				text, divisor = rest, math.Sqrt(3)
			}
		}
		q, err := quantity.Parse(text, "")
		switch {
		case e.kind == kindOther || err != nil:
			return fmt.Errorf(`expected a relative uncertainty such as "20 ppm" or "+- 50 ppm", found %s`, e.shown())
		case !math.IsNaN(q.U):
			return fmt.Errorf(`expected one figure such as "20 ppm" or "+- 50 ppm", found %s`, e.shown())
		case !(q.Value >= 0 && q.Value < 0.1):
			return fmt.Errorf("expected a relative uncertainty below 10 %%, such as \"20 ppm\", found %s", e.shown())
		}
		to.TimebaseU = q.Value / divisor
		return nil
	}
}

// quantity reads the entry as a value in unit; numbers need no quotes.
func (e entry) quantity(unit string) (quantity.Quantity, error) {
	if e.kind == kindOther || e.kind == kindTable {
		return quantity.Unknown(unit), fmt.Errorf("expected a value in quotes, found %s", e.shown())
	}
	q, err := quantity.Parse(e.text, unit)
	if err != nil {
		return quantity.Unknown(unit), err
	}
	return q, nil
}

// unknownKey names what might have been meant.
func unknownKey(key string, keys map[string]setter) error {
	at := strings.LastIndex(key, ".") + 1
	var siblings []string
	for k := range keys {
		if rest, ok := strings.CutPrefix(k, key[:at]); ok && rest != "" && !strings.Contains(rest, ".") {
			siblings = append(siblings, rest)
		}
	}
	if len(siblings) == 0 {
		return errors.New("unknown key")
	}
	slices.Sort(siblings)
	return errors.New("unknown key; known here: " + strings.Join(siblings, ", "))
}
