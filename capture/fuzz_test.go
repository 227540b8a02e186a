package capture

import (
	"bytes"
	"errors"
	"math"
	"strconv"
	"strings"
	"testing"
)

// FuzzNumber: every cell that strconv reads as a decimal number is read, to the
// same bits, whatever stands behind it; and no other is, except that strconv
// also knows hexadecimal, underscores and words.
func FuzzNumber(f *testing.F) {
	for _, s := range []string{
		"0", "-0", "00.000024400000", "-00.0000244", "+808.000E-06", "1e22", "1e23", "9007199254740993", "9007199254740993e-5",
		"1.7976931348623157e308", "1.7976931348623159e308", "4.9e-324", "2.4703282292062327e-324", "12345678901234567890123",
		"0.00000000000000000000000000012345678901234567", "8.5e-9", "123456781234567812.345678e-3", ".5", "5.", "1e", "e5", "-", "",
		"3.14159265358979323846264338327950288", "1.5E+3", "1e999999999999", "0e-99999999", "7.2057594037927933e16",
	} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		d, ok := parseDecimal([]byte(s), '.')
		x, err := strconv.ParseFloat(s, 64)
		if errors.Is(err, strconv.ErrRange) {
			err = nil
		}
		plain := strings.Trim(s, "0123456789+-.eE") == ""
		if ok != (err == nil && plain) {
			t.Fatalf("%q: read %v, strconv says %v", s, ok, err)
		}
		if !ok {
			return
		}
		if v := d.float(0, []byte(s), '.'); math.Float64bits(v) != math.Float64bits(x) {
			t.Errorf("%q: %v (%x), strconv %v (%x)", s, v, math.Float64bits(v), x, math.Float64bits(x))
		}
		// A power of ten of the unit goes into the exponent, not into a second rounding.
		if !strings.ContainsAny(s, "eE") {
			y, err := strconv.ParseFloat(s+"e-3", 64)
			if v := d.float(-3, []byte(s), '.'); err == nil && v != y {
				t.Errorf("%q milli: %v, strconv %v", s, v, y)
			}
		}
		comma := strings.Replace(s, ".", ",", 1)
		d, ok = parseDecimal([]byte(comma), ',')
		if v := d.float(0, []byte(comma), ','); !ok || math.Float64bits(v) != math.Float64bits(x) {
			t.Errorf("%q: %v, %v", comma, v, ok)
		}
	})
}

// texts are the beginnings of the fuzzers' texts: one of each kind of layout.
func texts() []string {
	short := func(i int) string { return at(i, 0.4, 1) + "," + ring(1, i) }
	return []string{
		"time (us),V_C (V)\n" + lines(8, short),
		"\ufefft [ms];U [V]\r\n" + strings.ReplaceAll(lines(8, func(i int) string { return "0,2" + at(i, 1, 0) + ";1,5" }), "\n", "\r\n"),
		"\xff\xfet\x00,\x00V\x00\n\x001\x00,\x002\x00\n\x00",
		"X,CH1,Start,Increment,\nSequence,Volt,-1e-3,4e-6,\n" + lines(8, func(i int) string { return at(i, 1, 0) + ",1.25,,," }),
		"Source,AA,,0.0,1\nSample Interval,1e-6,,1.0,2\n" + lines(8, func(i int) string { return ",,," + at(i+2, 1, 1) + ",3" }),
		"# Sampling interval: 4 us\n# Units: mV\n" + lines(8, func(i int) string { return "1.5  2.5" }),
		"t,V\n" + lines(8, func(i int) string { return "3/4/2031 11:59:59.99990" + at(i, 1, 0) + ",1.25e-3" }),
		"time\tV\tremark\n" + lines(8, func(i int) string { return at(i, 4, 3) + "us\t--- \t\"a\tb\"" }),
		"t,a,b,c\n" + lines(8, func(i int) string { return `"1,00` + at(i, 1, 0) + `.5",1,0,` }),
		"CH1\n\r\r\n" + lines(8, func(i int) string { return "17" }),
		"a (us),A,b (us),B\n" + lines(12, func(i int) string { return short(i) + []string{"," + short(i), ",,", ""}[i/5] }),
		"\"t\n(us)\",\"V\n(mV)\"\n" + lines(8, func(i int) string { return "[" + at(i, 1.5, 1) + ", \u22121.2D-3]," }),
		"t;V\n" + lines(40, func(i int) string { return "23:59:59," + at(7+i/2, 1, 0) + ";" + at(i%2, 1.5, 1) }),
		"0,1\n" + lines(8, func(i int) string { return "\"" + at(i, 1, 0) + ".000,5\";1 234,5 mV" }),
		"t V\n" + lines(8, func(i int) string { return at(i, 1, 0) + ",5 us 0" + at(i, 1, 0) + ",25 mV" }),
		"1 0.1 2 0.3\n2 0.1 3 0.4\n3 0.1 1 0.2\n4 0.1 2 0.3\n5 0.1 3 0.4\n6 0.1 1 0.2\n",
		"Sample Rate,2,500,000 Sa/s\nDecimation,10\nmV/count,20\nSample,CH1\n" + lines(8, func(i int) string { return at(i, 10, 0) + ",1" + at(i, 1, 0) }),
		"Date,Time,ms,V\n" + lines(8, func(i int) string { return "2031-03-04,12:00:0" + at(i/2, 1, 0) + "," + at(i%2, 500, 0) + ",1.5" }),
		"Year,Month,Day,Hour,Minute,Second,V\n" + lines(8, func(i int) string { return "2031,3,4,12,0," + at(i, 1, 0) + ",1.5" }),
		"\"t (min),V\"\n" + lines(8, func(i int) string { return "\"" + at(i, 1, 1) + ",1.5\"" }) + "\"Mean,1.5\"\n",
		"t,V\n" + lines(8, func(i int) string { return at(i, 1, 0) + ",1.5" }) + "t,V\n" + lines(8, func(i int) string { return at(i, 1, 0) + ",1.5" }),
		"t,V\n" + lines(8, func(i int) string {
			return "-1 days +23:59:5" + at(i, 1, 0) + ",0\n20310304T12000" + at(i, 1, 0) + "Z,1mV"
		}),
		"t,ch,V\n" + lines(8, func(i int) string { return at(i, 1, 0) + ",A,1.5\n" + at(i, 1, 0) + ",B,1.5" }),
		"# name: t\n1\n2\n3\n4\n5\n6\n\n# name: v\n1\n2\n3\n4\n5\n6\n",
		"loop 07\ntime,s,0,1,2,3,4,5,6,7,8,9,10,11,12,13,14,15,16\nV,mV" + strings.Repeat(",0.5,-0.25", 8) + ",1\n",
		"\x1f\x8b\x08\x00", "PK\x03\x04", "%PDF", "", "\n\n", "a,b\n", "1\n", ",,,\n,,,\n", "time,V\n1,2\n1,3\n0,4\n",
	}
}

