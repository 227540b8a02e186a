package capture

import (
	"bytes"
	"compress/gzip"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
)

// good is a text without fault, to break in one place.
func good(n int) []string {
	text := "time (us),CH1 (V),CH2 (V)\n" + lines(n, func(i int) string { return at(i, 0.4, 1) + "," + ring(1, i%500) + "," + ring(2, i%500) })
	return strings.SplitAfter(text, "\n")
}

// broken replaces a line, counted from 1.
func broken(n, number int, text string) string {
	l := good(n)
	l[number-1] = text + "\n"
	return strings.Join(l, "")
}

func TestBadInput(t *testing.T) {
	var spreadsheet = "PK\x03\x04\x14\x00\x06\x00\x08\x00\x00\x00!\x00[Content_Types].xml"
	var zipped bytes.Buffer
	z := gzip.NewWriter(&zipped)
	z.Write([]byte(strings.Join(good(100), "")))
	z.Close()
	for _, c := range []struct {
		name, text   string
		err          error
		line, column int
		message      string
	}{
		{"empty", "", ErrNoData, 0, 0, "no samples: found an empty file, expected columns of samples"},
		{"blank lines", "\n\n \n", ErrNoData, 0, 0, "no samples: found nothing but blank lines, expected columns of samples"},
		{"header only", "time (s),V_C (V)\n", ErrNoData, 0, 0, `no samples: found 1 line from "time (s),V_C (V)" on without a row of numbers, expected columns of samples`},
		{"prose", "Dear colleague,\nthe loop rings at 125 kHz.\nRegards\n", ErrNoData, 0, 0, `no samples: found 3 lines from "Dear colleague," on without a row of numbers, expected columns of samples`},
		{"binary", "\x00\x01\x02\x03abc\x00", ErrNotText, 0, 0, "not a text file: found binary data, expected text with columns of samples"},
		{"binary after a text", "time,V\n" + strings.Repeat("\x00\x01", 10), ErrNotText, 0, 0, "not a text file: found binary data, expected text with columns of samples"},
		{"spreadsheet", spreadsheet, ErrNotText, 0, 0, "not a text file: found a spreadsheet (save it as text: comma-separated values), expected text with columns of samples"},
		{"zip", "PK\x03\x04\x14\x00\x00\x00loop07.csv", ErrNotText, 0, 0, "not a text file: found a zip archive (unpack it first), expected text with columns of samples"},
		{"image", "\x89PNG\r\n\x1a\n", ErrNotText, 0, 0, "not a text file: found a PNG image, expected text with columns of samples"},
		{"document", "%PDF-1.7\n", ErrNotText, 0, 0, "not a text file: found a PDF document, expected text with columns of samples"},
		{"web page", "\n<!DOCTYPE html><html>", ErrNotText, 0, 0, "not a text file: found a web page, expected text with columns of samples"},
		{"gzip cut off", zipped.String()[:zipped.Len()/2], ErrNotText, 0, 0, "not a text file: found a damaged or cut-off gzip file (unexpected EOF), expected text with columns of samples"},
		{"not a number", broken(2000, 1502, "600.0,0.1,x7.2"), ErrSyntax, 1502, 3, `line 1502, column 3: found "x7.2", expected a number`},
		{"not a number in the head", broken(60, 22, "8.0,0.1.2,0.3"), ErrSyntax, 22, 2, `line 22, column 2: found "0.1.2", expected a number`},
		{"not a number in the first row", broken(60, 2, "0.0,x,0.3"), ErrSyntax, 2, 2, `line 2, column 2: found "x", expected a number`},
		{"not a number in the second row", broken(60, 3, "0.4,0.1,x"), ErrSyntax, 3, 3, `line 3, column 3: found "x", expected a number`},
		{"not a time", broken(2000, 1502, "noon,0.1,0.2"), ErrSyntax, 1502, 1, `line 1502, column 1: found "noon", expected a time as a number`},
		{"no time", broken(2000, 1502, ",0.1,0.2"), ErrSyntax, 1502, 1, `line 1502, column 1: found an empty cell, expected a time as a number`},
		{"row too short", broken(2000, 1502, "600.0,0.1"), ErrSyntax, 1502, 0, `line 1502: found a row of 2 cells, expected 3`},
		{"row too long", broken(2000, 1502, "600.0,0.1,0.2,0.3"), ErrSyntax, 1502, 0, `line 1502: found a row of 4 cells, expected 3`},
		{"words between the samples", broken(2000, 1502, "second record"), ErrSyntax, 1502, 1, `line 1502, column 1: found "second record", expected a time as a number`},
		{"time backwards", broken(2000, 1502, "500.0,0.1,0.2"), ErrBackwards, 1502, 0, `line 1502: time runs backwards: found 500 µs after 599.6 µs, expected a later time`},
		{"clock time backwards", "time,V (V)\n" + lines(rows, func(i int) string { return fmt.Sprintf("12:00:%02d.5,%s", i%40, ring(1, i)) }),
			ErrBackwards, 42, 0, `line 42: time runs backwards: found "12:00:00.5" after "12:00:39.5"; the time begins anew once, expected one record: cut the file before this line`},
		{"samples without their time beside others that have it", "time (us),A (V),time (us),B (V)\n" + lines(2000, func(i int) string {
			if i == 1500 {
				return at(i, 4, 1) + "," + ring(1, i) + ",," + ring(2, i)
			}
			return at(i, 4, 1) + "," + ring(1, i) + "," + at(i, 2, 1) + "," + ring(2, i)
		}), ErrSyntax, 1502, 3, "line 1502, column 3: found an empty cell, expected a time as a number"},
		{"two records in one file", strings.Join(good(600), "") + strings.Join(good(600)[1:], ""), ErrBackwards, 602, 0, `line 602: time runs backwards: found 0 s after 239.6 µs; the time begins anew once, expected one record: cut the file before this line`},
		{"cut off in the middle of a row", strings.Join(good(100), "") + "40.0,0.1", ErrSyntax, 102, 0, `line 102: found a row of 2 cells, expected 3`},
		{"two samples", strings.Join(good(2), ""), ErrTooFew, 0, 0, "too few samples: found 2 rows, expected at least 6: a decay has five unknowns"},
		{"the same time throughout", "time (s),V (V)\n" + strings.Repeat("1.5,0.25\n", 20), ErrNoTime, 0, 1, "column 1: no time axis: found 1.5 s in every row, expected a time that rises"},
		{"no interval", "CH1\n" + lines(rows, func(i int) string { return ring(1, i) }), ErrNoTime, 0, 0, "no time axis: found no time column, and no sampling interval in the preamble, expected one of them, or --interval"},
		{"an interval that is none", "loop 07\nSample Interval,4 ticks\nCH1\n" + lines(rows, func(i int) string { return ring(1, i) }), ErrNoTime, 2, 0, `line 2: no time axis: found "4 ticks" for the sampling interval or rate, expected a number greater than zero with its unit, or --interval`},
		{"an interval of zero", "Sample Interval,0\nCH1\n" + lines(rows, func(i int) string { return ring(1, i) }), ErrNoTime, 1, 0, `line 1: no time axis: found "0" for the sampling interval or rate, expected a number greater than zero with its unit, or --interval`},
		{"a driven sweep", "Frequency (kHz),V_C (dB)\n" + lines(rows, func(i int) string { return fmt.Sprint(100+i) + "," + ring(1, i) }), ErrNoData, 0, 0, "no samples: found columns of frequency, response, expected samples over time, not over frequency"},
		{"decimal commas between commas", "t,V_C\n" + lines(rows, func(i int) string { return comma(fourth(i)) + "," + comma(ring(1, i)) }), ErrSyntax, 2, 0, `line 2: found "0,0,1,78300", where commas part cells and fractions alike, expected semicolons or tabs between the cells`},
		{"words behind the numbers of a column", "time (us),V_C\n" + lines(rows, func(i int) string { return fourth(i) + "," + ring(1, i) + " V?" }), ErrSyntax, 2, 2, `line 2, column 2: found "1.78300 V?", expected a number`},
		{"segments that each begin at zero", "Segment,Time (us),V_C\n" + lines(rows, func(i int) string { return fmt.Sprint(i/30, ",", fourth(i%30), ",", ring(1, i)) }), ErrBackwards, 32, 0, "line 32: time runs backwards: found 0 s after 116 µs; the time begins anew once, expected one record: cut the file before this line"},
		{"only a count", "n,CH1\n" + lines(rows, func(i int) string { return at(i, 1, 0) + "," + ring(1, i) }), ErrNoTime, 0, 0, "no time axis: found only a count of samples in column 1, and no sampling interval in the preamble, expected one of them, or --interval"},
		{"nothing but over-range marks", "time (us),V (V)\n" + lines(rows, func(i int) string { return at(i, 0.4, 1) + ",---" }), ErrNoData, 0, 2, "column 2: no samples: found 60 samples missing or over range, expected numbers"},
		{"only time", "time (s)\n" + lines(rows, func(i int) string { return at(i, 1, 1) }), ErrNoData, 0, 0, "no samples: found a time column and nothing beside it, expected a column of voltage or current"},
		{"rows of two numbers below many of one", "# Sampling interval: 4 us\n" + lines(90000, func(i int) string { return ring(1, i%500) }) + "time,V\n" + lines(rows, func(i int) string { return at(i, 4, 1) + "," + ring(1, i) }),
			ErrSyntax, 90003, 1, `line 90003, column 1: found "0.0,1.78300", expected a number`},
	} {
		t.Run(c.name, func(t *testing.T) {
			x, err := Read(strings.NewReader(c.text), "loop 07.csv", Options{})
			var e *Error
			if !errors.As(err, &e) {
				t.Fatalf("%v, %v", x, err)
			}
			if !errors.Is(err, c.err) || e.Line != c.line || e.Column != c.column {
				t.Errorf("%v at line %d, column %d, want %v at %d, %d", e.Err, e.Line, e.Column, c.err, c.line, c.column)
			}
			if got := err.Error(); got != "loop 07.csv: "+c.message {
				t.Errorf("message\n%s, want\nloop 07.csv: %s", got, c.message)
			}
			if strings.Contains(err.Error(), "\n") {
				t.Error("more than one line")
			}
		})
	}
}

