package report

import (
	"slices"
	"testing"

	"dieaway/capture"
)

// TestSidewaysLayout: of a table on its side the page counts columns where it counts
// lines of others.
func TestSidewaysLayout(t *testing.T) {
	r := loop07().ringDown()
	r.Capture.Layout = capture.Layout{Encoding: "UTF-8", Sideways: true, HeaderLine: 1, FirstLine: 3, Delimiter: "comma", DecimalMark: ".",
		Columns: []capture.Column{{Number: 4, Name: "Time", Unit: "us", Role: capture.RoleTime, Why: "its unit is us"}}}
	all := elements(t, pageOf(t, r))
	for tag, want := range map[string][]string{
		"dd":      {"on its side, a line for each channel", "column 1", "column 3"},
		"caption": {"The lines of the file and what they were taken for."},
		"th":      {"line", "4"},
	} {
		got := texts(all, tag)
		for _, s := range want {
			if !slices.Contains(got, s) {
				t.Errorf("no %s %q in %q", tag, s, got)
			}
		}
	}
}
