//go:build ignore

// Generate_sweep writes a driven sweep of loop 07, the antenna of generate.go: the
// voltage at the circuit and across its capacitor, by the impedances of its parts.
//
//	go run demo/generate_sweep.go -o demo/loop07-sweep.csv
//
// The generator's 50 ohm are there, but the voltage at the circuit is measured
// behind them, so that the ratio of the two is that of the antenna by itself with
// the probe on its capacitor.
package main

import (
	"bufio"
	"flag"
	"fmt"
	"log"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"os"
)

// The circuit of generate.go, in SI units.
const (
	inductance       = 1.62e-3
	capacitance      = 1.0e-9
	coilResistance   = 15.0
	fittedResistance = 15.0
	sourceResistance = 50.0
	probeResistance  = 10e6
	probeCapacitance = 12e-12
	sourceVoltage    = 0.1 // rms
)

// The sweep.
const (
	points = 81
	from   = 112e3 // Hz
	to     = 136e3
	noise  = 0.004 // of each reading
	seed1  = 7
	seed2  = 124_301
)

func voltages(f float64) (circuit, capacitor float64) {
	s := complex(0, 2*math.Pi*f)
	zc := 1 / (s*(capacitance+probeCapacitance) + 1/complex(probeResistance, 0))
	z := complex(coilResistance+fittedResistance, 0) + s*inductance + zc
	i := sourceVoltage / (sourceResistance + z)
	return cmplx.Abs(i * z), cmplx.Abs(i * zc)
}

func main() {
	log.SetFlags(0)
	name := flag.String("o", "loop07-sweep.csv", "file to write")
	flag.Parse()
	file, err := os.Create(*name)
	if err != nil {
		log.Fatal(err)
	}
	out := bufio.NewWriter(file)
	out.WriteString("frequency (kHz),source V_S (V),capacitor V_C (V)\n")
	random := rand.New(rand.NewPCG(seed1, seed2))
	for n := range points {
		f := from + (to-from)*float64(n)/(points-1)
		vs, vc := voltages(f)
		fmt.Fprintf(out, "%.3f,%.5f,%.5f\n", f/1e3, vs*(1+noise*random.NormFloat64()), vc*(1+noise*random.NormFloat64()))
	}
	if err := out.Flush(); err != nil {
		log.Fatal(err)
	}
	if err := file.Close(); err != nil {
		log.Fatal(err)
	}
}