// A line of the real length of a deep record without line ends must not fill
// the memory.
func TestEndlessLine(t *testing.T) {
	for name, head := range map[string]string{"from the start": "", "after a header and samples": strings.Join(good(30000), "")} {
		t.Run(name, func(t *testing.T) {
			var before, after runtime.MemStats
			runtime.ReadMemStats(&before)
			endless := io.LimitReader(&repeater{text: "0.25,"}, 1<<30)
			_, err := Read(io.MultiReader(strings.NewReader(head), endless), "loop 07.csv", Options{})
			var e *Error
			if !errors.As(err, &e) || !strings.Contains(err.Error(), "more than 256 KiB without a line end") || e.Line != strings.Count(head, "\n")+1 {
				t.Fatal(err)
			}
			runtime.ReadMemStats(&after)
			if grown := after.TotalAlloc - before.TotalAlloc; grown > 64<<20 {
				t.Errorf("%d bytes allocated", grown)
			}
		})
	}
}

type repeater struct {
	text string
	at   int
}

func (r *repeater) Read(p []byte) (int, error) {
	for i := range p {
		p[i] = r.text[r.at]
		r.at = (r.at + 1) % len(r.text)
	}
	return len(p), nil
}

// Errors of the system are no *Error: they say nothing of the file's text.
func TestSystemErrors(t *testing.T) {
	var e *Error
	dir := t.TempDir()
	if _, err := ReadFile(dir, Options{}); err == nil || errors.As(err, &e) {
		t.Errorf("directory: %v", err)
	}
	if _, err := ReadFile(filepath.Join(dir, "none.csv"), Options{}); !errors.Is(err, fs.ErrNotExist) || errors.As(err, &e) {
		t.Errorf("no file: %v", err)
	}
	text := strings.Join(good(30000), "")
	torn := io.MultiReader(strings.NewReader(text), brokenReader{})
	if _, err := Read(torn, "-", Options{}); !errors.Is(err, errTorn) || errors.As(err, &e) {
		t.Errorf("broken stick: %v", err)
	}
}

