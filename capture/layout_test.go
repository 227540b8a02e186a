package capture

import (
	"bytes"
	"compress/gzip"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"
	"unicode/utf16"
)

// All texts of this file are invented: the ring of loop 07, a tag reader's
// antenna, in the shapes that instruments and spreadsheets write.

const rows = 60

// ring is sample i of the ring of a channel, as printed.
func ring(channel, i int) string {
	t := float64(i) * 0.4
	return strconv.FormatFloat(3.3/float64(channel)*math.Exp(-t/15)*math.Cos(0.785*t+float64(channel)), 'f', 5, 64)
}

// lines joins n rows made by row.
func lines(n int, row func(i int) string) string {
	var b strings.Builder
	for i := range n {
		b.WriteString(row(i) + "\n")
	}
	return b.String()
}

// at prints the time i*interval to some places.
func at(i int, interval float64, places int) string {
	return strconv.FormatFloat(float64(i)*interval, 'f', places, 64)
}

// want is what must be understood of a text.
type want struct {
	n               int // 0: rows
	start, interval float64
	times           []float64               // nil: even
	channels        string                  // "name/unit name/unit", blanks in names as _
	value           func(ch, i int) float64 // nil: ring
	findings        string
	check           func(t *testing.T, c *Capture)
}

// scaled is the ring times a power of ten, as the nearest float64 to the print.
func scaled(exp int) func(ch, i int) float64 {
	return func(ch, i int) float64 { return number(fmt.Sprintf("%se%d", ring(ch, i), exp)) }
}

func number(s string) float64 {
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		panic(err)
	}
	return v
}

// understand reads a text and compares it with what is wanted.
func understand(t *testing.T, text string, opt Options, w want) *Capture {
	t.Helper()
	c, err := Read(strings.NewReader(text), "loop 07.csv", opt)
	if err != nil {
		t.Fatalf("%v\n%s", err, text[:min(len(text), 400)])
	}
	if w.n == 0 {
		w.n = rows
	}
	if w.value == nil {
		w.value = scaled(0)
	}
	var names, codes []string
	for k, ch := range c.Channels {
		names = append(names, strings.ReplaceAll(ch.Name, " ", "_")+"/"+ch.Unit)
		compareAxis(t, ch.Axis, w)
		if len(ch.Samples) != w.n {
			t.Fatalf("%s has %d samples, want %d", ch.Name, len(ch.Samples), w.n)
		}
		for i, v := range ch.Samples {
			if x := w.value(k+1, i); v != x && !(math.IsNaN(v) && math.IsNaN(x)) {
				t.Fatalf("%s: sample %d is %v, want %v", ch.Name, i, v, x)
			}
		}
	}
	for _, f := range c.Findings {
		codes = append(codes, string(f.Code))
	}
	slices.Sort(codes)
	if got := strings.Join(names, " "); got != w.channels {
		t.Errorf("channels %q, want %q", got, w.channels)
	}
	if got := strings.Join(codes, " "); got != w.findings {
		t.Errorf("findings %q, want %q: %v", got, w.findings, c.Findings)
	}
	if w.check != nil {
		w.check(t, c)
	}
	if t.Failed() {
		var b bytes.Buffer
		c.Explain(&b)
		t.Logf("%s\n%s", text[:min(len(text), 300)], &b)
	}
	return c
}

func compareAxis(t *testing.T, a *Axis, w want) {
	t.Helper()
	if a.N != w.n || !near(a.Start, w.start, w.interval) || !near(a.Interval, w.interval, w.interval) {
		t.Errorf("axis of %d from %v every %v, want %d from %v every %v (%s)", a.N, a.Start, a.Interval, w.n, w.start, w.interval, a.Source)
	}
	if (a.Times == nil) != (w.times == nil) || len(a.Times) != len(w.times) {
		t.Errorf("%d true times, want %d (%s)", len(a.Times), len(w.times), a.Source)
		return
	}
	for i, x := range w.times {
		if !near(a.Times[i], x, w.interval) {
			t.Fatalf("time of sample %d is %v, want %v", i, a.Times[i], x)
		}
	}
}

// near allows for the rounding of a product, not for anything that matters.
func near(a, b, interval float64) bool { return math.Abs(a-b) <= 1e-10*interval }

