//go:build ignore

// Generate writes the capture that `dieaway demo` measures: the ring-down of
// loop 07, a tag reader's 125 kHz loop antenna. It is run by go generate.
//
//	go run demo/generate.go -o demo/loop07.csv
//
// The capture is simulated with the equation of the circuit, not with the closed
// form of a damped oscillation, which is what the fit assumes; the samples then go
// through a noisy 8-bit converter.
//
//	source 50      fitted 15    coil 1.62 mH, 15
//	+--/\/\/--+-----/\/\/-----UUUU--/\/\/--+----------+
//	|                                      |          |
//	( ) V0 -> 0 at t = 0              1.0 nF =    probe 10 M || 12 p
//	|                                      |          |
//	+--------------------------------------+----------+
//
// The 50 ohm of the generator stay in the loop when its output falls to zero,
// so the record shows the loaded Q: about sqrt(L/C')/R = 15.8. The antenna by
// itself, with the 30 ohm of coil and resistor only, would have 42.
package main

import (
	"flag"
	"log"
	"math/rand/v2"
	"os"

	"dieaway/decay/circuit"
)

const bench = `
[circuit]
inductance = "1.62 mH"
capacitance = "1.0 nF"
coil_resistance = "15"    # at 125 kHz: copper, skin and proximity effect
resistor = "15"
[ringdown]
source_resistance = "50"
probe_resistance = "10M"
probe_capacitance = "12p"
`

var preamble = [][2]string{
	{"device", "loop 07"},
	{"drive", "1.1 V switched off behind 50 ohm"},
	{"circuit", "1.62 mH and 1.0 nF in series with 15 ohm"},
	{"probe", "10 Mohm 12 pF across the capacitor"},
	{"origin", "simulated by cmd/dieaway/demo/generate.go"},
}

// simulation is the circuit and the oscilloscope: 2.56 V over 8 bits, a noise of
// 0.7 levels, and zero volts off the middle of a level.
func simulation() *circuit.Simulation {
	b, err := circuit.ParseBench([]byte(bench), "bench")
	if err != nil {
		log.Fatal(err)
	}
	return &circuit.Simulation{Bench: b, Source: 1.1, Interval: 100e-9, Samples: 2500, Pretrigger: 280, Noise: 0.7 * 0.01,
		Converter: circuit.Converter{Bits: 8, FullScale: 2.56, Bias: 0.3},
		Random:    rand.New(rand.NewPCG(7, 125_000))}
}

func main() {
	log.SetFlags(0)
	name := flag.String("o", "loop07.csv", "file to write")
	flag.Parse()
	r, err := simulation().Record()
	if err != nil {
		log.Fatal(err)
	}
	r.Notes = preamble
	file, err := os.Create(*name)
	if err != nil {
		log.Fatal(err)
	}
	if err := r.Write(file); err != nil {
		log.Fatal(err)
	}
	if err := file.Close(); err != nil {
		log.Fatal(err)
	}
}
