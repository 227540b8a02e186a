package report

import (
	"bytes"
	"encoding/json"
	"encoding/xml"
	"errors"
	"io"
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
