package driven_test

import (
	"fmt"
	"math/cmplx"
	"testing"

	"dieaway/capture"
	"dieaway/decay/driven"
)

// current is the current through 1.62 mH, 1.0 nF and 40 ohm in series at f hertz,
// in parts of that at resonance.
func current(f float64) float64 {
	w := 2 * 3.141592653589793 * f
	return 40 / cmplx.Abs(complex(40, w*1.62e-3-1/(w*1e-9)))
}

func table(rows int) *capture.Sweep {
	s := &capture.Sweep{Unit: "V", Name: "V_R", Part: capture.Resistor}
	for i := range rows {
		f := 118e3 + 14e3*float64(i)/float64(rows-1)
		s.Frequency, s.Magnitude = append(s.Frequency, f), append(s.Magnitude, current(f))
	}
	return s
}

func ExampleAnalyze() {
	r := driven.Analyze(table(57), driven.Options{})
	fmt.Printf("%s, across the %s\n", r.Status, r.Across)
	fmt.Printf("f0 %.2f Hz, Q %.4f\n", r.Quantities.NaturalFrequency.Value, r.Quantities.Q.Value)
	level, _ := r.At(r.Quantities.NaturalFrequency.Value + r.Quantities.Bandwidth.Value/2)
	fmt.Printf("half a bandwidth above f0: %.3f V\n", level)
	// Output:
	// good, across the resistor
	// f0 125043.93 Hz, Q 31.8198
	// half a bandwidth above f0: 0.710 V
}

func BenchmarkAnalyze(b *testing.B) {
	for _, rows := range []int{60, 1000, 20000} {
		s := table(rows)
		s.Part = ""
		b.Run(fmt.Sprint(rows), func(b *testing.B) {
			for b.Loop() {
				driven.Analyze(s, driven.Options{})
			}
		})
	}
}
