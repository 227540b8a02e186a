package capture

import (
	"fmt"
	"strings"
	"testing"
)

// What a preamble says of samples without times, and may say of something else.
func TestDoubtfulIntervals(t *testing.T) {
	one := func(i int) string { return ring(1, i) }
	samples := "CH1 (V)\n" + lines(rows, one)
	counted := func(step int) string {
		return "Sample,CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprint(step*i) + "," + ring(1, i) })
	}
	ch1 := want{channels: "CH1/V"}
	readOdd(t, []odd{
		{"a rate in groups of digits", "Sample Rate: 250,000.0 Sa/s\n" + strings.Replace(samples, "(V)", "(V);", 1), Options{Interval: 4e-6}, ch1},
		{"a rate in three groups of digits", "Sample Rate,2,500,000\nDecimation,1\n" + samples, Options{}, want{interval: 4e-7, channels: "CH1/V"}},
		{"the same with its unit", "Sample Rate: 2,500,000 Sa/s\n" + samples, Options{}, want{interval: 4e-7, channels: "CH1/V"}},
		{"a decimal comma among commas", "Sample Interval,4,00E-06\n" + samples, Options{}, ch1},
		{"a count in the steps of the decimation", "Sample Rate,2.5 MSa/s\nDecimation,10\n" + counted(10), Options{}, ch1},
		{"one segment", "Segments,1\nSample Interval,4us\n" + samples, Options{}, ch1},
		{"an interval that both channels have", "Sample Interval,4us,4us\nCH1 (V),CH2 (V)\n" + lines(rows, func(i int) string { return ring(1, i) + "," + ring(2, i) }), Options{}, want{channels: "CH1/V CH2/V"}},
		{"an interval in every row", "dt,CH1 (V)\n" + lines(rows, func(i int) string { return "4e-6," + ring(1, i) }), Options{}, ch1},
		{"times in samples", "Sample Interval,400 ns\nTime (samples),CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprint(10*i) + "," + ring(1, i) }), Options{}, want{channels: "CH1/V", check: roles("index channel")}},
		{"blank lines between the samples", "Sample Interval,4us\nCH1 (V)\n" + lines(rows, func(i int) string { return strings.Repeat("\n", i%20/19) + ring(1, i) }), Options{},
			want{channels: "CH1/V", findings: "uneven-time", check: has(UnevenTime, Warning, "in 3 places, first before sample 20")}},
		{"blank lines between all samples", "Sample Interval,4us\nCH1 (V)\n" + lines(rows, func(i int) string { return ring(1, i) + "\n" }), Options{}, ch1},
	})
	for _, c := range []struct{ name, text, message string }{
		{"a thousand or one", "Sample Rate,250,000 Sa/s\n" + samples, `line 1: no time axis: found "250,000 Sa/s" for the sampling interval or rate, expected a number greater than zero with its unit, or --interval`},
		{"a decimation", "Sample Rate,2.5 MSa/s\nDecimation,10\n" + samples, "line 2: no time axis: found a decimation of 10, which the sampling interval of 400 ns in line 1 may or may not include, expected --interval"},
		{"a decimation beside a count", "Sample Rate,2.5 MSa/s\nDecimation,10\n" + counted(1), "line 2: no time axis: found a decimation of 10, which the sampling interval of 400 ns in line 1 may or may not include, expected --interval"},
		{"segments", "Sample Interval,4us\nSegments,3\n" + samples, "line 2: no time axis: found 3 segments, and no time column that shows where they begin, expected one record"},
		{"channels of different intervals", "Sample Interval,4us,8us\nCH1 (V),CH2 (V)\n" + lines(rows, func(i int) string { return ring(1, i) + "," + ring(2, i) }), "line 1: no time axis: found a sampling interval of 8 µs beside one of 4 µs in line 1, expected one interval, or --interval"},
		{"times in samples without an interval", "Time (samples),CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprint(i) + "," + ring(1, i) }), "no time axis: found only a count of samples in column 1, and no sampling interval in the preamble, expected one of them, or --interval"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := Read(strings.NewReader(c.text), "loop 07.csv", Options{})
			if err == nil || err.Error() != "loop 07.csv: "+c.message {
				t.Errorf("%v, want %s", err, c.message)
			}
		})
	}
}

// Numbers with units attached: zero needs none, any other number does.
func TestUnitsInCells(t *testing.T) {
	row := func(i int) string { return fmt.Sprintf("%dus,%sV", 4*i, ring(1, i)) }
	zero := func(i int) string {
		if i == 0 {
			return "0," + ring(1, 0) + "V"
		}
		return row(i)
	}
	readOdd(t, []odd{
		{"the first time is zero", "time,CH1\n" + lines(rows, zero), Options{}, want{channels: "CH1/V"}},
		{"other zeros", "time,CH1\n" + lines(rows, func(i int) string {
			if i%7 == 3 {
				return fmt.Sprintf("%dus,0.0", 4*i)
			}
			return row(i)
		}), Options{}, want{channels: "CH1/V", value: func(_, i int) float64 {
			if i%7 == 3 {
				return 0
			}
			return number(ring(1, i))
		}}},
		{"prefixes that change", "time,CH1\n" + lines(rows, func(i int) string {
			if i < 10 {
				return fmt.Sprintf("%dns,%sV", 4000*i, ring(1, i))
			}
			return row(i)
		}), Options{}, want{channels: "CH1/V"}},
	})
	text := "time,CH1\n" + lines(rows, func(i int) string {
		if i == 50 {
			return "200,1V"
		}
		return row(i)
	})
	if _, err := Read(strings.NewReader(text), "loop 07.csv", Options{}); err == nil || err.Error() != `loop 07.csv: line 52, column 1: found "200", expected a number with its unit` {
		t.Error(err)
	}
}

// Headings that hold more than names, and in other writings.
func TestHeadingsOfAllKinds(t *testing.T) {
	pair := func(i int) string { return fourth(i) + "," + ring(1, i) }
	readOdd(t, []odd{
		{"a statistic behind the names", "Time (us),CH1 (mV),,Mean,0.01\n" + lines(rows, func(i int) string {
			return pair(i) + []string{",,Max,1.78", ",,Min,-2.7", ",,,"}[min(i, 2)]
		}), Options{}, want{channels: "CH1/V", value: scaled(-3), findings: "ignored-columns"}},
		{"quotes of typesetters", "“Time (us)”,“CH1 (mV)”\n" + lines(rows, pair), Options{}, want{channels: "CH1/V", value: scaled(-3)}},
		{"single quotes", "'Time (us)','CH1 (mV)'\n" + lines(rows, pair), Options{}, want{channels: "CH1/V", value: scaled(-3)}},
		{"Cyrillic", "Время, мкс;Напряжение, мВ\n" + comma(lines(rows, func(i int) string { return fourth(i) + ";" + ring(1, i) })), Options{}, want{channels: "Напряжение/V", value: scaled(-3)}},
		{"Chinese", "时间(微秒),电压(毫伏)\n" + lines(rows, pair), Options{}, want{channels: "电压/V", value: scaled(-3)}},
		{"two headings, one in words", "Elapsed time since trigger,Voltage across the coil\nt/us,u/mV\n" + lines(rows, pair), Options{}, want{channels: "u/V", value: scaled(-3)}},
	})
}
