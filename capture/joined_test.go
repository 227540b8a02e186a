package capture

import (
	"fmt"
	"strings"
	"testing"
	"time"
)

// Dates, clock times and fractions of the second in columns of their own.
func TestStampsInColumns(t *testing.T) {
	begin := time.Date(2031, 3, 4, 11, 59, 59, 0, time.UTC)
	// stamped writes rows every so often from a time on, in a format, the ring behind it.
	stamped := func(format string, from, every time.Duration, sep string, digits int, unit time.Duration) string {
		return lines(rows, func(i int) string {
			s := begin.Add(from + time.Duration(i)*every)
			cells := []string{s.Format(format)}
			if digits > 0 {
				cells = append(cells, fmt.Sprintf("%0*d", digits, s.Nanosecond()/int(unit)))
			}
			return strings.Join(append(cells, ring(1, i)), sep)
		})
	}
	of := func(interval float64, r string) want {
		return want{interval: interval, channels: "CH1/V", check: roles(r)}
	}
	fraction := func(row func(i int) string) string {
		return lines(rows, func(i int) string { return "2031-03-04,12:00:00," + row(i) + "," + ring(1, i) })
	}
	for _, c := range []struct {
		name, text string
		w          want
	}{
		{"date and clock", "Date,Time,CH1 (V)\n" + stamped("2006-01-02,15:04:05.000", 900*time.Millisecond, time.Millisecond, ",", 0, 0), of(1e-3, "time time channel")},
		{"clock and date", "Time,Date,CH1 (V)\n" + stamped("15:04:05.000,2006-01-02", 900*time.Millisecond, time.Millisecond, ",", 0, 0), of(1e-3, "time time channel")},
		{"date, clock and milliseconds", "Date,Time,Millisecond,CH1 (V)\n" + stamped("2006-01-02,15:04:05", 0, 100*time.Millisecond, ",", 1, time.Millisecond), of(0.1, "time time time channel")},
		{"the unit is the name", "Date\tTime\tms\tCH1 (V)\n" + stamped("02.01.2006\t15:04:05", 0, 70*time.Millisecond, "\t", 1, time.Millisecond), of(0.07, "time time time channel")},
		{"microseconds within a second", "Date;Time;us;CH1 (V)\n" + stamped("02.01.2006;15:04:05", 100*time.Millisecond, 4*time.Microsecond, ";", 1, time.Microsecond), of(4e-6, "time time time channel")},
		{"clock and milliseconds", "Time,ms,CH1 (V)\n" + stamped("15:04:05", 0, 150*time.Millisecond, ",", 3, time.Millisecond), of(0.15, "time time channel")},
		{"date and clock in one column, nanoseconds", "Stamp,ns,CH1 (V)\n" + stamped("2006-01-02 15:04:05", 999_999_900*time.Nanosecond, 400*time.Nanosecond, ",", 9, time.Nanosecond), of(4e-7, "time time channel")},
		{"a fraction of the second", "Date,Time,Fraction,CH1 (V)\n" + fraction(func(i int) string { return at(i, 4e-6, 6) }), of(4e-6, "time time time channel")},
		{"over midnight, the date counts", "Date,Time,CH1 (V)\n" + stamped("2006-01-02,15:04:05.0", 12*time.Hour-time.Second, 100*time.Millisecond, ",", 0, 0), of(0.1, "time time channel")},
		{"in the order of the afternoon", "Date Time Half CH1_(V)\n" + stamped("1/2/2006 3:04:05.000 PM", 900*time.Millisecond, 5*time.Millisecond, " ", 0, 0), of(5e-3, "time time time channel")},
		{"without names, the fraction begins anew with the second", stamped("2006-01-02,15:04:05", 0, 50*time.Millisecond, ",", 1, time.Millisecond),
			want{interval: 0.05, channels: "channel_1/", check: roles("time time time channel")}},
		{"without names, microseconds", stamped("15:04:05", 999_900*time.Microsecond, 4*time.Microsecond, "\t", 6, time.Microsecond),
			want{interval: 4e-6, channels: "channel_1/", check: roles("time time channel")}},
		{"a channel beside the clock that is no fraction", "Date,Time,CH1 (V)\n" + lines(rows, func(i int) string { return "2031-03-04,12:00:" + fmt.Sprintf("%02d", i) + "," + at(i, 0.01, 2) }),
			want{interval: 1, channels: "CH1/V", value: func(_, i int) float64 { return number(at(i, 0.01, 2)) }, check: roles("time time channel")}},
	} {
		t.Run(c.name, func(t *testing.T) { understand(t, c.text, Options{}, c.w) })
	}
}

// What is wrong with a stamp of several columns is shown with all of them.
func TestBrokenStampsInColumns(t *testing.T) {
	for name, c := range map[string]struct{ row, message string }{
		"no date":          {"never,12:00:01,40", `line 42, column 2: found "never 12:00:01 40", expected a date or clock time`},
		"too large":        {"2031-03-04,12:00:01,4000", `line 42, column 2: found "2031-03-04 12:00:01 4000", expected a date or clock time`},
		"a date backwards": {"2031-03-03,12:00:01,40", `line 42: time runs backwards: found "2031-03-03 12:00:01 40" after "2031-03-04 12:00:03 900", expected a later time`},
	} {
		t.Run(name, func(t *testing.T) {
			text := "Date,Time,ms,CH1 (V)\n" + lines(rows, func(i int) string {
				if i == 40 {
					return c.row + ",0.1"
				}
				return fmt.Sprintf("2031-03-04,12:00:%02d,%d,%s", i/10, i%10*100, ring(1, i))
			})
			_, err := Read(strings.NewReader(text), "-", Options{})
			if err == nil || err.Error() != "standard input: "+c.message {
				t.Errorf("%v, want %s", err, c.message)
			}
		})
	}
}
