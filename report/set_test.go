package report

import (
	"bytes"
	"cmp"
	"encoding/csv"
	"fmt"
	"slices"
	"strings"
	"testing"

	"github.com/chromedp/chromedp"

	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// coils are a set that was made up: ten alike, one far off, one refused, one that
// could not be read, with a name that tries to be more.
func coils() *Set {
	s := &Set{Heading: "coils", Limits: []circuit.Range{{Quantity: "q", Min: 14, Max: 17}}}
	for i := range 10 {
		v := float64(i%5) - 2
		s.Rows = append(s.Rows, &SetRow{File: fmt.Sprintf("loop%02d.csv", i), Status: "good", Verdict: circuit.Pass,
			NaturalFrequency: quantity.New(125e3+100*v, 10, "Hz"), Q: quantity.New(15.5+0.1*v, 0.05, ""), TimeConstant: quantity.New(40e-6+1e-7*v, 1e-7, "s")})
	}
	far := *s.Rows[0]
	far.File, far.Q = "</title><script>alert(1)</script>.csv", quantity.New(25, 0.1, "")
	return &Set{Heading: s.Heading, Limits: s.Limits, Rows: append(s.Rows, &far,
		&SetRow{File: "noise.csv", Status: "refused", NaturalFrequency: quantity.Unknown("Hz"), Q: quantity.Unknown(""), TimeConstant: quantity.Unknown("s"), Codes: []string{"no-decay"}},
		&SetRow{File: "gone.csv", Err: "open gone.csv: no such file, \"really\"", NaturalFrequency: quantity.Unknown("Hz"), Q: quantity.Unknown(""), TimeConstant: quantity.Unknown("s")})}
}

func TestSetSummary(t *testing.T) {
	var out bytes.Buffer
	if err := coils().WriteSummary(&out, Style{}); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"13 captures: 11 good, 1 refused, 1 unreadable, 11 pass", "outlier: </title>", "by its Q\n"} {
		if !strings.Contains(out.String(), want) {
			t.Errorf("no %q in\n%s", want, &out)
		}
	}
	if strings.Count(out.String(), "outlier") != 1 {
		t.Errorf("more than one outlier:\n%s", &out)
	}
}

// TestSetCSV reads the table back.
func TestSetCSV(t *testing.T) {
	var out bytes.Buffer
	err := WriteCSVHead(&out)
	for _, r := range coils().Rows {
		err = cmp.Or(err, r.WriteCSV(&out))
	}
	if err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&out).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) != 14 || rows[1][6] != "124800" || rows[1][7] != "10" || rows[12][6] != "" || rows[13][2] != "unreadable" || !strings.Contains(rows[13][17], `"really"`) {
		t.Errorf("%q", rows)
	}
}

func TestSetPage(t *testing.T) {
	var out bytes.Buffer
	if err := coils().WritePage(&out); err != nil {
		t.Fatal(err)
	}
	page := out.String()
	if strings.Contains(page, "<script>alert") || strings.Contains(scripts.ReplaceAllString(page, "$1$2"), "NaN") || strings.Contains(page, "ZgotmplZ") {
		t.Error("a file's name got into the page as it is, or a number is none")
	}
	set := coils()
	figures, err := set.figures(set.judge())
	if err != nil {
		t.Fatal(err)
	}
	want := []string{"Natural frequency", "Quality factor", "Time constant", "Distribution of the natural frequency",
		"Distribution of the quality factor", "Distribution of the time constant"}
	if got := titles(figures); !slices.Equal(got, want) {
		t.Errorf("charts %q", got)
	}
	var keys []string
	for _, k := range figures[0].Panels[1].Keys {
		keys = append(keys, k.Name)
	}
	if want := []string{setKinds[0].key.Name, setKinds[2].key.Name, "mean", "limits"}; !slices.Equal(keys, want) {
		t.Errorf("Q shows %q, want %q", keys, want)
	}
	q := set.judge()[1]
	if n := sum(set.counted(q)); n != 11 {
		t.Errorf("%g captures are counted, want 11", n)
	}
	if err := (&Set{}).WritePage(&out); err == nil {
		t.Error("a page of nothing")
	}
	one := &Set{Rows: coils().Rows[11:]}
	if err := one.WritePage(&out); err != nil {
		t.Error(err)
	}
}

func sum(x []float64) (s float64) {
	for _, v := range x {
		s += v
	}
	return s
}

// The charts of a set are drawn, name the capture that the pointer is at, and none
// is wider than a phone.
func TestSetInBrowser(t *testing.T) {
	p := open(t, browser(t), coils(), 1280, 900, "light")
	if n := eval[int](p, `document.querySelectorAll("figure.charts canvas").length`); n != 4 {
		t.Errorf("%d figures are drawn, want 4", n)
	}
	for i, share := range eval[[]float64](p, inked) {
		if share < 0.003 {
			t.Errorf("panel %d is empty: %g of it is drawn", i+1, share)
		}
	}
	eval[any](p, theChart+`.dispatchAction({type: "showTip", x: 200, y: 250}), null`)
	p.do(rest)
	if tip := eval[string](p, `document.querySelector("#chart .tip").innerText`); !strings.Contains(tip, "loop0") || !strings.Contains(tip, "± 0.02 kHz") {
		t.Errorf("tooltip %q", tip)
	}
	eval[any](p, theChart+`.dispatchAction({type: "hideTip"}), null`)
	p.do(chromedp.EmulateViewport(360, 800), rest)
	if n := eval[float64](p, overflow); n > 0 {
		t.Errorf("%g pixels wider than a window of 360: %s", n, eval[string](p, `[...document.querySelectorAll("main *")].filter((e) => e.getBoundingClientRect().right > 361).map((e) => e.outerHTML.slice(0, 120)).slice(0, 8).join("\n")`))
	}
	p.quiet()
}

// TestSetHeading: the heading is the worst that is to be said of any capture, limits
// included: numbers can be good and the device not.
func TestSetHeading(t *testing.T) {
	s := coils()
	s.Rows = s.Rows[:10]
	for _, c := range []struct {
		verdict circuit.Verdict
		want    string
	}{
		{circuit.Pass, "<strong>good</strong> <span>nothing speaks against the numbers of any; limits: pass</span>"},
		{circuit.Undecided, "<strong>undecided</strong> <span>not decided by the limits; good: nothing speaks"},
		{circuit.Fail, "<strong>fail</strong> <span>outside the limits; good: nothing speaks"},
	} {
		s.Rows[3].Verdict = c.verdict
		var page bytes.Buffer
		if err := s.WritePage(&page); err != nil {
			t.Fatal(err)
		}
		if !strings.Contains(page.String(), c.want) {
			t.Errorf("%s: no %q on the page", c.verdict, c.want)
		}
	}
}
