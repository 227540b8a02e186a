package capture

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"unicode/utf16"
)

// The layouts of this file are odd, and seen: what scripts print, what
// spreadsheets save in this country or that, and what several programs on the
// way leave of a capture.

func comma(s string) string { return strings.ReplaceAll(s, ".", ",") }

// fourth is the time of sample i at 4 us a sample, in us.
func fourth(i int) string { return at(i, 4, 1) }

func bigEndian(text string) string {
	b := []byte{0xfe, 0xff}
	for _, u := range utf16.Encode([]rune(text)) {
		b = append(b, byte(u>>8), byte(u))
	}
	return string(b)
}

// odd is a text and what must be understood of it.
type odd struct {
	name, text string
	opt        Options
	w          want
}

func readOdd(t *testing.T, cases []odd) {
	t.Helper()
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			t.Helper()
			if c.w.interval == 0 {
				c.w.interval = 4e-6
			}
			understand(t, c.text, c.opt, c.w)
		})
	}
}

func TestOddRows(t *testing.T) {
	pair := func(i int) string { return fourth(i) + "," + ring(1, i) }
	ch1 := want{channels: "CH1/V"}
	milli := want{channels: "CH1/V", value: scaled(-3)}
	head := "Time (us),CH1 (V)\n"
	readOdd(t, []odd{
		{"a table of a text with marks", "| Time (us) | CH1 (V) |\n| ---: | ---: |\n" + lines(rows, func(i int) string { return "| " + fourth(i) + " | " + ring(1, i) + " |" }), Options{}, ch1},
		{"semicolons at the ends of lines", "t_us, CH1_mV\n" + lines(rows, func(i int) string { return fourth(i) + ", " + ring(1, i) + ";" }), Options{}, milli},
		{"lists in brackets", "[t_us, CH1_mV]\n" + lines(rows, func(i int) string { return "[" + fourth(i) + ", " + ring(1, i) + "]," }), Options{}, milli},
		{"pairs in brackets", "t_us CH1_mV\n" + lines(rows, func(i int) string { return "(" + fourth(i) + ", " + ring(1, i) + ")" }), Options{}, milli},
		{"formulas that keep a text", head + lines(rows, func(i int) string { return `="` + fourth(i) + `",="` + ring(1, i) + `"` }), Options{}, ch1},
		{"blank lines between all rows", head + lines(rows, func(i int) string { return pair(i) + "\n" }), Options{}, ch1},
		{"tabs among blanks", "Time (us) \t CH1 (V)\n" + lines(rows, func(i int) string { return fourth(i) + " \t " + ring(1, i) }), Options{}, ch1},
		{"a tab before every row", "\tTime (us)\tCH1 (V)\n" + lines(rows, func(i int) string { return "\t" + fourth(i) + "\t" + ring(1, i) }), Options{}, ch1},
		{"room that was never filled", head + lines(rows, pair) + strings.Repeat("\x00", 300), Options{}, ch1},
		{"another separator in the heading", "Time [us];CH1 [V]\n" + lines(rows, pair), Options{}, ch1},
		{"one column with separators at the end", "CH1 (mV)\n" + lines(rows, func(i int) string { return ring(1, i) + "," }), Options{Interval: 4e-6}, milli},
		{"own times, semicolons, commas, units, separators at the end, big-endian", bigEndian("Zeit;CH1;;Zeit;CH2;;\nus;mV;;us;mV;;\n" + lines(rows, func(i int) string {
			return comma(fourth(i) + ";" + ring(1, i) + ";;" + fourth(i) + ";" + ring(2, i) + ";;")
		})), Options{}, want{channels: "CH1/V CH2/V", value: scaled(-3)}},
		{"own times without names", lines(rows, func(i int) string { return at(i, 4e-6, 6) + "," + ring(1, i) + "," + at(i, 4e-6, 6) + "," + ring(2, i) }),
			Options{}, want{channels: "channel_1/ channel_2/", findings: "coarse-time", check: roles("time channel time channel")}},
		{"a count before the time, no names", lines(rows, func(i int) string { return fmt.Sprintf("%d,%s,%s", i+1, at(i, 4e-6, 6), ring(1, i)) }),
			Options{}, want{channels: "channel_1/", findings: "coarse-time ignored-columns", check: roles("index time channel")}},
		{"time last, no names", lines(rows, func(i int) string { return ring(1, i) + "," + at(i, 4e-6, 6) }), Options{}, want{channels: "channel_1/", findings: "coarse-time"}},
		{"time first and last", "Time (us),CH1 (V),Time (us)\n" + lines(rows, func(i int) string { return pair(i) + "," + fourth(i) }), Options{}, ch1},
		{"a channel that ends early beside one time", "Time (us),CH1 (V),CH2 (V)\n" + lines(rows, func(i int) string {
			if i >= 10 {
				return pair(i) + ","
			}
			return pair(i) + "," + ring(2, i)
		}), Options{}, want{channels: "CH1/V CH2/V", findings: "missing-samples", check: has(MissingSamples, Warning, "50 of 60 samples of CH2"), value: func(ch, i int) float64 {
			if ch == 2 && i >= 10 {
				return math.NaN()
			}
			return number(ring(ch, i))
		}}},
		{"a count that begins before the trigger", "Sample interval,4us\nSample,CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprint(i-30) + "," + ring(1, i) }),
			Options{}, want{start: -120e-6, channels: "CH1/V"}},
	})
}

