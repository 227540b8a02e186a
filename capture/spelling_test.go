package capture

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"
	"time"
)

// grouped writes a whole number in groups of three digits.
func grouped(n int, sep string) string {
	if n < 1000 {
		return fmt.Sprint(n)
	}
	return fmt.Sprintf("%s%s%03d", grouped(n/1000, sep), sep, n%1000)
}

// Numbers as they are printed elsewhere than in English and C.
func TestSpellings(t *testing.T) {
	pair := func(i int) string { return fourth(i) + "," + ring(1, i) }
	german := func(time func(i int) string) string {
		return "Zeit/ns;CH1/V\n" + lines(rows, func(i int) string { return time(i) + ";" + comma(ring(1, i)) })
	}
	ch1 := want{channels: "CH1/V"}
	ns := want{interval: 4e-7, channels: "CH1/V"}
	fortran := func(v float64) string { return strings.Replace(fmt.Sprintf("%.9E", v), "E", "D", 1) }
	head := "Time (us),CH1 (V)\n"
	readOdd(t, []odd{
		{"exponents of Fortran", "# time (s)   CH1 (V)\n" + lines(rows, func(i int) string { return "  " + fortran(float64(i)*4e-6) + "  " + fortran(number(ring(1, i))) }), Options{}, ch1},
		{"small exponents of Fortran, no names", lines(rows, func(i int) string {
			return strings.ToLower(fortran(float64(i)*4e-6) + " " + fortran(number(ring(1, i))))
		}),
			Options{}, want{channels: "channel_1/", findings: "coarse-time"}},
		{"exponents behind decimal commas", "Zeit [s];CH1 [V]\n" + lines(rows, func(i int) string { return comma(fmt.Sprintf("%.1E;%.5E", float64(i)*4e-4, number(ring(1, i)))) }),
			Options{}, want{interval: 4e-4, channels: "CH1/V", findings: "coarse-time"}},
		{"minus signs of typesetters", head + lines(rows, func(i int) string { return strings.Replace(pair(i), "-", "\u2212", 1) }), Options{}, ch1},
		{"dashes of a code page", head + lines(rows, func(i int) string { return strings.Replace(pair(i), "-", "\x96", 1) }), Options{}, ch1},
		{"negative zeros", head + lines(rows, func(i int) string {
			if i > 50 {
				return fourth(i) + ",-0.00000"
			}
			return pair(i)
		}), Options{}, want{channels: "CH1/V", value: func(_, i int) float64 {
			if i > 50 {
				return 0
			}
			return number(ring(1, i))
		}}},
		{"thousands in points", german(func(i int) string { return grouped(400*i, ".") + ",0" }), Options{}, ns},
		{"whole thousands in points", german(func(i int) string { return grouped(400*i, ".") }), Options{}, ns},
		{"thousands in quotes, some of them", german(func(i int) string { return `"` + grouped(400*i, ".") + `,0"` }), Options{}, ns},
		{"thousands in apostrophes", german(func(i int) string { return grouped(400*i, "'") + ",0" }), Options{}, ns},
		{"thousands in fixed blanks", german(func(i int) string { return grouped(400*i, "\u00a0") + ",0" }), Options{}, ns},
		{"thousands in fixed blanks of Latin-1", german(func(i int) string { return grouped(400*i, "\xa0") + ",0" }), Options{}, ns},
		{"thousands in blanks between tabs", strings.ReplaceAll(german(func(i int) string { return grouped(400*i, " ") + ",0" }), ";", "\t"), Options{}, ns},
		{"thousands in commas between semicolons", "t (ns);CH1 (V)\n" + lines(rows, func(i int) string { return grouped(400*i, ",") + ".0;" + ring(1, i) }), Options{}, ns},
		{"two columns of whole numbers between blanks are no thousands", "t (us) CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d %d", 100+4*i, 200+i*7%100) }),
			Options{}, want{start: 100e-6, channels: "CH1/V", value: func(_, i int) float64 { return float64(200 + i*7%100) }}},
		{"decimal commas with three places in quotes", "t (us),CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf(`"%d,000","%d,%03d"`, 4*i+4, i%3+1, i*37%1000) }),
			Options{}, want{start: 4e-6, channels: "CH1/V", value: func(_, i int) float64 { return number(fmt.Sprintf("%d.%03d", i%3+1, i*37%1000)) }}},
		{"decimal commas with three places between tabs", "t (us)\tCH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d,000\t%d,%03d", 4*i+4, i%3+1, i*37%1000) }),
			Options{}, want{start: 4e-6, channels: "CH1/V", value: func(_, i int) float64 { return number(fmt.Sprintf("%d.%03d", i%3+1, i*37%1000)) }}},
		{"one column with decimal commas", "CH1 (V)\n" + lines(rows, func(i int) string { return comma(ring(1, i)) }), Options{Interval: 4e-6}, ch1},
		{"a count and padded codes between commas", "n,CH1\n" + lines(rows, func(i int) string { return fmt.Sprintf("%d,%04d", i, i*37%1000) }),
			Options{Interval: 4e-6}, want{channels: "CH1/counts", value: func(_, i int) float64 { return float64(i * 37 % 1000) }}},
		{"units of several sizes", "t,CH1\n" + lines(rows, func(i int) string {
			t, v := fmt.Sprintf("%dns", 400*i), ring(1, i)+"V"
			if i > 2 {
				t = at(i, 0.4, 1) + "us"
			}
			if i%2 == 0 {
				v = strconv.FormatFloat(1000*number(ring(1, i)), 'f', 2, 64) + " mV"
			}
			return t + "," + v
		}), Options{}, ns},
		{"prefixes without units", "Time,CH1 (V)\n" + lines(rows, func(i int) string { return fourth(i) + "u," + ring(1, i) + "m" }), Options{}, want{channels: "CH1/V", value: scaled(-3)}},
		{"times with a blank and their unit", "Time,CH1\n" + lines(rows, func(i int) string { return fourth(i) + " µs," + ring(1, i) + " V" }), Options{}, ch1},
	})
}

