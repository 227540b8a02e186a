package capture

import (
	"fmt"
	"strings"
	"testing"
)

// A column that counts the samples, only some of which are kept: its numbers times
// the declared interval are the times.
func TestDecimatedCounts(t *testing.T) {
	count := func(from, step int) func(i int) string {
		return func(i int) string { return fmt.Sprint(from+step*i) + "," + ring(1, i) }
	}
	ch1 := want{channels: "CH1/V", check: roles("index channel")}
	later, trigger, noted, us := ch1, ch1, ch1, ch1
	later.start, trigger.start = 40e-6, -120e-6
	noted.findings, noted.check = "coarse-time", has(CoarseTime, Note, "column 1 rise by 10", "numbers of the samples, 400 ns apart")
	us.check = roles("time channel")
	gap := ch1
	gap.findings, gap.check = "missing-samples", has(MissingSamples, Warning, "2 rows of time missing: before sample 31 at 128 µs")
	for i := range rows {
		gap.times = append(gap.times, float64(i+2*(i/30))*4e-6)
	}
	twice := ch1
	twice.findings = "uneven-time"
	for i := range rows { // 0, 8, 20, 28, 40: two steps by turns
		twice.times = append(twice.times, float64(i/2*20+i%2*8)*4e-7)
	}
	readOdd(t, []odd{
		{"interval", "Sample Interval,4e-7\nSample,CH1 (V)\n" + lines(rows, count(0, 10)), Options{}, ch1},
		{"rate", "Sampling rate: 2.5 MSa/s\nPoint,CH1 (V)\n" + lines(rows, count(0, 10)), Options{}, ch1},
		{"the caller's interval", "Index,CH1 (V)\n" + lines(rows, count(0, 10)), Options{Interval: 4e-7}, ch1},
		{"from one", "Sample Interval,4e-7\nSample,CH1 (V)\n" + lines(rows, count(1, 10)), Options{}, ch1},
		{"from a hundred", "Sample Interval,4e-7\nSample,CH1 (V)\n" + lines(rows, count(100, 10)), Options{}, later},
		{"before the trigger", "Sample Interval,4e-7\nSample,CH1 (V)\n" + lines(rows, count(-300, 10)), Options{}, trigger},
		{"start declared", "Sample Interval,4e-7\nStart,-1.2e-4\nSample,CH1 (V)\n" + lines(rows, count(0, 10)), Options{}, trigger},
		{"number of samples declared", "Sample Interval,4e-7\nRecord Length,600\nSample,CH1 (V)\n" + lines(rows, count(0, 10)), Options{}, ch1},
		{"without a name", "Sample Interval,4e-7\n,CH1 (V)\n" + lines(rows, count(0, 10)), Options{}, noted},
		{"x", "Sample Interval,4e-7\nx,CH1 (V)\n" + lines(rows, count(0, 10)), Options{}, noted},
		{"times in the unit that the interval implies", "Sample Interval,4us\n,CH1 (V)\n" + lines(rows, count(0, 4)), Options{}, us},
		{"a unit given", "Sample,CH1 (V)\n" + lines(rows, count(0, 4)), Options{TimeUnit: "us"}, us},
		{"two rows missing", "Sample Interval,4e-7\nSample,CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprint(10*(i+2*(i/30))) + "," + ring(1, i) }), Options{}, gap},
		{"two steps by turns", "Sample Interval,4e-7\nSample,CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprint(i/2*20+i%2*8) + "," + ring(1, i) }), Options{}, twice},
	})
	_, err := Read(strings.NewReader("Sample,CH1 (V)\n"+lines(rows, count(0, 10))), "-", Options{})
	if want := "standard input: no time axis: found only a count of samples in column 1, and no sampling interval in the preamble, expected one of them, or --interval"; err == nil || err.Error() != want {
		t.Errorf("%v, want %s", err, want)
	}
}

// Units of time and of rates.
func TestUnitsOfTime(t *testing.T) {
	pair := func(i int) string { return at(i, 0.25, 2) + "," + ring(1, i) }
	one := func(i int) string { return ring(1, i) }
	of := func(interval float64) want { return want{interval: interval, channels: "CH1/V"} }
	cases := []odd{
		{"minutes and hours in pairs", "Time (min),CH1 (V),Time (h),CH2 (V)\n" + lines(rows, func(i int) string {
			return at(i, 60, 0) + "," + ring(1, i) + "," + at(i, 1, 0) + "," + ring(2, i)
		}), Options{}, want{interval: 3600, channels: "CH1/V CH2/V"}},
		{"units below the names", "Time,CH1\nmin,V\n" + lines(rows, pair), Options{}, of(15)},
		{"unit in the preamble", "Time Unit,h\nTime,CH1 (V)\n" + lines(rows, pair), Options{}, of(900)},
		{"interval in minutes", "Sample Interval,2 min\nCH1 (V)\n" + lines(rows, one), Options{}, of(120)},
		{"the unit of the key", "Sample Interval (h): 0.5\nCH1 (V)\n" + lines(rows, one), Options{}, of(1800)},
		{"least and largest are no minutes", "Time (us),CH1 min (V),CH1 max (V)\n" + lines(rows, func(i int) string { return fourth(i) + "," + peaks(1, i) }), Options{}, want{interval: 4e-6, channels: "CH1/V", value: peakMean, findings: "ignored-columns"}},
		{"two rows missing of minutes", "Time (min),CH1 (V)\n" + lines(rows, func(i int) string { return at(i+2*(i/30), 0.25, 2) + "," + ring(1, i) }), Options{},
			want{interval: 15, channels: "CH1/V", findings: "missing-samples", times: func() (s []float64) {
				for i := range rows {
					s = append(s, 15*float64(i+2*(i/30)))
				}
				return s
			}(), check: has(MissingSamples, Warning, "before sample 31 at 480 s")}},
	}
	for unit, interval := range map[string]float64{"min": 15, "h": 900, "minutes": 15, "hours": 900, "ks": 250, "s": 0.25, "ms": 0.25e-3} {
		for _, name := range []string{"Time (%s)", "t [%s]", "Time / %s", "time_%s", "Elapsed time (%s)", "t in %s"} {
			if strings.Contains(name, "_") && len(unit) > 3 {
				continue
			}
			cases = append(cases, odd{fmt.Sprintf(name, unit), fmt.Sprintf(name, unit) + ",CH1 (V)\n" + lines(rows, pair), Options{}, of(interval)})
		}
	}
	for _, rate := range []string{"2.5 MSa/s", "2.5E6 Sa/s", "2.5E+06", "2500 kS/s", "2.5 MHz", "2500000 Hz", "2.5M", "2.5MSPS", "2500 kSamples/s", "2500 ksamples/sec", "2.5 Megasamples/s"} {
		cases = append(cases, odd{rate, "Sample Rate," + rate + "\nCH1 (V)\n" + lines(rows, one), Options{}, of(4e-7)})
	}
	// What a division is worth is no interval.
	for _, no := range []string{"Time Base,50 us/div", "Timebase: 50us", "Horizontal Scale,5e-5", "Time per division,50us", "Horizontal: 50 us/div", "Time/Div = 50 us", "t/div,50us", "s/div,5e-5"} {
		cases = append(cases, odd{no, no + "\nRecord Length,60\nSample Interval,4us\nCH1 (V)\n" + lines(rows, one), Options{}, of(4e-6)})
		if c, err := Read(strings.NewReader(no+"\nRecord Length,60\nCH1 (V)\n"+lines(rows, one)), "-", Options{}); err == nil || !strings.Contains(err.Error(), "no sampling interval in the preamble") {
			t.Errorf("%s: %v, %v", no, c, err)
		}
	}
	for _, no := range []string{"Interval: 50 us/div", "Sampling: 50 us/div"} {
		if c, err := Read(strings.NewReader(no+"\nCH1 (V)\n"+lines(rows, one)), "-", Options{}); err == nil || !strings.Contains(err.Error(), `line 1: no time axis: found "50 us/div" for the sampling interval or rate`) {
			t.Errorf("%s: %v, %v", no, c, err)
		}
	}
	readOdd(t, cases)
}

// Axes that no capture can have are refused.
func TestImpossibleAxes(t *testing.T) {
	one := func(i int) string { return ring(1, i) }
	pair := func(exp string) string {
		return lines(rows, func(i int) string { return fmt.Sprint(i) + exp + "," + ring(1, i) })
	}
	for name, c := range map[string]struct {
		text string
		opt  Options
		want string // "" when it can be read
	}{
		"ages":                   {"Time (s),CH1 (V)\n" + pair("e300"), Options{}, "column 1: no time axis: found 60 samples over 5.9e+301 s, expected a record of 1e+09 s at most"},
		"beyond all numbers":     {"Time (s),CH1 (V)\n" + pair("e310"), Options{}, "column 1: no time axis: found stamps beyond all numbers, expected times in seconds or parts of them"},
		"two hundred years":      {"Time (s),CH1 (V)\n" + pair("e8"), Options{}, "column 1: no time axis: found 60 samples over 5.9e+09 s, expected a record of 1e+09 s at most"},
		"ten years":              {"Time (s),CH1 (V)\n" + pair("e6"), Options{}, ""},
		"a stamp that is broken": {"Time (s),CH1 (V)\n" + lines(rows, func(i int) string { return at(i, 1, 0) + "," + ring(1, i) }) + "5e300,0\n", Options{}, "column 1: no time axis: found 61 samples over 5e+300 s, expected a record of 1e+09 s at most"},
		"no time at all":         {"Time (s),CH1 (V)\n" + pair("e-30"), Options{}, "column 1: no time axis: found samples 1e-30 s apart, expected 1e-18 s at least"},
		"a declared interval":    {"Sample Interval,1e-25\nCH1 (V)\n" + lines(rows, one), Options{}, "no time axis: found samples 1e-25 s apart, expected 1e-18 s at least"},
		"a given interval":       {"CH1 (V)\n" + lines(rows, one), Options{Interval: 1e9}, "no time axis: found 60 samples over 5.9e+10 s, expected a record of 1e+09 s at most"},
		"a femtosecond":          {"Sample Interval,1e-15\nCH1 (V)\n" + lines(rows, one), Options{}, ""},
		"seconds of 1970":        {"Time (s),CH1 (V)\n" + lines(rows, func(i int) string { return "1930000000." + fmt.Sprintf("%06d,", 4*i) + ring(1, i) }), Options{}, ""},
	} {
		t.Run(name, func(t *testing.T) {
			_, err := Read(strings.NewReader(c.text), "-", c.opt)
			switch {
			case c.want == "" && err != nil:
				t.Error(err)
			case c.want != "" && (err == nil || !strings.HasPrefix(err.Error(), "standard input: "+c.want)):
				t.Errorf("%v, want %s", err, c.want)
			}
		})
	}
}

// Lines that are in quotes as a whole hold a table all the same.
func TestWrappedLines(t *testing.T) {
	pair := func(i int) string { return `"` + fourth(i) + "," + ring(1, i) + `"` }
	ch1 := want{channels: "CH1/V"}
	two := want{channels: "CH1/V CH2/V"}
	readOdd(t, []odd{
		{"comma", `"Time (us),CH1 (V)"` + "\n" + lines(rows, pair), Options{}, ch1},
		{"the heading is not", "Time (us),CH1 (V)\n" + lines(rows, pair), Options{}, ch1},
		{"semicolon and decimal comma", `"Time (us);CH1 (V)"` + "\n" + lines(rows, func(i int) string { return `"` + comma(fourth(i)+";"+ring(1, i)) + `"` }), Options{}, ch1},
		{"tabs", "\"Time (us)\tCH1 (V)\tCH2 (V)\"\n" + lines(rows, func(i int) string { return `"` + fourth(i) + "\t" + ring(1, i) + "\t" + ring(2, i) + `"` }), Options{}, two},
		{"blanks", `"Time (us)  CH1 (V)"` + "\n" + lines(rows, func(i int) string { return `"` + fourth(i) + "  " + ring(1, i) + `"` }), Options{}, ch1},
		{"quotes within", `"""Time (us)"",""CH1 (V)"""` + "\n" + lines(rows, func(i int) string { return `"""` + fourth(i) + `"",""` + ring(1, i) + `"""` }), Options{}, ch1},
		{"separators behind", `"Time (us),CH1 (V)",,` + "\n" + lines(rows, func(i int) string { return pair(i) + ",," }), Options{}, ch1},
		{"a preamble and a footer", `"loop 07"` + "\n" + `"Units: mV"` + "\n" + `"Time (us),CH1"` + "\n" + lines(rows, pair) + `"End of data"` + "\n", Options{}, want{channels: "CH1/V", value: scaled(-3)}},
		{"whole numbers below names", `"Time_us,CH1_mV"` + "\n" + lines(rows, func(i int) string { return fmt.Sprintf(`"%d,%d"`, 4*i, i*37%256) }), Options{},
			want{channels: "CH1/V", value: func(_, i int) float64 { return number(fmt.Sprintf("%de-3", i*37%256)) }}},
		{"a column of decimal commas", "Sample Interval,4us\n" + `"CH1 (V)"` + "\n" + lines(rows, func(i int) string { return `"` + comma(ring(1, i)) + `"` }), Options{}, ch1},
	})
	long := strings.ReplaceAll(strings.Join(good(30000), ""), "\n", "\"\n\"")
	if c, err := Read(strings.NewReader(`"`+strings.TrimSuffix(long, `"`)), "-", Options{}); err != nil || len(c.Channels) != 2 || len(c.Channels[1].Samples) != 30000 || c.Channels[1].Samples[29999] != number(ring(2, 29999%500)) {
		t.Errorf("%v", err)
	}
	_, err := Read(strings.NewReader(`"Time (us),CH1 (V)"`+"\n"+lines(rows, pair)+`"1000,x7"`+"\n"), "-", Options{})
	if want := `standard input: line 62, column 2: found "x7", expected a number`; err == nil || err.Error() != want {
		t.Errorf("%v, want %s", err, want)
	}
}
