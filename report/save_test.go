package report

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"strconv"
	"strings"
	"testing"

	"github.com/chromedp/chromedp"
)

// caught makes the page keep what it would save instead of saving it.
const caught = `HTMLAnchorElement.prototype.click = function () { window.saved = { name: this.download, text: decodeURIComponent(this.href.split(",").slice(1).join(",")) }; }`

// TestPageSavesItsEvidence: the result and the numbers drawn come out of the page
// as they went in.
func TestPageSavesItsEvidence(t *testing.T) {
	r := loop07().ringDown()
	r.Channel.Name = "</script>, \"quoted\""
	p := open(t, browser(t), r, 1000, 800, "light")
	p.do(chromedp.Evaluate[chromedp.Void](caught), chromedp.Click(`[data-save=result]`))
	var want bytes.Buffer
	if err := r.WriteJSON(&want); err != nil {
		t.Fatal(err)
	}
	var a, b any
	if err := json.Unmarshal([]byte(eval[string](p, "saved.text")), &a); err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(want.Bytes(), &b); err != nil {
		t.Fatal(err)
	}
	if x, y := asJSON(t, a), asJSON(t, b); x != y {
		t.Errorf("the page saves %s\nand the result is %s", x, y)
	}

	p.do(chromedp.Click(`[data-do=table]`))
	table, err := csv.NewReader(strings.NewReader(eval[string](p, "saved.text"))).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if name := eval[string](p, "saved.name"); name != "free-decay.csv" {
		t.Errorf("saved as %s", name)
	}
	samples, charts := 0, map[string]bool{}
	for _, row := range table[1:] {
		charts[row[0]] = true
		if row[1] != keySamples.Name {
			continue
		}
		if v, err := strconv.ParseFloat(row[3], 64); err != nil || v-r.Channel.Samples[samples] > 1e-3 || v-r.Channel.Samples[samples] < -1e-3 || row[4] != "V" {
			t.Fatalf("sample %d is %v, not %g V", samples, row, r.Channel.Samples[samples])
		}
		samples++
	}
	if samples != len(r.Channel.Samples) || len(charts) < 3 || table[0][2] != "x (µs)" {
		t.Errorf("%d of %d samples, charts %v, heading %v", samples, len(r.Channel.Samples), charts, table[0])
	}
	p.quiet()
}

func asJSON(t *testing.T, v any) string {
	t.Helper()
	text, err := json.Marshal(v)
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}