// FuzzLayout: whatever the head of a text is, a layout is found or refused with
// one line, and what is found holds together.
func FuzzLayout(f *testing.F) {
	for _, s := range texts() {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		h, refusal := newHead(bytes.Clone(b), true)
		if refusal != nil {
			oneLine(t, refusal)
			return
		}
		if h.first < 0 || h.first >= len(h.lines) {
			t.Fatalf("first row %d of %d lines", h.first, len(h.lines))
		}
		d, refusal := design(h, Options{Interval: 1})
		if refusal != nil {
			oneLine(t, refusal)
			return
		}
		if d.plan.values == 0 || d.plan.last >= len(d.plan.steps) {
			t.Fatalf("plan %+v", d.plan)
		}
		for _, c := range d.columns {
			if c.Role == "" || c.Why == "" {
				t.Errorf("column %d has no role or no why", c.Number)
			}
		}
	})
}

func oneLine(t *testing.T, err error) {
	t.Helper()
	if s := err.Error(); s == "" || strings.ContainsAny(s, "\n\r") {
		t.Errorf("error %q is not one line", s)
	}
}

// FuzzRead: any bytes give a capture that holds together, or one line of error.
func FuzzRead(f *testing.F) {
	for _, s := range texts() {
		f.Add([]byte(s), 0.0, "")
	}
	f.Add([]byte(texts()[0]), 1e-6, "us")
	f.Fuzz(func(t *testing.T, b []byte, interval float64, unit string) {
		opt := Options{Interval: interval, TimeUnit: unit}
		if opt.check() != nil {
			opt = Options{}
		}
		c, err := Read(bytes.NewReader(b), "-", opt)
		if err != nil {
			oneLine(t, err)
			var e *Error
			if !errors.As(err, &e) || e.Err == nil {
				t.Errorf("error of the kind %T: %v", err, err)
			}
			return
		}
		holdsTogether(t, c)
	})
}

// holdsTogether checks what the types of a capture promise.
func holdsTogether(t *testing.T, c *Capture) {
	t.Helper()
	if len(c.Channels) == 0 || len(c.SHA256) != 64 {
		t.Fatalf("%d channels, digest %q", len(c.Channels), c.SHA256)
	}
	for i, ch := range c.Channels {
		a := ch.Axis
		if ch.Number != i+1 || ch.Name == "" || a.N != len(ch.Samples) || a.N < fewestRows {
			t.Errorf("channel %d %q of %d samples on an axis of %d", ch.Number, ch.Name, len(ch.Samples), a.N)
		}
		if !(a.Interval > 0) || math.IsInf(a.Interval, 0) || math.IsNaN(a.Start) || math.IsInf(a.Start, 0) {
			t.Errorf("axis from %v every %v (%s)", a.Start, a.Interval, a.Source)
		}
		if a.Times != nil && len(a.Times) != a.N {
			t.Errorf("%d times of %d", len(a.Times), a.N)
		}
		for k := range a.Times {
			if k > 0 && !(a.Times[k] >= a.Times[k-1]) {
				t.Fatalf("time %v of sample %d after %v", a.Times[k], k, a.Times[k-1])
			}
		}
		for _, v := range ch.Samples {
			if math.IsInf(v, 0) {
				t.Fatalf("sample %v", v)
			}
		}
	}
	var b bytes.Buffer
	if err := c.Explain(&b); err != nil || b.Len() == 0 {
		t.Error(err)
	}
	for _, f := range c.Findings {
		if f.Message == "" || f.Remedy == "" || strings.ContainsAny(f.Message, "\n\r") {
			t.Errorf("finding %q", f)
		}
	}
}
