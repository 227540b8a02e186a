package capture

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"time"
)

// The shapes of this file are those of scripts, statistics programs, plotters and
// loggers.

// s is the time of sample i at 4 us a sample, in seconds.
func s(i int) string { return at(i, 4e-6, 6) }

func TestShapesOfScripts(t *testing.T) {
	pair := func(i int) string { return s(i) + " " + ring(1, i) }
	unnamed := want{channels: "channel_1/", findings: "coarse-time"}
	bare := want{channels: "channel_1/"}
	v := want{channels: "CH1/", findings: "coarse-time"}
	counted := v
	counted.findings = "coarse-time ignored-columns"
	from := func(start float64, w want) want { w.start = start; return w }
	blocks := "Decimal_Separator\t.\nX_Columns\tOne\nDate\t2031/03/04\n***End_of_Header***\t\n\t\nChannels\t2\t\nSamples\t60\t60\nDate\t2031/03/04\t2031/03/04\n" +
		"Y_Unit_Label\tVolts\tAmps\nX_Dimension\tTime\tTime\nX0\t-8.0E-5\t-8.0E-5\nDelta_X\t4.0E-6\t4.0E-6\n***End_of_Header***\t\t\t\nX_Value\tCoil\tShunt\tComment\n"
	two := want{start: -80e-6, channels: "Coil/V Shunt/A", findings: "ignored-columns"}
	readOdd(t, []odd{
		{"all digits between blanks", lines(rows, func(i int) string { return fmt.Sprintf("%.18e %.18e", number(s(i)), number(ring(1, i))) }), Options{}, unnamed},
		{"a step in a comment, no times", "# dt = 4e-6 s, fs = 250000\n" + lines(rows, func(i int) string { return ring(1, i) }), Options{}, bare},
		{"a list of lists", "[" + lines(rows-1, func(i int) string { return "[" + pair(i) + "]" }) + "[" + pair(rows-1) + "]]\n", Options{}, unnamed},
		{"a time that is the index", ",CH1\n" + lines(rows, func(i int) string { return s(i) + "," + ring(1, i) }), Options{}, v},
		{"spans of time", ",CH1\n" + lines(rows, func(i int) string { return fmt.Sprintf("0 days 00:00:00.%06d,%s", 4*i, ring(1, i)) }), Options{}, want{channels: "CH1/"}},
		{"spans of time, some before the trigger", "time,CH1\n" + lines(rows, func(i int) string {
			if i < 5 {
				return fmt.Sprintf("-1 days +23:59:59.%06d,%s", 1000000-20+4*i, ring(1, i))
			}
			return fmt.Sprintf("0 days 00:00:00.%06d,%s", 4*(i-5), ring(1, i))
		}), Options{}, want{channels: "CH1/"}},
		{"an ending zone", "time,CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("2031-03-04 12:00:00.%06d UTC,%s", 4*i, ring(1, i)) }), Options{}, want{channels: "CH1/V"}},
		{"two names above each other, a time for each", ",CH1,CH1,CH2,CH2\n,time (us),value (V),time (us),value (V)\n" + lines(rows, func(i int) string {
			return fmt.Sprintf("%d,%s,%s,%s,%s", i, fourth(i), ring(1, i), fourth(i), ring(2, i))
		}), Options{}, want{channels: "value/V value/V", findings: "ignored-columns"}},
		{"the matrix of an archive of text", "# Created by a script\n# name: ring\n# type: matrix\n# rows: 60\n# columns: 2\n" + lines(rows, func(i int) string { return " " + pair(i) }) + "\n\n", Options{}, unnamed},
		{"a scalar before it", "# name: dt\n# type: scalar\n4e-06\n\n\n# name: v\n# type: matrix\n# rows: 60\n# columns: 1\n" + lines(rows, func(i int) string { return " " + ring(1, i) }), Options{Interval: 4e-6}, bare},
		{"names of rows in quotes", `"time" "CH1"` + "\n" + lines(rows, func(i int) string { return fmt.Sprintf(`"%d" %s`, i+1, pair(i)) }), Options{}, counted},
		{"a letter behind each point", "# Curve 0 of 1, 60 points\n# Curve title: \"ring\"\n# x y type\n" + lines(rows, func(i int) string { return pair(i) + "  i" }), Options{}, want{channels: "y/", findings: "coarse-time ignored-columns"}},
		{"several blocks of a header", blocks + lines(rows, func(i int) string { return at(i-20, 4e-6, 6) + "\t" + ring(1, i) + "\t" + ring(2, i) + "\t" }), Options{}, two},
		{"the same without times", blocks + lines(rows, func(i int) string { return "\t" + ring(1, i) + "\t" + ring(2, i) + "\t" }), Options{}, two},
		{"values below their keys", "Start,Increment,Points,Unit\n-8e-5,4e-6,60,V\nCH1\n" + lines(rows, func(i int) string { return ring(1, i) }), Options{}, from(-80e-6, want{channels: "CH1/V"})},
		{"the rate of the converter beside that of the samples", "ADC clock 1 GSa/s\nSample Rate: 250 kSa/s\nCH1 (V)\n" + lines(rows, func(i int) string { return ring(1, i) }), Options{}, want{channels: "CH1/V"}},
		{"the heading on every page", lines(rows, func(i int) string {
			if i%20 == 0 {
				return "Time (us),CH1 (V)\n" + fourth(i) + "," + ring(1, i)
			}
			return fourth(i) + "," + ring(1, i)
		}), Options{}, want{channels: "CH1/V"}},
		{"the separator in the first line", "sep=;\nTime (us);CH1 (V)\n" + comma(lines(rows, func(i int) string { return fourth(i) + ";" + ring(1, i) })), Options{}, want{channels: "CH1/V"}},
	})
}

// Units in all places and spellings.
func TestUnitsBesideNames(t *testing.T) {
	pair := func(i int) string { return fourth(i) + "," + ring(1, i) }
	var cases []odd
	for _, names := range []string{"Time <us>,CH1 <mV>", "Time {us},CH1 {mV}", "Time: us,CH1: mV", "Time - us,CH1 - mV", "Time.us,CH1.mV", "Time-us,CH1-mV", "Time us,CH1 mV",
		"(us) Time,(mV) CH1", "[us]Time,[mV]CH1", "Time in microseconds,CH1 in millivolts", "Time (Microseconds),CH1 (Millivolts)", "Time (x1e-6 s),CH1 (x1e-3 V)",
		"Time (10^-6 s),CH1 (10^-3 V)", "Time (1e-6 s),CH1 (*0.001 V)", "Time (1 us),CH1 (mV)", "Time / 1 us,CH1 / mV", "us,CH1 (mV)"} {
		cases = append(cases, odd{names, names + "\n" + lines(rows, pair), Options{}, want{channels: "CH1/V", value: scaled(-3)}})
	}
	same := func(name, head, channels string) odd {
		return odd{name, head + "\n" + lines(rows, pair), Options{}, want{channels: channels}}
	}
	cases = append(cases,
		odd{"in steps of the clock", "Time (100 ns),CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprint(40*i) + "," + ring(1, i) }), Options{}, want{channels: "CH1/V"}},
		odd{"in steps that are no power of ten", "Time (25 ns),CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprint(160*i) + "," + ring(1, i) }), Options{}, want{channels: "CH1/V"}},
		same("a range is no unit", "Time (us),CH1 (10 V)", "CH1_(10_V)/"),
		same("an impedance is no factor", "Time (us),CH1 (1 Mohm)", "CH1_(1_Mohm)/"),
		same("letters that are names", "Time (us),Coil A", "Coil_A/"),
		same("volts of a logger", "Time (us),CH1 (VDC)", "CH1/V"),
	)
	readOdd(t, cases)
}

// Times as calendars have them.
func TestCalendars(t *testing.T) {
	begin := time.Date(2031, 3, 4, 11, 59, 30, 0, time.UTC)
	every := func(format string) string {
		return lines(rows, func(i int) string { return begin.Add(time.Duration(i)*time.Second).Format(format) + "," + ring(1, i) })
	}
	second := func(head, r string) want { return want{interval: 1, channels: "CH1/V", check: roles(r)} }
	count := func(unit int64) string {
		return lines(rows, func(i int) string { return fmt.Sprint(1930000000*unit+4*int64(i)) + "," + ring(1, i) })
	}
	since := func(interval float64) want {
		return want{start: 1.93e9, interval: interval, channels: "CH1/V", findings: "coarse-time", check: has(CoarseTime, Warning, "since 1970 are assumed")}
	}
	readOdd(t, []odd{
		{"hours, minutes and seconds", "Hour,Minute,Second,CH1 (V)\n" + every("15,4,5"), Options{}, second("", "time time time channel")},
		{"with a fraction", "h,m,s,CH1 (V)\n" + lines(rows, func(i int) string {
			return fmt.Sprintf("12,%d,%.2f,%s", i*4/60, math.Mod(float64(i)*4, 60), ring(1, i))
		}), Options{},
			want{interval: 4, channels: "CH1/V", check: roles("time time time channel")}},
		{"with milliseconds", "hour,min,sec,ms,CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("12,0,%d,%d,%s", i/2, i%2*500, ring(1, i)) }), Options{},
			want{interval: 0.5, channels: "CH1/V", check: roles("time time time time channel")}},
		{"with a date before them", "Date,Hour,Minute,Second,CH1 (V)\n" + every("2006-01-02,15,4,5"), Options{}, second("", "time time time time channel")},
		{"from the year on", "Year,Month,Day,Hour,Minute,Second,CH1 (V)\n" + every("2006,1,2,15,4,5"), Options{}, second("", "time time time time time time channel")},
		{"numbers for date and time", "Date,Time,CH1 (V)\n" + every("20060102,150405"), Options{}, second("", "time time channel")},
		{"the same before ten", "Date,Time,CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("20310304,%d,%s", 95930+i+i/30*4040, ring(1, i)) }), Options{}, second("", "time time channel")},
		{"no strokes", "Stamp,CH1 (V)\n" + every("20060102T150405Z"), Options{}, second("", "time channel")},
		{"a stroke for the T", "Stamp,CH1 (V)\n" + every("20060102_150405.000"), Options{}, second("", "time channel")},
		{"milliseconds since 1970", "timestamp,CH1 (V)\n" + count(1000), Options{}, since(4e-3)},
		{"microseconds since 1970", "timestamp,CH1 (V)\n" + count(1000000), Options{}, since(4e-6)},
		{"the same with a unit", "timestamp (us),CH1 (V)\n" + count(1000000), Options{}, want{start: 1.93e9, channels: "CH1/V"}},
		{"the same with the caller's", "timestamp,CH1 (V)\n" + count(1000000), Options{TimeUnit: "us"}, want{start: 1.93e9, channels: "CH1/V"}},
	})
	c, err := Read(strings.NewReader("Date,CH1 (V)\n"+lines(rows, func(i int) string { return fmt.Sprintf("%.9f,%s", 45355.5+float64(i)/86400, ring(1, i)) })), "-", Options{})
	if err != nil || math.Abs(c.Channels[0].Axis.Interval-1) > 1e-5 || math.Abs(c.Channels[0].Axis.Start-45355.5*86400) > 1e-3 {
		t.Fatalf("days of a spreadsheet: %v, %+v", err, c)
	}
	has(CoarseTime, Warning, "days are assumed")(t, c)
}

// What cannot be told apart is refused with what was found.
func TestShapesRefused(t *testing.T) {
	column := func(f func(i int) string) string { return lines(rows, f) }
	for _, c := range []struct {
		name, text string
		opt        Options
		message    string
	}{
		{"channels in rows", "Time (us),Channel,Value (V)\n" + column(func(i int) string {
			return fourth(i) + ",CH1," + ring(1, i) + "\n" + fourth(i) + ",CH2," + ring(2, i)
		}), Options{}, `line 3, column 1: no time axis: found each time in 2 rows, which column 2 "Channel" tells apart, expected one row for each time, and a column for each channel`},
		{"channels in rows, by number", "Time (us),Value (V),Channel\n" + column(func(i int) string {
			return fourth(i) + "," + ring(1, i) + ",1\n" + fourth(i) + "," + ring(2, i) + ",2\n" + fourth(i) + "," + ring(3, i) + ",3"
		}), Options{}, `line 3, column 1: no time axis: found each time in 3 rows, which column 3 "Channel" tells apart, expected one row for each time, and a column for each channel`},
		{"channels below each other", "Channel,Time (us),Value (V)\n" + column(func(i int) string { return "CH1," + fourth(i) + "," + ring(1, i) }) + column(func(i int) string { return "CH2," + fourth(i) + "," + ring(2, i) }), Options{},
			"line 62: time runs backwards: found 0 s after 236 µs; the time begins anew once, expected one record: cut the file before this line"},
		{"samples in rows below their names", strings.Repeat("CH1 (V),", 60) + "CH1 (V)\n" + strings.Repeat("0.25,", 60) + "0\n" + strings.Repeat("0.5,", 60) + "0\n", Options{Interval: 1}, "too few samples: found 2 rows of 61 cells, expected at least 6: a decay has five unknowns; samples must stand below each other"},
		{"two vectors", "# name: t\n# rows: 60\n" + column(s) + "\n# name: v\n# rows: 60\n" + column(func(i int) string { return ring(1, i) }), Options{Interval: 1}, `line 64: found "# name: v", expected a number`},
		{"an interval and a rate", "Sample Interval: 4 us\nSample Rate: 1 MSa/s\nCH1 (V)\n" + column(func(i int) string { return ring(1, i) }), Options{}, "line 2: no time axis: found a sampling interval of 1 µs beside one of 4 µs in line 1, expected one interval, or --interval"},
		{"two rates", "ADC clock 1 GSa/s\ndisplay 250 kSa/s\nCH1 (V)\n" + column(func(i int) string { return ring(1, i) }), Options{}, "line 2: no time axis: found a sampling interval of 4 µs beside one of 1 ns in line 1, expected one interval, or --interval"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := Read(strings.NewReader(c.text), "-", c.opt)
			if err == nil || err.Error() != "standard input: "+c.message {
				t.Errorf("%v, want %s", err, c.message)
			}
		})
	}
}
