package report

import (
	"bytes"
	"encoding/json"
	"math"
	"path/filepath"
	"strings"
	"testing"

	"dieaway/capture"
	"dieaway/decay"
)

// The page draws what the analysis found: the fitted curve of the true law runs
// through the samples.
func TestPageOfAnalysis(t *testing.T) {
	r := loop07().ringDown()
	r.curves, r.Result = nil, decay.Analyze(r.Channel, decay.Options{})
	if r.refused() {
		t.Fatalf("refused: %v", r.Result.Findings)
	}
	all := r.drawnDecays()
	if len(all) != 1 {
		t.Fatalf("%d decays are drawn", len(all))
	}
	tr := all[0].fitted(r.Channel.Axis.Time)
	law := ring{loop07(), 0}
	for i, at := range tr.t {
		want, _, _ := law.At(at)
		// Four times the noise divided by the root of a few hundred samples of weight.
		if math.Abs(tr.v[i]-want) > 0.005 {
			t.Fatalf("at %g s the curve is drawn at %g V, the truth is %g V", at, tr.v[i], want)
		}
	}
	if page := pageOf(t, r); !strings.Contains(page, r.Result.Quantities.Q.String()) {
		t.Error("the page does not give Q")
	}
}

// Real captures, read in place; the tests of the analysis judge the numbers.
func TestRealCaptures(t *testing.T) {
	files, _ := filepath.Glob("../../shared/captures/r*")
	if len(files) == 0 {
		t.Skip("no real captures beside the repository")
	}
	for _, file := range files {
		c, err := capture.ReadFile(file, capture.Options{})
		if err != nil {
			t.Errorf("%s: %v", file, err)
			continue
		}
		for _, ch := range c.Channels {
			r := &RingDown{Capture: c, Channel: ch, Result: decay.Analyze(ch, decay.Options{})}
			var b bytes.Buffer
			if err := r.WriteJSON(&b); err != nil || !json.Valid(b.Bytes()) {
				t.Errorf("%s %s: %v", file, ch.Name, err)
			}
			page := pageOf(t, r)
			if all := elements(t, page); strings.Contains(strings.Join(texts(all, "main"), " "), "NaN") {
				t.Errorf("%s %s: NaN stands on the page", file, ch.Name)
			}
			if data := dataOf(t, page); !json.Valid([]byte(data)) {
				t.Errorf("%s %s: the data of the charts is no JSON", file, ch.Name)
			}
			if s := summaryOf(t, r, Style{}); strings.Contains(s, "NaN") {
				t.Errorf("%s %s: NaN in the summary:\n%s", file, ch.Name, s)
			}
		}
	}
}
