package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/chromedp"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// inventedComponents are those of a switch node (12 nH, 320 pF, 0.8 ohm, with a probe
// of 9 pF on it) or, with resistors, of loop 07, found from invented captures that are a
// little off; one of them was clipped.
func inventedComponents(t testing.TB, resistors bool) *Components {
	t.Helper()
	bench, unit, values, l, c0, r0 := "[ringdown]\nprobe_capacitance = \"9p +- 1p\"\nprobe_resistance = \"10M\"\n", "F", []float64{0, 220e-12, 470e-12}, 12e-9, 329e-12, 0.8
	if resistors {
		bench, unit, values, l, c0, r0 = "[ringdown]\nsource_resistance = \"50 +- 0.5\"\n", "ohm", []float64{0, 10, 33}, 1.62e-3, 1e-9, 65
	}
	b, err := circuit.ParseBench([]byte(bench+"[limits]\ninductance = { max = \"1.7 mH\" }\n"), "node.toml")
	if err != nil {
		t.Fatal(err)
	}
	c := &Components{Device: "stage 2", Origin: Origin{Version: "1.0.0", CommandLine: "dieaway components …", Made: time.Date(2026, 3, 14, 9, 30, 0, 0, time.UTC)}}
	var rows []circuit.Added
	for i, x := range values {
		added := quantity.New(x, 0.01*x, unit)
		row := circuit.Added{Capacitance: added, Resistance: quantity.Unknown("ohm")}
		all, loss := c0+x, r0
		if resistors {
			row.Capacitance, row.Resistance = quantity.Unknown("F"), added
			all, loss = c0, r0+x
		}
		off := float64(i%2) - 0.5 // in standard uncertainties
		f0, alpha := (1+2e-4*off)/(2*math.Pi*math.Sqrt(l*all)), (1-1e-3*off)*loss/(2*l)
		r := loop07().ringDown()
		r.File = []string{"as-is.csv", "first.csv", "second.csv"}[i]
		q := r.Result.Quantities
		q.NaturalFrequency, q.DecayRate = quantity.New(f0, 2e-4*f0, "Hz"), quantity.New(alpha, 1e-3*alpha, "1/s")
		q.DampedFrequency = quantity.New(math.Sqrt(f0*f0-alpha*alpha/(4*math.Pi*math.Pi)), 2e-4*f0, "Hz")
		row.Result = q
		rows, c.Added, c.RingDowns = append(rows, row), append(c.Added, added), append(c.RingDowns, r)
	}
	c.RingDowns[1].Result.Findings = []capture.Finding{{Code: capture.Clipped, Severity: capture.Warning, Message: "3 samples are cut off.", Remedy: "Use a larger range."}}
	if c.Result, err = circuit.FindComponents(b, rows); err != nil {
		t.Fatal(err)
	}
	c.Limits = b.Limits.JudgeComponents(c.Result)
	return c
}

// refusedComponents lack the result of a capture.
func refusedComponents(t testing.TB) *Components {
	c := inventedComponents(t, false)
	c.RingDowns[1] = refusedRecord()
	c.Result, c.Refusal = nil, errors.New("every capture is needed, and there is no result of first.csv")
	c.Limits = (&circuit.Limits{Rule: circuit.Guarded, Ranges: []circuit.Range{{Quantity: "inductance", Unit: "H", Min: math.NaN(), Max: 1.7e-3}}}).JudgeComponents(nil)
	return c
}

func TestComponentsGolden(t *testing.T) {
	for name, c := range map[string]*Components{"components": inventedComponents(t, false), "components-resistors": inventedComponents(t, true), "components-refused": refusedComponents(t)} {
		golden(t, name+".txt", []byte(written(t, func(b *bytes.Buffer) error { return c.WriteSummary(b, Style{}) })))
		golden(t, name+".json", []byte(written(t, func(b *bytes.Buffer) error { return c.WriteJSON(b) })))
		page := written(t, func(b *bytes.Buffer) error { return c.WritePage(b) })
		golden(t, name+".html", []byte(scripts.ReplaceAllString(page, "$1$2")))
	}
}