func TestLineEnds(t *testing.T) {
	text := "time (us),V_C (V)\n" + lines(rows, func(i int) string { return at(i, 0.4, 1) + "," + ring(1, i) })
	w := want{interval: 0.4e-6, channels: "V_C/V"}
	for name, end := range map[string]string{"LF": "\n", "CRLF": "\r\n", "CR": "\r", "CR CR LF": "\r\r\n"} {
		t.Run(name, func(t *testing.T) {
			s := strings.ReplaceAll(text, "\n", end)
			understand(t, s, Options{}, w)
			understand(t, strings.TrimRight(s, "\r\n"), Options{}, w) // no final line end
			understand(t, s+end+end, Options{}, w)
			understand(t, end+s, Options{}, w)
			understand(t, strings.ReplaceAll(s, end, " "+end), Options{}, w) // blanks at the end of every line
		})
	}
}

func TestEncodings(t *testing.T) {
	text := "temp 25 °C\ntime (µs),V_C (V)\n" + lines(rows, func(i int) string { return at(i, 0.4, 1) + "," + ring(1, i) })
	var latin, little, big, zipped []byte
	for _, r := range text {
		latin = append(latin, byte(r))
	}
	little, big = []byte{0xff, 0xfe}, []byte{0xfe, 0xff}
	for _, u := range utf16.Encode([]rune(text)) {
		little = append(little, byte(u), byte(u>>8))
		big = append(big, byte(u>>8), byte(u))
	}
	var z bytes.Buffer
	zw := gzip.NewWriter(&z)
	zw.Write([]byte(text))
	zw.Close()
	zipped = z.Bytes()
	for name, s := range map[string]string{
		"UTF-8": text, "UTF-8 with mark": "\ufeff" + text, "Latin-1": string(latin),
		"UTF-16 little-endian": string(little), "UTF-16 big-endian": string(big), "gzip": string(zipped),
	} {
		t.Run(name, func(t *testing.T) {
			c := understand(t, s, Options{}, want{interval: 0.4e-6, channels: "V_C/V"})
			if name == "gzip" {
				if !c.Layout.Compressed {
					t.Error("not said to be compressed")
				}
			} else if c.Layout.Encoding != name {
				t.Errorf("encoding %q", c.Layout.Encoding)
			}
		})
	}
}

// named asks for the line of the names.
func named(line int) func(*testing.T, *Capture) {
	return func(t *testing.T, c *Capture) {
		t.Helper()
		if c.Layout.HeaderLine != line {
			t.Errorf("names in line %d, want %d", c.Layout.HeaderLine, line)
		}
	}
}

// A preamble may be longer than what is read at first.
func TestLongPreambles(t *testing.T) {
	const n = 60000 // 1 to 3 MB
	for name, entry := range map[string]func(i int) string{
		"comments": func(i int) string { return fmt.Sprintf("# setting %d of the generator, %d", i, 7*i) },
		"entries":  func(i int) string { return fmt.Sprintf("setting %d,%d", i, 7*i) },
		"equals":   func(i int) string { return fmt.Sprintf("setting%d=%d", i, 7*i) },
		"words":    func(i int) string { return "no average, no filter" },
	} {
		t.Run(name, func(t *testing.T) {
			text := lines(n, entry) + "Vertical Units,mV\ntime (us),V_C\n" + lines(rows, func(i int) string { return at(i, 0.4, 1) + "," + ring(1, i) })
			understand(t, text, Options{}, want{interval: 0.4e-6, channels: "V_C/V", value: scaled(-3), check: named(n + 2)})
		})
	}
}

