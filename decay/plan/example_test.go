package plan_test

import (
	"fmt"
	"log"

	"dieaway/decay/plan"
)

// What to set for a Q of 40 at 125 kHz to one per mille, with a noise of 8 mV in 8 bits.
func Example() {
	p, err := plan.Make(plan.Wish{NaturalFrequency: 125e3, Q: 40, Amplitude: 1, Noise: 8e-3, Bits: 8, Want: 1e-3})
	if err != nil {
		log.Fatal(err)
	}
	s := p.Setting
	fmt.Printf("%d samples at %g MHz, %d averages, over %g V\n", s.Samples, s.SampleRate/1e6, s.Averages, s.FullScale)
	fmt.Printf("Q will be known to %.2g\n", s.Expected.Q.Relative())
	// Output:
	// 10000 samples at 20 MHz, 1 averages, over 4 V
	// Q will be known to 0.00082
}