func TestOddStamps(t *testing.T) {
	noon := time.Date(2031, 3, 4, 11, 59, 59, 999_900_000, time.UTC)
	stamped := func(format string) func(i int) string {
		return func(i int) string { return noon.Add(time.Duration(4*i) * time.Microsecond).Format(format) }
	}
	table := func(sep string, stamp func(i int) string) string {
		return "time" + sep + "CH1 [V]\n" + lines(rows, func(i int) string { return stamp(i) + sep + ring(1, i) })
	}
	ch1 := want{channels: "CH1/V"}
	ms := want{interval: 4e-3, channels: "CH1/V"}
	hour := ms
	hour.findings, hour.check = "uneven-time", has(UnevenTime, Note, "pass the full hour", "1 h")
	readOdd(t, []odd{
		{"names of months", table(",", stamped("02-Jan-2006 15:04:05.000000")), Options{}, ch1},
		{"names of months in German", table(";", func(i int) string { return strings.Replace(stamped("2.Jan.2006 15:04:05.000000")(i), "Mar", "Mär", 1) }), Options{}, ch1},
		{"year first between strokes", table(",", stamped("2006/01/02 15:04:05.000000")), Options{}, ch1},
		{"decimal comma", comma(strings.ReplaceAll(table(";", stamped("02/01/2006 15:04:05.000000")), "CH1 [V]", "CH1 [V]")), Options{}, ch1},
		{"minutes and seconds", table(",", func(i int) string { return fmt.Sprintf("59:%02d.%03d", i*4/1000, i*4%1000) }), Options{}, ms},
		{"minutes and seconds over the full hour", table(",", func(i int) string { return minutes(4*i - 100) }), Options{}, hour},
		{"a colon before the milliseconds", table(",", func(i int) string { return fmt.Sprintf("12:00:00:%03d", 4*i) }), Options{}, ms},
		{"seconds of the epoch", "time (s),CH1 (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("1930000000.%06d,%s", 4*i, ring(1, i)) }),
			Options{}, want{start: 1930000000, interval: 4e-6, channels: "CH1/V"}},
	})
}

// minutes writes milliseconds after the full hour as a clock that shows no hours.
func minutes(ms int) string {
	ms = (ms + 3600_000) % 3600_000
	return fmt.Sprintf("%02d:%02d.%03d", ms/60000, ms/1000%60, ms%1000)
}

// A cell of two numbers is refused wherever it stands, and read nowhere as the first.
func TestTwoNumbersInACell(t *testing.T) {
	for _, sep := range []string{",", ";", "\t"} {
		for _, tail := range []string{"", sep, sep + "note", sep + sep} {
			text := "Time (us)" + sep + "CH1 (V)" + tail + "\n" + lines(2*rows, func(i int) string {
				cell := ring(1, i)
				if i == 40 {
					cell = "1.5 2.5"
				}
				return fourth(i) + sep + cell + tail
			})
			_, err := Read(strings.NewReader(text), "loop 07.csv", Options{})
			if err == nil || !strings.Contains(err.Error(), `line 42, column 2: found "1.5 2.5", expected a number`) {
				t.Errorf("%q, %q: %v", sep, tail, err)
			}
		}
	}
}

func TestMarksInDialects(t *testing.T) {
	for text, x := range map[string]float64{
		"1.234,5": 1234.5, "1.234.567": 1234567, "1 234,5": 1234.5, "-1'234,5": -1234.5, "1,25D-03": 1.25e-3, "\u22121,5": -1.5, "1.234": 1234,
	} {
		d := dialect{';', ','}
		n, digits, ok := d.number(cell{text: []byte(text)})
		if v := n.float(0, digits, ','); !ok || math.Float64bits(v) != math.Float64bits(x) {
			t.Errorf("%q: %v, %v, want %v", text, v, ok, x)
		}
	}
	for _, text := range []string{"208,", "1.23,5", "12.34", "0.123,5", "1 23", "1D5", "D3", "--5", "1,2,3", "1234.567", ""} {
		d := dialect{';', ','}
		if n, digits, ok := d.number(cell{text: []byte(text)}); ok {
			t.Errorf("%q: read as %v", text, n.float(0, digits, ','))
		}
	}
	// Between semicolons 1,234 may be a decimal comma.
	if n, _, ok := (dialect{';', '.'}).number(cell{text: []byte("1,234")}); ok {
		t.Errorf("1,234 read as %v", n)
	}
}
