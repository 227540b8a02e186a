package circuit_test

import (
	"fmt"
	"io"
	"log"

	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// What a probe does to a tank of 10 mH, 10 nF and 10 ohm.
func ExampleTank_Loaded() {
	bare := circuit.Tank{Inductance: 10e-3, Capacitance: 10e-9, Resistance: 10}
	probe := circuit.Load{Conductance: 1 / 10e6, Capacitance: 12e-12}
	for _, r := range []circuit.Resonance{bare.Loaded(circuit.Load{}), bare.Loaded(probe)} {
		fmt.Printf("%.4f Hz, Q %.5f, tau %.7f ms\n", r.NaturalFrequency, r.Q(), r.TimeConstant()*1e3)
	}
	// Output:
	// 15915.4943 Hz, Q 100.00000, tau 2.0000000 ms
	// 15905.9616 Hz, Q 98.95177, tau 1.9802215 ms
}

func ExampleAnalyze() {
	bench, err := circuit.ParseBench([]byte(`
[circuit]
inductance = "1.62 mH +- 0.2 %"
resistor = "15"
[ringdown]
source_resistance = "50 +- 1 %"
probe_capacitance = "12p +- 1p"
`), "loop07.toml")
	if err != nil {
		fmt.Println(err)
		return
	}
	a := circuit.Analyze(bench, &decay.Quantities{
		DampedFrequency: quantity.New(124.240e3, 6, "Hz"), DecayRate: quantity.New(24723, 34, "1/s")})
	fmt.Println("capacitance", a.Capacitance)
	fmt.Println("Q without source and probe", a.Unloaded.Q)
	for _, l := range a.Budget {
		fmt.Printf("%s: %s, %.1f %% of the loss\n", l.Part, l.Resistance, 100*l.Share.Value)
	}
	// Output:
	// capacitance 1.0000(23) nF
	// Q without source and probe 42.28(73)
	// source: 50.00(50) Ω, 62.4 % of the loss
	// resistor: 15 Ω, 18.7 % of the loss
	// coil and the rest: 15.10(54) Ω, 18.9 % of the loss
}

func ExampleParseBench() {
	_, err := circuit.ParseBench([]byte("[circuit]\ninductance = \"10 nF\"\n"), "loop07.toml")
	fmt.Println(err)
	// Output:
	// loop07.toml: line 2: circuit.inductance: expected a value in H such as "10 mH", found "10 nF", which is in F
}

// Write the capture of a circuit whose values are known.
func ExampleSimulation() {
	bench, err := circuit.ParseBench([]byte(`
[circuit]
inductance = "1.62 mH"
capacitance = "1.0 nF"
resistor = "80"
`), "bench.toml")
	if err != nil {
		log.Fatal(err)
	}
	s := &circuit.Simulation{Bench: bench, Noise: 5e-3, Converter: circuit.Converter{Bits: 8, FullScale: 4}}
	if err := s.Complete(20e-6, 200e-6); err != nil { // before the trigger, in all
		log.Fatal(err)
	}
	record, err := s.Record()
	if err != nil {
		log.Fatal(err)
	}
	fmt.Println(len(record.Samples), "samples,", record.Write(io.Discard))
	// Output: 1000 samples, <nil>
}
