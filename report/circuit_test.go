package report

import (
	"bytes"
	"encoding/json"
	"strings"
	"testing"

	"dieaway/decay/circuit"
)

// onBench is the invented ring-down of loop 07 with a bench file.
func onBench(t testing.TB, text string) *RingDown {
	t.Helper()
	b, err := circuit.ParseBench([]byte(text), "loop07.toml")
	if err != nil {
		t.Fatal(err)
	}
	r := loop07().ringDown()
	r.Circuit = circuit.Analyze(b, r.Result.Quantities)
	r.Limits = b.Limits.Judge(r.Result.Quantities, r.Circuit)
	return r
}

const benchText = `[circuit]
inductance = "1.62 mH +- 0.1 %"
capacitance = "1.0 nF +- 2 %"
resistor = "10 +- 0.1"
[ringdown]
source_resistance = "12 +- 0.05"
probe_resistance = "10M"
probe_capacitance = "12p +- 1p"
[limits]
natural_frequency = { min = "124k", max = "126k" }
q = { min = "39.27" }
unloaded_q = { min = "70" }
`

func TestCircuitGolden(t *testing.T) {
	r := onBench(t, benchText)
	golden(t, "circuit.json", writeJSON(t, r))
	var b bytes.Buffer
	if err := r.WriteSummary(&b, Style{}); err != nil {
		t.Fatal(err)
	}
	golden(t, "circuit.txt", b.Bytes())
	golden(t, "circuit.html", []byte(scripts.ReplaceAllString(pageOf(t, r), "$1$2")))
	all := elements(t, pageOf(t, r))
	checkHeadings(t, all)
	checkTables(t, all)
}

// A bench file that contradicts the ring-down makes it doubtful, and a refused
// one is neither inside the limits nor outside.
func TestCircuitDoubts(t *testing.T) {
	r := onBench(t, strings.Replace(benchText, `"12 +- 0.05"`, `"50"`, 1))
	if r.Status() != "doubtful" || r.Findings()[0].Code != "loading" {
		t.Errorf("%s: %v", r.Status(), r.Findings())
	}
	refused := refusedRecord()
	refused.Limits = (&circuit.Limits{Rule: circuit.Guarded, Ranges: onBenchRanges(t)}).Judge(nil, nil)
	var out struct {
		Circuit any
		Limits  struct {
			Verdict string
			Checks  []struct {
				Verdict string
				Result  struct{ Value *float64 }
			}
		}
	}
	if err := json.Unmarshal(writeJSON(t, refused), &out); err != nil {
		t.Fatal(err)
	}
	if out.Circuit != nil || out.Limits.Verdict != "undecided" || len(out.Limits.Checks) != 3 || out.Limits.Checks[0].Result.Value != nil {
		t.Errorf("%+v", out)
	}
}

func onBenchRanges(t *testing.T) []circuit.Range {
	b, err := circuit.ParseBench([]byte(benchText), "loop07.toml")
	if err != nil {
		t.Fatal(err)
	}
	return b.Limits.Ranges
}
