package main

import (
	"bytes"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// TestDemoIsGenerated runs the generator and wants the committed capture, byte
// for byte.
func TestDemoIsGenerated(t *testing.T) {
	name := filepath.Join(t.TempDir(), "loop07.csv")
	if out, err := exec.Command("go", "run", "demo/generate.go", "-o", name).CombinedOutput(); err != nil {
		t.Fatalf("generate: %v\n%s", err, out)
	}
	made, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(made, loop07) {
		t.Error("demo/loop07.csv is not what demo/generate.go makes: run go generate")
	}
}

// TestDemoAgreesWithCircuit compares what is measured in the demo's capture
// with the loaded circuit's natural frequency and Q. The generator integrates
// the differential equation and knows neither formula, nor does the fit:
//
//	omega0'^2 = (1 + R/Rp)/(L C'),  omega0'/Q' = R/L + 1/(Rp C'),  C' = C + Cp
//
// (derived from the circuit's characteristic equation). The record is seeded,
// so this test does not fail by chance: three standard uncertainties are far
// more than its noise makes, and far less than a wrong circuit would.
func TestDemoAgreesWithCircuit(t *testing.T) {
	const (
		r  = 50 + 15 + 15.0
		l  = 1.62e-3
		c  = 1.0e-9 + 12e-12
		rp = 10e6
	)
	omega0 := math.Sqrt((1 + r/rp) / (l * c))
	alpha := (r/l + 1/(rp*c)) / 2 // half of omega0/Q

	record, err := capture.Read(bytes.NewReader(loop07), demoFile, capture.Options{})
	if err != nil {
		t.Fatal(err)
	}
	_, result := decay.AnalyzeCapture(record, decay.Options{})
	if result.Status != decay.Good || result.Quantities == nil {
		t.Fatalf("status %s, want good: %v", result.Status, result.Findings)
	}
	q := result.Quantities
	tests := []struct {
		name string
		got  quantity.Quantity
		want float64
	}{
		{"natural frequency", q.NaturalFrequency, omega0 / (2 * math.Pi)},
		{"damped frequency", q.DampedFrequency, math.Sqrt(omega0*omega0-alpha*alpha) / (2 * math.Pi)},
		{"time constant", q.TimeConstant, 1 / alpha},
		{"Q", q.Q, omega0 / (2 * alpha)},
	}
	for _, test := range tests {
		if e := (test.got.Value - test.want) / test.got.U; !(math.Abs(e) <= 3) {
			t.Errorf("%s %v, the circuit has %v: %.1f standard uncertainties off", test.name, test.got, test.want, e)
		}
		if !(test.got.Relative() < 0.01) {
			t.Errorf("%s: relative uncertainty %v, want below 1 %%", test.name, test.got.Relative())
		}
	}
}