// Without a result all numbers are null and the reason is there; a file that could
// not be read says where, and has no page.
func TestComponentsWithout(t *testing.T) {
	c := refusedComponents(t)
	if c.Status() != decay.Refused {
		t.Errorf("status %s", c.Status())
	}
	type number struct{ Value *float64 }
	type output struct {
		Status     string
		Inductance number `json:"inductance_h"`
		Damping    any    `json:"damping_network"`
		Rows       []struct {
			F   number   `json:"natural_frequency_hz"`
			Off *float64 `json:"residual"`
		}
		Error struct {
			Message      string
			Line, Column *int
		}
	}
	read := func() (out output) {
		line := written(t, func(b *bytes.Buffer) error { return c.WriteJSON(b) })
		if err := json.Unmarshal([]byte(line), &out); err != nil {
			t.Fatal(err)
		}
		return out
	}
	if out := read(); out.Status != "refused" || out.Inductance.Value != nil || out.Damping != nil || out.Rows[0].F.Value == nil ||
		out.Rows[1].F.Value != nil || out.Rows[0].Off != nil || out.Error.Message != c.Refusal.Error() || out.Error.Line != nil {
		t.Errorf("refused: %+v", out)
	}
	c.Refusal = nil
	if err := c.WriteJSON(&bytes.Buffer{}); err == nil {
		t.Error("written without a result or a reason for none")
	}
	bad := &capture.Error{File: "second.csv", Line: 7, Column: 2, Found: `"x"`, Expected: "a number", Err: capture.ErrSyntax}
	c.RingDowns[2] = &RingDown{File: "second.csv", Err: bad}
	out := read()
	if out.Status != "unreadable" || out.Error.Line == nil || *out.Error.Line != 7 || out.Error.Column == nil || *out.Error.Column != 2 || len(out.Rows) != 3 {
		t.Errorf("unreadable: %+v", out)
	}
	if err := c.WritePage(&bytes.Buffer{}); !errors.Is(err, capture.ErrSyntax) {
		t.Errorf("a page of an unreadable capture: %v", err)
	}
	if text := written(t, func(b *bytes.Buffer) error { return c.WriteSummary(b, Style{}) }); !strings.HasPrefix(text, "unreadable: second.csv: line 7") {
		t.Errorf("%s", text)
	}
	c.RingDowns[0] = &RingDown{File: "as-is.csv", Err: errors.New("open as-is.csv: gone")}
	if err := c.Err(); err == nil || err.Error() != "open as-is.csv: gone; "+bad.Error() {
		t.Errorf("two of them: %v", err)
	}
}

func TestComponentsPage(t *testing.T) {
	for name, c := range map[string]*Components{"capacitors": inventedComponents(t, false), "resistors": inventedComponents(t, true), "refused": refusedComponents(t)} {
		page := written(t, func(b *bytes.Buffer) error { return c.WritePage(b) })
		all := elements(t, page)
		checkHeadings(t, all)
		checkTables(t, all)
		want := []string{"Result", "Findings", "Limits", "Charts", "Captures", "How it was made"}
		if c.Result == nil {
			want = []string{"Why there is no result", "Limits", "Captures", "How it was made"}
		}
		if heads := texts(all, "h2"); !slices.Equal(heads, want) {
			t.Errorf("%s: sections %q, want %q", name, heads, want)
		}
		if strings.Contains(strings.Join(texts(all, "main"), " "), "NaN") || len(page) > mostBytes {
			t.Errorf("%s: %d bytes, or a number that is none", name, len(page))
		}
		if c.Result == nil {
			continue
		}
		main := strings.Join(texts(all, "main"), " ")
		for _, q := range []quantity.Quantity{c.Result.Inductance, c.Result.Capacitance, c.Result.Resistance, c.Result.Rows[2].NaturalFrequency, c.Result.Rows[2].DecayRate} {
			if !strings.Contains(main, q.String()) {
				t.Errorf("%s: no %s on the page", name, q)
			}
		}
	}
}

