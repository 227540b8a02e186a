package capture

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
	"time"

	"gonum.org/v1/gonum/stat"
)

// has asks for a finding of a code and severity with words in its message.
func has(code Code, s Severity, words ...string) func(*testing.T, *Capture) {
	return func(t *testing.T, c *Capture) {
		t.Helper()
		for _, f := range c.Findings {
			found := f.Code == code && f.Severity == s
			for _, w := range words {
				found = found && strings.Contains(f.Message, w)
			}
			if found {
				return
			}
		}
		t.Errorf("no %s %s with %q in %v", s, code, words, c.Findings)
	}
}

// Times as columns of stamps.
func TestTimeColumns(t *testing.T) {
	ms := func(v float64) string { return strconv.FormatFloat(v, 'f', 3, 64) }
	stamped := func(format string, first time.Time, step time.Duration) string {
		return lines(rows, func(i int) string {
			return first.Add(time.Duration(i)*step).Format(format) + "," + ring(1, i)
		})
	}
	noon := time.Date(2031, 3, 4, 11, 59, 59, 999_900_000, time.UTC)
	midnight := time.Date(2031, 3, 4, 23, 59, 59, 999_900_000, time.UTC)
	header := "time,V_C (V)\n"
	for _, c := range []struct {
		name, text string
		w          want
	}{
		{"ms in the header", "Time[ms],V_C (V)\n" + lines(rows, func(i int) string { return at(i, 0.004, 3) + "," + ring(1, i) }),
			want{interval: 4e-6, channels: "V_C/V"}},
		{"ns in a units row", "Time,V_C\nns,V\n" + lines(rows, func(i int) string { return at(i, 400, 0) + "," + ring(1, i) }),
			want{interval: 400e-9, channels: "V_C/V"}},
		{"us in the preamble", "Horizontal Units,us\nTime,V_C\n" + lines(rows, func(i int) string { return at(i, 0.4, 1) + "," + ring(1, i) }),
			want{interval: 0.4e-6, channels: "V_C/"}},
		{"time column last", "V_C (V),time (us)\n" + lines(rows, func(i int) string { return ring(1, i) + "," + at(i, 0.4, 1) }),
			want{interval: 0.4e-6, channels: "V_C/V"}},
		{"six significant digits", "time (s),V_C (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%.6g,%s", 0.9+float64(i)*1e-6, ring(1, i)) }),
			want{start: 0.9, interval: 1e-6, channels: "V_C/V"}},
		{"all digits of a float64", "time (s),V_C (V)\n" + lines(rows, func(i int) string {
			return strconv.FormatFloat(float64(i)*0.4e-6-1e-5, 'g', -1, 64) + "," + ring(1, i)
		}), want{start: -1e-5, interval: 0.4e-6, channels: "V_C/V"}},
		{"ISO stamps", header + stamped("2006-01-02T15:04:05.000000Z", noon, 4*time.Microsecond), want{interval: 4e-6, channels: "V_C/V"}},
		{"ISO stamps over noon with offset", header + stamped("2006-01-02 15:04:05.000000+01:00", noon, 4*time.Microsecond), want{interval: 4e-6, channels: "V_C/V"}},
		{"day first", header + stamped("02.01.2006 15:04:05.000000", noon, 4*time.Microsecond), want{interval: 4e-6, channels: "V_C/V"}},
		{"month first over midnight", header + stamped("1/2/2006  15:04:05.000000", time.Date(2031, 3, 14, 23, 59, 59, 999_900_000, time.UTC), 4*time.Microsecond),
			want{interval: 4e-6, channels: "V_C/V"}},
		{"twelve hours", header + stamped("1/2/2006 3:04:05.000000 PM", noon, 4*time.Microsecond), want{interval: 4e-6, channels: "V_C/V"}},
		{"clock time alone", header + stamped("15:04:05.000000", noon, 4*time.Microsecond), want{interval: 4e-6, channels: "V_C/V"}},
		{"clock time over midnight", header + stamped("15:04:05.000000", midnight, 4*time.Microsecond),
			want{interval: 4e-6, channels: "V_C/V", findings: "uneven-time", check: has(UnevenTime, Note, "pass midnight", "24 h")}},
		{"twelve hours over midnight", header + stamped("03:04:05.000000 PM", midnight, 4*time.Microsecond),
			want{interval: 4e-6, channels: "V_C/V", findings: "uneven-time", check: has(UnevenTime, Note, "pass midnight", "24 h")}},
		{"date and clock in columns of their own", "date;clock;V_C (V)\n" + strings.ReplaceAll(stamped("2006-01-02;15:04:05.000000", noon, 4*time.Microsecond), ",", ";"),
			want{interval: 4e-6, channels: "V_C/V"}},
		{"stamps too coarse, interval declared", "delta t,2.500000E-6\ntime,V_C (V)\n" + stamped("1/2/2006 15:04:05.000000", noon, 2500*time.Nanosecond),
			want{interval: 2.5e-6, channels: "V_C/V", findings: "coarse-time", check: has(CoarseTime, Note, "printed to 1 µs", "2.5 µs")}},
		{"stamps that never change, interval declared", "delta t,2.5E-6\ntime,V_C (V)\n" + stamped("1/2/2006 15:04:05", noon.Truncate(time.Second), 2500*time.Nanosecond),
			want{interval: 2.5e-6, channels: "V_C/V", findings: "coarse-time", check: has(CoarseTime, Note, "never change")}},
		{"stamps that change once, interval declared", "Sample interval,4E-6\ntime (s),V_C (V)\n" + lines(rows, func(i int) string { return at(i, 4e-6, 4) + "," + ring(1, i) }),
			want{interval: 4e-6, channels: "V_C/V", findings: "coarse-time", check: has(CoarseTime, Note, "printed to 100 µs")}},
		{"printed to 1 ms, 1.92 ms a sample", "time (s),V_C (V)\n" + lines(rows, func(i int) string { return ms(float64(i)*1.92e-3) + "," + ring(1, i) }),
			want{interval: 1.92e-3, channels: "V_C/V", findings: "coarse-time", check: has(CoarseTime, Warning, "printed to 1 ms")}},
		{"printed to 1 ms, rate declared", "Sample rate,520.833333 Hz\ntime (s),V_C (V)\n" + lines(rows, func(i int) string { return ms(float64(i)*1.92e-3) + "," + ring(1, i) }),
			want{interval: 1 / 520.833333, channels: "V_C/V", findings: "coarse-time", check: has(CoarseTime, Note, "printed to 1 ms")}},
		{"interval of the preamble contradicts", "Sample Interval,8e-6\ntime (s),V_C (V)\n" + lines(rows, func(i int) string { return at(i, 4e-6, 6) + "," + ring(1, i) }),
			want{interval: 4e-6, channels: "V_C/V", findings: "coarse-time", check: has(CoarseTime, Warning, "declares 8 µs", "4 µs apart")}},
		{"a time column for each channel", "TimeV_S\tAmplitudeV_S\tTimeV_C\tAmplitudeV_C\t\t\r\n\r\n" + lines(rows, func(i int) string {
			return at(i, 4e-6, 6) + "\t" + ring(1, i) + "\t" + at(i, 4e-6, 6) + "\t" + ring(2, i)
		}), want{interval: 4e-6, channels: "V_S/ V_C/", findings: "coarse-time"}},
	} {
		t.Run(c.name, func(t *testing.T) { understand(t, c.text, Options{}, c.w) })
	}
}

