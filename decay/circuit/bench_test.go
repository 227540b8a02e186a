package circuit

import (
	"errors"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"dieaway/decay/quantity"
)

const loop07 = `[device]
name = "loop 07"
[circuit]
topology = "series"            # or "parallel"
inductance = "1.62 mH +- 1 %"
capacitance = "1.0 nF"
resistor = 15                  # a number needs no quotes
[ringdown]
source_resistance = "50"
probe_resistance = "10M"
probe_capacitance = "12p"
timebase = "20 ppm"
[sweep]
source_resistance = "0"
probe_resistance = "10M"
probe_capacitance = "12p"
timebase = "+- 30 ppm"
meter_bandwidth = "5 MHz"
[limits]
natural_frequency = { min = "124k", max = "126k" }
q = { min = 30 }
rule = "simple"
[limits.inductance]
max = "1.7 mH"
`

func TestParseBench(t *testing.T) {
	got, err := ParseBench([]byte(loop07), "loop07.toml")
	if err != nil {
		t.Fatal(err)
	}
	nan := math.NaN()
	want := &Bench{
		File: "loop07.toml", Device: "loop 07", Topology: Series,
		Inductance: quantity.New(1.62e-3, 1.62e-5, "H"), Capacitance: quantity.New(1e-9, nan, "F"),
		Resistor: quantity.New(15, nan, "ohm"), CoilResistance: quantity.Unknown(""),
		RingDown: Setup{SourceResistance: quantity.New(50, nan, "ohm"), ProbeResistance: quantity.New(10e6, nan, "ohm"),
			ProbeCapacitance: quantity.New(12e-12, nan, "F"), TimebaseU: 20e-6, MeterBandwidth: quantity.Unknown("")},
		Sweep: Setup{SourceResistance: quantity.New(0, nan, "ohm"), ProbeResistance: quantity.New(10e6, nan, "ohm"),
			// The half-width of an even distribution over the square root of 3: GUM 4.3.7.
			ProbeCapacitance: quantity.New(12e-12, nan, "F"), TimebaseU: 30e-6 / math.Sqrt(3), MeterBandwidth: quantity.New(5e6, nan, "Hz")},
		Limits: Limits{Rule: Simple, Ranges: []Range{{"natural_frequency", "Hz", 124e3, 126e3}, {"q", "", 30, nan}, {"inductance", "H", nan, 1.7e-3}}},
	}
	if diff := cmp.Diff(want, got, cmpopts.EquateNaNs(), cmpopts.EquateApprox(1e-12, 0)); diff != "" {
		t.Errorf("-want +got:\n%s", diff)
	}
}

// TestBenchOfOtherEditors: a byte-order mark and line ends CR LF change nothing.
func TestBenchOfOtherEditors(t *testing.T) {
	want, err := ParseBench([]byte(loop07), "b")
	if err != nil {
		t.Fatal(err)
	}
	got, err := ParseBench([]byte("\ufeff"+strings.ReplaceAll(loop07, "\n", "\r\n")), "b")
	if diff := cmp.Diff(want, got, cmpopts.EquateNaNs()); diff != "" || err != nil {
		t.Errorf("%v, -want +got:\n%s", err, diff)
	}
}

