package capture

import (
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

func readSweep(t *testing.T, text string, opt SweepOptions) *Sweep {
	t.Helper()
	s, err := ReadSweep(strings.NewReader(text), "sweep.csv", opt)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// column prints what a sweep has of a column for comparison, cut to the first values.
func firstOf(v []float64) string {
	if v == nil {
		return "-"
	}
	var parts []string
	for _, x := range v[:min(2, len(v))] {
		parts = append(parts, fmt.Sprintf("%.5g", x))
	}
	return strings.Join(parts, " ")
}

// rowsOf joins rows of cells, five of them at least by repeating the last.
func rowsOf(head string, rows ...string) string {
	for len(rows) < 5 {
		rows = append(rows, rows[len(rows)-1])
	}
	return head + strings.Join(rows, "\n") + "\n"
}

func TestSweepColumns(t *testing.T) {
	for _, w := range []struct {
		name, text                            string
		opt                                   SweepOptions
		f, m, phase, reference, deviation, ck string
		part                                  Part
	}{
		{name: "plain", text: rowsOf("frequency (kHz),V_C (V)\n", "124,1.5", "125,2.5"), f: "1.24e+05 1.25e+05", m: "1.5 2.5", part: Capacitor},
		{name: "source and millivolts", text: rowsOf("f/Hz;V_S/V;V_L/mV\n", "124000;1,01;500,5", "125000;1,00;600"), f: "1.24e+05 1.25e+05", m: "0.5005 0.6", reference: "1.01 1", part: Inductor},
		{name: "two channels", text: rowsOf("Freq [Hz]\tv1\tv2\n", "1e3\t1\t0.2", "2e3\t0.9\t0.4"), f: "1000 2000", m: "0.2 0.4", reference: "1 0.9"},
		{name: "decibels and degrees", text: rowsOf("freq,gain (dB),phase (deg)\n", "1000,-20,90", "2000,0,-180"), f: "1000 2000", m: "0.1 1", phase: "1.5708 -3.1416"},
		{name: "negative amplitudes are decibels", text: rowsOf("f,amp,pha\n", "1000,-20,1.5", "2000,0,-1.5"), f: "1000 2000", m: "0.1 1", phase: "1.5 -1.5"},
		{name: "deviation by name", text: rowsOf("Hz,out,err out\n", "1000,2,0.1", "2000,3,0.2"), f: "1000 2000", m: "2 3", deviation: "0.1 0.2"},
		{name: "deviation in decibels", text: rowsOf("Hz,out (dB),sd (dB)\n", "1000,0,0.1", "2000,20,0.1"), f: "1000 2000", m: "1 10", deviation: "0.011513 0.11513"},
		{name: "real and imaginary", text: rowsOf("f (MHz),re,im\n", "1,3,4", "2,0,-1"), f: "1e+06 2e+06", m: "5 1", phase: "0.9273 -1.5708"},
		{name: "clock", text: rowsOf("time (s),f,V_R\n", "0,1000,1", "0.5,1001,2"), f: "1000 1001", m: "1 2", ck: "0 0.5", part: Resistor},
		{name: "no names", text: rowsOf("", "1000\t2\t0.1", "1001\t30\t0.2", "1002\t3\t0.3", "1003\t2\t0.1"), f: "1000 1001", m: "2 30", deviation: "0.1 0.2"},
		{name: "no names, phase", text: rowsOf("", "1000 2 10", "1001 30 -80"), f: "1000 1001", m: "2 30", phase: "0.17453 -1.3963"},
		{name: "named by hand", text: rowsOf("a,b,c,d\n", "3,1,1000,2", "4,2,2000,3"), opt: SweepOptions{Frequency: "c", Response: "4", Reference: "B"}, f: "1000 2000", m: "2 3", reference: "1 2"},
		{name: "unit by hand", text: rowsOf("f,V_C\n", "1,2", "2,3"), opt: SweepOptions{FrequencyUnit: "kHz"}, f: "1000 2000", m: "2 3", part: Capacitor},
		{name: "no reference wanted", text: rowsOf("f,V_S,V_C\n", "1,2,5", "2,3,6"), opt: SweepOptions{Reference: "none"}, f: "1 2", m: "5 6", part: Capacitor},
		{name: "a ratio already", text: rowsOf("f,V_S,V_C/V_S\n", "1,2,5", "2,3,6"), f: "1 2", m: "5 6", part: Capacitor},
		{name: "peak to peak over rms", text: rowsOf("f,V_S rms,out (pp)\n", "1,1,2.828427125", "2,2,6"), f: "1 2", m: "2.8284 6", reference: "2.8284 5.6569"},
		{name: "units in the cells", text: rowsOf("f,out\n", "1 kHz,20 mV", "1.5 kHz,30 mV"), f: "1000 1500", m: "0.02 0.03"},
		{name: "parts in words", text: rowsOf("frequency (kHz),source V_S (V),coil V_L (V)\n", "124,1.5,3", "125,2.5,4"), f: "1.24e+05 1.25e+05", m: "3 4", reference: "1.5 2.5", part: Inductor},
		{name: "unsorted, repeated", text: rowsOf("f,out\n", "3,1", "1,2", "1,2.5"), f: "3 1", m: "1 2"},
	} {
		t.Run(w.name, func(t *testing.T) {
			s := readSweep(t, w.text, w.opt)
			got := []string{firstOf(s.Frequency), firstOf(s.Magnitude), firstOf(s.Phase), firstOf(s.Reference), firstOf(s.Deviation), firstOf(s.Clock), string(s.Part)}
			want := []string{w.f, w.m, w.phase, w.reference, w.deviation, w.ck, string(w.part)}
			for i := range want {
				if want[i] == "" && i < 6 {
					want[i] = "-"
				}
				if got[i] != want[i] {
					t.Errorf("%s is %q, want %q\n%v", []string{"frequency", "magnitude", "phase", "reference", "deviation", "clock", "part"}[i], got[i], want[i], s.Layout.Columns)
				}
			}
			for _, c := range s.Layout.Columns {
				if c.Role == "" || c.Why == "" {
					t.Errorf("column %d: role %q, why %q", c.Number, c.Role, c.Why)
				}
			}
		})
	}
}

// TestFrequencyUnitGiven: the caller's unit wins over that of the file, which is said;
// but not over that of each cell.
func TestFrequencyUnitGiven(t *testing.T) {
	rows := []string{"1,2", "2,3"}
	override := "The file gives its frequencies in MHz and --frequency-unit in kHz; the given unit is used."
	for _, w := range []struct{ name, text, f, message string }{
		{"in the heading", rowsOf("f (MHz),V_C\n", rows...), "1000 2000", override},
		{"in the preamble", rowsOf("Frequency Unit,MHz\nf,V_C\n", rows...), "1000 2000", override},
		{"in the option line", "# MHz S MA R 50\n1 0.2 0\n2 0.3 0\n3 0.4 0\n4 0.3 0\n5 0.2 0\n", "1000 2000", override},
		{"in each cell", rowsOf("f,V_C\n", "1 MHz,2", "2 MHz,3"), "1e+06 2e+06", "Each frequency of the file has its unit, and --frequency-unit kHz is not used."},
		{"angular", rowsOf("omega (rad/s),V_C\n", rows...), "1000 2000", "The file gives its frequencies in rad/s and --frequency-unit in kHz; the given unit is used."},
		{"the same", rowsOf("f (kHz),V_C\n", rows...), "1000 2000", ""},
		{"nowhere", rowsOf("f,V_C\n", rows...), "1000 2000", ""},
	} {
		t.Run(w.name, func(t *testing.T) {
			s := readSweep(t, w.text, SweepOptions{FrequencyUnit: "kHz"})
			if got := firstOf(s.Frequency); got != w.f {
				t.Errorf("frequencies %s, want %s", got, w.f)
			}
			message := ""
			for _, f := range s.Findings {
				if f.Code != IgnoredColumns || f.Severity != Note || message != "" {
					t.Errorf("finding %v", f)
				}
				message = f.Message
			}
			if message != w.message {
				t.Errorf("said %q, want %q", message, w.message)
			}
		})
	}
}

func TestSweepErrors(t *testing.T) {
	for _, w := range []struct {
		name, text string
		opt        SweepOptions
		message    string
		err        error
		line, col  int
	}{
		{"a word in the table", rowsOf("f,out\n", "1,2", "2,x7", "3,4"), SweepOptions{}, `found "x7", expected a number`, ErrSyntax, 3, 2},
		{"negative frequency", rowsOf("f,out\n", "1,2", "-2,3"), SweepOptions{}, "found -2, expected a frequency greater than zero", ErrSyntax, 3, 1},
		{"no frequency in a row", rowsOf("f,out\n", "1,2", ",3", "3,4"), SweepOptions{}, "found an empty cell, expected a frequency", ErrSyntax, 3, 1},
		{"negative magnitude", rowsOf("f,V_C\n", "1,2", "2,-3"), SweepOptions{}, "found -3, expected a magnitude", ErrSyntax, 3, 2},
		{"one row", "f,out\n1,2\n", SweepOptions{}, "found 1 row, expected at least 5", ErrTooFew, 0, 0},
		{"one frequency", rowsOf("f,out\n", "1,2"), SweepOptions{}, "found 1 Hz in every row", ErrTooFew, 0, 1},
		{"phase without magnitude", rowsOf("f,phase\n", "1,2", "2,3"), SweepOptions{}, "expected a magnitude", ErrNoData, 0, 0},
		{"one column", rowsOf("f\n", "1", "2"), SweepOptions{}, "expected a magnitude", ErrNoData, 0, 0},
		{"no frequency", rowsOf("out\n", "-1", "-2"), SweepOptions{}, "expected one of frequency", ErrNoData, 0, 0},
		{"missing column", rowsOf("f,out\n", "1,2", "2,3"), SweepOptions{Response: "V_C"}, `bad.csv: no such column: expected "V_C" for the response, found 1 "f", 2 "out"`, ErrNoColumn, 0, 0},
		{"column of words", rowsOf("f,out,note\n", "1,2,a", "2,3,b"), SweepOptions{Response: "note"}, "column 3 of the table holds words", ErrNoColumn, 0, 0},
		{"one column for two things", rowsOf("f,out\n", "1,2", "2,3"), SweepOptions{Response: "out", Phase: "out"}, "is the response already", ErrNoColumn, 0, 0},
		{"no table", "nothing here\n", SweepOptions{}, "without a row of numbers", ErrNoData, 0, 0},
		{"empty", "", SweepOptions{}, "an empty file", ErrNoData, 0, 0},
		{"picture", "\x89PNG\r\n\x1a\n\x00\x00", SweepOptions{}, "a PNG image", ErrNotText, 0, 0},
		{"touchstone word", "# GHz S MA R 50\n1 0.5 x\n", SweepOptions{}, `found "x", expected a number`, ErrSyntax, 2, 3},
		{"touchstone of three ports", "[Version] 2.0\n# Hz S RI\n[Number of Ports] 3\n", SweepOptions{}, "expected one port or two", ErrSyntax, 3, 0},
		{"touchstone falls", "# Hz S RI R 50\n1 0 1\n2 0 1\n2 0 1\n", SweepOptions{}, "the frequency 2 after 2", ErrSyntax, 4, 1},
		{"touchstone hybrid", "# Hz H RI R 50\n1 0 1\n", SweepOptions{}, "found H parameters, expected S, Y or Z", ErrSyntax, 1, 0},
		{"touchstone row too long", "# Hz S RI R 50\n1 0 1\n2 0 1 5\n", SweepOptions{}, "found 4 numbers, expected 3", ErrSyntax, 3, 0},
	} {
		t.Run(w.name, func(t *testing.T) {
			_, err := ReadSweep(strings.NewReader(w.text), "bad.csv", w.opt)
			if !errors.Is(err, w.err) || !strings.Contains(fmt.Sprint(err), w.message) || strings.Contains(fmt.Sprint(err), "\n") {
				t.Fatalf("error %q, want %q", err, w.message)
			}
			var e *Error
			if errors.As(err, &e) && (e.File != "bad.csv" || e.Line != w.line || e.Column != w.col) {
				t.Errorf("%s line %d column %d, want line %d column %d", e.File, e.Line, e.Column, w.line, w.col)
			}
		})
	}
	if _, err := ReadSweep(strings.NewReader(""), "", SweepOptions{FrequencyUnit: "rpm"}); err == nil {
		t.Error("unit rpm taken")
	}
	if _, err := ReadSweepFile(filepath.Join(t.TempDir(), "none"), SweepOptions{}); !os.IsNotExist(err) {
		t.Error(err)
	}
}

func TestSweepVoltages(t *testing.T) {
	s := readSweep(t, rowsOf("f,V_S,V_C,V_L,note\n", "1,1,2,3,a", "2,1,4,5,b"), SweepOptions{})
	if c, l := s.Voltage(Capacitor), s.Voltage(Inductor); c[1] != 4 || l[1] != 5 || s.Voltage(Resistor) != nil {
		t.Errorf("voltages %v %v", c, l)
	}
	if lo, hi := s.Span(); lo != 1 || hi != 2 {
		t.Errorf("span %v to %v", lo, hi)
	}
	if len(s.Findings) != 1 || s.Findings[0].Code != IgnoredColumns || !strings.Contains(s.Findings[0].Message, `5 "note"`) {
		t.Errorf("findings %v", s.Findings)
	}
	s = readSweep(t, rowsOf("f,V_C\n", "1,2", "2,", "3,4", "4,5", "5,6", "6,7"), SweepOptions{})
	if !math.IsNaN(s.Magnitude[1]) || len(s.Findings) != 1 || s.Findings[0].Code != MissingSamples {
		t.Errorf("missing value: %v, findings %v", s.Magnitude[1], s.Findings)
	}
}

// The real sweeps, read a second time the simplest way.
func TestSharedSweeps(t *testing.T) {
	for _, w := range []struct {
		file, sep     string
		skip, m, dev  int
		phase         int
		decibels      bool
		first, name   string
		lines, others int
	}{
		{file: "s08.csv", sep: ",", skip: 1, m: 2, dev: -1, phase: 3, decibels: true, name: "amp", lines: 100, others: 3},
		{file: "s10.csv", sep: ",", skip: 4, m: 1, dev: 2, phase: -1, name: "peak-to-peak voltage", lines: 36, others: 2},
		{file: "s11.txt", sep: "\t", m: 1, dev: 2, phase: -1, lines: 57},
	} {
		t.Run(w.file, func(t *testing.T) {
			name := filepath.Join(shared, w.file)
			b, err := os.ReadFile(name)
			if err != nil {
				t.Skip(err)
			}
			s, err := ReadSweepFile(name, SweepOptions{})
			if err != nil {
				t.Fatal(err)
			}
			lines := strings.Split(strings.TrimSpace(string(b)), "\n")[w.skip:]
			if len(lines) != len(s.Frequency) || len(lines) != w.lines || s.Name != w.name || s.Decibels != w.decibels || len(s.Others) != w.others {
				t.Fatalf("%d rows of %d, response %q, dB %v, others %d", len(s.Frequency), len(lines), s.Name, s.Decibels, len(s.Others))
			}
			for i, l := range lines {
				cells := strings.Split(strings.TrimSpace(l), w.sep)
				value := func(k int) float64 {
					x, err := strconv.ParseFloat(cells[k], 64)
					if err != nil {
						t.Fatal(err)
					}
					return x
				}
				m := value(w.m)
				if w.decibels {
					m = math.Pow(10, m/20)
				}
				if s.Frequency[i] != value(0) || s.Magnitude[i] != m || s.Lines[i] != i+1+w.skip {
					t.Fatalf("row %d: %v Hz %v in line %d", i, s.Frequency[i], s.Magnitude[i], s.Lines[i])
				}
				if w.dev >= 0 && s.Deviation[i] != value(w.dev) || w.phase >= 0 && s.Phase[i] != value(w.phase)*(math.Pi/180) {
					t.Fatalf("row %d: deviation or phase", i)
				}
			}
		})
	}
}
