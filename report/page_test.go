package report

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"regexp"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"dieaway/decay/quantity"
)

// mostBytes is the most that a page may have, at any length of the record.
const mostBytes = 2_500_000

func pageOf(t testing.TB, r *RingDown) string {
	t.Helper()
	var b bytes.Buffer
	if err := r.WritePage(&b); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// An element is what the tests need of one: its name, attributes and text.
type element struct {
	name  string
	attrs map[string]string
	text  strings.Builder
}

var scripts = regexp.MustCompile(`(?s)(<(?:script|style)[^>]*>).*?(</(?:script|style)>)`)

// elements reads the page as a tree of elements, scripts and styles emptied, and
// fails when a tag is not closed.
func elements(t *testing.T, page string) []*element {
	t.Helper()
	dec := xml.NewDecoder(strings.NewReader(scripts.ReplaceAllString(page, "$1$2")))
	dec.Strict, dec.AutoClose, dec.Entity = false, xml.HTMLAutoClose, xml.HTMLEntity
	var all, path []*element
	for {
		token, err := dec.Token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		switch x := token.(type) {
		case xml.StartElement:
			e := &element{name: x.Name.Local, attrs: map[string]string{}}
			for _, a := range x.Attr {
				e.attrs[a.Name.Local] = a.Value
			}
			all, path = append(all, e), append(path, e)
		case xml.EndElement:
			if len(path) == 0 || path[len(path)-1].name != x.Name.Local {
				t.Fatalf("</%s> closes nothing", x.Name.Local)
			}
			path = path[:len(path)-1]
		case xml.CharData:
			for _, e := range path {
				e.text.Write(x)
			}
		}
	}
	if len(path) > 0 {
		t.Fatalf("<%s> is not closed", path[len(path)-1].name)
	}
	return all
}

// texts returns the texts of all elements of a name.
func texts(all []*element, name string) (out []string) {
	for _, e := range all {
		if e.name == name {
			out = append(out, strings.Join(strings.Fields(e.text.String()), " "))
		}
	}
	return out
}

func TestPageStructure(t *testing.T) {
	for name, r := range records() {
		if r.Err != nil {
			continue
		}
		t.Run(name, func(t *testing.T) {
			all := elements(t, pageOf(t, r))
			if all[0].name != "html" || all[0].attrs["lang"] != "en" {
				t.Errorf("begins with %s, lang %q", all[0].name, all[0].attrs["lang"])
			}
			checkHeadings(t, all)
			checkTables(t, all)
			want := []string{"Result", "Findings", "Charts", "How it was made"}
			panels := 3
			if r.refused() {
				want, panels = []string{"Why there is no result", "Charts", "How it was made"}, 1
			}
			if diff := cmp.Diff(want, texts(all, "h2")); diff != "" {
				t.Errorf("sections (-want +got):\n%s", diff)
			}
			if got := len(texts(all, "h3")); got != panels+1 {
				t.Errorf("%d headings of charts and layout, want %d", got, panels+1)
			}
		})
	}
}

// The text of the pages, byte by byte; scripts and styles are files of their own.
func TestPageGolden(t *testing.T) {
	for _, name := range []string{"doubtful", "refused", "several"} {
		golden(t, name+".html", []byte(scripts.ReplaceAllString(pageOf(t, records()[name]), "$1$2")))
	}
}

func checkHeadings(t *testing.T, all []*element) {
	t.Helper()
	level := 0
	ids := map[string]bool{}
	for _, e := range all {
		if len(e.name) == 2 && e.name[0] == 'h' && e.name[1] >= '1' && e.name[1] <= '6' {
			n := int(e.name[1] - '0')
			if n > level+1 || level == 0 && n != 1 {
				t.Errorf("<h%d> %q follows level %d", n, e.text.String(), level)
			}
			level = n
		}
		if id := e.attrs["id"]; id != "" {
			if ids[id] {
				t.Errorf("id %q twice", id)
			}
			ids[id] = true
		}
	}
	for _, e := range all {
		if id := e.attrs["aria-labelledby"]; id != "" && !ids[id] {
			t.Errorf("<%s> is labelled by %q, which does not exist", e.name, id)
		}
	}
}

func checkTables(t *testing.T, all []*element) {
	t.Helper()
	if tables, captions := len(texts(all, "table")), len(texts(all, "caption")); tables != captions {
		t.Errorf("%d tables with %d captions", tables, captions)
	}
	for _, e := range all {
		if e.name == "th" && e.attrs["scope"] == "" {
			t.Errorf("header cell %q without scope", e.text.String())
		}
	}
}

// Every result stands on the page as text, with its uncertainty.
func TestPageHoldsEveryResult(t *testing.T) {
	r := doubtful(records()["amplitude"])
	page := strings.Join(texts(elements(t, pageOf(t, r)), "body"), " ")
	d := r.Result.Decays[0]
	for _, row := range append(resultRows(r.Result.Quantities), shapeRows(d)...) {
		c := row.Columns()
		short := strings.Contains(page, row.Quantity.String())
		if long := strings.Contains(page, c.Value) && strings.Contains(page, c.Expanded) && strings.Contains(page, c.Relative); !short && !long {
			t.Errorf("%s %s is missing", row.Label, row.Quantity)
		}
	}
	for _, c := range comparisons(r.Result) {
		if !strings.Contains(page, c.Reading.String()) || !strings.Contains(page, c.Difference()) {
			t.Errorf("reading %s %s is missing", c.Label, c.Reading)
		}
	}
	for _, f := range r.Findings() {
		if !strings.Contains(page, f.Message) || !strings.Contains(page, f.Remedy) || !strings.Contains(page, string(f.Code)) {
			t.Errorf("finding %s is missing", f.Code)
		}
	}
	for _, s := range []string{r.Capture.SHA256, r.Origin.Version, r.Origin.CommandLine, "2026-03-14 09:30:00 UTC", "regression over all stamps"} {
		if !strings.Contains(page, s) {
			t.Errorf("%q is missing", s)
		}
	}
}

// A refused record shows its waveform and the reason, and none of the numbers tried.
func TestRefusedPageWithholdsNumbers(t *testing.T) {
	r := refusedRecord()
	page := pageOf(t, r)
	q := r.Result.Decays[0].Quantities
	for _, x := range []quantity.Quantity{q.DampedFrequency, q.TimeConstant, q.Q} {
		if strings.Contains(page, x.String()) || strings.Contains(page, x.Columns().Value) {
			t.Errorf("%s stands on the page", x)
		}
	}
	if !strings.Contains(page, "no oscillation stands out of the noise") {
		t.Error("the reason is missing")
	}
	if f := figureOf(t, r); len(f.Panels) != 1 || len(f.Views) != 0 {
		t.Errorf("%d panels and %d views", len(f.Panels), len(f.Views))
	}
}

func figureOf(t testing.TB, r *RingDown) *figure {
	t.Helper()
	f, err := r.figure()
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func TestPageIsStable(t *testing.T) {
	first := pageOf(t, doubtful(loop07().ringDown()))
	for range 5 { // maps come in another order each time
		if again := pageOf(t, doubtful(loop07().ringDown())); again != first {
			t.Fatal("the same ring-down gives two pages")
		}
	}
}

// Nothing on the page may reach for the network: the policy forbids it, and
// nothing even asks.
func TestPageNeedsNoNetwork(t *testing.T) {
	page := pageOf(t, loop07().ringDown())
	const policy = `content="default-src 'none'; script-src 'unsafe-inline'; style-src 'unsafe-inline'; img-src data: blob:"`
	if !strings.Contains(page, policy) {
		t.Error("no policy")
	}
	for _, e := range elements(t, page) {
		for _, a := range []string{"src", "href", "srcset", "action"} {
			if v := e.attrs[a]; v != "" {
				t.Errorf("<%s %s=%q>", e.name, a, v)
			}
		}
	}
	if strings.Contains(pageCSS, "url(") || strings.Contains(pageCSS, "@import") {
		t.Error("the style sheet loads something")
	}
}

// The benign page and the one with hostile names have the same elements, and no
// text gets out of its place.
func TestPageHostile(t *testing.T) {
	names := func(all []*element) (out []string) {
		for _, e := range all {
			out = append(out, e.name)
		}
		return out
	}
	want := names(elements(t, pageOf(t, named("benign"))))
	scriptTags := regexp.MustCompile(`(?i)</?script`)
	tags := len(scriptTags.FindAllString(pageOf(t, named("benign")), -1))
	for _, name := range hostile {
		page := pageOf(t, named(name))
		if diff := cmp.Diff(want, names(elements(t, page))); diff != "" {
			t.Errorf("%.40q changes the structure (-want +got):\n%s", name, diff)
		}
		if got := len(scriptTags.FindAllString(page, -1)); got != tags {
			t.Errorf("%.40q: %d script tags, want %d", name, got, tags)
		}
		if strings.ContainsAny(page, "\x00\x1b\u202e\u2066\u2028") {
			t.Errorf("%.40q reaches the page", name)
		}
		if !json.Valid([]byte(dataOf(t, page))) {
			t.Errorf("%.40q breaks the data", name)
		}
	}
}

// dataOf returns the JSON that the charts are drawn from.
func dataOf(t *testing.T, page string) string {
	t.Helper()
	_, rest, _ := strings.Cut(page, `<script type="application/json" id="data">`)
	data, _, ok := strings.Cut(rest, "</script>")
	if !ok {
		t.Fatal("no data on the page")
	}
	return data
}

// sizes are records that could make a large page, each in its own way.
func sizes() map[string]loop {
	long := loop07()
	long.samples, long.interval, long.tau = 3_000_000, 2e-9, 1e-3
	highQ := loop07()
	highQ.samples, highQ.interval, highQ.tau = 2_000_000, 1e-6, 0.4
	many := loop07()
	many.samples, many.decays, many.tau = 500_000, 60, 200e-6
	sparse := loop07()
	sparse.samples, sparse.interval = 9_999, 3.1e-6
	last, next := loop07(), loop07()
	last.samples, next.samples = exactLimit, exactLimit+1
	short := loop07()
	short.samples, short.start = 12, 0
	return map[string]loop{"long": long, "high Q": highQ, "many decays": many, "sparse": sparse,
		"last exact": last, "first reduced": next, "short": short}
}

func TestPageSize(t *testing.T) {
	for name, l := range sizes() {
		page := pageOf(t, l.ringDown())
		t.Logf("%s: %d samples, %d bytes", name, l.samples, len(page))
		if len(page) > mostBytes {
			t.Errorf("%s: %d bytes, more than %d", name, len(page), mostBytes)
		}
	}
}

// What is missing, over range or without a spread must not break the charts.
func TestPageOddRecords(t *testing.T) {
	gaps := loop07().ringDown()
	for i := 300; i < 340; i++ {
		gaps.Channel.Samples[i] = math.NaN()
	}
	gaps.Channel.Samples[10] = math.Inf(1)
	empty := refusedRecord()
	for i := range empty.Channel.Samples {
		empty.Channel.Samples[i] = math.NaN()
	}
	flat := refusedRecord()
	for i := range flat.Channel.Samples {
		flat.Channel.Samples[i] = 0
	}
	unknowns := loop07().ringDown()
	d := unknowns.Result.Decays[0]
	d.NoiseRMS, d.SNR, d.Cycles, d.Quantities.DampedFrequency = math.NaN(), math.NaN(), math.NaN(), unknown
	d.AtStart, unknowns.Result.Readings.Line = nil, [2]float64{math.NaN(), math.NaN()}
	long := loop07()
	long.samples = 30_000
	holes := long.ringDown()
	for i := range holes.Channel.Samples {
		if i%3 != 0 || i > 20_000 {
			holes.Channel.Samples[i] = math.NaN()
		}
	}
	for name, r := range map[string]*RingDown{"gaps": gaps, "empty": empty, "flat": flat, "unknowns": unknowns, "holes": holes} {
		page := pageOf(t, r)
		if data := dataOf(t, page); !json.Valid([]byte(data)) || strings.Contains(data, "NaN") || strings.Contains(data, "Inf") {
			t.Errorf("%s: the data of the charts is no JSON", name)
		}
		if strings.Contains(strings.Join(texts(elements(t, page), "main"), " "), "NaN") {
			t.Errorf("%s: NaN stands on the page", name)
		}
	}
}

// The embedded library is the one whose origin and licence are on record.
func TestECharts(t *testing.T) {
	readme, err := os.ReadFile("echarts/README.md")
	if err != nil {
		t.Fatal(err)
	}
	sum := sha256.Sum256([]byte(echartsJS))
	if line := hex.EncodeToString(sum[:]) + "  echarts.common.min.js"; !bytes.Contains(readme, []byte(line)) {
		t.Errorf("echarts/README.md does not have %s", line)
	}
	for _, name := range []string{"LICENSE", "NOTICE", "LICENSE-d3"} {
		if _, err := os.Stat("echarts/" + name); err != nil {
			t.Error(err)
		}
	}
	if strings.Contains(strings.ToLower(echartsJS), "</script") {
		t.Error("the library ends the script element that holds it")
	}
}

func BenchmarkWritePage(b *testing.B) {
	for _, n := range []int{2_500, 1_000_000, 10_000_000} {
		l := loop07()
		l.samples, l.interval = n, 500e-6/float64(n)
		r := l.ringDown()
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			b.SetBytes(int64(8 * n))
			var size int
			for b.Loop() {
				size = len(pageOf(b, r))
			}
			b.ReportMetric(float64(size), "page-bytes")
		})
	}
}
