package capture

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// roles asks for the roles of the columns.
func roles(wanted string) func(*testing.T, *Capture) {
	return func(t *testing.T, c *Capture) {
		t.Helper()
		var got []string
		for _, col := range c.Layout.Columns {
			got = append(got, string(col.Role))
			if col.Why == "" {
				t.Errorf("column %d is %s without a why", col.Number, col.Role)
			}
		}
		if s := strings.Join(got, " "); s != wanted {
			t.Errorf("columns are %s, want %s", s, wanted)
		}
	}
}

// Columns that are no channels, and cells that are no samples.
func TestColumns(t *testing.T) {
	t0 := func(i int) string { return at(i, 0.4, 1) }
	nan := math.NaN()
	ringBut := func(gone func(ch, i int) bool) func(ch, i int) float64 {
		return func(ch, i int) float64 {
			if gone(ch, i) {
				return nan
			}
			return number(ring(ch, i))
		}
	}
	marks := []string{"inf", "-inf", "---", "****", "", "NaN", "OVER", "+Inf", "#N/A", "1e999", "∞", "-∞", "+∞", "OL", "-OL", "OVL",
		"over", "overflow", "-", "*", "1.#INF", "-1.#IND00", "1.#QNAN0", "#NAME?", "#DIV/0!", ">5.00", "<-5.00 V"}
	marked := func(ch, i int) bool { return i < len(marks) }
	for _, c := range []struct {
		name, text string
		w          want
	}{
		{"minimum and maximum of peak detection", "time (us),CH1 min (V),CH1 max (V),CH2 min (V),CH2 max (V)\n" + lines(rows, func(i int) string {
			return t0(i) + "," + peaks(1, i) + "," + peaks(2, i)
		}), want{interval: 0.4e-6, channels: "CH1/V CH2/V", findings: "ignored-columns", value: peakMean,
			check: roles("time channel duplicate channel duplicate")}},
		{"minimum and maximum under one name", "time (us),CH1 (V),CH1 (V)\n" + lines(rows, func(i int) string { return t0(i) + "," + peaks(1, i) }),
			want{interval: 0.4e-6, channels: "CH1/V", findings: "ignored-columns", value: peakMean, check: roles("time channel duplicate")}},
		{"a channel and its peak detection", "TIME,CH1,CH1 Peak Detect\ns,V,V\n" + lines(rows, func(i int) string { return at(i, 4e-6, 6) + "," + peaks(1, i) }),
			want{interval: 4e-6, channels: "CH1/V", findings: "ignored-columns", value: peakMean, check: roles("time channel duplicate")}},
		{"deviations named for what they are of", "t\tdt\tV\tdV\n" + lines(rows, func(i int) string { return t0(i) + "\t0.1\t" + ring(1, i) + "\t0.002" }),
			want{interval: 0.4, channels: "V/V", findings: "coarse-time ignored-columns", check: roles("time deviation channel deviation")}},
		{"two probes with like names are channels", "in s,V in V,uV in V\n" + lines(rows, func(i int) string { return t0(i) + "," + ring(1, i) + "," + ring(2, i) }),
			want{interval: 0.4, channels: "V/V uV/V"}},
		{"an error of the time", "time (us),time error (us),V (V),V error (V)\n" + lines(rows, func(i int) string { return t0(i) + ",0.1," + ring(1, i) + ",0.002" }),
			want{interval: 0.4e-6, channels: "V/V", findings: "ignored-columns", check: roles("time deviation channel deviation")}},
		{"a channel that rises, and no time column", "# Sampling interval: 4 us\n" + lines(rows, func(i int) string { return rise(i) + " " + ring(2, i) }),
			want{interval: 4e-6, channels: "channel_1/ channel_2/", check: roles("channel channel"), value: func(ch, i int) float64 {
				if ch == 1 {
					return number(rise(i))
				}
				return number(ring(2, i))
			}}},
		{"bit patterns", "time (us),D7-D0,CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%s,%08b,%s", t0(i), i, ring(1, i)) }),
			want{interval: 0.4e-6, channels: "CH1/V", findings: "ignored-columns", check: roles("time logic channel")}},
		{"error columns by name", "time (us),CH1 (V),CH1 error (V),CH2 (V),std CH2\n" + lines(rows, func(i int) string {
			return t0(i) + "," + ring(1, i) + ",0.002," + ring(2, i) + ",0.003"
		}), want{interval: 0.4e-6, channels: "CH1/V CH2/V", findings: "ignored-columns", check: roles("time channel deviation channel deviation")}},
		{"deviations without names", lines(rows, func(i int) string {
			return fmt.Sprintf("%s 0.%02d %s %.3f", t0(i), 3+i%5, ring(1, i), 0.01+0.001*float64(i%7))
		}), want{interval: 0.4, channels: "channel_1/", findings: "coarse-time ignored-columns", check: roles("time deviation channel deviation")}},
		{"one deviation without a name", lines(rows, func(i int) string { return fmt.Sprintf("%s\t%s\t%.3f", t0(i), ring(1, i), 0.01+0.001*float64(i%7)) }),
			want{interval: 0.4, channels: "channel_1/", findings: "coarse-time ignored-columns", check: roles("time channel deviation")}},
		{"two channels without names are channels", lines(rows, func(i int) string { return t0(i) + "," + ring(1, i) + "," + ring(2, i) }),
			want{interval: 0.4, channels: "channel_1/ channel_2/", findings: "coarse-time", check: roles("time channel channel")}},
		{"logic columns", "time (us),CH1 (V),D0,D1,trigger\n" + lines(rows, func(i int) string {
			return fmt.Sprintf("%s,%s,%d,0,%d", t0(i), ring(1, i), i%2, i/30)
		}), want{interval: 0.4e-6, channels: "CH1/V", findings: "ignored-columns", check: roles("time channel logic logic logic")}},
		{"a duplicate under a blank header", "time (us),CH1 (V),\n" + lines(rows, func(i int) string { return t0(i) + "," + ring(1, i) + "," + ring(1, i) }),
			want{interval: 0.4e-6, channels: "CH1/V", findings: "ignored-columns", check: roles("time channel duplicate")}},
		{"a text column last", "time (us),CH1 (V),remark\n" + lines(rows, func(i int) string {
			return t0(i) + "," + ring(1, i) + []string{",ok", ",\"armed, waiting\"", ",", ", see note, page 2"}[i%4]
		}), want{interval: 0.4e-6, channels: "CH1/V", findings: "ignored-columns", check: roles("time channel text text")}},
		{"a text column first", "state,time (us),CH1 (V)\n" + lines(rows, func(i int) string { return "run," + t0(i) + "," + ring(1, i) }),
			want{interval: 0.4e-6, channels: "CH1/V", findings: "ignored-columns", check: roles("text time channel")}},
		{"a blank column with a name", "time (us),CH1 (V),CH2 (V)\n" + lines(rows, func(i int) string { return t0(i) + "," + ring(1, i) + "," }),
			want{interval: 0.4e-6, channels: "CH1/V", findings: "ignored-columns", check: roles("time channel blank")}},
		{"count and time", "Index;Time (us);CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d;%s;%s", i, t0(i), ring(1, i)) }),
			want{interval: 0.4e-6, channels: "CH1/V", findings: "ignored-columns", check: roles("index time channel")}},
		{"an analogue cell empty at first", "time (us),CH1 (V),CH2 (V)\n" + lines(rows, func(i int) string {
			if i < 3 {
				return t0(i) + ",," + ring(2, i)
			}
			return t0(i) + "," + ring(1, i) + "," + ring(2, i)
		}), want{interval: 0.4e-6, channels: "CH1/V CH2/V", findings: "missing-samples",
			value: ringBut(func(ch, i int) bool { return ch == 1 && i < 3 }), check: has(MissingSamples, Warning, "3 of 60 samples of CH1")}},
		{"the only analogue cell empty at first", "time (us),CH1 (V)\n" + lines(rows, func(i int) string {
			if i < 3 {
				return t0(i) + ","
			}
			return t0(i) + "," + ring(1, i)
		}), want{interval: 0.4e-6, channels: "CH1/V", findings: "missing-samples", value: ringBut(func(ch, i int) bool { return i < 3 })}},
		{"marks of over-range and missing samples", "time (us),CH1 (V)\n" + lines(rows, func(i int) string {
			if marked(1, i) {
				return t0(i) + "," + marks[i]
			}
			return t0(i) + "," + ring(1, i)
		}), want{interval: 0.4e-6, channels: "CH1/V", findings: "missing-samples", value: ringBut(marked), check: has(MissingSamples, Warning, "27 of 60")}},
		{"a channel that is over range throughout", "time (us),CH1 (V),CH2 (V)\n" + lines(rows, func(i int) string { return t0(i) + "," + ring(1, i) + ",---" }),
			want{interval: 0.4e-6, channels: "CH1/V", findings: "ignored-columns", check: roles("time channel blank")}},
		{"comments and blank lines between the samples", "time (us),CH1 (V)\n" + lines(rows, func(i int) string {
			return t0(i) + "," + ring(1, i) + []string{"", "\n", "\n# block"}[i%3]
		}), want{interval: 0.4e-6, channels: "CH1/V"}},
	} {
		t.Run(c.name, func(t *testing.T) { understand(t, c.text, Options{}, c.w) })
	}
}

