package capture

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// why asks for words in the reason for a column's role; columns count from 1.
func why(column int, words ...string) func(*testing.T, *Capture) {
	return func(t *testing.T, c *Capture) {
		t.Helper()
		for _, w := range words {
			if got := c.Layout.Columns[column-1].Why; !strings.Contains(got, w) {
				t.Errorf("column %d: %q, without %q", column, got, w)
			}
		}
	}
}

// Codes of a converter become volts where the preamble says what one is worth.
func TestCodes(t *testing.T) {
	code := func(i int) float64 { return math.Round(30 * number(ring(1, i))) }
	is := func(f func(code float64) float64) func(_, i int) float64 {
		return func(_, i int) float64 { return f(code(i)) }
	}
	text := func(preamble string, zero int) string {
		return preamble + "Sample Interval,4us\nCH1\n" + lines(rows, func(i int) string { return fmt.Sprint(code(i) + float64(zero)) })
	}
	volts := want{channels: "CH1/V", value: is(func(x float64) float64 { return x * 0.02 }), check: why(1, "0.02 V each (line 1)", "no code of zero")}
	same := want{channels: "CH1/counts", value: is(func(x float64) float64 { return x }), check: why(1, "nothing says how many volts")}
	from := volts
	from.check = why(1, "0.02 V each (line 1), counted from 128 (line 2)")
	of := func(channels string, scale float64, words ...string) want {
		return want{channels: channels, value: is(func(x float64) float64 { return x * scale }), check: why(1, words...)}
	}
	readOdd(t, []odd{
		{"volts per count", text("Volts per count,0.02\n", 0), Options{}, volts},
		{"volts per code", text("Volts per ADC code: 20 mV\n", 0), Options{}, volts},
		{"the unit of the key", text("mV/LSB = 20\n", 0), Options{}, volts},
		{"the unit in brackets", text("Vertical scale (V/count),0.02\n", 0), Options{}, volts},
		{"the unit of the value", text("Vertical gain,20 mV/LSB\n", 0), Options{}, volts},
		{"LSB in volts", text("LSB,0.02 V\n", 0), Options{}, volts},
		{"an increment with its unit", text("Y Increment (V),0.02\n", 0), Options{}, volts},
		{"an increment and a unit of the axis", text("Y Increment,0.02\nY Unit,V\n", 0), Options{}, volts},
		{"amperes", text("A/count,0.004\n", 0), Options{}, of("CH1/A", 0.004, "0.004 A each (line 1)")},
		{"millivolts of the axis", text("Y Increment,20\nY Unit,mV\n", 0), Options{}, volts},
		{"from the code of zero", text("Volts per count,0.02\nZero code,128\n", 128), Options{}, from},
		{"volts and counts per division", text("Volts per division,0.5\nCounts per division,25\n", 0), Options{}, of("CH1/V", 0.02, "0.02 V each (lines 1 and 2)")},
		{"V/div and codes/div", text("V/div: 500 mV\ncodes/div: 25\n", 0), Options{}, of("CH1/V", 0.02, "0.02 V each (lines 1 and 2)")},
		{"a column that says counts", "mV/count,20\nTime (us),CH1 (counts)\n" + lines(rows, func(i int) string { return fourth(i) + "," + fmt.Sprint(code(i)) }), Options{},
			want{channels: "CH1/V", value: volts.value}},
		{"each channel its own", "Channel,CH1,CH2\nV/count,0.02,0.05\nIndex,CH1,CH2\n" + lines(rows, func(i int) string { return fmt.Sprint(i, ",", code(i), ",", code(i)) }),
			Options{Interval: 4e-6}, want{channels: "CH1/V CH2/V", value: func(ch, i int) float64 { return code(i) * []float64{0.02, 0.05}[ch-1] }}},
		{"no scale", text("", 0), Options{}, same},
		{"a scale without a unit", text("Y Increment,0.02\n", 0), Options{}, same},
		{"volts per division alone", text("Volts per division,0.5\n", 0), Options{}, same},
		{"vertical scale alone", text("Vertical Scale,0.5\n", 0), Options{}, same},
		{"a scale in seconds", text("Y Increment,0.02 s\n", 0), Options{}, same},
		{"numbers that are volts already", "Y Increment,0.02\nVertical Units,V\nSample Interval,4us\nCH1\n" + lines(rows, func(i int) string { return ring(1, i) }), Options{}, want{channels: "CH1/V"}},
		{"volts after a long quiet", "Y Increment,0.02\nVertical Units,mV\nSample Interval,4us\nCH1\n" + lines(400, func(int) string { return "0" }) + lines(rows, func(i int) string { return ring(1, i) }), Options{},
			want{n: 400 + rows, channels: "CH1/V", value: func(_, i int) float64 {
				if i < 400 {
					return 0
				}
				return number(ring(1, i-400)) * 1e-3
			}}},
		{"a heading that says volts", "Volts per count,0.02\nTime (us),CH1 (V)\n" + lines(rows, func(i int) string { return fourth(i) + "," + fmt.Sprint(code(i)) }), Options{},
			want{channels: "CH1/V", value: is(func(x float64) float64 { return x })}},
	})
}
