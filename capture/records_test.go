package capture

import (
	"fmt"
	"strings"
	"testing"
)

// Several records in one text are refused with the lines where they begin, however
// the text parts them and wherever its blocks end.
func TestSeveralRecords(t *testing.T) {
	head := "Time (us),CH1 (V)\n"
	record := func(n int) string {
		return lines(n, func(i int) string { return at(i-5, 4, 1) + "," + ring(1, i%500) })
	}
	stamps := func(n int) string {
		return lines(n, func(i int) string { return fmt.Sprintf("12:%02d:%02d.5,%s", i/60, i%60, ring(1, i%500)) })
	}
	tail := "; the time begins anew 2 times, in lines %d and %d, expected one record: cut the file before these lines"
	for _, c := range []struct{ name, text, message string }{
		{"nothing between", head + record(20) + record(20) + record(20), "line 22: time runs backwards: found -20 µs after 56 µs" + fmt.Sprintf(tail, 22, 42)},
		{"blank lines between", head + record(20) + "\n\n" + record(20) + "\n" + record(20), "line 24: time runs backwards: found -20 µs after 56 µs" + fmt.Sprintf(tail, 24, 45)},
		{"headings between", head + record(20) + "Segment 2\n" + record(20) + "Segment,3\n" + record(20), "line 23: time runs backwards: found -20 µs after 56 µs" + fmt.Sprintf(tail, 23, 44)},
		{"each with its own heading", strings.Repeat("loop 07\n"+head+record(20), 3), "line 25: time runs backwards: found -20 µs after 56 µs" + fmt.Sprintf(tail, 25, 47)},
		{"long", head + record(40000) + record(40000) + record(40000), "line 40002: time runs backwards: found -20 µs after 159.976 ms" + fmt.Sprintf(tail, 40002, 80002)},
		{"long, headings between", strings.Repeat(head+record(40000), 3), "line 40003: time runs backwards: found -20 µs after 159.976 ms" + fmt.Sprintf(tail, 40003, 80004)},
		{"many", head + strings.Repeat(record(20), 9), "line 22: time runs backwards: found -20 µs after 56 µs; the time begins anew 8 times, in lines 22, 42, 62, 82 and 4 more, expected one record: cut the file before these lines"},
		{"clock times", "Time,CH1 (V)\n" + stamps(3000) + stamps(3000), `line 3002: time runs backwards: found "12:00:00.5" after "12:49:59.5"; the time begins anew once, expected one record: cut the file before this line`},
		{"a count", "Sample Interval,4us\nSample,CH1 (V)\n" + lines(40, func(i int) string { return fmt.Sprint(10*(i%20)) + "," + ring(1, i) }),
			`line 23: time runs backwards: found "0" after "190"; the time begins anew once, expected one record: cut the file before this line`},
		{"minutes", "Time (min),CH1 (V)\n" + lines(40, func(i int) string { return at(i%20, 0.5, 1) + "," + ring(1, i) }),
			`line 22: time runs backwards: found "0.0" after "9.5"; the time begins anew once, expected one record: cut the file before this line`},
		{"a fall that is no beginning", head + record(20) + "40.0,1\n" + record(20), "line 22: time runs backwards: found 40 µs after 56 µs, expected a later time"},
		{"words between the samples", head + record(20) + "paused\n60.0,1\n" + record(20), `line 22, column 1: found "paused", expected a time as a number`},
		{"no order at all", head + lines(5000, func(i int) string { return at(i*7919%5003, 4, 1) + "," + ring(1, i%500) }), "line 4: time runs backwards: found"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := Read(strings.NewReader(c.text), "-", Options{})
			if err == nil || !strings.HasPrefix(err.Error(), "standard input: "+c.message) {
				t.Errorf("%v, want %s", err, c.message)
			}
		})
	}
}

// Clock times that fall where the blocks of a long text meet are shown as printed.
func TestClockFallsAnywhere(t *testing.T) {
	const n = 30000
	for _, at := range []int{100, 15000, n - 1, 13900, 14000, 14100} {
		text := "Time,CH1 (V)\n" + lines(n, func(i int) string {
			if i == at {
				return "11:00:00.5,1"
			}
			return fmt.Sprintf("12:%02d:%02d.%03d,%s", i/6000, i/100%60, i%100*10, ring(1, i%500))
		})
		i := at - 1
		want := fmt.Sprintf(`standard input: line %d: time runs backwards: found "11:00:00.5" after "12:%02d:%02d.%03d", expected a later time`, at+2, i/6000, i/100%60, i%100*10)
		if _, err := Read(strings.NewReader(text), "-", Options{}); err == nil || err.Error() != want {
			t.Errorf("%v, want %s", err, want)
		}
	}
}

// Words below the samples are told, and no samples are lost; in the middle they
// break the table.
func TestFooters(t *testing.T) {
	text := "Time (us),CH1 (V)\n" + lines(rows, func(i int) string { return fourth(i) + "," + ring(1, i) })
	for name, c := range map[string]struct {
		footer string
		line   int
	}{
		"none":           {"", 0},
		"a word":         {"End of data\n", rows + 2},
		"statistics":     {"\nMean,0.01\nStd Dev,0.9\n", rows + 3},
		"a table of two": {"Statistic,CH1\nmin,-2.7\nmax,1.8\n\n", rows + 2},
		"a comment":      {"# 60 samples\n", 0},
	} {
		t.Run(name, func(t *testing.T) {
			c1 := understand(t, text+c.footer, Options{}, want{interval: 4e-6, channels: "CH1/V"})
			var b strings.Builder
			c1.Explain(&b)
			told := fmt.Sprintf(", words from line %d on are not read\n", c.line)
			if c1.Layout.FooterLine != c.line || strings.Contains(b.String(), told) != (c.line > 0) {
				t.Errorf("footer in line %d, want %d\n%s", c1.Layout.FooterLine, c.line, &b)
			}
		})
	}
	long := strings.Join(good(30000), "") + "Mean,0.01,0.02\n"
	if c, err := Read(strings.NewReader(long), "-", Options{}); err != nil || c.Layout.FooterLine != 30002 {
		t.Errorf("%v", err)
	}
}