// TestBenchErrors: one line each, with file, line, key, what was found and expected.
func TestBenchErrors(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"[circuit]\ninductance = \"10 nF\"\n",
			`b.toml: line 2: circuit.inductance: expected a value in H such as "10 mH", found "10 nF", which is in F`},
		{"[circuit]\n\ninductanse = \"10 mH\"\n",
			`b.toml: line 3: circuit.inductanse: unknown key; known here: capacitance, coil_resistance, inductance, resistor, topology`},
		{"[circut]\n", `b.toml: line 1: circut: unknown key; known here: circuit, device, limits, ringdown, sweep`},
		{"inductance = \"10 mH\"\n", `b.toml: line 1: inductance: unknown key; known here: circuit, device, limits, ringdown, sweep`},
		{"[limits]\nq = { minimum = \"30\" }\n", `b.toml: line 2: limits.q.minimum: unknown key; known here: max, min`},
		{"[limits]\nq = \"30\"\n", `b.toml: line 2: limits.q: expected { min = …, max = … }, or one of them, found "30"`},
		{"[limits]\nq = {}\n", `b.toml: line 2: limits.q: gives neither min nor max`},
		{"[limits]\nq = { min = \"40\", max = \"30\" }\n", `b.toml: line 2: limits.q: min 40 is above max 30: nothing can pass`},
		{"[limits]\n[limits.natural_frequency]\nmax = \"124k\"\nmin = \"126k\"\n",
			`b.toml: line 2: limits.natural_frequency: min 126 kHz is above max 124 kHz: nothing can pass`},
		{"[limits]\nq = { min = \"30 +- 1\" }\n", `b.toml: line 2: limits.q.min: expected a limit without an uncertainty, found "30 +- 1"`},
		{"[limits]\nrule = \"strict\"\n", `b.toml: line 2: limits.rule: expected "guarded" or "simple", found "strict"`},
		{"[circuit]\ntopology = \"star\"\n", `b.toml: line 2: circuit.topology: expected "series" or "parallel", found "star"`},
		{"[circuit]\ncapacitance = \"0\"\n", `b.toml: line 2: circuit.capacitance: expected a value above zero, found "0"`},
		{"[circuit]\nresistor = -15\n", `b.toml: line 2: circuit.resistor: expected a value that is not negative, found -15`},
		{"[circuit]\nresistor = true\n", `b.toml: line 2: circuit.resistor: expected a value in quotes, found true`},
		{"[circuit]\nresistor = [15]\n", `b.toml: line 2: circuit.resistor: expected a value in quotes, found a list`},
		{"[circuit]\nresistor = nan\n", `b.toml: line 2: circuit.resistor: expected a value in ohm such as "4k7", found "nan", which does not begin with a number`},
		{"[circuit]\ntopology = \"parallel\"\nresistor = \"0\"\n",
			`b.toml: line 3: circuit.resistor: 0 ohm across a parallel circuit is a short circuit: leave out what is not connected`},
		{"[sweep]\nsource_resistance = \"0\"\n[circuit]\ntopology = \"parallel\"\n",
			`b.toml: line 2: sweep.source_resistance: 0 ohm across a parallel circuit is a short circuit: leave out what is not connected`},
		{"[ringdown]\nprobe_resistance = \"0\"\n", `b.toml: line 2: ringdown.probe_resistance: expected a value above zero, found "0"`},
		{"[ringdown]\ntimebase = \"20 us\"\n", `b.toml: line 2: ringdown.timebase: expected a relative uncertainty such as "20 ppm" or "+- 50 ppm", found "20 us"`},
		{"[ringdown]\ntimebase = \"20\"\n", `b.toml: line 2: ringdown.timebase: expected a relative uncertainty below 10 %, such as "20 ppm", found "20"`},
		{"[ringdown]\ntimebase = \"shared\"\n", `b.toml: line 2: ringdown.timebase: expected a relative uncertainty such as "20 ppm" or "+- 50 ppm", found "shared"`},
		{"[sweep]\ntimebase = \"shared\"\n", `b.toml: line 2: sweep.timebase: "shared" with the ring-down, and [ringdown] gives no timebase`},
		{"[device]\nname = 7\n", `b.toml: line 2: device.name: expected a name in quotes, found 7`},
		{"[circuit]\ncapacitance = \"1 nF\"\ncapacitance = \"2 nF\"\n", `b.toml: line 3: TOML: key capacitance is already defined`},
		{"[circuit]\ninductance = 1.62 mH\n", `b.toml: line 2: TOML: expected newline but got U+006D 'm'; a value with its unit stands in quotes, as "1.62 mH"`},
		{"[ringdown]\nprobe_capacitance = 12\n", `b.toml: line 2: ringdown.probe_capacitance: expected a value below 1 F such as "47 nF", found 12`},
		{"\xff\xfe[\x00", `b.toml: found UTF-16 text, expected UTF-8: save it in that encoding`},
	} {
		b, err := ParseBench([]byte(c.text), "b.toml")
		if err == nil {
			t.Errorf("%q: accepted as %+v", c.text, b)
			continue
		}
		var bad *BenchError
		if err.Error() != c.want || !errors.As(err, &bad) {
			t.Errorf("%q:\n got %s\nwant %s", c.text, err, c.want)
		}
	}
}

func FuzzParseBench(f *testing.F) {
	f.Add(loop07)
	f.Add("[limits]\nq = { min = \"40\", max = \"30\" }\n[[circuit]]\na.b.c = 1\n")
	f.Fuzz(func(t *testing.T, text string) {
		b, err := ParseBench([]byte(text), "f")
		if err != nil {
			var bad *BenchError
			if !errors.As(err, &bad) {
				t.Fatalf("%T: %v", err, err)
			}
			return
		}
		for _, q := range []quantity.Quantity{b.Inductance, b.Capacitance} {
			if q.Known() && !(q.Value > 0) {
				t.Fatalf("%q was accepted as %v", text, q)
			}
		}
	})
}