var errTorn = errors.New("input/output error")

type brokenReader struct{}

func (brokenReader) Read([]byte) (int, error) { return 0, errTorn }

func TestFileThatChanges(t *testing.T) {
	name := filepath.Join(t.TempDir(), "loop 07.csv")
	text := strings.Join(good(40000), "")
	for what, change := range map[string]func() error{
		"shrinks": func() error { return os.Truncate(name, int64(len(text)/2/26*26)) },
		"grows": func() error {
			f, err := os.OpenFile(name, os.O_APPEND|os.O_WRONLY, 0)
			if err != nil {
				return err
			}
			defer f.Close()
			_, err = f.WriteString("16000.0,0.1,0.2\n")
			return err
		},
	} {
		t.Run(what, func(t *testing.T) {
			if err := os.WriteFile(name, []byte(text), 0o600); err != nil {
				t.Fatal(err)
			}
			changed := false
			_, err := ReadFile(name, Options{Progress: func(done, total int64) {
				if !changed && done < total {
					changed = true
					if err := change(); err != nil {
						t.Error(err)
					}
				}
			}})
			if !changed {
				t.Fatal("read before it could change")
			}
			if !errors.Is(err, ErrChanged) && !errors.Is(err, ErrSyntax) {
				t.Errorf("%v", err)
			}
		})
	}
}
