package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"flag"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

var update = flag.Bool("update", false, "write the golden files anew")

// golden compares got with testdata/name, byte by byte.
func golden(t *testing.T, name string, got []byte) {
	t.Helper()
	file := filepath.Join("testdata", name)
	if *update {
		if err := os.WriteFile(file, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(string(want), string(got)); diff != "" {
		t.Errorf("%s (-want +got):\n%s", name, diff)
	}
}

// records are the ring-downs that the golden files show.
func records() map[string]*RingDown {
	several := loop07()
	several.samples, several.decays, several.tau = 6000, 2, 60e-6
	amplitude := loop07().ringDown()
	amplitude.Result.Model = decay.Amplitude
	amplitude.Result.Decays[0].AtStart = &decay.AtStart{
		DampedFrequency: quantity.New(124.1e3, 40, "Hz"), Q: quantity.New(31.2, 0.4, "")}
	two := loop07().ringDown()
	two.Result.Model = decay.TwoMode
	two.Result.Modes = []*decay.Quantities{two.Result.Quantities, &several.ringDown().Result.Decays[1].Quantities}
	unreadable := &RingDown{File: "loop07.csv", Device: "loop 07", Err: &capture.Error{File: "loop07.csv", Line: 17, Column: 2,
		Found: `"***"`, Expected: "a number", Err: capture.ErrSyntax}}
	return map[string]*RingDown{"good": loop07().ringDown(), "doubtful": doubtful(loop07().ringDown()), "refused": refusedRecord(),
		"several": several.ringDown(), "amplitude": amplitude, "two-mode": two, "unreadable": unreadable}
}

func writeJSON(t *testing.T, r *RingDown) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := r.WriteJSON(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func TestWriteJSON(t *testing.T) {
	for name, r := range records() {
		got := writeJSON(t, r)
		if n := bytes.Count(got, []byte("\n")); n != 1 || !bytes.HasSuffix(got, []byte("\n")) {
			t.Errorf("%s: %d line ends, want one at the end", name, n)
		}
		golden(t, name+".json", got)
	}
}

// The keys and their order are those of DESIGN.md section 6, which other programs
// depend on. circuit and limits belong to later commands.
func TestJSONKeys(t *testing.T) {
	quantities := []string{"damped_frequency_hz", "natural_frequency_hz", "time_constant_s", "decay_rate_per_s", "q",
		"damping_ratio", "log_decrement", "bandwidth_hz"}
	good := writeJSON(t, loop07().ringDown())
	for _, c := range []struct {
		path string
		want []string
	}{
		{"", []string{"schema", "status", "file", "sha256", "device", "channel", "unit", "samples", "interval_s", "start_s",
			"model", "quantities", "decays", "readings", "findings"}}, // modes: two-mode only
		{"quantities", quantities},
		{"quantities.q", []string{"value", "u"}},
		{"decays.0", []string{"from_s", "to_s", "cycles", "quantities", "noise_rms", "residual_rms", "snr_db"}},
		{"decays.0.quantities", append(append([]string{}, quantities...), "amplitude", "phase_rad", "offset")},
		{"readings", []string{"crossings", "peaks"}},
		{"readings.crossings", []string{"damped_frequency_hz"}},
		{"readings.peaks", []string{"log_decrement", "q", "time_constant_s"}},
	} {
		if diff := cmp.Diff(c.want, keysAt(t, good, c.path)); diff != "" {
			t.Errorf("keys of %q (-want +got):\n%s", c.path, diff)
		}
	}
	start := keysAt(t, writeJSON(t, records()["amplitude"]), "decays.0.at_start")
	if diff := cmp.Diff([]string{"damped_frequency_hz", "q"}, start); diff != "" {
		t.Errorf("keys of at_start (-want +got):\n%s", diff)
	}
	bad := writeJSON(t, records()["unreadable"])
	if diff := cmp.Diff([]string{"message", "line", "column"}, keysAt(t, bad, "error")); diff != "" {
		t.Errorf("keys of error (-want +got):\n%s", diff)
	}
}

// keysAt returns the keys of the object at a dotted path, in their order.
func keysAt(t *testing.T, raw []byte, path string) []string {
	t.Helper()
	for _, step := range strings.FieldsFunc(path, func(c rune) bool { return c == '.' }) {
		if step == "0" {
			var list []json.RawMessage
			if err := json.Unmarshal(raw, &list); err != nil || len(list) == 0 {
				t.Fatalf("%s: no list: %v", path, err)
			}
			raw = list[0]
			continue
		}
		var object map[string]json.RawMessage
		if err := json.Unmarshal(raw, &object); err != nil {
			t.Fatalf("%s: %v", path, err)
		}
		raw = object[step]
	}
	dec := json.NewDecoder(bytes.NewReader(raw))
	if _, err := dec.Token(); err != nil {
		t.Fatalf("%s: %v", path, err)
	}
	var keys []string
	for dec.More() {
		key, err := dec.Token()
		if err != nil {
			t.Fatal(err)
		}
		keys = append(keys, key.(string))
		var skip json.RawMessage
		if err := dec.Decode(&skip); err != nil {
			t.Fatal(err)
		}
	}
	return keys
}

// Whatever is not a number becomes null.
func TestJSONUnknown(t *testing.T) {
	r := loop07().ringDown()
	d := r.Result.Decays[0]
	d.NoiseRMS, d.SNR, d.Quantities.Q.U = math.NaN(), math.Inf(1), math.NaN()
	r.Result.Readings = decay.Readings{DampedFrequency: unknown, LogDecrement: unknown, Q: unknown, TimeConstant: unknown}
	r.Device, r.Channel.Unit = "", ""
	got := string(writeJSON(t, r))
	for _, want := range []string{`"device":null`, `"unit":null`, `"noise_rms":null`, `"snr_db":null`,
		`"u":null},"damping_ratio"`, `"peaks":{"log_decrement":{"value":null,"u":null}`} {
		if !strings.Contains(got, want) {
			t.Errorf("no %s in %s", want, got)
		}
	}
}

func TestJSONUnreadable(t *testing.T) {
	r := &RingDown{File: "-", Err: errors.New("is a directory")}
	const want = `{"schema":"dieaway.ringdown.v1","status":"unreadable","file":"-","sha256":null,"device":null,` +
		`"error":{"message":"is a directory","line":null,"column":null}}` + "\n"
	if diff := cmp.Diff(want, string(writeJSON(t, r))); diff != "" {
		t.Errorf("(-want +got):\n%s", diff)
	}
}

// A warning of the reader makes a good analysis doubtful; each finding stands once.
func TestStatusCountsTheReader(t *testing.T) {
	r := loop07().ringDown()
	f := capture.Finding{Code: capture.CoarseTime, Severity: capture.Warning, Message: "the stamps repeat"}
	r.Result.Findings = []capture.Finding{{Code: capture.ColouredNoise, Severity: capture.Note, Message: "coloured"}}
	if got := r.Status(); got != decay.Good {
		t.Errorf("a note alone makes it %s", got)
	}
	r.Capture.Findings = []capture.Finding{f, f}
	if got := r.Status(); got != decay.Doubtful {
		t.Errorf("a warning of the reader leaves it %s", got)
	}
	if got := r.Findings(); len(got) != 2 || got[0] != f {
		t.Errorf("findings %v", got)
	}
}

func TestIncomplete(t *testing.T) {
	for name, write := range map[string]func(r *RingDown) error{
		"json":    func(r *RingDown) error { return r.WriteJSON(&bytes.Buffer{}) },
		"summary": func(r *RingDown) error { return r.WriteSummary(&bytes.Buffer{}, Style{}) },
		"page":    func(r *RingDown) error { return r.WritePage(&bytes.Buffer{}) },
	} {
		if write(&RingDown{File: "a.csv"}) == nil {
			t.Errorf("%s of a ring-down without result: no error", name)
		}
	}
	if err := records()["unreadable"].WritePage(&bytes.Buffer{}); err == nil || !strings.Contains(err.Error(), "line 17, column 2") {
		t.Errorf("page of an unreadable file: %v", err)
	}
}
