package main

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"os"
	"strings"

	"github.com/rogpeppe/go-internal/testscript"
)

// swept writes the sweep of a loop antenna (1.62 mH, 1.0 nF, 40 ohm; Q 31.8 at
// 125.04 kHz) from the impedances of its parts: swept KIND FILE.
func swept(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 2 {
		ts.Fatalf("usage: swept KIND FILE")
	}
	kind, ok := sweptKinds[args[0]]
	if !ok {
		ts.Fatalf("no sweep of the kind %s", args[0])
	}
	random := rand.New(rand.NewPCG(1, 2))
	var text strings.Builder
	text.WriteString(kind.head + "\n")
	for i := range 61 {
		f := kind.from + kind.step*float64(i)
		w := 2 * math.Pi * f
		v := complex(0, -1/(w*1e-9)) / complex(40, w*1.62e-3-1/(w*1e-9))
		v += complex(0.1*random.NormFloat64(), 0.1*random.NormFloat64())
		text.WriteString(kind.row(f, v) + "\n")
	}
	ts.Check(os.WriteFile(ts.MkAbs(args[1]), []byte(text.String()), 0o666))
}

var sweptKinds = map[string]struct {
	head       string
	from, step float64
	row        func(f float64, v complex128) string
}{
	"plain": {"frequency (kHz),V_C (V)", 116e3, 300, func(f float64, v complex128) string {
		return fmt.Sprintf("%.4f,%.4f", f/1e3, cmplx.Abs(v))
	}},
	"decibels": {"freq;gain (dB);phase (deg);note", 116e3, 300, func(f float64, v complex128) string {
		return fmt.Sprintf("%.1f;%.3f;%.2f;x", f, 20*math.Log10(cmplx.Abs(v)), cmplx.Phase(v)*180/math.Pi)
	}},
	"columns": {"a,b,c", 116e3, 300, func(f float64, v complex128) string {
		return fmt.Sprintf("%.4f,2,%.4f", f/1e3, 2*cmplx.Abs(v))
	}},
	"below":  {"f,V_C", 100e3, 300, func(f float64, v complex128) string { return fmt.Sprintf("%.1f,%.4f", f, cmplx.Abs(v)) }},
	"narrow": {"f,V_C", 123.6e3, 50, func(f float64, v complex128) string { return fmt.Sprintf("%.1f,%.4f", f, cmplx.Abs(v)) }},
}
