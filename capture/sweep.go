package capture

import "math"

// A Sweep is a driven sweep: what a circuit answers to a source of many
// frequencies, one row for each. Rows stay in the order of the file, unsorted
// and repeated as they are; all slices that are not nil have one value for each
// row, NaN where the file has none. The zero value of a field means that the
// file has nothing of the kind, so that a sweep may also be put together in a
// program: frequencies and magnitudes are enough.
type Sweep struct {
	// File is the name it was read from, "-" for standard input, and SHA256 the
	// lower-case hexadecimal digest of the bytes of the file.
	File, SHA256 string
	// Frequency is in Hz, greater than zero.
	Frequency []float64
	// Magnitude is the magnitude of the response on a linear scale, never
	// negative, in Unit; Name is what the file calls it.
	Magnitude  []float64
	Unit, Name string
	// Decibels is true when the magnitude was printed in dB: its scatter is then
	// in proportion to it. Without Unit it is a ratio; levels (dBV, dBm) have one.
	Decibels bool
	// Phase of the response in radians, not unwrapped; Cartesian is true when it
	// and Magnitude come from real and imaginary parts, whose scatter is alike.
	Phase     []float64
	Cartesian bool
	// Deviation is the standard deviation of Magnitude that the file states, in Unit.
	Deviation []float64
	// Reference is the voltage of the source, measured at the circuit; Magnitude is not
	// divided by it. It is on the scale of Magnitude (both peak, rms or peak to peak).
	Reference []float64
	// Clock is the time at which each row was measured, in s.
	Clock []float64
	// Part is what the name of the response says it was measured across.
	Part Part
	// Others are the other columns of voltage.
	Others []SweepColumn
	// Lines is the line of the file for each row, counted from 1.
	Lines []int
	// Layout says how the file was understood, with the role of each column and why.
	Layout Layout
	// Findings tells what the reader left out or had to assume.
	Findings []Finding
}

// A SweepColumn is a column of voltage that is neither response nor reference.
type SweepColumn struct {
	// Number counts the columns of the file from 1, Name is as the file gives it.
	Number int
	Name   string
	Unit   string
	Part   Part
	Values []float64
}

// A Part of the series circuit that a voltage is measured across.
type Part string

// The parts. Both stands for coil and capacitor together, which is a notch.
const (
	Capacitor Part = "capacitor"
	Inductor  Part = "inductor"
	Resistor  Part = "resistor"
	Both      Part = "both"
)

// The roles of columns of a sweep, beside those of a capture.
const (
	RoleFrequency Role = "frequency"
	RoleResponse  Role = "response"
	RoleReference Role = "reference"
	RolePhase     Role = "phase"
	RoleReal      Role = "real part"
	RoleImaginary Role = "imaginary part"
	RoleVoltage   Role = "voltage"
)

// SweepOptions says what a table may not tell by itself. The zero value reads a
// table that tells everything.
type SweepOptions struct {
	// Frequency, Response, Reference and Phase name a column by its heading or by
	// its number, counted from 1; "" lets the reader decide. Reference may be "none".
	Frequency, Response, Reference, Phase string
	// FrequencyUnit is the unit of the frequencies: "Hz", "kHz", "MHz" or "GHz";
	// "": as the file says, else Hz.
	FrequencyUnit string
}

// Voltage returns the values measured across the part, nil when no column is:
// the response itself or one of the others, not divided by the reference.
func (s *Sweep) Voltage(p Part) []float64 {
	if s.Part == p && !s.Decibels {
		return s.Magnitude
	}
	for _, c := range s.Others {
		if c.Part == p {
			return c.Values
		}
	}
	return nil
}

// Span returns the lowest and the highest frequency in Hz; NaN without rows.
func (s *Sweep) Span() (lo, hi float64) {
	lo, hi = math.NaN(), math.NaN()
	for _, f := range s.Frequency {
		if !(f >= lo) {
			lo = f
		}
		if !(f <= hi) {
			hi = f
		}
	}
	return lo, hi
}
