package report

import (
	"bytes"
	"context"
	"math"
	"strings"
	"testing"

	"github.com/chromedp/cdproto/cdp"
	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"
)

// The expressions below ask the page what a person would see.
const (
	theChart = `echarts.getInstanceByDom(document.getElementById("chart"))`
	// inked returns for each panel the share of pixels of its coordinate system
	// that differ from the one in its corner.
	inked = `(() => {
		const canvas = document.querySelector("#chart canvas"), ratio = canvas.width / canvas.clientWidth;
		const pixels = new OffscreenCanvas(canvas.width, canvas.height).getContext("2d", {willReadFrequently: true});
		pixels.drawImage(canvas, 0, 0);
		return ` + theChart + `.getModel().getComponent("grid", 0).ecModel.queryComponents({mainType: "grid"}).map((g) => {
			const r = g.coordinateSystem.getRect();
			const d = pixels.getImageData(r.x * ratio, r.y * ratio, r.width * ratio, r.height * ratio).data;
			let n = 0;
			for (let i = 4; i < d.length; i += 4) if (d[i] !== d[i - 4] || d[i + 1] !== d[i - 3] || d[i + 2] !== d[i - 2]) n++;
			return n / (d.length / 4);
		});
	})()`
	// extents returns the stretch of time that each panel shows.
	extents = theChart + `.getModel().queryComponents({mainType: "xAxis"}).map((x) => x.axis.scale.getExtent())`
	// overflow is how far the page is wider than its window.
	overflow = `document.documentElement.scrollWidth - document.documentElement.clientWidth`
)

func TestPageDraws(t *testing.T) {
	ctx := browser(t)
	deep := sizes()["long"]
	records := map[string]*RingDown{"doubtful": doubtful(loop07().ringDown()), "refused": refusedRecord(), "deep": deep.ringDown()}
	for name, r := range records {
		for _, scheme := range []string{"light", "dark"} {
			t.Run(name+" "+scheme, func(t *testing.T) {
				p := open(t, ctx, r, 1400, 900, scheme)
				panels := len(figureOf(t, r).Panels)
				ink := eval[[]float64](p, inked)
				if len(ink) != panels {
					t.Fatalf("%d panels are drawn, want %d", len(ink), panels)
				}
				for i, share := range ink {
					if share < 0.005 {
						t.Errorf("panel %d is empty: %g of it is drawn", i+1, share)
					}
				}
				paper := eval[string](p, `getComputedStyle(document.body).backgroundColor`)
				if dark := paper == "rgb(22, 25, 29)"; dark != (scheme == "dark") {
					t.Errorf("paper %s in the %s scheme", paper, scheme)
				}
				p.quiet()
			})
		}
	}
}

// A button changes the stretch of time of every chart, and the whole record comes back.
func TestPageZoom(t *testing.T) {
	p := open(t, browser(t), loop07().ringDown(), 1400, 900, "light")
	whole := eval[[][2]float64](p, extents)
	zoomed := func(click string) [][2]float64 {
		p.do(chromedp.Click(chromedp.CSS(click)), rest)
		e := eval[[][2]float64](p, extents)
		for i := range e {
			if e[i] != e[0] {
				t.Errorf("after %s panel %d shows %v, the first %v", click, i+1, e[i], e[0])
			}
		}
		return e
	}
	first := zoomed(`[data-view="1"]`)
	if span := first[0][1] - first[0][0]; span < 40 || span > 100 {
		t.Errorf("the first cycles are %v µs", first[0])
	}
	in := zoomed(`[data-do="in"]`)
	if a, b := in[0][1]-in[0][0], (first[0][1]-first[0][0])/2; math.Abs(a/b-1) > 0.01 {
		t.Errorf("zooming in shows %g µs, want %g", a, b)
	}
	if later := zoomed(`[data-do="right"]`); later[0][0] <= in[0][0] {
		t.Errorf("later is %v after %v", later[0], in[0])
	}
	if back := zoomed(`[data-do="all"]`); back[0] != whole[0] {
		t.Errorf("the whole record is %v, was %v", back[0], whole[0])
	}
	p.do(chromedp.Click(chromedp.CSS(`[data-do="select"]`)), rest)
	x, y := eval[float64](p, `document.getElementById("chart").getBoundingClientRect().left + 400`), eval[float64](p,
		`(window.scrollTo(0, document.getElementById("chart").getBoundingClientRect().top + scrollY - 50), document.getElementById("chart").getBoundingClientRect().top + 250)`)
	p.do(chromedp.MouseEvent("mousePressed", x, y, chromedp.ButtonLeft), chromedp.MouseEvent("mouseMoved", x+200, y, chromedp.ButtonLeft),
		chromedp.MouseEvent("mouseReleased", x+200, y, chromedp.ButtonLeft), rest)
	marked := eval[[][2]float64](p, extents)
	if part := (marked[0][1] - marked[0][0]) / (whole[0][1] - whole[0][0]); part < 0.1 || part > 0.25 {
		t.Errorf("marking 200 pixels shows %v of %v", marked[0], whole[0])
	}
	p.quiet()
}

