package report

import (
	"bytes"
	"strings"
	"testing"
	"unicode/utf8"
)

func summaryOf(t *testing.T, r *RingDown, style Style) string {
	t.Helper()
	var b bytes.Buffer
	if err := r.WriteSummary(&b, style); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestWriteSummary(t *testing.T) {
	for name, r := range records() {
		got := summaryOf(t, r, Style{})
		golden(t, name+".txt", []byte(got))
		for i, line := range strings.Split(got, "\n") {
			if n := utf8.RuneCountInString(line); n > 80 {
				t.Errorf("%s: line %d has %d columns: %s", name, i+1, n, line)
			}
			if strings.TrimRight(line, " ") != line {
				t.Errorf("%s: line %d ends in spaces", name, i+1)
			}
		}
	}
}

// Colour adds its codes and changes nothing else, above all no line break.
func TestSummaryColor(t *testing.T) {
	for name, r := range records() {
		colored := summaryOf(t, r, Style{Color: true})
		plainText := summaryOf(t, r, Style{})
		if colored == plainText {
			t.Errorf("%s: no colour", name)
		}
		for _, c := range []string{red, green, yellow, plain} {
			colored = strings.ReplaceAll(colored, c, "")
		}
		if colored != plainText {
			t.Errorf("%s: with colour\n%s\nwithout\n%s", name, colored, plainText)
		}
	}
}

func TestSummaryWidth(t *testing.T) {
	got := summaryOf(t, doubtful(loop07().ringDown()), Style{Width: 120})
	if !strings.Contains(got, "at the upper edge of the converter's range, 3.20 V\n    what to do") {
		t.Errorf("a message of 110 columns is broken at 120:\n%s", got)
	}
}

// hostile holds names that try to get out of where they are shown.
var hostile = []string{
	`</script><script>alert(1)</script>`, `"><img src=x onerror=alert(1)>`, `{{.SHA256}} ${1} <!--`,
	"\u202egnp.scod", "\u2066\u2067", "a\x00b\x1b[31mred\x1b[0m\r\nnext\u2028line", "\xff\xfe", strings.Repeat("x", 10000),
}

// named puts a name wherever a name from outside can stand.
func named(name string) *RingDown {
	r := doubtful(loop07().ringDown())
	r.Device, r.File, r.Channel.Name, r.Channel.Unit = name, name, name, name
	r.Result.Decays[0].Amplitude.Unit = name
	r.Origin.CommandLine, r.Origin.Version = name, name
	r.Capture.Layout.Columns[1].Name, r.Capture.Layout.Columns[1].Unit, r.Capture.Layout.Columns[1].Why = name, name, name
	r.Capture.Layout.Encoding, r.Channel.Axis.Source = name, name
	r.Result.Findings[0].Message, r.Result.Findings[0].Remedy = name, name
	return r
}

func TestSummaryHostile(t *testing.T) {
	for _, name := range hostile {
		got := summaryOf(t, named(name), Style{})
		if strings.ContainsAny(got, "\x00\x1b\r\u202e\u2066\u2067\u2028") || !utf8.ValidString(got) {
			t.Errorf("%q reaches the terminal: %q", name[:min(len(name), 40)], got)
		}
	}
}

func TestWrap(t *testing.T) {
	for _, c := range []struct {
		text                 string
		first, indent, width int
		want                 string
	}{
		{"", 3, 2, 10, ""},
		{"one two", 0, 2, 7, "one two"},
		{"one two", 0, 2, 6, "one\n  two"},
		{"one two three", 4, 2, 8, "one\n  two\n  three"},
		{"µµµ µµµ", 0, 0, 7, "µµµ µµµ"}, // runes, not bytes
		{"a longerthanthewidth b", 0, 2, 8, "a\n  longerthanthewidth\n  b"},
	} {
		if got := wrap(c.text, c.first, c.indent, c.width); got != c.want {
			t.Errorf("%q: got %q, want %q", c.text, got, c.want)
		}
	}
}