// An interval of the caller's that the stamps contradict: the trigger, which is the
// zero of time, stays at its sample.
func TestIntervalAgainstStamps(t *testing.T) {
	// stamps of 0.4 us from the number of the first sample on, with a row left out.
	stamps := func(first float64, without int) string {
		text := "Time (us),V_C (V)\n"
		for i := range rows {
			n := first + float64(i)
			if i >= without {
				n++
			}
			text += fmt.Sprintf("%.1f,%s\n", 0.4*n, ring(1, i))
		}
		return text
	}
	gap := make([]float64, rows)
	for i := range gap {
		gap[i] = float64(i-20) * 1e-6
		if i >= 40 {
			gap[i] += 1e-6
		}
	}
	contradicts := has(CoarseTime, Warning, "--interval gives 1 µs", "400 ns apart", "the given interval is used")
	for _, c := range []struct {
		name, text string
		w          want
	}{
		{"the trigger in the record", stamps(-20, rows), want{start: -20e-6}},
		{"the trigger before the record", stamps(50, rows), want{start: 20e-6}},
		{"the trigger behind the record", stamps(-rows-9, rows), want{start: -4e-6 - (rows-1)*1e-6}},
		{"the trigger between two samples", stamps(-20.25, rows), want{start: -20.25e-6}},
		{"a row missing", stamps(-20, 40), want{start: -20e-6, times: gap, findings: "coarse-time missing-samples"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			c.w.interval, c.w.channels, c.w.check = 1e-6, "V_C/V", contradicts
			if c.w.findings == "" {
				c.w.findings = "coarse-time"
			}
			understand(t, c.text, Options{Interval: 1e-6}, c.w)
		})
	}
}

