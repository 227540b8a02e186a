package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"slices"
	"strings"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/driven"
)

// The demo's capture, sweep and bench file: simulated from the circuit's equations
// with the true values that cmd/dieaway/demo/generate*.go state.
const demo = "../cmd/dieaway/demo/"

// demoCheck compares the demo's ring-down with its sweep.
func demoCheck(t testing.TB, bench bool) *CrossCheck {
	t.Helper()
	c, err := capture.ReadFile(demo+"loop07.csv", capture.Options{})
	table, errSweep := capture.ReadSweepFile(demo+"loop07-sweep.csv", capture.SweepOptions{})
	b, errBench := circuit.ReadBench(demo + "loop07.toml")
	if err := errors.Join(err, errSweep, errBench); err != nil {
		t.Fatal(err)
	}
	ring := &RingDown{Capture: c}
	ring.Channel, ring.Result = decay.AnalyzeCapture(c, decay.Options{TimebaseU: b.RingDown.TimebaseU})
	sweep := &Sweep{Table: table, Result: driven.Analyze(table, driven.Options{TimebaseU: b.Sweep.TimebaseU})}
	if !bench {
		b = nil
	}
	return &CrossCheck{RingDown: ring, Sweep: sweep, Check: circuit.Compare(b, ring.Result, sweep.Result), Device: "loop 07",
		Origin: Origin{Version: "test", CommandLine: "dieaway crosscheck loop07.csv loop07-sweep.csv"}}
}

func written(t testing.TB, write func(b *bytes.Buffer) error) string {
	t.Helper()
	var b bytes.Buffer
	if err := write(&b); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestCrossCheckSummary(t *testing.T) {
	c := demoCheck(t, true)
	text := written(t, func(b *bytes.Buffer) error { return c.WriteSummary(b, Style{}) })
	for _, want := range []string{"agrees: ring-down and sweep agree with source and probe taken out", "\n  as measured ", "\n  unloaded ",
		"in the set-up of the ring-down", "in the set-up of the sweep", "The source resistance of 50 Ω takes 62.", "sweep as the ring-down predicts it: f_0 "} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q in:\n%s", want, text)
		}
	}
	for line := range strings.Lines(text) {
		if len([]rune(line)) > 81 {
			t.Errorf("longer than 80 columns: %s", line)
		}
	}
}

func TestCrossCheckJSON(t *testing.T) {
	c := demoCheck(t, true)
	line := written(t, func(b *bytes.Buffer) error { return c.WriteJSON(b) })
	var out struct {
		Schema, Status, Verdict, Decisive string
		RingDown                          struct{ Schema string }
		Sweep                             struct{ Schema string }
		Comparisons                       []struct {
			Quantity, Condition         string
			RingDown, Sweep, Difference struct{ Value, U *float64 }
			En                          *float64 `json:"e_n"`
			Agrees                      bool
		}
		LossBudget []struct {
			Part       string
			Resistance struct{ Value, U *float64 } `json:"resistance_ohm"`
			Share      float64
		} `json:"loss_budget"`
		Explanations []string
		Findings     []capture.Finding
	}
	if err := json.Unmarshal([]byte(line), &out); err != nil || strings.Count(line, "\n") != 1 {
		t.Fatalf("%v: %s", err, line)
	}
	if out.Schema != "dieaway.crosscheck.v1" || out.Status != "good" || out.Verdict != "agrees" || out.Decisive != "unloaded" ||
		out.RingDown.Schema != "dieaway.ringdown.v1" || out.Sweep.Schema != "dieaway.sweep.v1" || out.Explanations == nil || out.Findings == nil {
		t.Errorf("%.600s", line)
	}
	if len(out.Comparisons) != 8 || out.Comparisons[5].Quantity != "q" || out.Comparisons[5].Condition != "unloaded" || !out.Comparisons[5].Agrees ||
		out.Comparisons[5].Difference.U == nil || out.Comparisons[5].En == nil {
		t.Errorf("comparisons: %+v", out.Comparisons)
	}
	sum := 0.0
	for _, l := range out.LossBudget {
		sum += l.Share
	}
	if len(out.LossBudget) != 4 || out.LossBudget[0].Part != "source" || *out.LossBudget[0].Resistance.Value != 50 || sum < 0.999999 || sum > 1.000001 {
		t.Errorf("budget: %+v", out.LossBudget)
	}
}