// Separators, marks and the ways to print a number.
func TestCells(t *testing.T) {
	comma := func(s string) string { return strings.ReplaceAll(s, ".", ",") }
	for _, c := range []struct {
		name string
		text string
		w    want
	}{
		{"semicolon and decimal comma", "t [ms];U [V]\n" + lines(rows, func(i int) string { return comma(at(i, 0.25, 2)) + ";" + comma(ring(1, i)) }),
			want{interval: 250e-6, channels: "U/V"}},
		{"tab and decimal comma", "t [ms]\tU [V]\n" + lines(rows, func(i int) string { return comma(at(i, 0.25, 2)) + "\t" + comma(ring(1, i)) }),
			want{interval: 250e-6, channels: "U/V"}},
		{"quoted decimal comma between commas", `"t [ms]","U [V]"` + "\n" + lines(rows, func(i int) string { return `"` + comma(at(i, 0.25, 2)) + `","` + comma(ring(1, i)) + `"` }),
			want{interval: 250e-6, channels: "U/V"}},
		{"runs of blanks", "time_us   V_C\n" + lines(rows, func(i int) string { return fmt.Sprintf("%12s   %10s  ", at(i, 0.4, 2), ring(1, i)) }),
			want{interval: 0.4e-6, channels: "V_C/"}},
		{"blanks, units apart in brackets", "Time (us)   V_C (V)\n" + lines(rows, func(i int) string { return at(i, 0.4, 2) + " " + ring(1, i) }),
			want{interval: 0.4e-6, channels: "V_C/V"}},
		{"doubled commas", "time (us),,V_C (V),,I (A)\n" + lines(rows, func(i int) string { return at(i, 0.4, 2) + ",," + ring(1, i) + ",," + ring(2, i) }),
			want{interval: 0.4e-6, channels: "V_C/V I/A"}},
		{"doubled semicolons", "t;;u\ns;;V\n" + lines(rows, func(i int) string { return comma(at(i, 0.25, 2)) + ";;" + comma(ring(1, i)) }),
			want{interval: 0.25, channels: "u/V"}},
		{"trailing separators", "time (us),V_C (V),,\n" + lines(rows, func(i int) string { return at(i, 0.4, 2) + "," + ring(1, i) + ",," }),
			want{interval: 0.4e-6, channels: "V_C/V"}},
		{"padded cells", "  time (us) ,   V_C (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("  %s  ,  %12s ", at(i, 0.4, 2), ring(1, i)) }),
			want{interval: 0.4e-6, channels: "V_C/V"}},
		{"quoted cells", `"time (us)","V_C (V)"` + "\n" + lines(rows, func(i int) string { return `"` + at(i, 0.4, 2) + `","` + ring(1, i) + `"` }),
			want{interval: 0.4e-6, channels: "V_C/V"}},
		{"thousands in quotes", "t (ns),V_C (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf(`"%d,%03d.0",%s`, 1+i*400/1000, i*400%1000, ring(1, i)) }),
			want{start: 1e-6, interval: 0.4e-6, channels: "V_C/V"}},
		{"units in the cells", "t,V_C\n" + lines(rows, func(i int) string { return at(i, 4, 3) + "us," + ring(1, i) + " mV" }),
			want{interval: 4e-6, channels: "V_C/V", value: scaled(-3)}},
		{"signs and zeros in front", "s,V\n" + lines(rows, func(i int) string {
			return fmt.Sprintf("%+015.10f,%+.5fE+00", float64(i-30)*0.4e-6, number(ring(1, i)))
		}),
			want{start: -12e-6, interval: 0.4e-6, channels: "channel_1/V"}},
		{"exponents", "second,Volt\n" + lines(rows, func(i int) string { return fmt.Sprintf("%+.3fE-06,%sE-03", float64(i)*0.4, ring(1, i)) }),
			want{interval: 0.4e-6, channels: "channel_1/V", value: scaled(-3)}},
	} {
		t.Run(c.name, func(t *testing.T) { understand(t, c.text, Options{}, c.w) })
	}
}

