package capture

import (
	"bytes"
	"compress/gzip"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
)

// flat is a line of a table that lies on its side: what stands in front, and a cell for
// each of the rows.
func flat(sep, front string, cell func(i int) string) string {
	cells := []string{front}
	if front == "" {
		cells = nil
	}
	for i := range rows {
		cells = append(cells, cell(i))
	}
	return strings.Join(cells, sep) + "\n"
}

// Tables with a line for each channel are read as those that stand are.
func TestSideways(t *testing.T) {
	fine := func(i int) string { return at(i, 4e-6, 6) }
	first := func(i int) string { return ring(1, i) }
	second := func(i int) string { return ring(2, i) }
	comma := func(f func(int) string) func(int) string {
		return func(i int) string { return strings.ReplaceAll(f(i), ".", ",") }
	}
	one, both := want{interval: 4e-6, channels: "CH1/V"}, want{interval: 4e-6, channels: "CH1/V CH2/V"}
	bare := want{interval: 4e-6, channels: "channel_1/ channel_2/", findings: "coarse-time"} // whose unit of time nothing gives
	gone := both
	gone.findings = "missing-samples"
	gone.value = func(ch, i int) float64 {
		if ch == 2 && i == 7 {
			return math.NaN()
		}
		return number(ring(ch, i))
	}
	for _, c := range []struct {
		name, text string
		opt        Options
		w          want
	}{
		{"names with units", flat(",", "Time (s)", fine) + flat(",", "CH1 (V)", first) + flat(",", "CH2 (V)", second), Options{}, both},
		{"one channel, no line end", strings.TrimSuffix(flat(",", "Time (s)", fine)+flat(",", "CH1 (V)", first), "\n"), Options{}, one},
		{"a cell for the unit", flat(";", "Time;us", func(i int) string { return at(i, 4, 0) }) + flat(";", "CH1;V", first) + flat(";", "CH2;V", second), Options{}, both},
		{"no names", flat(",", "", fine) + flat(",", "", first) + flat(",", "", second), Options{}, bare},
		{"tabs and CR LF", strings.ReplaceAll(flat("\t", "Time (us)", func(i int) string { return at(i, 4, 0) })+flat("\t", "CH1 (V)", first)+flat("\t", "CH2 (V)", second), "\n", "\r\n"), Options{}, both},
		{"CR", strings.ReplaceAll(flat("\t", "Time (us)", func(i int) string { return at(i, 4, 0) })+flat("\t", "CH1 (V)", first), "\n", "\r"), Options{}, one},
		{"runs of blanks", flat("  ", "t/s", fine) + flat("  ", "CH1/V", first), Options{}, one},
		{"decimal commas", flat(";", "Time (s)", comma(fine)) + flat(";", "CH1 (V)", comma(first)) + flat(";", "CH2 (V)", comma(second)), Options{}, both},
		{"names in quotes", flat(",", `"Time (s)"`, fine) + flat(",", `"CH1 (V)"`, first), Options{}, one},
		{"separators at the ends", strings.ReplaceAll(flat(",", "Time (s)", fine)+flat(",", "CH1 (V)", first), "\n", ",\n"), Options{}, one},
		{"blank lines", "\n" + flat(",", "Time (s)", fine) + "\n" + flat(",", "CH1 (V)", first) + "\n\n", Options{}, one},
		{"the time last", flat(",", "CH1 (V)", first) + flat(",", "CH2 (V)", second) + flat(",", "Time (s)", fine), Options{}, both},
		{"a preamble and no time", "Device,loop 07\nSample Interval,4e-06\n" + flat(",", "CH1 (V)", first) + flat(",", "CH2 (V)", second), Options{}, both},
		{"an interval that is given", flat(",", "CH1 (V)", first), Options{Interval: 4e-6}, one},
		{"a count", flat(",", "Sample", func(i int) string { return fmt.Sprint(i) }) + flat(",", "CH1 (V)", first), Options{Interval: 4e-6}, one},
		{"a sample missing", flat(",", "Time (s)", fine) + flat(",", "CH1 (V)", first) + flat(",", "CH2 (V)", func(i int) string {
			if i == 7 {
				return "over"
			}
			return ring(2, i)
		}), Options{}, gone},
	} {
		t.Run(c.name, func(t *testing.T) {
			if got := understand(t, c.text, c.opt, c.w); !got.Layout.Sideways {
				t.Error("the layout does not tell how the table lies")
			}
		})
	}
}