// A side without a result is told with its reason, and so is one that could not be read.
func TestCrossCheckOneSided(t *testing.T) {
	c := demoCheck(t, true)
	c.RingDown.Result = refusedRecord().Result
	c.Check = circuit.Compare(nil, c.RingDown.Result, c.Sweep.Result)
	if c.Status() != decay.Refused {
		t.Errorf("status %s", c.Status())
	}
	text := written(t, func(b *bytes.Buffer) error { return c.WriteSummary(b, Style{}) })
	if !strings.Contains(text, "refused: there is nothing to compare") || !strings.Contains(text, "no-decay") || strings.Contains(text, "E_n") {
		t.Errorf("refused:\n%s", text)
	}
	page := written(t, func(b *bytes.Buffer) error { return c.WritePage(b) })
	checkHeadings(t, elements(t, page))
	line := written(t, func(b *bytes.Buffer) error { return c.WriteJSON(b) })
	if !strings.Contains(line, `"status":"refused","verdict":null`) || !strings.Contains(line, `"comparisons":[]`) {
		t.Errorf("%.400s", line)
	}
	c.Check, c.Sweep = nil, &Sweep{File: "s.csv", Err: &capture.Error{File: "s.csv", Line: 3, Err: capture.ErrNoData}}
	line = written(t, func(b *bytes.Buffer) error { return c.WriteJSON(b) })
	if !strings.Contains(line, `"status":"unreadable"`) || !strings.Contains(line, `"line":3`) {
		t.Errorf("%.400s", line)
	}
	if err := c.WritePage(&bytes.Buffer{}); !errors.Is(err, capture.ErrNoData) {
		t.Errorf("a page of an unreadable sweep: %v", err)
	}
	if text := written(t, func(b *bytes.Buffer) error { return c.WriteSummary(b, Style{}) }); !strings.HasPrefix(text, "unreadable: s.csv: line 3") {
		t.Errorf("%s", text)
	}
}

func TestCrossCheckPage(t *testing.T) {
	for _, bench := range []bool{true, false} {
		c := demoCheck(t, bench)
		page := written(t, func(b *bytes.Buffer) error { return c.WritePage(b) })
		all := elements(t, page)
		checkHeadings(t, all)
		checkTables(t, all)
		heads := texts(all, "h2")
		if slices.Contains(heads, "Where the loss sits in the sweep") != bench {
			t.Errorf("bench %v: sections %q", bench, heads)
		}
		main := strings.Join(texts(all, "main"), " ")
		for _, k := range c.Check.Comparisons {
			if !strings.Contains(main, k.Difference.String()) {
				t.Errorf("no difference %s on the page", k.Difference)
			}
		}
		if strings.Contains(main, "NaN") || len(page) > mostBytes {
			t.Errorf("%d bytes", len(page))
		}
		figures, err := c.figures()
		if err != nil {
			t.Fatal(err)
		}
		alone, err := c.RingDown.sheet()
		if err != nil {
			t.Fatal(err)
		}
		got, want := titles(figures[1:]), titles(alone.Figures)
		if !slices.Equal(got, want) || !slices.Contains(got, "Spectrum of the residual") || !slices.Contains(got, "Spectrum of the ring") {
			t.Errorf("charts of the ring-down %q, on its own page %q", got, want)
		}
		for i, name := range []string{keyForetold.Name, keyPredicted.Name} {
			if drawn := strings.Contains(string(figures[i].Option), name); !drawn {
				t.Errorf("bench %v: nothing is %s", bench, name)
			}
		}
	}
}

// Both figures are drawn, each over its own axis, and zoom apart from each other.
func TestCrossCheckDrawn(t *testing.T) {
	p := open(t, browser(t), demoCheck(t, true), 1400, 900, "light")
	const axes = `["chart", "chart2"].map((id) => echarts.getInstanceByDom(document.getElementById(id)).getOption().xAxis[0].name)`
	if got := eval[[]string](p, axes); !slices.Equal(got, []string{"kHz", "µs"}) {
		t.Errorf("axes %q", got)
	}
	const zoom = `["chart", "chart2"].map((id) => echarts.getInstanceByDom(document.getElementById(id)).getOption().dataZoom[0].end)`
	before := eval[[]float64](p, zoom)
	eval[bool](p, `(document.querySelector('figure[data-figure="2"] [data-do="in"]').click(), true)`)
	p.do(rest)
	after := eval[[]float64](p, zoom)
	if after[0] != before[0] || after[1] == before[1] {
		t.Errorf("zoom of the second figure: %v, then %v", before, after)
	}
	p.quiet()
}