// rise is a supply that settles.
func rise(i int) string { return fmt.Sprintf("%.4f", 5-5*math.Exp(-float64(i)/20)) }

// peaks are the two ends of peak detection about the ring of a channel.
func peaks(channel, i int) string {
	v := number(ring(channel, i))
	return fmt.Sprintf("%.5f,%.5f", v-0.01, v+0.02)
}

func peakMean(ch, i int) float64 {
	ends := strings.Split(peaks(ch, i), ",")
	return number(ends[0])/2 + number(ends[1])/2
}

// Minimum and maximum in rows that alternate, at one time or half an interval apart.
func TestPeakRows(t *testing.T) {
	end := func(ch, i int) string { return strings.Split(peaks(ch, i/2), ",")[i%2] }
	swapped := func(ch, i int) string { return strings.Split(peaks(ch, i/2), ",")[1-i%2] }
	twice := func(i int) string { return at(i/2, 0.4, 1) }
	header := "time (us),CH1 (V),CH2 (V)\n"
	joined := want{interval: 0.4e-6, channels: "CH1/V CH2/V", value: peakMean, findings: "uneven-time", check: has(UnevenTime, Note, "minimum and the maximum")}
	half := joined
	half.start = 0.1e-6
	with := joined
	with.findings = "ignored-columns uneven-time"
	with.check = roles("time channel channel logic")
	gone := joined
	gone.findings = "missing-samples uneven-time"
	gone.value = func(ch, i int) float64 {
		if ch == 1 && i == 20 {
			return math.NaN()
		}
		return peakMean(ch, i)
	}
	for _, c := range []struct {
		name string
		row  func(i int) string
		w    want
	}{
		{"at one time", func(i int) string { return twice(i) + "," + end(1, i) + "," + end(2, i) }, joined},
		{"the maximum first", func(i int) string { return twice(i) + "," + swapped(1, i) + "," + swapped(2, i) }, joined},
		{"half an interval apart", func(i int) string { return at(i, 0.2, 1) + "," + end(1, i) + "," + end(2, i) }, half},
		{"one of them over range", func(i int) string {
			if i == 41 {
				return twice(i) + ",over," + end(2, i)
			}
			return twice(i) + "," + end(1, i) + "," + end(2, i)
		}, gone},
		{"beside logic", func(i int) string { return fmt.Sprintf("%s,%s,%s,%d", twice(i), end(1, i), end(2, i), i/6%2) }, with},
	} {
		t.Run(c.name, func(t *testing.T) {
			text := header
			if strings.HasSuffix(c.name, "logic") {
				text = strings.Replace(header, "\n", ",D0\n", 1)
			}
			understand(t, text+lines(2*rows, c.row), Options{}, c.w)
		})
	}
	// Exactly two samples a cycle: every second one is the larger, as in peak detection.
	two := func(_, i int) float64 { return math.Exp(-float64(i)/50) * math.Cos(math.Pi*float64(i)+0.3) }
	twice = func(i int) string { return fmt.Sprintf("%s,%v", at(i/2, 0.4, 1), two(1, i)) }
	apart := func(i int) string { return fmt.Sprintf("%s,%v", at(i, 0.2, 1), two(1, i)) }
	mean := func(_, i int) float64 { return 0.5*two(1, 2*i) + 0.5*two(1, 2*i+1) }
	plain := want{n: 2 * rows, interval: 0.2e-6, channels: "CH1/V", value: two}
	paired := want{interval: 0.4e-6, channels: "CH1/V", value: mean, findings: "uneven-time"}
	pairedHalf := paired
	pairedHalf.start = 0.1e-6
	for _, c := range []struct {
		name, above string
		row         func(i int) string
		w           want
	}{
		{"a ring of two samples a cycle is none", "", apart, plain},
		{"in spite of a mode that is off", "Peak Detect: Off\n", apart, plain},
		{"unless the file says so", "Acquisition Mode,Peak Detect\n", apart, pairedHalf},
		{"or every stamp comes twice", "", twice, paired},
	} {
		t.Run(c.name, func(t *testing.T) {
			understand(t, c.above+"time (us),CH1 (V)\n"+lines(2*rows, c.row), Options{}, c.w)
		})
	}
	t.Run("a ring of 2.1 samples a cycle is none", func(t *testing.T) {
		ring := func(_, i int) float64 { return math.Exp(-float64(i)/50) * math.Cos(2*math.Pi*float64(i)/2.1) }
		text := "time (us),V_C (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%s,%v", at(i, 0.4, 1), ring(1, i)) })
		understand(t, text, Options{}, want{interval: 0.4e-6, channels: "V_C/V", value: ring})
	})
	t.Run("a ramp is none", func(t *testing.T) {
		text := "time (us),V_C (V)\n" + lines(rows, func(i int) string { return at(i, 0.4, 1) + "," + rise(i) })
		understand(t, text, Options{}, want{interval: 0.4e-6, channels: "V_C/V", value: func(_, i int) float64 { return number(rise(i)) }})
	})
}

func TestChannel(t *testing.T) {
	c, err := Read(strings.NewReader("time (us),V_S (V),V_C (V),3\n"+lines(rows, func(i int) string {
		return at(i, 0.4, 1) + "," + ring(1, i) + "," + ring(2, i) + "," + ring(3, i)
	})), "loop 07.csv", Options{})
	if err != nil {
		t.Fatal(err)
	}
	for ask, name := range map[string]string{"V_S": "V_S", "v_c": "V_C", "1": "V_S", "2": "V_C", "3": "3"} {
		if ch, err := c.Channel(ask); err != nil || ch.Name != name {
			t.Errorf("%q gives %v, %v", ask, ch, err)
		}
	}
	_, err = c.Channel("V_R")
	const message = `no channel "V_R" in loop 07.csv, which has 1 "V_S", 2 "V_C", 3 "3"`
	if err == nil || err.Error() != message {
		t.Errorf("error %v, want %s", err, message)
	}
}