// The tooltip gives time, values and units; the legend switches a series off and on.
func TestPageReadout(t *testing.T) {
	p := open(t, browser(t), loop07().ringDown(), 1400, 900, "light")
	eval[any](p, theChart+`.dispatchAction({type: "showTip", x: 300, y: 250}), null`)
	p.do(rest)
	tip := eval[string](p, `document.querySelector(".tip").innerText`)
	for _, want := range []string{"µs", "samples", "fitted curve", "V", "fitted envelope", "sample less fitted curve", "mV"} {
		if !strings.Contains(tip, want) {
			t.Errorf("the tooltip has no %q: %q", want, tip)
		}
	}
	eval[any](p, theChart+`.dispatchAction({type: "hideTip"}), null`)
	p.do(rest)
	before := eval[[]float64](p, inked)
	p.do(chromedp.Click(chromedp.CSS(`[data-series="fitted curve"]`)), rest)
	after := eval[[]float64](p, inked)
	if after[0] >= before[0]*0.97 || math.Abs(after[2]/before[2]-1) > 0.01 {
		t.Errorf("without the fitted curve the panels are drawn to %v, before to %v", after, before)
	}
	p.do(chromedp.Click(chromedp.CSS(`[data-series="fitted curve"]`)), rest)
	if again := eval[[]float64](p, inked); math.Abs(again[0]/before[0]-1) > 0.01 {
		t.Errorf("with the curve again %v, before %v", again, before)
	}
	label := eval[string](p, `document.getElementById("chart").getAttribute("aria-label")`)
	if !strings.Contains(label, "Three charts") {
		t.Errorf("aria-label %q", label)
	}
	p.quiet()
}

// The picture has headings and legends, which the page has as text, and the page
// has none of them afterwards.
func TestPagePicture(t *testing.T) {
	p := open(t, browser(t), loop07().ringDown(), 1100, 900, "light")
	got := eval[string](p, `(() => {
		let saved = "", titles = "";
		HTMLAnchorElement.prototype.click = function () { saved = this.download + " " + this.href; titles = JSON.stringify(`+theChart+`.getOption().title.map((t) => t.text)); };
		document.querySelector('[data-do="picture"]').click();
		return saved.slice(0, 60) + " " + saved.length + " " + titles;
	})()`)
	for _, want := range []string{"free-decay.png data:image/png;base64,", "loop 07, CH1 – Waveform", "fitted envelope", "two standard deviations"} {
		if !strings.Contains(got, want) {
			t.Errorf("no %q in %q", want, got)
		}
	}
	if n := eval[int](p, theChart+`.getOption().title.filter((t) => t.show).length`); n != 0 {
		t.Errorf("%d headings are left in the charts", n)
	}
	p.quiet()
}

func TestPageWidths(t *testing.T) {
	ctx := browser(t)
	several := loop07()
	several.samples, several.decays, several.tau = 6000, 3, 60e-6
	pages := map[string]*RingDown{"doubtful": doubtful(loop07().ringDown()), "refused": refusedRecord(),
		"several": several.ringDown(), "two-mode": records()["two-mode"], "long names": named(strings.Repeat("x", 10000))}
	for name, r := range pages {
		widths := []int64{360}
		if name == "doubtful" {
			widths = []int64{360, 768, 3840}
		}
		for _, width := range widths {
			p := open(t, ctx, r, width, 800, "light")
			if n := eval[float64](p, overflow); n > 0 {
				t.Errorf("%s at %d pixels: %g pixels wider than the window", name, width, n)
			}
			if w := eval[float64](p, `document.querySelector("#chart canvas").clientWidth`); w < 250 || w > float64(width) {
				t.Errorf("%s at %d pixels: the charts are %g wide", name, width, w)
			}
			p.quiet()
		}
	}
}

// On a very wide screen charts stand beside the numbers, each as wide as they are below
// each other or wider, and no table has to be scrolled sideways; below them elsewhere.
func TestPageBeside(t *testing.T) {
	const places = `["results", "charts"].map((id) => document.getElementById(id).closest("section").getBoundingClientRect()).flatMap((r) => [r.left, r.top, r.width])`
	ctx := browser(t)
	for width, beside := range map[int64]bool{1400: false, 3563: false, 3564: true, 3840: true, 5120: true} {
		p := open(t, ctx, doubtful(loop07().ringDown()), width, 2000, "light")
		at := eval[[]float64](p, places)
		left, top, wide := at[0], at[1], at[2]
		if got := at[3] >= left+wide && at[4] == top; got != beside || at[5] < wide {
			t.Errorf("at %d pixels: left, top and width of the numbers %v, of the charts %v", width, at[:3], at[3:])
		}
		if n := eval[int](p, `[...document.querySelectorAll(".scroll")].filter((e) => e.scrollWidth > e.clientWidth).length`); n > 0 {
			t.Errorf("at %d pixels: %d tables are cut", width, n)
		}
	}
}