// A unit of time of the caller's wins over that of the file, which is said; but not
// over that of each stamp.
func TestTimeUnitGiven(t *testing.T) {
	plain := lines(rows, func(i int) string { return at(i, 4, 0) + "," + ring(1, i) })
	override := has(CoarseTime, Note, "gives its times in ms and --time-unit in us", "the given unit is used")
	for _, c := range []struct {
		name, text string
		w          want
	}{
		{"in the heading", "Time (ms),V_C (V)\n" + plain, want{findings: "coarse-time", check: override}},
		{"in the preamble", "Horizontal Units,ms\nTime,V_C (V)\n" + plain, want{findings: "coarse-time", check: override}},
		{"in each cell", "Time,V_C (V)\n" + strings.ReplaceAll(plain, ",", "us,"), want{findings: "coarse-time", check: has(CoarseTime, Note, "Each stamp", "--time-unit us is not used")}},
		{"the same", "Time (us),V_C (V)\n" + plain, want{}},
		{"nowhere", "Time,V_C (V)\n" + plain, want{}},
	} {
		t.Run(c.name, func(t *testing.T) {
			c.w.interval, c.w.channels = 4e-6, "V_C/V"
			understand(t, c.text, Options{TimeUnit: "us"}, c.w)
		})
	}
}

