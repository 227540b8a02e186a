package report

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/chromedp/chromedp"

	"dieaway/capture"
	"dieaway/decay"
)

// detailsOf are the figures behind the first.
func detailsOf(t *testing.T, r *RingDown) (first *figure, rest []*figure) {
	t.Helper()
	first = figureOf(t, r)
	more, err := r.details()
	if err != nil {
		t.Fatal(err)
	}
	first.Notes = append(first.Notes, more.notes...)
	return first, more.figures
}

// titles of all panels.
func titles(figures []*figure) (out []string) {
	for _, f := range figures {
		for _, p := range f.Panels {
			out = append(out, p.Title)
		}
	}
	return out
}

// The options of all charts, their data by its length: what is drawn, with which
// colours, axes and names.
func TestChartOptions(t *testing.T) {
	for name, r := range map[string]*RingDown{"options": measuredLoop(0.004, 0), "options-refused": refusedRecord()} {
		first, rest := detailsOf(t, r)
		var all []map[string]any
		for _, f := range append([]*figure{first}, rest...) {
			text, err := json.Marshal(f)
			if err != nil {
				t.Fatal(err)
			}
			var figure map[string]any
			if err := json.Unmarshal(text, &figure); err != nil {
				t.Fatal(err)
			}
			all = append(all, withoutData(figure))
		}
		text, err := json.MarshalIndent(all, "", " ")
		if err != nil {
			t.Fatal(err)
		}
		golden(t, name+".json", append(text, '\n'))
	}
}

// withoutData leaves of the data the names of the columns, and of numbers that hang
// on the noise nothing.
func withoutData(figure map[string]any) map[string]any {
	option := figure["option"].(map[string]any)
	for _, d := range option["dataset"].([]any) {
		source := d.(map[string]any)["source"].(map[string]any)
		for k := range source {
			source[k] = "…"
		}
	}
	for _, s := range option["series"].([]any) {
		delete(s.(map[string]any), "markArea")
	}
	for _, axis := range []string{"xAxis", "yAxis"} {
		for _, a := range option[axis].([]any) {
			delete(a.(map[string]any), "min")
			delete(a.(map[string]any), "max")
		}
	}
	delete(figure, "views")
	return figure
}

// A measured ring-down has both spectra, in units of the channel.
func TestSpectraFigures(t *testing.T) {
	r := measuredLoop(0.004, 0)
	_, rest := detailsOf(t, r)
	want := []string{"Spectrum of the residual", "Frequency along the decay", "Quality factor along the decay",
		"Frequency against amplitude", "Quality factor against amplitude", "Spectrum of the ring"}
	if got := titles(rest); !slices.Equal(got, want) {
		t.Errorf("charts %q, want %q", got, want)
	}
	residual, ring := rest[0], rest[len(rest)-1]
	if residual.Panels[0].Unit != "µV/√Hz" || residual.Time != "Hz" || !residual.Logarithmic {
		t.Errorf("residual in %s over %s", residual.Panels[0].Unit, residual.Time)
	}
	// White noise of 4 mV at 5 MHz has sqrt(2/5 MHz) 4 mV = 2.53 uV/sqrt(Hz).
	if note := residual.Notes[0]; !strings.Contains(note, "the level 2.5") || !strings.Contains(note, "µV/√Hz") {
		t.Errorf("note %q", note)
	}
	if ring.Panels[0].Unit != "µV/Hz" || ring.Time != "kHz" || len(ring.Views) != 1 {
		t.Errorf("ring in %s over %s, views %v", ring.Panels[0].Unit, ring.Time, ring.Views)
	}
	several := measuredDecays(3)
	_, rest = detailsOf(t, several)
	if got, want := rest[0].Panels[0].Title, "Spectrum of the residual, decay "+strconv.Itoa(several.Result.Best+1); got != want {
		t.Errorf("%q, want %q", got, want)
	}
}

// With all of its charts the page of a long record stays below its limit.
func TestPageSizeMeasured(t *testing.T) {
	l := loop07()
	l.samples, l.interval = 1_000_000, 500e-12
	r := l.ringDown()
	r.curves, r.Result = nil, decay.Analyze(r.Channel, decay.Options{})
	for name, r := range map[string]*RingDown{"long": r, "many": measuredDecays(mostDecays)} {
		page := pageOf(t, r)
		t.Logf("%s: %d bytes", name, len(page))
		if len(page) > mostBytes || strings.Count(page, `<figure class="charts"`) != 5 {
			t.Errorf("%s: %d bytes, %d figures", name, len(page), strings.Count(page, `<figure class="charts"`))
		}
	}
}

// Where there is no spectrum the page says why.
func TestSpectraWithheldOnPage(t *testing.T) {
	r := measuredLoop(0.004, 0)
	even := r.Channel.Axis
	times := make([]float64, even.N)
	for i := range times {
		times[i] = even.Time(i)
	}
	r.Channel.Axis = &capture.Axis{N: even.N, Start: even.Start, Interval: even.Interval, Times: times}
	r.Result = decay.Analyze(r.Channel, decay.Options{})
	first, rest := detailsOf(t, r)
	if got := titles(rest); len(got) != 4 {
		t.Errorf("charts %q", got)
	}
	notes := strings.Join(first.Notes, " ")
	for _, want := range []string{"no spectrum of the residual: the samples stand at uneven times", "no spectrum of the ring: the samples"} {
		if !strings.Contains(notes, want) {
			t.Errorf("no %q in %q", want, notes)
		}
	}
}

