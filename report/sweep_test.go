package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/driven"
)

// loop07Sweep is a sweep of a loop antenna (1.62 mH, 1.0 nF, 40 ohm) at 125 kHz,
// the voltage across its capacitor over that of the source, from its impedances.
func loop07Sweep() *capture.Sweep {
	rng := rand.New(rand.NewPCG(7, 7))
	s := &capture.Sweep{File: "loop07-sweep.csv", SHA256: strings.Repeat("1f", 32), Name: "V_C", Unit: "V", Part: capture.Capacitor,
		Layout: capture.Layout{Encoding: "UTF-8", HeaderLine: 1, FirstLine: 2, Delimiter: "comma", DecimalMark: ".", Columns: []capture.Column{
			{Number: 1, Name: "frequency", Unit: "kHz", Role: capture.RoleFrequency, Why: `its name is "frequency"`},
			{Number: 2, Name: "V_C", Unit: "V", Role: capture.RoleResponse, Why: `its name is "V_C"`},
			{Number: 3, Name: "phase", Unit: "deg", Role: capture.RolePhase, Why: `its name is "phase"`}}}}
	for i := range 61 {
		f := 116e3 + 300*float64(i)
		w := 2 * math.Pi * f
		h := complex(0, -1/(w*1e-9)) / complex(40, w*1.62e-3-1/(w*1e-9))
		re, im := real(h)+0.1*rng.NormFloat64(), imag(h)+0.1*rng.NormFloat64()
		s.Frequency = append(s.Frequency, f)
		s.Magnitude = append(s.Magnitude, math.Hypot(re, im))
		s.Phase = append(s.Phase, math.Atan2(im, re))
	}
	s.Magnitude[50] = 12
	return s
}

func sweeps() map[string]*Sweep {
	table := loop07Sweep()
	origin := Origin{Version: "test", CommandLine: "dieaway sweep loop07-sweep.csv"}
	flat := &capture.Sweep{File: "flat.csv", Unit: "V", Name: "out"}
	for i := range 30 {
		flat.Frequency = append(flat.Frequency, 1000+float64(i))
		flat.Magnitude = append(flat.Magnitude, 1+0.01*float64(i*7%5))
	}
	benched := &Sweep{Table: table, Result: driven.Analyze(table, driven.Options{}), Device: "loop 07", Origin: origin}
	if b, err := circuit.ParseBench([]byte(benchText+"[sweep]\nsource_resistance = \"12 +- 0.05\"\n"), "loop07.toml"); err == nil {
		benched.Circuit = circuit.AnalyzeSweep(b, benched.Result.Quantities)
		benched.Limits = b.Limits.JudgeSweep(benched.Result.Quantities, benched.Circuit)
	}
	return map[string]*Sweep{
		"sweep-bench":      benched,
		"sweep":            {Table: table, Result: driven.Analyze(table, driven.Options{}), Device: "loop 07", Origin: origin},
		"sweep-refused":    {Table: flat, Result: driven.Analyze(flat, driven.Options{}), Origin: origin},
		"sweep-unreadable": {File: "x.csv", Err: &capture.Error{File: "x.csv", Line: 3, Column: 2, Found: `"a"`, Expected: "a number", Err: capture.ErrSyntax}},
	}
}

