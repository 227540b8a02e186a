package report

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"strings"
	"testing"

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
	if err := coils().WriteCSV(&out); err != nil {
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
	if strings.Contains(page, "<script>alert") || strings.Contains(page, "NaN") || strings.Contains(page, "ZgotmplZ") {
		t.Error("a file's name got into the page as it is, or a number is none")
	}
	if n := strings.Count(page, `<circle class="point`); n != 33 { // three quantities of eleven
		t.Errorf("%d points, want 33", n)
	}
	if n := strings.Count(page, `<path class="limit"`); n != 2 {
		t.Errorf("%d limits, want 2", n)
	}
	if err := (&Set{}).WritePage(&out); err == nil {
		t.Error("a page of nothing")
	}
	one := &Set{Rows: coils().Rows[11:]}
	if err := one.WritePage(&out); err != nil {
		t.Error(err)
	}
}
