//go:build ignore

// Generate_node writes captures of the switch node of a converter that rings when
// it is switched to 12 V, as it is and with known capacitors added.
//
//	go run demo/generate_node.go -o demo
//
// The stray inductance of 12 nH with 0.8 ohm and the node's 320 pF are integrated
// by their differential equation:
//
//	L di/dt = source(t) - R i - v      C' dv/dt = i - v/Rp      C' = C + Cp + added
package main

import (
	"bufio"
	"flag"
	"fmt"
	"log"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
)

// The circuit, in SI units.
const (
	inductance       = 12e-9
	resistance       = 0.8
	capacitance      = 320e-12
	probeResistance  = 10e6
	probeCapacitance = 9e-12
	supply           = 12.0
)

// The oscilloscope: 8 bits over 32 V.
const (
	samples  = 600
	pretrig  = 60
	interval = 0.5e-9
	step     = 0.125
	noise    = 0.06
	substeps = 50
)

func capture(name string, added float64, seed uint64) error {
	file, err := os.Create(name)
	if err != nil {
		return err
	}
	out := bufio.NewWriter(file)
	out.WriteString("time,switch node\nns,V\n")
	random := rand.New(rand.NewPCG(seed, 12))
	c := capacitance + probeCapacitance + added
	slope := func(i, v, source float64) (di, dv float64) {
		return (source - resistance*i - v) / inductance, (i - v/probeResistance) / c
	}
	var i, v float64
	const h = interval / substeps
	for n := range samples {
		fmt.Fprintf(out, "%.1f,%.3f\n", float64(n-pretrig)*interval*1e9, step*math.Round((v+noise*random.NormFloat64())/step)+0)
		source := 0.0
		if n >= pretrig {
			source = supply
		}
		for range substeps { // the classical Runge-Kutta method
			a1, b1 := slope(i, v, source)
			a2, b2 := slope(i+h/2*a1, v+h/2*b1, source)
			a3, b3 := slope(i+h/2*a2, v+h/2*b2, source)
			a4, b4 := slope(i+h*a3, v+h*b3, source)
			i += h / 6 * (a1 + 2*a2 + 2*a3 + a4)
			v += h / 6 * (b1 + 2*b2 + 2*b3 + b4)
		}
	}
	if err := out.Flush(); err != nil {
		return err
	}
	return file.Close()
}

func main() {
	log.SetFlags(0)
	folder := flag.String("o", ".", "folder to write to")
	flag.Parse()
	for n, c := range []struct {
		name  string
		added float64
	}{{"node.csv", 0}, {"node-220p.csv", 220e-12}, {"node-470p.csv", 470e-12}} {
		if err := capture(filepath.Join(*folder, c.name), c.added, uint64(n+1)); err != nil {
			log.Fatal(err)
		}
	}
}