func TestOddColumns(t *testing.T) {
	pair := func(i int) string { return fourth(i) + "," + ring(1, i) }
	but := func(r string) want { return want{channels: "CH1/V", findings: "ignored-columns", check: roles(r)} }
	milli := func(r string) want { return want{channels: "CH1/V", value: scaled(-3), check: roles(r)} }
	readOdd(t, []odd{
		{"a count of segments", "Segment,Time (us),CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d,%s", i/30+1, pair(i)) }),
			Options{}, want{channels: "CH1/V", check: roles("metadata time channel")}},
		{"a spectrum beside the samples", "Time (us),CH1 (V),Frequency (Hz),Spectrum (dB)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%s,%d,%.2f", pair(i), 1000*i, -float64(i%17)) }),
			Options{}, but("time channel frequency response")},
		{"a bus in hexadecimal", "Time (us),CH1 (V),Bus\n" + lines(rows, func(i int) string { return fmt.Sprintf("%s,%02X", pair(i), i*7) }), Options{}, but("time channel text")},
		{"a remark that is a number at times", "Time (us),CH1 (V),Remark\n" + lines(rows, func(i int) string { return pair(i) + []string{",12", ",see page 2", ","}[i%3] }), Options{}, but("time channel text")},
		{"words between time and channel", "Time (us),Gate,CH1 (V)\n" + lines(rows, func(i int) string { return fourth(i) + []string{",TRUE,", ",FALSE,"}[i%2] + ring(1, i) }), Options{}, but("time text channel")},
		{"units between blanks", lines(rows, func(i int) string { return fourth(i) + " us " + ring(1, i) + " mV" }), Options{},
			want{channels: "channel_1/V", value: scaled(-3), check: roles("time metadata channel metadata")}},
		{"units in columns of their own", "t,,CH1,unit\n" + lines(rows, func(i int) string { return fourth(i) + ",us," + ring(1, i) + ",mV" }), Options{}, milli("time metadata channel metadata")},
		{"peak detection, logic and words", "Time (us),CH1 Min (V),CH1 Max (V),D0,State\n" + lines(rows, func(i int) string { return fmt.Sprintf("%s,%s,%d,run", fourth(i), peaks(1, i), i%2) }),
			Options{}, want{channels: "CH1/V", value: peakMean, findings: "ignored-columns", check: roles("time channel duplicate logic text")}},
		{"columns numbered above", ",0,1\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d,%s,%s", i, at(i, 4e-6, 6), ring(1, i)) }),
			Options{}, want{channels: "channel_1/", findings: "coarse-time ignored-columns", check: roles("index time channel")}},
		{"columns numbered above, no count", "0,1\n" + lines(rows, func(i int) string { return at(i, 4e-6, 6) + "," + ring(1, i) }), Options{}, want{channels: "channel_1/", findings: "coarse-time"}},
		{"a first row of whole numbers", "0,1\n" + lines(rows-1, func(i int) string { return at(i+1, 4e-6, 6) + "," + ring(1, i+1) }), Options{},
			want{channels: "channel_1/", findings: "coarse-time", value: func(_, i int) float64 {
				if i == 0 {
					return 1
				}
				return number(ring(1, i))
			}}},
		{"a count under the first name", `"time_us" "CH1_mV"` + "\n" + lines(rows, func(i int) string { return fmt.Sprintf(`"%d" %s %s`, i+1, fourth(i), ring(1, i)) }),
			Options{}, want{channels: "CH1/V", value: scaled(-3), findings: "ignored-columns", check: roles("index time channel")}},
		{"a count without a name", ",time_us,CH1_mV\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d,%s", i, pair(i)) }),
			Options{}, want{channels: "CH1/V", value: scaled(-3), findings: "ignored-columns", check: roles("index time channel")}},
	})
}