// Turning the window or the colour scheme redraws the charts and keeps the stretch of time.
func TestPageFollows(t *testing.T) {
	p := open(t, browser(t), loop07().ringDown(), 1400, 900, "light")
	p.do(chromedp.Click(chromedp.CSS(`[data-view="1"]`)), rest)
	want := eval[[][2]float64](p, extents)
	p.do(chromedp.EmulateViewport(400, 800), p.scheme("dark"), rest)
	if got := eval[[][2]float64](p, extents); math.Abs(got[0][0]-want[0][0]) > 0.1 || math.Abs(got[0][1]-want[0][1]) > 0.1 {
		t.Errorf("shows %v, want %v", got[0], want[0])
	}
	if n := eval[float64](p, overflow); n > 0 {
		t.Errorf("%g pixels wider than the window", n)
	}
	for i, share := range eval[[]float64](p, inked) {
		if share < 0.005 {
			t.Errorf("panel %d is empty", i+1)
		}
	}
	p.quiet()
}

// Names that try to get out of their place do nothing in a browser either.
func TestPageHostileInBrowser(t *testing.T) {
	ctx := browser(t)
	short, long := strings.Join(hostile[:len(hostile)-1], ""), hostile[len(hostile)-1]
	for _, name := range []string{short, long} {
		p := open(t, ctx, named(name), 800, 600, "light")
		if n := eval[int](p, `document.querySelectorAll("img, iframe, object, script:not([type]), a").length`); n != 2 {
			t.Errorf("%.40q: %d elements that could do harm, want the two scripts of the page", name, n)
		}
		eval[any](p, theChart+`.dispatchAction({type: "showTip", x: 300, y: 250}), null`)
		p.do(chromedp.Click(chromedp.CSS(`[data-do="picture"]`)), rest)
		p.quiet()
	}
}

// Without scripts the numbers stand there, and a line says what is missing.
func TestPageWithoutScript(t *testing.T) {
	p := open(t, browser(t), doubtful(loop07().ringDown()), 800, 600, "light")
	p.do(chromedp.Func(func(ctx context.Context, t *chromedp.Target) error {
		_, err := cdp.Call(ctx, t, emulation.SetScriptExecutionDisabled, emulation.SetScriptExecutionDisabledParams{Value: true})
		return err
	}), chromedp.Navigate(p.url))
	text, err := chromedp.Run(p.ctx, chromedp.Text(chromedp.CSS("main")))
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"125.0342(11) kHz", "39.284(13)", "need a script", "1 warning"} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q", want)
		}
	}
	p.quiet()
}

// On paper every section is there, in dark ink, and the charts fit the sheet.
func TestPagePrints(t *testing.T) {
	ctx := browser(t)
	for name, size := range map[string]chromedp.PaperSize{"A4": chromedp.PaperA4, "Letter": chromedp.PaperLetter} {
		p := open(t, ctx, measuredLoop(0.004, 0), 1400, 900, "dark")
		eval[any](p, `window.printed = [],
			addEventListener("beforeprint", () => printed.push(document.querySelector("#chart canvas").clientWidth, getComputedStyle(document.documentElement).getPropertyValue("--ink").trim())), null`)
		pdf, err := chromedp.Run(p.ctx, chromedp.PrintToPDF(chromedp.PDFPaper(size), chromedp.PDFPrintBackground(), chromedp.PDFOutlineAndTagged()))
		if err != nil {
			t.Fatal(err)
		}
		for _, heading := range []string{"loop 07", "Result", "Findings", "Charts", "Waveform", "Envelope, logarithmic", "Residual",
			"Spectrum of the residual", "Quality factor along the decay", "Spectrum of the ring", "The fit in detail", "How it was made"} {
			if !bytes.Contains(pdf, []byte("("+heading+")")) {
				t.Errorf("%s: the outline of the print has no %q", name, heading)
			}
		}
		if printed := eval[[]any](p, "printed"); len(printed) != 2 || printed[0] != 680.0 || printed[1] != "#22272e" {
			t.Errorf("%s: width and ink in print are %v", name, printed)
		}
		p.do(rest)
		if w := eval[float64](p, `document.querySelector("#chart canvas").clientWidth`); w < 1000 {
			t.Errorf("%s: after printing the charts are %g wide", name, w)
		}
		p.quiet()
	}
}
