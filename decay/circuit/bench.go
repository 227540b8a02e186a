package circuit

import (
	"fmt"
	"math"
	"os"
	"strings"

	"dieaway/decay/quantity"
)

// Topology says how source, fitted resistor and tank are connected.
type Topology string

// In a Series circuit source and fitted resistor are in the loop of coil and
// capacitor; in a Parallel one they are across the capacitor.
const (
	Series   Topology = "series"
	Parallel Topology = "parallel"
)

// A Bench is what a bench file says of the circuit and of what was connected to
// it. A value that the file leaves out is not Known; one without an uncertainty
// counts as exact.
type Bench struct {
	// File is the name of the file, Device the name of the circuit, "" without one.
	File, Device string
	Topology     Topology
	// Inductance (H) and Capacitance (F) of the circuit by itself, Resistor (ohm),
	// the fitted one, and CoilResistance (ohm), in series with the coil.
	Inductance, Capacitance, Resistor, CoilResistance quantity.Quantity
	// RingDown and Sweep are the two set-ups.
	RingDown, Sweep Setup
	Limits          Limits
}

// A Setup is what loads the circuit while it is measured, and with what.
type Setup struct {
	// SourceResistance and ProbeResistance are in ohm, ProbeCapacitance in F; the
	// probe hangs on the capacitor.
	SourceResistance, ProbeResistance, ProbeCapacitance quantity.Quantity
	// TimebaseU is the relative standard uncertainty of the clock that times or
	// frequencies were measured with; 0 when the file gives none.
	TimebaseU float64
	// SharedClock is true for a sweep whose frequencies were measured with the
	// clock of the ring-down: its error is no reason for the two to differ.
	SharedClock bool
	// MeterBandwidth is the frequency in Hz at which the meter of the sweep, with
	// one pole, reads low by 3 dB; not Known when the file gives none.
	MeterBandwidth quantity.Quantity
}

// A BenchError says what is wrong with a bench file.
type BenchError struct {
	File string
	// Line counts from 1; 0 where there is none. Key is the dotted name of the key, or "".
	Line int
	Key  string
	Err  error
}

// Error is one line with file, line, key and what is wrong.
func (e *BenchError) Error() string {
	s := e.File + ": "
	if e.Line > 0 {
		s += fmt.Sprintf("line %d: ", e.Line)
	}
	if e.Key != "" {
		s += e.Key + ": "
	}
	return s + e.Err.Error()
}

// Unwrap returns what is wrong without the place.
func (e *BenchError) Unwrap() error { return e.Err }

// ReadBench reads a bench file. An error of its contents is a [*BenchError].
func ReadBench(name string) (*Bench, error) {
	if info, err := os.Stat(name); err == nil && info.IsDir() {
		return nil, fmt.Errorf("bench file: %s is a folder, expected a file", name)
	}
	text, err := os.ReadFile(name)
	if err != nil {
		return nil, fmt.Errorf("bench file: %w", err)
	}
	return ParseBench(text, name)
}

// ParseBench reads the text of a bench file (TOML); name is for the messages.
// Every key is known and every value plausible, or the error, a [*BenchError],
// says which is not.
func ParseBench(text []byte, name string) (*Bench, error) {
	b := &Bench{File: name, Topology: Series, Limits: Limits{Rule: Guarded}}
	for _, q := range []*quantity.Quantity{&b.Inductance, &b.Capacitance, &b.Resistor, &b.CoilResistance} {
		*q = quantity.Unknown("")
	}
	b.RingDown, b.Sweep = emptySetup(), emptySetup()
	entries, err := readEntries(text)
	if err != nil {
		err.File = name
		return nil, err
	}
	p := &benchParser{bench: b, lines: map[string]int{}}
	if err := p.all(entries); err != nil {
		err.File = name
		return nil, err
	}
	return b, nil
}

func emptySetup() Setup {
	none := quantity.Unknown("")
	return Setup{SourceResistance: none, ProbeResistance: none, ProbeCapacitance: none, MeterBandwidth: none}
}

// A benchParser puts the entries of a file into a Bench.
type benchParser struct {
	bench *Bench
	lines map[string]int // of the keys that were given
}

func (p *benchParser) all(entries []entry) *BenchError {
	keys := p.keys()
	for _, e := range entries {
		set, ok := keys[e.key]
		if !ok {
			return &BenchError{Line: e.line, Key: e.key, Err: unknownKey(e.key, keys)}
		}
		p.lines[e.key] = e.line
		if err := set(e); err != nil {
			return &BenchError{Line: e.line, Key: e.key, Err: err}
		}
	}
	return p.contradictions()
}

// contradictions looks at what only several values together can get wrong.
func (p *benchParser) contradictions() *BenchError {
	b := p.bench
	if b.Topology == Parallel {
		for _, s := range []struct {
			key string
			q   quantity.Quantity
		}{{"circuit.resistor", b.Resistor}, {"ringdown.source_resistance", b.RingDown.SourceResistance},
			{"sweep.source_resistance", b.Sweep.SourceResistance}} {
			if s.q.Value == 0 {
				return p.fault(s.key, "0 ohm across a parallel circuit is a short circuit: leave out what is not connected")
			}
		}
	}
	if b.Sweep.SharedClock {
		if b.RingDown.TimebaseU == 0 {
			return p.fault("sweep.timebase", `"shared" with the ring-down, and [ringdown] gives no timebase`)
		}
		b.Sweep.TimebaseU = b.RingDown.TimebaseU
	}
	return p.limitContradictions()
}

func (p *benchParser) limitContradictions() *BenchError {
	for _, r := range p.bench.Limits.Ranges {
		key := "limits." + r.Quantity
		switch {
		case math.IsNaN(r.Min) && math.IsNaN(r.Max):
			return p.fault(key, "gives neither min nor max")
		case r.Min > r.Max:
			return p.fault(key, fmt.Sprintf("min %s is above max %s: nothing can pass",
				quantity.Format(r.Min, r.Unit, 6), quantity.Format(r.Max, r.Unit, 6)))
		}
	}
	return nil
}

// fault is an error at the line of a key or, for a table, of the first key in it.
func (p *benchParser) fault(key, message string) *BenchError {
	line := p.lines[key]
	for k, n := range p.lines {
		if strings.HasPrefix(k, key+".") && (line == 0 || n < line) {
			line = n
		}
	}
	return &BenchError{Line: line, Key: key, Err: fmt.Errorf("%s", message)}
}
