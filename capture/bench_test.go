package capture

import (
	"bufio"
	"bytes"
	"compress/gzip"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"testing"
)

// deep makes n rows of a layout.
func deep(n int, header string, row func(b *strings.Builder, i int)) []byte {
	var b strings.Builder
	b.WriteString(header)
	for i := range n {
		row(&b, i)
	}
	return []byte(b.String())
}

func volts(i int) float64 {
	t := float64(i) * 2e-3
	return 4*math.Exp(-t/400)*math.Cos(0.785*t) + 0.001*float64(i*7919%17-8)
}

var benchLayouts = []struct {
	name, header string
	row          func(b *strings.Builder, i int)
}{
	{"time,value", "time (s),V_C (V)\n", func(b *strings.Builder, i int) { fmt.Fprintf(b, "%.12f,%.8f\n", float64(i-1000)*2e-9, volts(i)) }},
	{"exponents", "s,V\n", func(b *strings.Builder, i int) { fmt.Fprintf(b, "%+.6E,%+.6E\n", float64(i-1000)*2e-9, volts(i)) }},
	{"all digits", "time (s),V_C (V)\n", func(b *strings.Builder, i int) {
		b.WriteString(strconv.FormatFloat(float64(i)*2e-9, 'g', -1, 64) + "," + strconv.FormatFloat(volts(i), 'g', -1, 64) + "\n")
	}},
	{"codes", "Sampling Period,4.000us\n", func(b *strings.Builder, i int) { fmt.Fprintf(b, "%d\n", int(volts(i)*8000)) }},
	{"four channels, semicolon, decimal comma", "t [us];A;B;C;D\n", func(b *strings.Builder, i int) {
		v := strings.ReplaceAll(fmt.Sprintf("%.4f", volts(i)), ".", ",")
		fmt.Fprintf(b, "%d,%03d;%s;%s;%s;%s\n", i/1000, i%1000, v, v, v, v)
	}},
	{"metadata beside, padded", "", func(b *strings.Builder, i int) {
		beside := ","
		if i < 2 {
			beside = []string{"Sample Interval,2e-09", "Horizontal Units,s"}[i]
		}
		fmt.Fprintf(b, "%s,,%017.12f,%10.5f,\n", beside, float64(i)*2e-9, volts(i))
	}},
	{"date-time stamps", "time,V_C (V)\n", func(b *strings.Builder, i int) {
		fmt.Fprintf(b, "2031-03-04 11:%02d:%02d.%06d,%.6f\n", i/60000000, i/1000000%60, i%1000000, volts(i))
	}},
	{"jittered stamps", "time (us),V_C (V)\n", func(b *strings.Builder, i int) {
		fmt.Fprintf(b, "%.3f,%.6f\n", float64(i)*0.4+0.01*float64(i*7919%13), volts(i))
	}},
	{"quoted", `"time (s)","V_C (V)"` + "\n", func(b *strings.Builder, i int) { fmt.Fprintf(b, `"%.9f","%.6f"`+"\n", float64(i)*2e-9, volts(i)) }},
}

const deepRows = 200_000

// BenchmarkRead gives the bytes per second of each layout.
func BenchmarkRead(b *testing.B) {
	for _, l := range benchLayouts {
		b.Run(l.name, func(b *testing.B) { benchRead(b, deep(deepRows, l.header, l.row)) })
	}
	b.Run("gzip", func(b *testing.B) {
		var z bytes.Buffer
		w := gzip.NewWriter(&z)
		w.Write(deep(deepRows, benchLayouts[0].header, benchLayouts[0].row))
		w.Close()
		benchRead(b, z.Bytes())
	})
}

func benchRead(b *testing.B, text []byte) {
	b.SetBytes(int64(len(text)))
	b.ReportAllocs()
	for b.Loop() {
		if _, err := read(bytes.NewReader(text), "loop 07.csv", int64(len(text)), Options{}); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkAgainst sets reading beside counting the lines of the same text and
// beside what a short script would do: a line scanner and strconv.
func BenchmarkAgainst(b *testing.B) {
	text := deep(2*deepRows, benchLayouts[0].header, benchLayouts[0].row)
	b.Run("counting lines", func(b *testing.B) {
		b.SetBytes(int64(len(text)))
		buf := make([]byte, blockSize)
		for b.Loop() {
			r, n := bytes.NewReader(text), 0
			for {
				k, err := r.Read(buf)
				n += bytes.Count(buf[:k], []byte{'\n'})
				if err == io.EOF {
					break
				}
			}
			if n != 2*deepRows+1 {
				b.Fatal(n)
			}
		}
	})
	b.Run("bufio and strconv", func(b *testing.B) {
		b.SetBytes(int64(len(text)))
		for b.Loop() {
			if times, values := scriptRead(b, text); len(times) != len(values) || len(values) != 2*deepRows {
				b.Fatal(len(values))
			}
		}
	})
	b.Run("this package", func(b *testing.B) { benchRead(b, text) })
}

func scriptRead(b *testing.B, text []byte) (times, values []float64) {
	s := bufio.NewScanner(bytes.NewReader(text))
	s.Scan()
	for s.Scan() {
		left, right, _ := strings.Cut(s.Text(), ",")
		t, err1 := strconv.ParseFloat(left, 64)
		v, err2 := strconv.ParseFloat(right, 64)
		if err1 != nil || err2 != nil {
			b.Fatal(err1, err2)
		}
		times, values = append(times, t), append(values, v)
	}
	return times, values
}

// BenchmarkSmall is a capture of 2,500 samples, of which a bench makes thousands.
func BenchmarkSmall(b *testing.B) {
	for _, l := range benchLayouts[:1] {
		benchRead(b, deep(2500, l.header, l.row))
	}
}

// BenchmarkPass is the data pass alone, on one processor: what a row costs.
func BenchmarkPass(b *testing.B) {
	text := deep(9000, benchLayouts[0].header, benchLayouts[0].row)
	h, refusal := newHead(text[:len(text):len(text)], true)
	if refusal != nil {
		b.Fatal(refusal)
	}
	d, refusal := design(h, Options{})
	if refusal != nil {
		b.Fatal(refusal)
	}
	start := h.lines[h.first].offset
	s := &scanner{p: &d.plan, h: h, src: &source{meter: &meter{}}, store: store{columns: 1}, rowLen: 26}
	c := s.chunk(text[start:], 0)
	b.SetBytes(int64(len(c.text)))
	w := d.plan.worker()
	for b.Loop() {
		c.rows = 0
		d.plan.read(c, w)
		if c.err != nil || c.rows != 9000 {
			b.Fatal(c.err)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/9000, "ns/row")
}
