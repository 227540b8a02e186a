package capture

import (
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// What is written in any mixture of separator, decimal mark, line end, unit
// and print comes back to the last bit.
func TestRoundTrip(t *testing.T) {
	prints := map[string]func(v float64) string{
		"fixed":       func(v float64) string { return strconv.FormatFloat(v, 'f', 9, 64) },
		"exponent":    func(v float64) string { return strconv.FormatFloat(v, 'E', 8, 64) },
		"shortest":    func(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) },
		"with signs":  func(v float64) string { return fmt.Sprintf("%+.7f", v) },
		"engineering": func(v float64) string { return fmt.Sprintf("%.6fE-03", v*1000) },
	}
	for _, sep := range []string{",", ";", "\t", "  ", "|"} {
		for _, mark := range []string{".", ","} {
			for _, end := range []string{"\n", "\r\n", "\r"} {
				for _, u := range []struct {
					time, value       string
					timeExp, valueExp int
				}{{"s", "V", 0, 0}, {"ms", "mV", -3, -3}, {"us", "kV", -6, 3}, {"ns", "uA", -9, -6}} {
					for how, print := range prints {
						quote := ""
						if sep == mark {
							quote = `"`
						}
						cell := func(v float64) (printed, text string) {
							printed = print(v)
							return printed, quote + strings.Replace(printed, ".", mark, 1) + quote
						}
						name := fmt.Sprintf("%q %q %q %s %s", sep, mark, end, u.time, how)
						var want []float64
						text := fmt.Sprintf("time_%s%sC1 (%s)%s", u.time, sep, u.value, end)
						if u.time == "s" {
							text = fmt.Sprintf("Time%sC1%ss%sV%s", sep, end, sep, end)
						}
						for i := range 20 {
							_, stamp := cell(float64(i-7) * 0.125)
							printed, value := cell(volts(i))
							want = append(want, scaledNumber(printed, u.valueExp))
							text += stamp + sep + value + end
						}
						c, err := Read(strings.NewReader(text), name, Options{})
						if err != nil {
							t.Fatalf("%v\n%s", err, text)
						}
						ch := c.Channels[0]
						scale := math.Pow10(-u.timeExp)
						if ch.Name != "C1" || math.Abs(ch.Axis.Start*scale+7*0.125) > 1e-12 || math.Abs(ch.Axis.Interval*scale-0.125) > 1e-12 || ch.Axis.Times != nil {
							t.Fatalf("%s: %q from %v every %v\n%s", name, ch.Name, ch.Axis.Start, ch.Axis.Interval, text)
						}
						for i, v := range ch.Samples {
							if v != want[i] {
								t.Fatalf("%s: sample %d is %v, want %v", name, i, v, want[i])
							}
						}
					}
				}
			}
		}
	}
}

// scaledNumber is the float64 nearest to a printed number times 10^exp.
func scaledNumber(printed string, exp int) float64 {
	mantissa, power, _ := strings.Cut(strings.ToLower(printed), "e")
	n := 0
	if power != "" {
		n, _ = strconv.Atoi(power)
	}
	return number(fmt.Sprintf("%se%d", mantissa, n+exp))
}

// Faults deep in a long text are found at their line, wherever the blocks that
// the workers read happen to end.
func TestFaultsInLongTexts(t *testing.T) {
	const n = 40000 // rows: 1 MB, four blocks
	l := good(n)
	for _, number := range []int{4, 9800, 9999, 10123, 20001, 33333, n, n + 1} {
		old := l[number-1]
		for _, fault := range []struct {
			text string
			err  error
		}{{"-0.05,1,1\n", ErrBackwards}, {"99999.9,1;1\n", ErrSyntax}, {"nothing here\n", ErrSyntax}} {
			l[number-1] = fault.text
			_, err := Read(strings.NewReader(strings.Join(l, "")), "loop 07.csv", Options{})
			var e *Error
			if number == n+1 && fault.text == "nothing here\n" && err == nil {
				continue // words at the end are a footer
			}
			if !errors.As(err, &e) || e.Err != fault.err || e.Line != number {
				t.Errorf("%q in line %d: %v", fault.text, number, err)
			}
		}
		l[number-1] = old
	}
}

// A file and a stream of unknown length give the same capture.
func TestFileAndStream(t *testing.T) {
	l := good(30000)
	text := strings.Join(l, "")
	name := filepath.Join(t.TempDir(), "loop 07.csv")
	if err := os.WriteFile(name, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	a, err := ReadFile(name, Options{})
	if err != nil {
		t.Fatal(err)
	}
	b, err := Read(strings.NewReader(text), name, Options{}) // of unknown length
	if err != nil {
		t.Fatal(err)
	}
	if a.SHA256 != b.SHA256 || !sameAxis(a.Channels[0].Axis, b.Channels[0].Axis) {
		t.Errorf("%+v and %+v", a.Channels[0].Axis, b.Channels[0].Axis)
	}
	for k := range a.Channels {
		if !sameValues(a.Channels[k].Samples, b.Channels[k].Samples) || len(a.Channels[k].Samples) != 30000 {
			t.Errorf("channel %d differs", k+1)
		}
	}
}

func TestOptions(t *testing.T) {
	for _, opt := range []Options{{Interval: -1}, {Interval: math.NaN()}, {Interval: math.Inf(1)}, {TimeUnit: "h"}} {
		var e *Error
		if _, err := Read(strings.NewReader(strings.Join(good(20), "")), "-", opt); err == nil || errors.As(err, &e) {
			t.Errorf("%+v: %v", opt, err)
		}
	}
}
