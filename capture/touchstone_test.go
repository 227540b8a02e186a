package capture

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"
	"testing"
)

// A series circuit of a loop antenna (1.62 mH, 1.0 nF, 40 ohm) as one port, and
// between two ports, written in every form; the forms are those of the open
// specification (Touchstone 1.1 and 2.0), written from memory of it.
func loopImpedance(f float64) complex128 {
	w := 2 * math.Pi * f
	return complex(40, w*1.62e-3-1/(w*1e-9))
}

var touchFrequencies = []float64{120e3, 123e3, 125e3, 126e3, 128e3, 131e3}

func printed(z complex128, format string) string {
	switch format {
	case "RI":
		return fmt.Sprintf("%.12g %.12g", real(z), imag(z))
	case "DB":
		return fmt.Sprintf("%.12g %.12g", 20*math.Log10(cmplx.Abs(z)), cmplx.Phase(z)*180/math.Pi)
	}
	return fmt.Sprintf("%.12g %.12g", cmplx.Abs(z), cmplx.Phase(z)*180/math.Pi)
}

func TestTouchstoneOnePort(t *testing.T) {
	for _, format := range []string{"RI", "MA", "DB"} {
		for _, parameter := range []string{"S", "Y", "Z"} {
			for _, version := range []string{"", "[Version] 2.0\n"} {
				text := "! loop 07\n" + version + "# kHz " + parameter + " " + format + " R 75 ! option line\n"
				if version != "" {
					text += "[Number of Ports] 1\n[Reference]\n75\n[Number of Frequencies] 6\n[Network Data]\n"
				}
				norm := complex(75, 0) // version 1 has Z and Y in parts of the resistance
				if version != "" {
					norm = 1
				}
				for _, f := range touchFrequencies {
					z := loopImpedance(f)
					x := map[string]complex128{"S": (z - 75) / (z + 75), "Y": norm / z, "Z": z / norm}[parameter]
					text += fmt.Sprintf("%g %s ! %g\n", f/1e3, printed(x, format), f)
				}
				if version != "" {
					text += "[End]\nignored\n"
				}
				for response, want := range map[string]func(z complex128) complex128{
					"":    func(z complex128) complex128 { return 1 / z },
					"z11": func(z complex128) complex128 { return z },
					"S11": func(z complex128) complex128 { return (z - 75) / (z + 75) },
				} {
					s := readSweep(t, text, SweepOptions{Response: response})
					for i, f := range touchFrequencies {
						z := cmplx.Rect(s.Magnitude[i], s.Phase[i])
						if w := want(loopImpedance(f)); cmplx.Abs(z-w) > 1e-8*cmplx.Abs(w) || math.Abs(s.Frequency[i]-f) > 1e-6 {
							t.Fatalf("%s %s %q, response %q: %v at %v Hz, want %v", parameter, format, version, response, z, s.Frequency[i], w)
						}
					}
					if response == "" && (s.Part != Resistor || s.Unit != "S" || s.Name != "Y11" || !s.Cartesian) {
						t.Errorf("part %q, unit %q, name %q", s.Part, s.Unit, s.Name)
					}
				}
			}
		}
	}
}

// A parallel resonance is told by its impedance.
func TestTouchstoneParallel(t *testing.T) {
	text := "# Hz Z RI R 1\n"
	for _, f := range touchFrequencies {
		text += fmt.Sprintf("%g %s\n", f, printed(1/(loopImpedance(f)/1e6), "RI"))
	}
	if s := readSweep(t, text, SweepOptions{}); s.Name != "Z11" || s.Unit != "ohm" {
		t.Errorf("response %q in %q", s.Name, s.Unit)
	}
}