// What the charts draw is what circuit says: the line through the points, zero where
// it meets the axis, and the residuals in their uncertainties.
func TestComponentsFigures(t *testing.T) {
	for _, resistors := range []bool{false, true} {
		c := inventedComponents(t, resistors)
		figures, err := c.figures()
		if err != nil {
			t.Fatal(err)
		}
		if len(figures) != 2 || len(figures[0].Panels) != 1 || len(figures[1].Panels) != 2 {
			t.Fatalf("%d figures", len(figures))
		}
		curves := drawnIn(t, figures[0])
		own, unit, factor := c.Result.Capacitance, "pF", 1e12
		if resistors {
			own, unit, factor = c.Result.Resistance, "Ω", 1
		}
		at := curves[keyInterceptOf[resistors].Name].last()
		if figures[0].Time != unit || math.Abs(at[0]+own.Value*factor) > 1e-3*own.Value*factor || at[1] != 0 {
			t.Errorf("the line meets zero at %v %s, want -%s", at, figures[0].Time, own)
		}
		points, line := curves[keyCaptures.Name], curves[keyStraight.Name]
		if len(points) < 3 || len(line) < linePoints/5 || line.last()[0] < points.last()[0]-1e-6 {
			t.Errorf("%d points, the line ends at %v", len(points), line.last())
		}
		off := drawnIn(t, figures[1])[keyOffRate.Name]
		for i, r := range c.Result.Rows {
			_, rate := residualsOf(&r, resistors)
			if want := rate.Value / rate.U; math.Abs(off[i][1]-want) > 1e-3 {
				t.Errorf("capture %d is drawn %g u off, want %g", i+1, off[i][1], want)
			}
		}
	}
}

// A drawing is the points of one curve.
type drawing [][2]float64

func (d drawing) last() [2]float64 { return d[len(d)-1] }

// drawnIn returns the curves of a figure by name, the last of each name.
func drawnIn(t *testing.T, f *figure) map[string]drawing {
	t.Helper()
	var option struct {
		Dataset []struct{ Source map[string][]*float64 }
		Series  []struct {
			Name         string
			DatasetIndex int
			Encode       struct{ X, Y string }
		}
	}
	if err := json.Unmarshal(f.Option, &option); err != nil {
		t.Fatal(err)
	}
	out := map[string]drawing{}
	for _, s := range option.Series {
		var d drawing
		source := option.Dataset[s.DatasetIndex].Source
		for i, x := range source[s.Encode.X] {
			if y := source[s.Encode.Y][i]; y != nil {
				d = append(d, [2]float64{*x, *y})
			}
		}
		out[s.Name] = d
	}
	return out
}

// inkedIn is what inked is, of the figure of that id.
func inkedIn(id string) string {
	return strings.NewReplacer(`"chart"`, `"`+id+`"`, `"#chart canvas"`, `"#`+id+` canvas"`).Replace(inked)
}

// Both figures are drawn in light and dark, fit a phone, and reach for nothing.
func TestComponentsDrawn(t *testing.T) {
	ctx := browser(t)
	for _, resistors := range []bool{false, true} {
		for _, scheme := range []string{"light", "dark"} {
			p := open(t, ctx, inventedComponents(t, resistors), 1400, 900, scheme)
			for _, id := range []string{"chart", "chart2"} {
				for i, share := range eval[[]float64](p, inkedIn(id)) {
					if share < 0.002 {
						t.Errorf("%s of %v in the %s scheme: panel %d is empty, %g of it is drawn", id, resistors, scheme, i+1, share)
					}
				}
			}
			p.do(chromedp.Click(chromedp.CSS(`[data-view="1"]`)), rest) // the intercept
			if ink := eval[[]float64](p, inkedIn("chart")); ink[0] < 0.002 {
				t.Errorf("the intercept of %v in the %s scheme is drawn to %v", resistors, scheme, ink)
			}
			p.quiet()
		}
	}
	p := open(t, ctx, inventedComponents(t, false), 360, 800, "light")
	if n := eval[float64](p, overflow); n > 0 {
		t.Errorf("%g pixels wider than the window", n)
	}
	p.quiet()
}