// What is said of a table on its side counts lines and columns as they are in the file.
func TestSidewaysPlaces(t *testing.T) {
	fine := func(i int) string { return at(i, 4, 0) }
	broken := func(of func(int) string, at int, cell string) func(i int) string {
		return func(i int) string {
			if i == at {
				return cell
			}
			return of(i)
		}
	}
	first := func(i int) string { return ring(1, i) }
	for _, c := range []struct{ text, message string }{
		{"Device,loop 07\n\n" + flat(",", "Time (us)", fine) + flat(",", "CH1 (V)", broken(first, 29, "0.x5")), `line 4, column 31: found "0.x5", expected a number`},
		{flat(",", "Time (us)", broken(fine, 40, "3")) + flat(",", "CH1 (V)", first), `column 42: time runs backwards`},
		{flat(",", "CH1 (V)", first), "no time axis: found no time column"},
	} {
		_, err := Read(strings.NewReader(c.text), "loop 07.csv", Options{})
		var e *Error
		if !errors.As(err, &e) || !strings.HasPrefix(err.Error(), "loop 07.csv: "+c.message) {
			t.Errorf("%v, want %s", err, c.message)
		}
	}
	got := understand(t, "Device,loop 07\n"+flat(",", "Time,us", fine)+flat(",", "CH1,V", first), Options{}, want{interval: 4e-6, channels: "CH1/V"})
	if ch, err := got.Channel("CH1"); err != nil || ch.Column != 2 {
		t.Errorf("channel by its name: %v, %v", ch, err)
	}
	var explained bytes.Buffer
	if err := got.Explain(&explained); err != nil {
		t.Fatal(err)
	}
	for _, line := range []string{
		"  lines      preamble to line 1, names in column 1, units in column 2, samples from column 3 on\n",
		"  separator  comma, decimal mark \".\"\n  table      on its side, a line for each channel\n",
		"  line   2   time \"Time\" in us: ", "  line   3   channel \"CH1\" in V: numbers\n",
	} {
		if !strings.Contains(explained.String(), line) {
			t.Errorf("no %q in\n%s", line, &explained)
		}
	}
}

// Deep tables on their side are read up to a size, compressed or not; tables that stand
// are left alone, however wide.
func TestSidewaysSize(t *testing.T) {
	long := func(n int, front string, cell func(i int) string) string {
		var b strings.Builder
		b.WriteString(front)
		for i := range n {
			b.WriteString("," + cell(i))
		}
		return b.String() + "\n"
	}
	deep := func(n int) string {
		return long(n, "Time (us)", func(i int) string { return at(i, 0.4, 1) }) + long(n, "CH1 (V)", func(i int) string { return ring(1, i) })
	}
	for _, n := range []int{2_000, 300_000} {
		text := []byte(deep(n))
		var packed bytes.Buffer
		z := gzip.NewWriter(&packed)
		z.Write(text)
		z.Close()
		for _, file := range [][]byte{text, packed.Bytes()} {
			c, err := Read(bytes.NewReader(file), "-", Options{})
			if err != nil {
				t.Fatal(err)
			}
			ch := c.Channels[0]
			for i, v := range ch.Samples {
				if v != number(ring(1, i)) {
					t.Fatalf("sample %d of %d is %v, want %s", i, n, v, ring(1, i))
				}
			}
			if len(ch.Samples) != n || !near(ch.Axis.Interval, 0.4e-6, 0.4e-6) || ch.Axis.Times != nil {
				t.Errorf("%d samples every %v, want %d", len(ch.Samples), ch.Axis.Interval, n)
			}
		}
	}
	if _, err := Read(strings.NewReader(deep(2_000_000)), "-", Options{}); err == nil || !strings.Contains(err.Error(), "without a line end") {
		t.Errorf("of a table beyond what is turned: %v", err)
	}
	wide := strings.Repeat("CH (V),", 200) + "CH (V)\n"
	for i := range rows {
		wide += at(i, 4e-6, 6) + strings.Repeat(","+ring(1, i), 200) + "\n"
	}
	c, err := Read(strings.NewReader(strings.Replace(wide, "CH", "Time", 1)), "-", Options{Interval: 4e-6})
	if err != nil || c.Layout.Sideways || len(c.Channels) == 0 || len(c.Channels[0].Samples) != rows {
		t.Errorf("a table of 200 channels that stands: %v", err)
	}
	if names := slices.Collect(strings.Lines(wide)); len(names) != rows+1 {
		t.Fatal("the table is another")
	}
}