func TestTouchstoneTwoPorts(t *testing.T) {
	elements := func(f float64) (s11, s21, s12, s22 complex128) {
		z := loopImpedance(f) // in series between two ports of 50 ohm
		return z / (z + 100), 100 / (z + 100), complex(0, 0.25), complex(0.5, 0)
	}
	for _, w := range []struct {
		name, head string
		order      func(f float64) []complex128
		split      bool
		tail       string
	}{
		{"version 1", "# Hz S RI R 50\n", func(f float64) []complex128 { a, b, c, d := elements(f); return []complex128{a, b, c, d} }, false, "100 1 0.5 90 0.3\n200 1 0.5 90 0.3\n"},
		{"12_21", "[Version] 2.0\n# Hz S RI\n[Number of Ports] 2\n[Two-Port Data Order] 12_21\n[Network Data]\n",
			func(f float64) []complex128 { a, b, c, d := elements(f); return []complex128{a, c, b, d} }, true, "[Noise Data]\n1 2 3 4 5\n[End]\n"},
		{"lower", "[Version] 2.0\n# Hz S RI\n[Begin Information]\nanything 1 2 3\n[End Information]\n[Number of Ports] 2\n[Two-Port Data Order] 21_12\n[Matrix Format] Lower\n[Network Data]\n",
			func(f float64) []complex128 { a, b, _, d := elements(f); return []complex128{a, b, d} }, true, "[End]\n"},
	} {
		t.Run(w.name, func(t *testing.T) {
			text := w.head
			for _, f := range touchFrequencies {
				text += fmt.Sprint(f)
				for i, z := range w.order(f) {
					if text += " " + printed(z, "RI"); i == 1 && w.split {
						text += "\n"
					}
				}
				text += "\n"
			}
			s := readSweep(t, text+w.tail, SweepOptions{})
			if len(s.Frequency) != len(touchFrequencies) || s.Name != "S21" {
				t.Fatalf("%d rows of %s", len(s.Frequency), s.Name)
			}
			for i, f := range touchFrequencies {
				if _, want, _, _ := elements(f); cmplx.Abs(cmplx.Rect(s.Magnitude[i], s.Phase[i])-want) > 1e-9 {
					t.Errorf("%g Hz: %g at %g, want %v", f, s.Magnitude[i], s.Phase[i], want)
				}
			}
			if !strings.Contains(s.Layout.Columns[0].Why, "2 ports") {
				t.Error(s.Layout.Columns[0].Why)
			}
		})
	}
}

func FuzzReadSweep(f *testing.F) {
	for _, head := range []string{
		"omega (krad/s),X (V),Y (V),std (%)\n", "f,CH1 re,CH1 im,CH2 re\n", "f,level (dBm),phase (cycles),Vin (mVpp)\n", "log f,insertion loss (dB),delay (s),t\n", "",
	} {
		f.Add(head + lines(8, func(i int) string { return "1" + at(i, 1, 0) + ".5,2.5,0.25,1" }))
		f.Add(head + lines(8, func(i int) string { return at(i, 1, 0) + ",-2.5,0.25,1%" }))
	}
	f.Add("f,out\n1,2\n2,3\n3,4\n4,3\n5,2\n")
	f.Add("# GHz S MA R 50\n1 0.5 10\n2 0.4 20\n3 0.5 30\n4 0.4 20\n5 0.5 30\n")
	f.Add("[Version] 2.0\n# Hz Y DB\n[Number of Ports] 2\n[Matrix Format] Upper\n[Network Data]\n1 2 3 4\n5 6 7\n")
	f.Add("Hz;gain (dB);pha\n1;-1,5;3\n2;-2;4\n3;-2;4\n4;-2;4\n5;-2;4\n")
	f.Fuzz(func(t *testing.T, text string) {
		s, err := ReadSweep(strings.NewReader(text), "fuzz", SweepOptions{})
		if err != nil {
			return
		}
		n := len(s.Frequency)
		for _, v := range [][]float64{s.Magnitude, s.Phase, s.Reference, s.Deviation, s.Clock} {
			if v != nil && len(v) != n {
				t.Fatalf("%d values of %d", len(v), n)
			}
		}
		for i, f := range s.Frequency {
			if !(f > 0) || s.Magnitude[i] < 0 {
				t.Fatalf("row %d: %v Hz, magnitude %v", i, f, s.Magnitude[i])
			}
		}
	})
}