// Stamps that are not even are kept as they are.
func TestUnevenTime(t *testing.T) {
	us := func(i int) float64 { return float64(i) * 0.4 }
	r := rand.New(rand.NewPCG(1, 1))
	jitter := make([]float64, rows)
	for i := range jitter {
		jitter[i] = math.Round(1000*(us(i)+0.02*r.NormFloat64())) / 1000
	}
	for _, c := range []struct {
		name     string
		time     func(i int) float64 // us
		interval float64             // us; 0: that of the least-squares line
		findings string
		check    func(*testing.T, *Capture)
	}{
		{"one row missing", func(i int) float64 { return us(i + i/41) }, 0.4, "missing-samples", has(MissingSamples, Warning, "1 row of time", "before sample 42", "16.8 µs")},
		{"two gaps", func(i int) float64 { return us(i + 5*(i/20)) }, 0.4, "missing-samples", has(MissingSamples, Warning, "10 rows", "2 gaps", "before sample 21")},
		{"a stamp repeated", func(i int) float64 { return us(i - i/30) }, 0.4, "uneven-time", has(UnevenTime, Warning, "1 stamp repeats")},
		{"jitter", func(i int) float64 { return jitter[i] }, 0, "uneven-time", has(UnevenTime, Note, "steps scatter")},
		{"much jitter", func(i int) float64 { return us(i) + 0.15*float64(i%2) }, 0, "uneven-time", has(UnevenTime, Warning, "steps scatter")},
		{"a clock that slows down", func(i int) float64 { return us(i) + 0.001*float64(i*i) }, 0, "uneven-time", has(UnevenTime, Note, "steps")},
	} {
		t.Run(c.name, func(t *testing.T) {
			times := make([]float64, rows)
			text := "time (us),V_C (V)\n" + lines(rows, func(i int) string {
				s := strconv.FormatFloat(c.time(i), 'f', 3, 64)
				times[i] = number(s + "e-6")
				return s + "," + ring(1, i)
			})
			interval := c.interval * 1e-6
			if interval == 0 {
				numbers := make([]float64, rows)
				for i := range numbers {
					numbers[i] = float64(i)
				}
				_, interval = stat.LinearRegression(numbers, times, nil, false)
			}
			understand(t, text, Options{}, want{start: times[0], interval: interval, times: times,
				channels: "V_C/V", findings: c.findings, check: c.check})
		})
	}
	t.Run("whole numbers, one row missing", func(t *testing.T) {
		times := make([]float64, rows)
		for i := range times {
			times[i] = float64(i+i/41) * 1e-6
		}
		text := "time (us),V_C (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d,%s", i+i/41, ring(1, i)) })
		understand(t, text, Options{}, want{interval: 1e-6, times: times, channels: "V_C/V",
			findings: "missing-samples", check: has(MissingSamples, Warning, "1 row of time missing")})
		text = "Sample Interval,1e-6\nsample,V_C (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d,%s", i+i/41, ring(1, i)) })
		understand(t, text, Options{}, want{interval: 1e-6, times: times, channels: "V_C/V",
			findings: "missing-samples", check: has(MissingSamples, Warning, "1 row", "before sample 42")})
	})
}

// The interval of a record with breaks is that of its steps, and not its length
// over its samples.
func TestNominalInterval(t *testing.T) {
	for _, c := range []struct {
		name     string
		time     func(i int) float64 // us
		places   int
		interval float64 // us
		within   float64 // of it
		findings string
		check    func(*testing.T, *Capture)
	}{
		{"a row missing in a coarse print", func(i int) float64 { return 4.13 * float64(i+i/200) }, 1, 4.13, 1e-5, "missing-samples", has(MissingSamples, Warning, "1 row")},
		{"three rows missing in a coarse print", func(i int) float64 { return 4.13 * float64(i+i/100) }, 1, 4.13, 1e-5, "missing-samples", has(MissingSamples, Warning, "3 rows", "3 gaps")},
		{"bursts far apart", func(i int) float64 { return 4*float64(i%100) + 123457.3*float64(i/100) }, 1, 4, 1e-12, "missing-samples", has(MissingSamples, Warning, "3 gaps")},
		{"jitter and a row missing", func(i int) float64 { return 4*float64(i+i/200) + 0.1*math.Sin(float64(i*i)) }, 4, 4, 1e-4, "missing-samples uneven-time",
			has(MissingSamples, Warning, "1 row of time", "before sample 201")},
		{"a row written twice and a row missing", func(i int) float64 { return 4.1 * float64(i+i/200-i/300) }, 1, 4.1, 1e-12, "missing-samples uneven-time",
			has(UnevenTime, Warning, "1 stamp repeats")},
	} {
		t.Run(c.name, func(t *testing.T) {
			const n = 400
			stamp := func(i int) string { return strconv.FormatFloat(c.time(i), 'f', c.places, 64) }
			text := "time (us),V_C (V)\n" + lines(n, func(i int) string { return stamp(i) + "," + ring(1, i) })
			x, err := Read(strings.NewReader(text), "loop 07.csv", Options{})
			if err != nil {
				t.Fatal(err)
			}
			var codes []string
			for _, f := range x.Findings {
				codes = append(codes, string(f.Code))
			}
			if got := strings.Join(codes, " "); got != c.findings {
				t.Errorf("findings %v, want %s", x.Findings, c.findings)
			}
			c.check(t, x)
			a := x.Channels[0].Axis
			if math.Abs(a.Interval-c.interval*1e-6) > c.within*a.Interval {
				t.Errorf("interval %v, want %v us (%s)", a.Interval, c.interval, a.Source)
			}
			if a.N != n || len(a.Times) != n {
				t.Fatalf("%d samples, %d true times", a.N, len(a.Times))
			}
			for i, v := range a.Times {
				if s := number(stamp(i) + "e-6"); math.Abs(v-s) > 0.6*math.Pow10(-c.places-6) {
					t.Fatalf("time of sample %d is %v, printed %v", i, v, s)
				}
			}
		})
	}
}

