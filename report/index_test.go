package report

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/chromedp"

	"dieaway/decay/quantity"
)

// inventedHistory is n measurements of a loop antenna whose Q falls slowly, with a
// driven sweep now and then; for layout, not for measurement.
func inventedHistory(t *testing.T, device string, n int) *History {
	t.Helper()
	random := rand.New(rand.NewPCG(6, 7))
	h := NewHistory()
	least := 38.0
	for i := range n {
		made := time.Date(2026, 1, 5, 8, 0, 0, 0, time.UTC).Add(time.Duration(i) * 26 * time.Hour)
		f := &Filed{Name: made.Format("20060102T150405.000Z") + "-0123abcd", Made: made, Kind: "ringdown", Status: "good", Verdict: "pass", File: fmt.Sprintf("loop-%d.csv", i),
			NaturalFrequency: quantity.New(125034+2*random.NormFloat64(), 1.5, "Hz"), Q: quantity.New(39.2-0.6*float64(i)/float64(n)+0.05*random.NormFloat64(), 0.05, ""),
			TimeConstant: quantity.New(9.98e-5+1e-7*random.NormFloat64(), 1e-7, "s"), Limits: FiledLimits{Q: Limits{Min: &least}}}
		switch {
		case i%9 == 5:
			f.Kind, f.Verdict, f.Limits, f.TimeConstant = "sweep", "", FiledLimits{}, quantity.Unknown("s")
		case i%9 == 7:
			f.Status, f.Verdict = "refused", "undecided"
			f.NaturalFrequency, f.Q, f.TimeConstant = quantity.Unknown("Hz"), quantity.Unknown(""), quantity.Unknown("s")
		}
		if err := h.Add(device, f); err != nil {
			t.Fatal(err)
		}
	}
	return h
}

func inventedDevices(t *testing.T) *Devices {
	t.Helper()
	d := NewDevices()
	for i := range 12 {
		if err := d.Set(fmt.Sprintf("loop-%02d", i), inventedHistory(t, fmt.Sprintf("loop %02d", i), 1+5*i)); err != nil {
			t.Fatal(err)
		}
	}
	hostile := `</script><img src=x onerror="document.title='bad'">` + "\u202e" + strings.Repeat("x", 300)
	if err := d.Set("hostile", inventedHistory(t, hostile, 3)); err != nil {
		t.Fatal(err)
	}
	return d
}

func indexOf(t *testing.T, write func(io.Writer) error) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := write(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// TestHistoryIsTakenOver: from the page of some measurements and the rest comes the
// page of all of them, byte for byte.
func TestHistoryIsTakenOver(t *testing.T) {
	all := inventedHistory(t, "loop 07", 40)
	some, err := ReadHistory(indexOf(t, inventedHistory(t, "loop 07", 40).WritePage))
	if err != nil || some.Len() != 40 {
		t.Fatalf("%d measurements, %v", some.Len(), err)
	}
	next := &Filed{Name: "20270101T000000.000Z-0123abcd", Made: time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC), Kind: "ringdown", Status: "good",
		NaturalFrequency: quantity.New(125e3, math.NaN(), "Hz"), Q: quantity.New(40, 0.1, ""), TimeConstant: quantity.Unknown("s")}
	for _, h := range []*History{all, some} {
		if err := h.Add("loop 07", next); err != nil {
			t.Fatal(err)
		}
		if err := h.Add("loop 07", next); err == nil {
			t.Error("one measurement twice")
		}
	}
	if !bytes.Equal(indexOf(t, all.WritePage), indexOf(t, some.WritePage)) {
		t.Error("the page depends on how its history was read")
	}
}

func TestDevicesAreTakenOver(t *testing.T) {
	d, err := ReadDevices(indexOf(t, inventedDevices(t).WritePage))
	if err != nil {
		t.Fatal(err)
	}
	want := inventedDevices(t)
	for _, x := range []*Devices{d, want} {
		for _, folder := range []string{"zz", "a", "loop-05", "loop-055"} { // last, first, there already, between
			if err := x.Set(folder, inventedHistory(t, "new", 7)); err != nil {
				t.Fatal(err)
			}
		}
	}
	if got := d.Counts(); d.Len() != 16 || got["loop-05"] != 7 || got["zz"] != 7 || got["loop-11"] != 56 || len(got) != 16 {
		t.Errorf("%d devices: %v", d.Len(), got)
	}
	if !bytes.Equal(indexOf(t, d.WritePage), indexOf(t, want.WritePage)) {
		t.Error("the page depends on how it was read")
	}
	for _, page := range []string{"", "<html>", string(indexOf(t, inventedHistory(t, "x", 2).WritePage))[:20000]} {
		if _, err := ReadDevices([]byte(page)); err == nil {
			t.Errorf("rows of a page that has none: %.40q", page)
		}
	}
}

