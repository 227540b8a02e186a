package quantity

import (
	"math"
	"math/rand/v2"
	"testing"
)

var nan = math.NaN()

func TestString(t *testing.T) {
	for _, c := range []struct {
		q    Quantity
		want string
	}{
		// The form of GUM 7.2.2: m_S = 100.02147(35) g, with two digits.
		{New(100.02147, 0.00035, "V"), "100.02147(35) V"},
		{New(125034.2, 1.1, "Hz"), "125.0342(11) kHz"},
		// The rounding of u carries.
		{New(100, 9.96, "V"), "100(10) V"},
		{New(5, 0.0996, "V"), "5.00(10) V"},
		// Whole digits, then digits that straddle the point.
		{New(1234, 56, ""), "1234(56)"},
		{New(12300, 1500, "Hz"), "12.3(1.5) kHz"},
		{New(600, 560, "V"), "600(560) V"},
		// u beyond the value, and a value of zero.
		{New(0, 0.003, "V"), "0.0(3.0) mV"},
		{New(1e-9, 12, "V"), "0(12) V"},
		{New(-0.04, 1.2, "V"), "0.0(1.2) V"},
		{New(-0.0012, 3.4e-6, "V"), "-1.2000(34) mV"},
		// The prefix belongs to the rounded value.
		{New(999.99996, 0.0011, "Hz"), "1.0000000(11) kHz"},
		{New(999.96, 0.1, "V"), "999.96(10) V"},
		// Units and numbers without prefix.
		{New(39.27, 0.012, ""), "39.270(12)"},
		{New(3.2e-5, 1e-9, ""), "3.20000(10)e-5"},
		{New(0, 3.4e-4, "rad"), "0.00000(34) rad"},
		{New(74074.1, 5.2, "1/s"), "74074.1(5.2) 1/s"},
		{New(12345, 1500, "1/s"), "12300(1500) 1/s"},
		{New(6.284e6, 1.8e5, "1/s"), "6.28(18)e6 1/s"},
		{New(1200, 3, "s"), "1200.0(3.0) s"},
		{New(4.7, 0.2, "ohm"), "4.70(20) Ω"},
		{New(2.2e-6, 1e-9, "s"), "2.2000(10) µs"},
		{New(1e-18, 1e-20, "F"), "1.000(10)e-18 F"},
		// Exact, unknown, nothing.
		{New(47e-9, 0, "F"), "47 nF"},
		{New(1.23456789, nan, "s"), "1.23457 s"},
		{New(0.5, math.Inf(1), "V"), "500 mV"},
		{New(0.5, -1, "V"), "500 mV"},
		{New(1e9, 1e-12, "Hz"), "1 GHz"},
		{New(100, 6.1e-12, "%"), "100 %"}, // what a propagation leaves of nothing
		{New(0, 0, "V"), "0 V"},
		{New(nan, 1, "V"), "unknown"},
		{New(math.Inf(-1), 1, "V"), "unknown"},
	} {
		if got := c.q.String(); got != c.want {
			t.Errorf("%g ± %g: got %q, want %q", c.q.Value, c.q.U, got, c.want)
		}
	}
}

func TestColumns(t *testing.T) {
	for _, c := range []struct {
		q    Quantity
		want Columns
	}{
		{New(125034.2, 1.1, "Hz"), Columns{"125.0342 kHz", "± 0.0022 kHz", "8.8 ppm"}},
		{New(39.27, 0.12, ""), Columns{"39.27", "± 0.24", "0.31 %"}},
		{New(600, 560, "V"), Columns{"0.6 kV", "± 1.1 kV", "93 %"}},
		{New(3.2e-5, 1.2e-9, ""), Columns{"3.20000e-5", "± 2.4e-9", "0.0038 %"}},
		{New(0, 12, "V"), Columns{"0 V", "± 24 V", ""}},
		{New(1e-9, 12, "V"), Columns{"0 V", "± 24 V", "over 1000 %"}},
		{New(47e-9, 0, "F"), Columns{"47 nF", "exact", ""}},
		{New(1.5, nan, "s"), Columns{"1.5 s", "", ""}},
		{Unknown("s"), Columns{Value: "unknown"}},
	} {
		if got := c.q.Columns(); got != c.want {
			t.Errorf("%v: got %q, want %q", c.q, got, c.want)
		}
	}
}

func TestFormat(t *testing.T) {
	for _, c := range []struct {
		x      float64
		unit   string
		digits int
		want   string
	}{
		{47e-9, "F", 3, "47 nF"},
		{2.2e-6, "s", 3, "2.2 µs"},
		{999.6, "Hz", 3, "1 kHz"},
		{999.4, "Hz", 3, "999 Hz"},
		{123456, "Hz", 2, "120 kHz"},
		{-0.00162, "H", 4, "-1.62 mH"},
		{0, "V", 3, "0 V"},
		{12, "%", 3, "12 %"},
		{0.02, "%", 3, "0.02 %"},
		{12345, "", 3, "12300"},
		{1.5e-7, "", 3, "1.5e-7"},
		{3e12, "", 3, "3e12"},
		{100, "V", 0, "100 V"},
		{math.Inf(1), "V", 3, "unknown"},
	} {
		if got := Format(c.x, c.unit, c.digits); got != c.want {
			t.Errorf("%g %s: got %q, want %q", c.x, c.unit, got, c.want)
		}
	}
}

func TestScale(t *testing.T) {
	for _, c := range []struct {
		x      float64
		unit   string
		factor float64
		scaled string
	}{
		{2e-5, "s", 1e6, "µs"}, {999.6, "V", 1e-3, "kV"}, {-0.5, "V", 1e3, "mV"}, {5000, "s", 1, "s"},
		{0.01, "counts", 1, "counts"}, {0, "V", 1, "V"}, {nan, "ohm", 1, "Ω"},
	} {
		if f, u := Scale(c.x, c.unit); f != c.factor || u != c.scaled {
			t.Errorf("%g %s: got %g, %q, want %g, %q", c.x, c.unit, f, u, c.factor, c.scaled)
		}
	}
}

// What is printed reads back as the same quantity, to the digits shown.
func TestStringReadsBack(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	units := []string{"Hz", "s", "ohm", "V", "", "1/s"}
	for range 20000 {
		u := math.Pow(10, rng.Float64()*24-14)
		q := New(u*(rng.Float64()*2-1)*math.Pow(10, rng.Float64()*8-1), u, units[rng.IntN(len(units))])
		got, err := Parse(q.String(), q.Unit)
		if err != nil {
			t.Fatalf("%g ± %g: %v", q.Value, q.U, err)
		}
		if !(math.Abs(got.U/u-1) <= 0.05+1e-9) || !(math.Abs(got.Value-q.Value) <= 0.05*u*(1+1e-6)) {
			t.Fatalf("%g ± %g prints as %q and reads as %g ± %g", q.Value, q.U, q.String(), got.Value, got.U)
		}
	}
}
