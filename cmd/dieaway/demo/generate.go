//go:build ignore

// Generate writes the capture that `dieaway demo` measures: the ring-down of
// loop 07, a tag reader's 125 kHz loop antenna. It is run by go generate.
//
//	go run demo/generate.go -o demo/loop07.csv
//
// Nothing here uses the closed form of a damped oscillation, which is what the
// fit assumes: the circuit's own differential equation is integrated, and the
// samples then go through a noisy 8-bit converter.
//
//	source 50      fitted 15    coil 1.62 mH, 15
//	+--/\/\/--+-----/\/\/-----UUUU--/\/\/--+----------+
//	|                                      |          |
//	( ) V0 -> 0 at t = 0              1.0 nF =    probe 10 M || 12 p
//	|                                      |          |
//	+--------------------------------------+----------+
//
// With the current i in the loop and the voltage v across the capacitor:
//
//	L di/dt  = source(t) - R i - v      R = 50 + 15 + 15 ohm
//	C' dv/dt = i - v/Rp                 C' = C + Cp
//
// The 50 ohm of the generator stay in the loop when its output falls to zero,
// so the record shows the loaded Q: about sqrt(L/C')/R = 15.8. The antenna by
// itself, with the 30 ohm of coil and resistor only, would have 42.
package main

import (
	"bufio"
	"flag"
	"fmt"
	"io"
	"log"
	"math"
	"math/rand/v2"
	"os"
)

// The circuit, in SI units.
const (
	inductance       = 1.62e-3
	capacitance      = 1.0e-9
	coilResistance   = 15.0 // at 125 kHz: copper, skin and proximity effect
	fittedResistance = 15.0
	sourceResistance = 50.0
	probeResistance  = 10e6
	probeCapacitance = 12e-12
	sourceVoltage    = 1.1 // before it is switched off at t = 0
)

// The oscilloscope.
const (
	samples   = 2500
	pretrig   = 280     // samples before the trigger, which is the source's edge
	interval  = 100e-9  // s
	step      = 0.01    // V per code: 2.56 V over the 8 bits
	bias      = 0.3     // codes by which zero volts misses the middle of a code
	noise     = 0.7     // codes rms before the converter
	substeps  = 100     // Runge-Kutta steps of 1 ns per sample
	seed1     = 7       // loop 07
	seed2     = 125_000 // Hz
	codeLimit = 127
)

// state is the loop's current in A and the capacitor's voltage in V.
type state struct{ i, v float64 }

// slope is the right-hand side of the circuit's equations.
func slope(s state, source float64) state {
	const r = sourceResistance + fittedResistance + coilResistance
	return state{
		i: (source - r*s.i - s.v) / inductance,
		v: (s.i - s.v/probeResistance) / (capacitance + probeCapacitance),
	}
}

// advance makes one classical fourth-order Runge-Kutta step of h seconds. The
// source does not change within a step: its edge falls between two of them.
func advance(s state, source, h float64) state {
	add := func(d state, h float64) state { return state{s.i + h*d.i, s.v + h*d.v} }
	k1 := slope(s, source)
	k2 := slope(add(k1, h/2), source)
	k3 := slope(add(k2, h/2), source)
	k4 := slope(add(k3, h), source)
	return state{
		i: s.i + h/6*(k1.i+2*k2.i+2*k3.i+k4.i),
		v: s.v + h/6*(k1.v+2*k2.v+2*k3.v+k4.v),
	}
}

// settled is the state long after the source was switched on: no change in
// current or voltage, so that the probe's resistance draws all the current.
func settled() state {
	const r = sourceResistance + fittedResistance + coilResistance
	i := sourceVoltage / (r + probeResistance)
	return state{i: i, v: i * probeResistance}
}

// voltages integrates the circuit and returns the capacitor's voltage at each sample.
func voltages() []float64 {
	out := make([]float64, samples)
	s := settled()
	for n := range out {
		out[n] = s.v
		source := sourceVoltage
		if n >= pretrig {
			source = 0
		}
		for range substeps {
			s = advance(s, source, interval/substeps)
		}
	}
	return out
}

// convert passes v through the amplifier's noise and the 8-bit converter.
func convert(v float64, random *rand.Rand) float64 {
	code := math.Round(v/step + bias + noise*random.NormFloat64())
	return step*math.Max(-codeLimit-1, math.Min(codeLimit, code)) + 0 // never -0
}

const preamble = `device,loop 07
drive,1.1 V switched off behind 50 ohm
circuit,1.62 mH and 1.0 nF in series with 15 ohm
probe,10 Mohm 12 pF across the capacitor
origin,simulated by cmd/dieaway/demo/generate.go
sample interval,100 ns
samples,2500
time,capacitor voltage
s,V
`

func write(w io.Writer) error {
	out := bufio.NewWriter(w)
	out.WriteString(preamble)
	random := rand.New(rand.NewPCG(seed1, seed2))
	for n, v := range voltages() {
		// Whole tenths of a microsecond: no stamp shows the rounding of 1e-7.
		fmt.Fprintf(out, "%.1fe-06,%.2f\n", float64(n-pretrig)/10, convert(v, random))
	}
	return out.Flush() // it keeps the first error of all writes
}

func main() {
	log.SetFlags(0)
	name := flag.String("o", "loop07.csv", "file to write")
	flag.Parse()
	file, err := os.Create(*name)
	if err != nil {
		log.Fatal(err)
	}
	if err := write(file); err != nil {
		log.Fatal(err)
	}
	if err := file.Close(); err != nil {
		log.Fatal(err)
	}
}
