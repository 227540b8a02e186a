package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"io"
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/plan"
)

// planOf is a plan for loop 07 with a bench file, or for what is wished without one.
func planOf(t testing.TB, w plan.Wish, bench bool) Plan {
	t.Helper()
	if bench {
		b, err := circuit.ReadBench(demo + "loop07.toml")
		if err != nil {
			t.Fatal(err)
		}
		w.Bench = b
	}
	p, err := plan.Make(w)
	if err != nil {
		t.Fatal(err)
	}
	out := Plan{Plan: p, Origin: Origin{Version: "1.0.0", CommandLine: "dieaway plan", Made: time.Date(2026, 3, 14, 9, 30, 0, 0, time.UTC)}}
	if bench {
		out.Device = w.Bench.Device
	}
	return out
}

// plans are one that is met, one that is not, and one without any setting.
func plans(t testing.TB) map[string]Plan {
	return map[string]Plan{
		"plan":         planOf(t, plan.Wish{Q: 42, Amplitude: 1, Noise: 8e-3, Bits: 8, Want: 2e-3, Memory: 10000}, true),
		"plan-unmet":   planOf(t, plan.Wish{NaturalFrequency: 125e3, Q: 40, Amplitude: 10e-3, Noise: 5e-3, Want: 1e-6, Memory: 1000}, false),
		"plan-refused": planOf(t, plan.Wish{NaturalFrequency: 125e3, Q: 4e5, Amplitude: 1, Noise: 1e-3}, false),
	}
}

func TestPlanGolden(t *testing.T) {
	for name, p := range plans(t) {
		golden(t, name+".txt", []byte(written(t, func(b *bytes.Buffer) error { return p.WriteSummary(b, Style{}) })))
		golden(t, name+".json", []byte(written(t, func(b *bytes.Buffer) error { return p.WriteJSON(b) })))
		page := written(t, func(b *bytes.Buffer) error { return p.WritePage(b) })
		golden(t, name+".html", []byte(scripts.ReplaceAllString(page, "$1$2")))
	}
}

func TestPlanPage(t *testing.T) {
	want := map[string][]string{
		"plan":         {"What to set", "What to expect", "Findings", "Charts", "What source and probe will do", "What else there is", "How it was made"},
		"plan-unmet":   {"The best that can be set", "What to expect", "Findings", "Charts", "What else there is", "How it was made"},
		"plan-refused": {"Why there is no result", "How it was made"},
	}
	for name, p := range plans(t) {
		page := written(t, func(b *bytes.Buffer) error { return p.WritePage(b) })
		all := elements(t, page)
		checkHeadings(t, all)
		checkTables(t, all)
		if heads := texts(all, "h2"); !slices.Equal(heads, want[name]) {
			t.Errorf("%s: sections %q, want %q", name, heads, want[name])
		}
		main := strings.Join(texts(all, "main"), " ")
		if strings.Contains(main, "NaN") || strings.Contains(main, "unknown") || len(page) > mostBytes {
			t.Errorf("%s: %d bytes, or a number that is none", name, len(page))
		}
		if e := p.Setting.Expected; e != nil && !strings.Contains(main, e.Q.Columns().Relative) {
			t.Errorf("%s: no %s on the page", name, e.Q.Columns().Relative)
		}
		var result struct {
			Schema string
			Status decay.Status
		}
		_, rest, _ := strings.Cut(page, `id="result">`)
		line, _, _ := strings.Cut(rest, "</script>")
		if err := json.Unmarshal([]byte(line), &result); err != nil || result.Schema != schemaPlan || result.Status != p.Status() {
			t.Errorf("%s: the page holds %.80q: %v", name, line, err)
		}
	}
}

// The charts draw what plan says: the chosen setting lies on both curves.
func TestPlanFigures(t *testing.T) {
	p := plans(t)["plan"]
	figures, err := p.figures()
	if err != nil || len(figures) != 2 {
		t.Fatalf("%d figures, %v", len(figures), err)
	}
	for i, x := range []float64{p.Setting.TimeConstants, math.Log10(p.Setting.SampleRate)} {
		curves := drawnIn(t, figures[i])
		at := curves[keyPlanChosen.Name].last()
		if math.Abs(at[0]-x) > 1e-3 || math.Abs(at[1]/(100*p.Setting.Expected.Q.Relative())-1) > 1e-3 {
			t.Errorf("figure %d: the plan is drawn at %v", i+1, at)
		}
		if !slices.ContainsFunc(curves[keyPlanSteps.Name], func(s [2]float64) bool { return math.Hypot(s[0]-at[0], s[1]-at[1]) < 1e-6 }) {
			t.Errorf("figure %d: the plan is none of the settings that scopes have", i+1)
		}
		if wanted := curves[keyPlanWanted.Name].last()[1]; wanted != 0.2 {
			t.Errorf("figure %d: wanted %g %%", i+1, wanted)
		}
	}
	unmet, err := plans(t)["plan-unmet"].figures()
	if err != nil || len(drawnIn(t, unmet[0])[keyPlanWanted.Name]) != 0 || len(unmet[0].Notes) != 1 {
		t.Errorf("what is wanted by far: %v", err)
	}
}

// Hostile names of the device do no harm.
func TestPlanHostile(t *testing.T) {
	p := plans(t)["plan"]
	for _, name := range hostile {
		p.Device = name
		page := written(t, func(b *bytes.Buffer) error { return p.WritePage(b) })
		if strings.Contains(scripts.ReplaceAllString(page, "$1$2"), "<img") || strings.Contains(page, "<script>alert") || strings.ContainsAny(page, "\x00\x1b\u202e\u2066\u2028") {
			t.Errorf("%.40q reaches the page", name)
		}
	}
}

func TestPlanDrawn(t *testing.T) {
	ctx := browser(t)
	for _, scheme := range []string{"light", "dark"} {
		p := open(t, ctx, plans(t)["plan"], 1400, 900, scheme)
		for _, id := range []string{"chart", "chart2"} {
			if ink := eval[[]float64](p, inkedIn(id)); len(ink) != 1 || ink[0] < 0.005 {
				t.Errorf("%s in the %s scheme is drawn to %v", id, scheme, ink)
			}
		}
		p.quiet()
	}
	for name, page := range plans(t) {
		p := open(t, ctx, page, 360, 800, "light")
		if n := eval[float64](p, overflow); n > 0 {
			t.Errorf("%s: %g pixels wider than the window", name, n)
		}
		p.quiet()
	}
}

// Without a writer that works the page is an error.
func TestPlanUnwritten(t *testing.T) {
	if err := plans(t)["plan"].WritePage(broken{}); !errors.Is(err, io.ErrClosedPipe) {
		t.Errorf("%v", err)
	}
}

type broken struct{}

func (broken) Write([]byte) (int, error) { return 0, io.ErrClosedPipe }