// A clock that passes midnight in a record of many chunks, twice.
func TestMidnights(t *testing.T) {
	const n = 60000
	first := time.Date(2031, 3, 4, 23, 0, 0, 0, time.UTC)
	stamp := func(i int) string { return first.Add(time.Duration(i) * 2 * time.Second).Format("15:04:05.000") }
	text := "time,V_C (V)\n" + lines(n, func(i int) string { return stamp(i) + "," + ring(1, i%500) })
	c, err := Read(strings.NewReader(text), "loop 07.csv", Options{})
	if err != nil {
		t.Fatal(err)
	}
	if a := c.Channels[0].Axis; a.N != n || a.Times != nil || a.Start != 0 || a.Interval != 2 {
		t.Errorf("axis %+v", a)
	}
	has(UnevenTime, Note, "48 h")(t, c)
}

// The stamps of a long record are not kept, whatever their print; what is
// decided from the sums of the chunks is what the stamps themselves tell.
func TestLongRecords(t *testing.T) {
	const n = 60000 // 1.2 MB: five blocks
	for _, c := range []struct {
		name   string
		stamp  func(i int) string
		uneven bool
		code   Code
		dt     float64
	}{
		{"progression", func(i int) string { return at(i, 4e-7, 7) }, false, "", 4e-7},
		{"engineering exponents", func(i int) string { return fmt.Sprintf("%.4fE-06", float64(i)*0.4) }, false, "", 4e-7},
		{"coarse", func(i int) string { return at(i, 1.92e-3, 3) }, false, CoarseTime, 1.92e-3},
		{"coarser than the interval", func(i int) string { return at(i, 0.3e-3, 3) }, false, CoarseTime, 0.3e-3},
		{"one row missing", func(i int) string { return at(i+i/40000, 4e-7, 7) }, true, MissingSamples, 4e-7},
		{"one row missing of whole numbers", func(i int) string { return at(i+i/40000, 1e-6, 6) }, true, MissingSamples, 1e-6},
		{"a step between two blocks of drift", func(i int) string { return at(i, 4e-7+2e-13*float64(i), 9) }, true, UnevenTime, 4e-7 + 2e-13*(n-1)},
	} {
		t.Run(c.name, func(t *testing.T) {
			text := "time (s),V_C (V)\n" + lines(n, func(i int) string { return c.stamp(i) + "," + ring(1, i%1000) })
			x, err := Read(strings.NewReader(text), "loop 07.csv", Options{})
			if err != nil {
				t.Fatal(err)
			}
			a := x.Channels[0].Axis
			if a.N != n || (a.Times != nil) != c.uneven || math.Abs(a.Interval-c.dt) > 1e-7*c.dt {
				t.Errorf("%d samples, uneven %v, interval %v, want %d, %v, %v (%s)", a.N, a.Times != nil, a.Interval, n, c.uneven, c.dt, a.Source)
			}
			if c.code != "" && (len(x.Findings) != 1 || x.Findings[0].Code != c.code) || c.code == "" && x.Findings != nil {
				t.Errorf("findings %v, want %s", x.Findings, c.code)
			}
			for i, v := range x.Channels[0].Samples {
				if v != number(ring(1, i%1000)) {
					t.Fatalf("sample %d is %v", i, v)
				}
				if s := number(c.stamp(i)); math.Abs(a.Time(i)-s) > 0.6*a.Resolution+3e-4*c.dt {
					t.Fatalf("time of sample %d is %v, printed %v", i, a.Time(i), s)
				}
			}
		})
	}
}
