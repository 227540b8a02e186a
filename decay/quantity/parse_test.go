package quantity

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

func TestParse(t *testing.T) {
	for _, c := range []struct {
		in, unit string
		value, u float64
	}{
		{"12k", "ohm", 12e3, nan},
		{"4k7", "ohm", 4700, nan}, // IEC 60062, from memory, and the next two
		{"4R7", "ohm", 4.7, nan},
		{"R47", "ohm", 0.47, nan},
		{"4n7", "F", 4.7e-9, nan},
		{"1M5 ohm", "ohm", 1.5e6, nan},
		{"50 Ω", "ohm", 50, nan},
		{"47n", "F", 47e-9, nan},
		{"47 nF", "F", 47e-9, nan},
		{"2.2 us", "s", 2.2e-6, nan},
		{"2.2 µs", "s", 2.2e-6, nan},
		{"2.2 μs", "s", 2.2e-6, nan},
		{" 10 mH ", "H", 10e-3, nan},
		{"10M", "ohm", 10e6, nan},
		{"10m", "ohm", 10e-3, nan},
		{"3 fF", "F", 3e-15, nan},
		{"30 ppm", "", 30e-6, nan},
		{"1 %", "", 0.01, nan},
		{"125kHz", "Hz", 125e3, nan},
		{"1e-3", "", 1e-3, nan},
		{"-1.5E+2", "V", -150, nan},
		{"−40 mV", "V", -0.04, nan},
		{".5", "", 0.5, nan},
		{"3 counts", "counts", 3, nan},
		{"1.62 mH +- 1 %", "H", 1.62e-3, 1.62e-5},
		{"-1.62 V ± 1%", "V", -1.62, 0.0162},
		{"1.62 mH +/- 0.02 mH", "H", 1.62e-3, 2e-5},
		{"1.62 mH ± 20 uH", "H", 1.62e-3, 2e-5},
		{"10 MHz +- 30 ppm", "Hz", 10e6, 300},
		{"15 +- 0.5", "ohm", 15, 0.5},
		{"15 +- 0", "ohm", 15, 0},
		{"1.62(2) mH", "H", 1.62e-3, 2e-5},
		{"12.3(1.5) kHz", "Hz", 12300, 1500},
		{"3.20000(10)e-5", "", 3.2e-5, 1e-9},
	} {
		q, err := Parse(c.in, c.unit)
		if err != nil {
			t.Errorf("%q: %v", c.in, err)
			continue
		}
		same := math.Abs(q.U-c.u) <= 1e-12*math.Abs(c.u) || math.IsNaN(q.U) && math.IsNaN(c.u)
		if q.Value != c.value || !same || q.Unit != c.unit {
			t.Errorf("%q: got %g ± %g %s, want %g ± %g %s", c.in, q.Value, q.U, q.Unit, c.value, c.u, c.unit)
		}
	}
}

func TestParseErrors(t *testing.T) {
	for _, c := range []struct{ in, unit, want string }{
		{"10 nF", "H", `expected a value in H such as "10 mH", found "10 nF", which is in F`},
		{"4R7", "F", `expected a value in F such as "47 nF", found "4R7", which is in ohm`},
		{"5 %", "Hz", `expected a value in Hz such as "125 kHz", found "5 %", which is a ratio in %`},
		{"12 xyz", "H", `whose ending "xyz" is no unit`},
		{"1,62 mH", "H", "the decimal mark is a point"},
		{"", "V", "which is empty"},
		{"NaN", "V", "does not begin with a number"},
		{"Inf", "V", "does not begin with a number"},
		{"-", "V", "does not begin with a number"},
		{"1e999", "V", "out of range"},
		{"1e99999999999999999999", "V", "out of range"},
		{"1e-400", "V", "out of range"},
		{"0x10", "V", "no unit or prefix"},
		{"1_000", "V", "no unit or prefix"},
		{"4k7k", "ohm", "two prefixes"},
		{"1.62(2 mH", "H", "parenthesis holds no uncertainty"},
		{"1.62() mH", "H", "parenthesis holds no uncertainty"},
		{"1.62 mH +- 0.02", "H", `"+- 0.02 mH", found "1.62 mH +- 0.02", whose uncertainty has no unit`},
		{"1.62 mH +- -1 %", "H", "not a positive number"},
		{"1.62 mH +-", "H", "which is empty"},
		{"1.62 mH +- 1 nF", "H", "which is in F"},
		{"1.62(2) mH +- 1 %", "H", "in parentheses already"},
		{"1 % +- 1 %", "", "share of the value or an amount"},
	} {
		q, err := Parse(c.in, c.unit)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: got %v, %v; want an error with %q", c.in, q, err, c.want)
		}
	}
}

// units are real ones: a unit that is itself a prefix would read back as one.
var units = []string{"", "H", "F", "ohm", "Hz", "s", "V", "1/s", "rad"}

func FuzzParse(f *testing.F) {
	for _, s := range []string{"4k7", "1.62 mH +- 1 %", "12.3(1.5) kHz", "30 ppm", "R47", "1e-3", "−2 µs ± 3ns"} {
		for k := range units {
			f.Add(s, uint8(k))
		}
	}
	f.Fuzz(func(t *testing.T, s string, k uint8) {
		unit := units[int(k)%len(units)]
		q, err := Parse(s, unit)
		if err != nil {
			return
		}
		if !q.Known() || math.IsInf(q.U, 0) || q.U < 0 {
			t.Fatalf("%q in %q reads as %g ± %g", s, unit, q.Value, q.U)
		}
		_ = q.Columns()
		if back, err := Parse(q.String(), q.Unit); err == nil && math.Abs(back.Value-q.Value) > 1e-5*math.Abs(q.Value)+q.U {
			t.Fatalf("%q reads as %g ± %g, prints as %q and reads back as %g", s, q.Value, q.U, q, back.Value)
		}
	})
}

func ExampleParse() {
	q, _ := Parse("1.62 mH +- 1 %", "H")
	fmt.Println(q)
	_, err := Parse("10 nF", "H")
	fmt.Println(err)
	// Output:
	// 1.620(16) mH
	// expected a value in H such as "10 mH", found "10 nF", which is in F
}