// TestHistoryTrend: the page says that the falling Q drifts and the steady
// frequency does not, as they were made.
func TestHistoryTrend(t *testing.T) {
	rows := trendRows(inventedHistory(t, "loop 07", 100).trends())
	if len(rows) != 3 || rows[0].Class != "steady" || rows[1].Class != "drifts" || rows[2].Class != "steady" || !strings.HasPrefix(rows[1].Change, "-0.6") {
		t.Errorf("%+v", rows)
	}
}

// TestDevicesInBrowser sorts and filters the page of all devices.
func TestDevicesInBrowser(t *testing.T) {
	for _, scheme := range []string{"light", "dark"} {
		p := open(t, browser(t), inventedDevices(t), 1280, 900, scheme)
		first := `document.querySelector("table.rows tbody tr").cells[0].textContent`
		count := `document.querySelector(".filter output").value`
		if got := eval[string](p, count); got != "all 13" {
			t.Errorf("shown: %s", got)
		}
		p.do(chromedp.Click(`//button[.="entries"]`), chromedp.Click(`//button[.="entries"]`))
		if got := eval[string](p, first); got != "loop 11" {
			t.Errorf("most entries: %q", got)
		}
		if got := eval[string](p, `document.querySelector("th[aria-sort]").textContent + document.querySelector("th[aria-sort]").ariaSort`); got != "entriesdescending" {
			t.Errorf("sorted: %q", got)
		}
		p.do(chromedp.SendKeys(`input[name=words]`, "LOOP 07"))
		if got := eval[string](p, count+` + ": " + `+first); got != "1 of 13: loop 07" {
			t.Errorf("found: %q", got)
		}
		if got := eval[string](p, `document.querySelector("table.rows a").getAttribute("href")`); got != "loop-07/index.html" {
			t.Errorf("leads to %q", got)
		}
		if got := eval[string](p, "document.title"); got != "Archive of resonant circuits" {
			t.Errorf("a device's name did something: %q", got)
		}
		p.quiet()
	}
}

// TestHistoryInBrowser: charts are drawn from the rows, and the table follows sort
// and filter, with 10,000 entries as well.
func TestHistoryInBrowser(t *testing.T) {
	for _, n := range []int{1, 120, 10000} {
		p := open(t, browser(t), inventedHistory(t, "loop 07", n), 1280, 900, "light")
		drawn := eval[int](p, `echarts.getInstanceByDom(document.getElementById("chart")).getOption().series.length`)
		if drawn < 9 {
			t.Errorf("%d entries: %d series", n, drawn)
		}
		points := eval[int](p, `echarts.getInstanceByDom(document.getElementById("chart")).getModel().getSeriesByIndex(1).getData().count()`)
		if want := eval[int](p, `JSON.parse(document.getElementById("rows").textContent).filter((r) => r.k === "ringdown" && r.f).length`); points != want || points == 0 {
			t.Errorf("%d entries: %d points, want %d", n, points, want)
		}
		if ink := eval[int](p, inkOfChart); ink < 500 {
			t.Errorf("%d entries: %d pixels are drawn", n, ink)
		}
		p.do(chromedp.Evaluate[chromedp.Void](`{ const s = document.querySelector("select[name=status]"); s.value = "refused"; s.dispatchEvent(new Event("input", { bubbles: true })); }`))
		wrong := eval[int](p, `[...document.querySelectorAll("table.rows tbody tr")].filter((r) => r.cells[2].textContent !== "refused").length`)
		if wrong != 0 {
			t.Errorf("%d entries: %d rows are not refused", n, wrong)
		}
		p.quiet()
	}
}

// inkOfChart counts pixels of the chart that are not transparent.
const inkOfChart = `(() => {
  const c = document.querySelector("#chart canvas");
  const d = c.getContext("2d").getImageData(0, 0, c.width, c.height).data;
  let n = 0;
  for (let i = 3; i < d.length; i += 4) n += d[i] > 0;
  return n;
})()`

// TestIndexPagesNarrow: no sideways scroll of the page at 360 pixels.
func TestIndexPagesNarrow(t *testing.T) {
	for name, page := range map[string]interface{ WritePage(io.Writer) error }{
		"devices": inventedDevices(t), "history": inventedHistory(t, "loop 07", 60)} {
		p := open(t, browser(t), page, 360, 740, "light")
		if wide := eval[int](p, "document.documentElement.scrollWidth"); wide > 360 {
			t.Errorf("%s is %d pixels wide", name, wide)
		}
		p.quiet()
	}
}