// The spectra are drawn, read out, zoomed and saved in a browser.
func TestSpectraInBrowser(t *testing.T) {
	r := measuredLoop(0.004, 0)
	p := open(t, browser(t), r, 1280, 900, "light")
	for _, c := range []struct {
		chart, figure, tip, file, x string
		lo, hi                      float64
	}{
		{"chart2", "2", "µV/√Hz", "residual-spectrum.csv", "x (Hz)", 1e4, 2.5e6},
		{"chart5", "5", "µV/Hz", "ring-spectrum.csv", "x (kHz)", 90, 160},
	} {
		instance := `echarts.getInstanceByDom(document.getElementById("` + c.chart + `"))`
		for _, scheme := range []string{"light", "dark"} {
			p.do(p.scheme(scheme), rest)
			if ink := eval[[]float64](p, strings.ReplaceAll(strings.ReplaceAll(inked, theChart, instance), "#chart ", "#"+c.chart+" ")); len(ink) != 1 || ink[0] < 0.005 {
				t.Errorf("%s, %s: %v of it is drawn", c.chart, scheme, ink)
			}
		}
		eval[any](p, instance+`.dispatchAction({type: "showTip", x: 500, y: 250}), null`)
		p.do(rest)
		tip := eval[string](p, `[...document.querySelectorAll("#`+c.chart+` .tip")].map((e) => e.innerText).join()`)
		if !strings.Contains(tip, c.tip) || !strings.Contains(tip, "Hz") {
			t.Errorf("%s: tooltip %q", c.chart, tip)
		}
		whole := eval[[2]float64](p, instance+`.getModel().getComponent("xAxis").axis.scale.getExtent()`)
		tools := `figure[data-figure="` + c.figure + `"] `
		p.do(chromedp.Click(chromedp.CSS(tools+`[data-do="in"]`)), rest)
		in := eval[[2]float64](p, instance+`.getModel().getComponent("xAxis").axis.scale.getExtent()`)
		if part := (in[1] - in[0]) / (whole[1] - whole[0]); math.Abs(part-0.5) > 0.01 {
			t.Errorf("%s: zooming in shows %g of it", c.chart, part)
		}
		if marks := eval[int](p, instance+`.getModel().getComponent("xAxis").axis.getViewLabels().filter((l) => { const [a, b] = `+
			instance+`.getModel().getComponent("xAxis").axis.scale.getExtent(); return l.tick.value >= a && l.tick.value <= b; }).length`); marks < 2 {
			t.Errorf("%s: %d marks along the axis after zooming in", c.chart, marks)
		}
		p.do(chromedp.Evaluate[chromedp.Void](caught), chromedp.Click(chromedp.CSS(tools+`[data-do="table"]`)))
		if name := eval[string](p, "saved.name"); name != c.file {
			t.Errorf("saved as %s", name)
		}
		table, err := csv.NewReader(strings.NewReader(eval[string](p, "saved.text"))).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		if table[0][2] != c.x || len(table) < 100 {
			t.Errorf("%s: %d lines, heading %v", c.file, len(table), table[0])
		}
		for _, row := range table[1:] {
			if f, err := strconv.ParseFloat(row[2], 64); err != nil || f < c.lo || f > c.hi {
				t.Fatalf("%s: a point at %s", c.file, row[2])
			}
		}
	}
	p.quiet()
}

// The matrix has a row and a column for each parameter, each with a letter of its own.
func TestParameterRows(t *testing.T) {
	r := measuredLoop(0.004, 0)
	rows := parameterRows(r.Result.Decays[0].Parameters)
	if len(rows) != 5 {
		t.Fatalf("%d rows", len(rows))
	}
	letters := map[string]bool{}
	for i, row := range rows {
		if len(row.Correlations) != len(rows) || row.Correlations[i] != "1" || row.Correlations[0] != rows[0].Correlations[i] {
			t.Errorf("%s: %v", row.Label, row.Correlations)
		}
	}
	for name, s := range symbols {
		letter := s.Greek + s.Letter + s.Index
		if letter == "" || letters[letter] {
			t.Errorf("%s: the letter %q", name, letter)
		}
		letters[letter] = true
	}
	// Between rate and amplitude 1/sqrt(2) for a long decay (closed form: m1/sqrt(m0 m2)).
	if c, err := strconv.ParseFloat(rows[2].Correlations[0], 64); err != nil || math.Abs(c-math.Sqrt2/2) > 0.03 {
		t.Errorf("rate and amplitude: %s", rows[2].Correlations[0])
	}
	page := pageOf(t, r)
	all := elements(t, page)
	checkTables(t, all)
	if text := strings.Join(texts(all, "table"), " "); !strings.Contains(text, "angular frequency") || !strings.Contains(text, rows[3].Correlations[1]) {
		t.Error("the matrix is not on the page")
	}
}

// Each parameter that a fit can have is named by a letter.
func TestParametersHaveLetters(t *testing.T) {
	for _, r := range []*RingDown{measuredLoop(0.004, 0), measuredLoop(0.002, 0.1)} {
		for _, row := range parameterRows(r.Result.Decays[0].Parameters) {
			if row.Letter+row.Greek == "" {
				t.Errorf("%s has no letter", row.Label)
			}
		}
	}
}
