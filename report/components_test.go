package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"math"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// invented components of a switch node, with a capture that was clipped.
func inventedComponents() *Components {
	pf := func(x, u float64) quantity.Quantity { return quantity.New(x*1e-12, u*1e-12, "F") }
	row := func(added quantity.Quantity, f, off float64) circuit.Row {
		return circuit.Row{Added: added, NaturalFrequency: quantity.New(f, 2e3, "Hz"), DecayRate: quantity.New(3.3e7, 3e4, "1/s"),
			Residual: quantity.New(off, 0.004, "")}
	}
	c := &Components{Device: "stage 2", Added: []quantity.Quantity{quantity.New(0, math.NaN(), "F"), pf(470, 4.7)},
		Result: &circuit.Components{Inductance: quantity.New(12e-9, 1e-10, "H"), Capacitance: pf(320, 3), Resistance: quantity.New(0.8, 0.01, "ohm"),
			Rows:      []circuit.Row{row(quantity.New(0, math.NaN(), "F"), 81.2e6, 0.0001), row(pf(470, 4.7), 51.7e6, -0.0002)},
			ChiSquare: 1.2, Degrees: 1,
			Damping: circuit.DampingNetwork{Resistance: quantity.New(6.12, 0.05, "ohm"), Capacitance: pf(960, 9), Most: pf(1280, 12), Q: 0.93}}}
	for _, name := range []string{"as-is.csv", "470p.csv"} {
		r := loop07().ringDown()
		r.File = name
		c.RingDowns = append(c.RingDowns, r)
	}
	c.RingDowns[1].Result.Findings = []capture.Finding{{Code: capture.Clipped, Severity: capture.Warning, Message: "3 samples are cut off.", Remedy: "Use a larger range."}}
	return c
}

func TestComponentsGolden(t *testing.T) {
	c := inventedComponents()
	var text, line bytes.Buffer
	if err := errors.Join(c.WriteSummary(&text, Style{}), c.WriteJSON(&line)); err != nil {
		t.Fatal(err)
	}
	golden(t, "components.txt", text.Bytes())
	golden(t, "components.json", line.Bytes())
}

// Without a result all numbers are null and the reason is there.
func TestComponentsRefused(t *testing.T) {
	c := inventedComponents()
	c.RingDowns[1] = refusedRecord()
	c.Result, c.Err = nil, errors.New("no components")
	if c.Status() != decay.Refused {
		t.Errorf("status %s", c.Status())
	}
	var line bytes.Buffer
	if err := c.WriteJSON(&line); err != nil {
		t.Fatal(err)
	}
	var out struct {
		Inductance struct{ Value *float64 } `json:"inductance_h"`
		Damping    any                      `json:"damping_network"`
		Rows       []struct {
			F struct{ Value *float64 } `json:"natural_frequency_hz"`
		}
		Error struct{ Message string }
	}
	if err := json.Unmarshal(line.Bytes(), &out); err != nil {
		t.Fatal(err)
	}
	if out.Inductance.Value != nil || out.Damping != nil || out.Rows[0].F.Value == nil || out.Rows[1].F.Value != nil || out.Error.Message != "no components" {
		t.Errorf("%s", line.String())
	}
	c.Err = nil
	if err := c.WriteJSON(&line); err == nil {
		t.Error("written without a result or an error")
	}
}