func writeSweep(t testing.TB, write func(b *bytes.Buffer) error) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := write(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func TestSweepGolden(t *testing.T) {
	for name, r := range sweeps() {
		golden(t, name+".json", writeSweep(t, func(b *bytes.Buffer) error { return r.WriteJSON(b) }))
		golden(t, name+".txt", writeSweep(t, func(b *bytes.Buffer) error { return r.WriteSummary(b, Style{}) }))
		if r.Err == nil {
			golden(t, name+".html", []byte(scripts.ReplaceAllString(string(writeSweep(t, func(b *bytes.Buffer) error { return r.WritePage(b) })), "$1$2")))
		}
	}
}

// The keys of the JSON are fixed: DESIGN, section 6.
func TestSweepJSONKeys(t *testing.T) {
	var got map[string]any
	if err := json.Unmarshal(writeSweep(t, func(b *bytes.Buffer) error { return sweeps()["sweep"].WriteJSON(b) }), &got); err != nil {
		t.Fatal(err)
	}
	at := func(path string) any {
		var v any = got
		for _, k := range strings.Split(path, ".") {
			m, ok := v.(map[string]any)
			if !ok {
				return nil
			}
			v = m[k]
		}
		return v
	}
	if at("schema") != "dieaway.sweep.v1" || at("status") != "good" || at("across") != "capacitor" || at("points") != 61.0 {
		t.Errorf("head: %v", got)
	}
	for _, key := range strings.Fields(`natural_frequency_hz q bandwidth_hz damping_ratio damped_frequency_hz peak_frequency_hz peak_gain`) {
		if v, ok := at("quantities." + key + ".value").(float64); !ok || !(v > 0) {
			t.Errorf("%s: %v", key, at("quantities."+key))
		}
	}
	for _, path := range []string{"readings.half_power.q", "readings.half_power.bandwidth_hz", "readings.reactance_ratio.natural_frequency_hz"} {
		if _, ok := at(path).(map[string]any); !ok {
			t.Errorf("%s is missing", path)
		}
	}
}

func TestSweepPage(t *testing.T) {
	for name, r := range sweeps() {
		if r.Err != nil {
			if err := r.WritePage(&bytes.Buffer{}); !errors.Is(err, capture.ErrSyntax) {
				t.Errorf("%s: %v", name, err)
			}
			continue
		}
		page := string(writeSweep(t, func(b *bytes.Buffer) error { return r.WritePage(b) }))
		all := elements(t, page)
		checkHeadings(t, all)
		checkTables(t, all)
		if r.refused() != (r.Status() == decay.Refused) || r.refused() == strings.Contains(page, "quality factor") {
			t.Errorf("%s: refused %v", name, r.refused())
		}
		var f struct {
			Option struct {
				Series []any `json:"series"`
				Grid   []any `json:"grid"`
			} `json:"option"`
			Panels []any  `json:"panels"`
			Time   string `json:"time"`
		}
		if err := json.Unmarshal([]byte(dataOf(t, page)), &f); err != nil {
			t.Fatal(err)
		}
		want := 3
		if r.refused() {
			want = 1
		}
		if len(f.Panels) != want || !strings.HasSuffix(f.Time, "Hz") || len(f.Option.Series) == 0 {
			t.Errorf("%s: %d panels over %s, %d series", name, len(f.Panels), f.Time, len(f.Option.Series))
		}
	}
}

// A page of very many rows stays small, and says that it left some out.
func TestSweepPageSize(t *testing.T) {
	s := &capture.Sweep{File: "many.csv", Name: "<script>alert(1)</script>", Unit: "V"}
	for i := range 50000 {
		f := 100e3 + float64(i)
		x := (f - 125e3) / 1000
		s.Frequency, s.Magnitude = append(s.Frequency, f), append(s.Magnitude, 1/math.Hypot(1, x))
	}
	r := &Sweep{Table: s, Result: driven.Analyze(s, driven.Options{Across: capture.Resistor})}
	page := string(writeSweep(t, func(b *bytes.Buffer) error { return r.WritePage(b) }))
	if len(page) > 2500000 || !strings.Contains(page, "more rows than a page can hold") || strings.Contains(page, "<script>alert") {
		t.Errorf("%d bytes", len(page))
	}
}

func TestSharedSweepPages(t *testing.T) {
	for _, name := range []string{"s08.csv", "s10.csv", "s11.txt"} {
		s, err := capture.ReadSweepFile(filepath.Join("../../shared/captures", name), capture.SweepOptions{})
		if os.IsNotExist(err) {
			t.Skip(err)
		}
		if err != nil {
			t.Fatal(err)
		}
		r := &Sweep{Table: s, Result: driven.Analyze(s, driven.Options{})}
		text := string(writeSweep(t, func(b *bytes.Buffer) error { return r.WriteSummary(b, Style{}) }))
		if strings.Contains(text, "NaN") || strings.Contains(text, "unknown") || !strings.Contains(text, "quality factor") {
			t.Errorf("%s:\n%s", name, text)
		}
		writeSweep(t, func(b *bytes.Buffer) error { return r.WritePage(b) })
	}
	if err := (&Sweep{}).WriteJSON(&bytes.Buffer{}); err == nil {
		t.Error("an empty sweep was written")
	}
}