// Preambles, headers and units.
func TestPreambles(t *testing.T) {
	pair := func(i int) string { return at(i, 4e-6, 6) + "," + ring(1, i) }
	codes := func(ch, i int) float64 { return math.Round(number(ring(ch, i)) * 30) }
	for _, c := range []struct {
		name string
		text string
		opt  Options
		w    want
	}{
		{"blank first line", "\n" + "time (s),CH1 (V)\n" + lines(rows, pair), Options{}, want{interval: 4e-6, channels: "CH1/V"}},
		{"no header", lines(rows, pair), Options{}, want{interval: 4e-6, channels: "channel_1/", findings: "coarse-time"}},
		{"sequence with start and increment under the header",
			"X,CH1,CH2,Start,Increment,\nSequence,Volt,Volt,-0.00012,4.0e-06,\n" +
				lines(rows, func(i int) string { return fmt.Sprintf("%d,%s,%s,,,", i, ring(1, i), ring(2, i)) }),
			Options{}, want{start: -120e-6, interval: 4e-6, channels: "CH1/V CH2/V", findings: "ignored-columns"}},
		{"sequence with start and increment beside the first row",
			"X,CH1,CH2,Start,Increment\n" + lines(rows, func(i int) string {
				row := fmt.Sprintf("%d,%s,%s", i, ring(1, i), ring(2, i))
				if i == 0 {
					row += ",-1.2E-04,4.0E-06"
				}
				return row
			}), Options{}, want{start: -120e-6, interval: 4e-6, channels: "CH1/ CH2/"}},
		{"long preamble, then TIME",
			"Format,points\nSample Interval,4.0e-06\nVertical Units,V\n\nHorizontal Units,s\nNote,\"bench 3, loop 07\"\n,\nLabel,,\n\nTIME,CH2\n" + lines(rows, pair),
			Options{}, want{interval: 4e-6, channels: "CH2/V"}},
		{"metadata of two channels side by side",
			"Record Length,60,,Record Length,60\nVertical Units,V,,Vertical Units,A\nHorizontal Units,s,,Horizontal Units,s\nTIME,CH1,,TIME,CH2\n" +
				lines(rows, func(i int) string { return pair(i) + ",," + at(i, 4e-6, 6) + "," + ring(2, i) }),
			Options{}, want{interval: 4e-6, channels: "CH1/V CH2/A"}},
		{"metadata of two channels beside the samples", lines(rows, func(i int) string {
			left, right := ",", ","
			if beside := []string{"Source,AA", "Vertical Units,V", "Horizontal Units,s", "Points,60"}; i < len(beside) {
				left, right = beside[i], strings.Replace(strings.Replace(beside[i], "AA", "BB", 1), ",V", ",A", 1)
			}
			return left + ",," + pair(i) + "," + right + ",," + at(i, 4e-6, 6) + "," + ring(2, i)
		}), Options{}, want{interval: 4e-6, channels: "AA/V BB/A"}},
		{"codes and a sampling period",
			"Memory depth,60\nSampling Period,4.000us\nScale,1.00V\n" + lines(rows, func(i int) string { return fmt.Sprint(codes(1, i)) }),
			Options{}, want{interval: 4e-6, channels: "channel_1/counts", value: codes}},
		{"separators at the end of every line",
			"Memory depth,60,\nSampling Period,4.000us,\nScale,1.00V,\n" + lines(rows, func(i int) string { return fmt.Sprint(codes(1, i), ",") }),
			Options{}, want{interval: 4e-6, channels: "channel_1/counts", value: codes}},
		{"a line of words below the heading", "time (us),V_C (V)\nloop 07 on the bench,second try\n" + lines(rows, func(i int) string { return at(i, 4, 1) + "," + ring(1, i) }),
			Options{}, want{interval: 4e-6, channels: "V_C/V", check: named(1)}},
		{"a sentence below names without units", "V_S;V_C\nsampled at 250 kSa/s\n" + lines(rows, func(i int) string { return ring(1, i) + ";" + ring(2, i) }),
			Options{}, want{interval: 4e-6, channels: "V_S/ V_C/", check: named(1)}},
		{"words below names and units", "Time,V_C\nus,V\nno average,no filter\n-----,-----\n" + lines(rows, func(i int) string { return at(i, 4, 1) + "," + ring(1, i) }),
			Options{}, want{interval: 4e-6, channels: "V_C/V", check: named(1)}},
		{"an entry below the heading", "Time (us),V_C (V)\nPoints,60\n" + lines(rows, func(i int) string { return at(i, 4, 1) + "," + ring(1, i) }),
			Options{}, want{interval: 4e-6, channels: "V_C/V", check: named(1)}},
		{"a word that announces the samples", "Seconds per sample,4e-6\nVertical unit,V\nData\n" + lines(rows, func(i int) string { return ring(1, i) }),
			Options{}, want{interval: 4e-6, channels: "channel_1/V"}},
		{"a name that is the unit", "Second,Value\n" + lines(rows, pair), Options{}, want{interval: 4e-6, channels: "Value/"}},
		{"codes of two channels and a rate in a sentence",
			"loop 07, sampled at 250 kSa/s\nCH1;CH2\n" + lines(rows, func(i int) string { return fmt.Sprintf("%v;%v", codes(1, i), codes(2, i)) }),
			Options{}, want{interval: 4e-6, channels: "CH1/counts CH2/counts", value: codes}},
		{"comment preamble", "# loop 07\n# Sample rate: 250000 Hz\n# trigger level = 0.5\n#\n# time,V_C\n" + lines(rows, pair),
			Options{}, want{interval: 4e-6, channels: "V_C/"}},
		{"comment preamble, blanks", "# Sampling interval: 4 us\n# Units: mV\n# start = -20 us\n" + lines(rows, func(i int) string { return ring(1, i) + "  " + ring(2, i) }),
			Options{}, want{start: -20e-6, interval: 4e-6, channels: "channel_1/V channel_2/V", value: scaled(-3)}},
		{"trigger's sample", "Sample Interval,4.0e-06\nTrigger Point,10\nCH1\n" + lines(rows, func(i int) string { return ring(1, i) }),
			Options{}, want{start: -40e-6, interval: 4e-6, channels: "CH1/"}},
		{"interval given", "CH1 (kV),CH2 (mA)\n" + lines(rows, func(i int) string { return ring(1, i) + "," + ring(2, i) }),
			Options{Interval: 2e-9}, want{interval: 2e-9, channels: "CH1/V CH2/A",
				value: func(ch, i int) float64 { return scaled([]int{3, -3}[ch-1])(ch, i) }}},
		{"names, blank row, units, blank row", "x-axis,1,2\n\nus,V,mV\n\n" + lines(rows, func(i int) string { return at(i, 4, 1) + "," + ring(1, i) + "," + ring(2, i) }),
			Options{}, want{interval: 4e-6, channels: "1/V 2/V", value: func(ch, i int) float64 { return scaled([]int{0, -3}[ch-1])(ch, i) }}},
		{"names one column short, unit of time by the interval",
			"Saved: 2031-03-04 10:11:12\nUnits:(mV)\n,CH1,CH2\nState:,armed,armed\nFrequency:,?,125.0 kHz\nSP:,4.000 uS,4.000 uS\n\n\n" +
				lines(rows, func(i int) string { return "," + at(i, 4, 3) + "," + ring(1, i) + "," + ring(2, i) }),
			Options{}, want{interval: 4e-6, channels: "CH1/V CH2/V", value: scaled(-3)}},
		{"unit of time given", "time,V_C\n" + lines(rows, func(i int) string { return at(i, 0.4, 1) + "," + ring(1, i) }),
			Options{TimeUnit: "ns"}, want{interval: 0.4e-9, channels: "V_C/"}},
		{"unit of time given for whole numbers", lines(rows, func(i int) string { return at(i, 1, 0) + " " + ring(1, i) }),
			Options{TimeUnit: "us"}, want{interval: 1e-6, channels: "channel_1/"}},
		{"count and interval in the preamble", "Sampling rate: 2.5 MSa/s\nsample,V_C (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d,%s", i, ring(1, i)) }),
			Options{}, want{interval: 0.4e-6, channels: "V_C/V"}},
		{"a line that names the separator", "sep=;\ntime (s);CH1 (V)\n" + lines(rows, func(i int) string { return strings.Replace(pair(i), ",", ";", 1) }),
			Options{}, want{interval: 4e-6, channels: "CH1/V"}},
		{"fewer samples than declared", "Record Length,100\ntime (s),CH1 (V)\n" + lines(rows, pair), Options{},
			want{interval: 4e-6, channels: "CH1/V", findings: "missing-samples", check: has(MissingSamples, Note, "declares 100 samples, and 60 are there")}},
		{"numbers of another table above", "# Sampling interval: 4 us\n" + lines(40, func(i int) string { return ring(1, i) }) + lines(rows, func(i int) string { return ring(1, i) + ";" + ring(2, i) }),
			Options{}, want{interval: 4e-6, channels: "channel_1/ channel_2/", findings: "ignored-columns", check: has(IgnoredColumns, Note, "ines 2 to 41", "begin in line 42")}},
		{"footer", "time (s),CH1 (V)\n" + lines(rows, pair) + "\nend of record\n", Options{}, want{interval: 4e-6, channels: "CH1/V"}},
	} {
		t.Run(c.name, func(t *testing.T) { understand(t, c.text, c.opt, c.w) })
	}
}
