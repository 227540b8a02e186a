package driven

import (
	"math"
	"os"
	"path/filepath"
	"testing"

	"dieaway/capture"
)

// Real sweeps outside the project, read in place. The figures are those of an
// independent least-squares script, for orientation: within 5 %.
func TestSharedSweeps(t *testing.T) {
	for _, w := range []struct {
		file   string
		f0, q  float64
		across capture.Part
		phase  bool
	}{
		{"s08.csv", 51.1e3, 2.42, capture.Resistor, true},
		{"s10.csv", 27.5e3, 3.1, capture.Capacitor, false},
		{"s11.txt", 48.4e3, 13.3, capture.Capacitor, false},
	} {
		t.Run(w.file, func(t *testing.T) {
			s, err := capture.ReadSweepFile(filepath.Join("../../../shared/captures", w.file), capture.SweepOptions{})
			if os.IsNotExist(err) {
				t.Skip(err)
			}
			if err != nil {
				t.Fatal(err)
			}
			r := Analyze(s, Options{})
			if r.Quantities == nil {
				t.Fatal(r.Findings)
			}
			near(t, "f0", r.Quantities.NaturalFrequency.Value, w.f0, 0.05*w.f0)
			near(t, "Q", r.Quantities.Q.Value, w.q, 0.05*w.q)
			if r.Across != w.across || !r.Guessed || r.Complex != w.phase {
				t.Errorf("across %s (%s), complex %v", r.Across, r.Why, r.Complex)
			}
			if math.Abs(r.Readings.Q.Value/w.q-1) > 0.08 {
				t.Errorf("half-power Q %v", r.Readings.Q)
			}
			t.Log(codes(r), r.Quantities.NaturalFrequency, r.Quantities.Q, r.Readings.Q, r.Findings)
		})
	}
}