func TestOddPreambles(t *testing.T) {
	pair := func(i int) string { return fourth(i) + "," + ring(1, i) }
	one := func(i int) string { return ring(1, i) }
	ch1 := want{channels: "CH1/V"}
	milli := want{channels: "CH1/V", value: scaled(-3)}
	codes := func(_, i int) float64 { return math.Round(30 * number(ring(1, i))) }
	unnamed := want{channels: "channel_1/"}
	us := Options{TimeUnit: "us"}
	var long strings.Builder
	for i := range 15 {
		fmt.Fprintf(&long, "Probe %d,1.0E+01\nPosition %d,-3.2\nTrigger %d,CH1,CH2\nSaved %d,2031-03-04,12:00:01\n\nDelay %d,0.0,0.0\n", i, i, i, i, i)
	}
	readOdd(t, []odd{
		{"sixty lines of all kinds", long.String() + "TIME (us),CH1 (V)\n" + lines(rows, pair), Options{}, ch1},
		{"units above the names", "us,mV\nTime,CH1\n" + lines(rows, pair), Options{}, milli},
		{"a title above names and units", "loop 07,second try\nTime,CH1\nus,mV\n" + lines(rows, pair), Options{}, milli},
		{"units in brackets below the names", "t;CH1\n[us];[mV]\n" + lines(rows, func(i int) string { return comma(fourth(i) + ";" + ring(1, i)) }), Options{}, milli},
		{"separators in the names", "\"Time, us\",\"CH1, mV\"\n" + lines(rows, pair), Options{}, milli},
		{"line ends in the names", "\"Time\n(us)\",\"CH1\n(mV)\"\n" + lines(rows, pair), Options{}, milli},
		{"names of two words between blanks", "Time (us)   Probe A (mV)   Probe B (mV)\n" + lines(rows, func(i int) string { return fourth(i) + "   " + ring(1, i) + "   " + ring(2, i) }),
			Options{}, want{channels: "Probe_A/V Probe_B/V", value: scaled(-3)}},
		{"units of both axes", "X Unit: us\nY Unit: mV\nX,CH1\n" + lines(rows, pair), Options{}, milli},
		{"all in capitals", "TIME[US],CH1[MV]\n" + lines(rows, pair), Options{}, milli},
		{"a sign of micro that was taken for two letters", "Time (Âµs),CH1 (V)\n" + lines(rows, pair), Options{}, ch1},
		{"a sign of micro that became a question mark", "Time (?s),CH1 (V)\n" + lines(rows, pair), Options{}, ch1},
		{"a sign of micro that was lost", "Time (\ufffds),CH1 (V)\n" + lines(rows, pair), Options{}, ch1},
		{"a unit of time that nobody knows", "Time (ticks),CH1 (V)\n" + lines(rows, pair), Options{}, want{interval: 4, channels: "CH1/V", findings: "coarse-time", check: has(CoarseTime, Warning, `"ticks" is not known`)}},
		{"codes with the scale that makes them volts", "Vertical Units,V\nYMULT,0.02\nYOFF,12\nSample Interval,4e-6\n" + lines(rows, func(i int) string { return fmt.Sprint(codes(1, i)) }),
			Options{}, want{channels: "channel_1/V", value: func(_, i int) float64 { return codes(1, i) * 0.02 }, check: why(1, "0.02 V each (line 2)", "no code of zero")}},
		{"German, with separators at the end", "Abtastrate;0,25 MSa/s;\nKanal;CH1;\nEinheit;V;\n" + lines(rows, func(i int) string { return comma(ring(1, i)) + ";" }), Options{}, ch1},
		{"units of the channels in a list", "Units: V, A\nTime (us),CH1,CH2\n" + lines(rows, func(i int) string { return fourth(i) + "," + ring(1, i) + "," + ring(2, i) }),
			Options{}, want{channels: "CH1/V CH2/A"}},
		{"units above the channels", "Units,V,A\nTime (us),CH1,CH2\n" + lines(rows, func(i int) string { return fourth(i) + "," + ring(1, i) + "," + ring(2, i) }),
			Options{}, want{channels: "CH1/V CH2/A"}},
		{"unit in the key", "Sample Interval (ns): 4000\nCH1 (V)\n" + lines(rows, one), Options{}, ch1},
		{"rate with a prefix only", "Sampling rate = 250k\nCH1 (V)\n" + lines(rows, one), Options{}, ch1},
		{"rate in MSPS", "Rate: 0.25 MSPS\nCH1 (V)\n" + lines(rows, one), Options{}, ch1},
		{"start that is a date", "Start time,2031-03-04 12:00:00\nSampling interval,4us\nCH1 (V)\n" + lines(rows, one), Options{}, ch1},
		{"values above the channels", "Channel,CH1,CH2\nSample Interval,4us,4us\nUnit,V,A\nName,Coil,Shunt\n,,\nIndex,CH1,CH2\n" + lines(rows, func(i int) string { return fmt.Sprint(i) + "," + ring(1, i) + "," + ring(2, i) }),
			Options{}, want{channels: "CH1/V CH2/A"}},
		{"numbers above the names", "0\n60\n4.0e-06\n-1.2e-4\nTime (us),CH1 (V)\n" + lines(rows, pair), Options{}, ch1},
		{"pairs of numbers above the names", "1,2\n60,4.0e-06\nTime (us),CH1 (V)\n" + lines(rows, pair), Options{}, ch1},
		{"an entry with a number is no heading", "Format,2\nPoints,60\nAverages,16\n\n" + lines(rows, pair), us, unnamed},
		{"the last entry of a list is no heading", "Model,antenna\nCoupling,DC\nMode,normal\n" + lines(rows, pair), us, unnamed},
	})
}
