package capture

import (
	"fmt"
	"math"
	"math/cmplx"
	"strconv"
	"strings"
	"testing"
)

// A driven is the sweep of loop 07 with a source that sags near resonance, every
// number as it is printed.
type driven struct {
	f, source, out, m, phase, re, im []float64
}

const sweptRows = 41

func newDriven() *driven {
	d := &driven{}
	printed := func(x float64) float64 { return number(strconv.FormatFloat(x, 'g', 7, 64)) }
	for i := range sweptRows {
		f := 115e3 + 500*float64(i)
		h := 1 / complex(1-f*f/125e3/125e3, f/125e3/30)
		source := printed(1 - 0.2*math.Exp(-math.Pow((f-125e3)/3e3, 2)))
		d.f, d.source, d.m = append(d.f, f), append(d.source, source), append(d.m, printed(cmplx.Abs(h)))
		d.out, d.phase = append(d.out, printed(cmplx.Abs(h)*source)), append(d.phase, cmplx.Phase(h))
		d.re, d.im = append(d.re, printed(real(h))), append(d.im, printed(imag(h)))
	}
	return d
}

// tabled writes a heading and columns in a scale of their own, separated by commas.
func tabled(head string, columns ...func(i int) float64) string {
	return head + "\n" + lines(sweptRows, func(i int) string {
		var cells []string
		for _, c := range columns {
			cells = append(cells, strconv.FormatFloat(c(i), 'g', -1, 64))
		}
		return strings.Join(cells, ",")
	})
}

func timesAll(v []float64, k float64) func(i int) float64 {
	return func(i int) float64 { return v[i] * k }
}

func inDecibels(v []float64, zero float64) func(i int) float64 {
	return func(i int) float64 { return 20 * math.Log10(v[i]/zero) }
}

// want is what must be understood; nil slices must be nil.
type swept struct {
	f, m, phase, reference, deviation, clock []float64
	unit                                     string
	part                                     Part
	decibels                                 bool
}

func compareSwept(t *testing.T, s *Sweep, w swept) {
	t.Helper()
	for _, c := range []struct {
		name      string
		got, want []float64
		tolerance float64
	}{
		{"frequency", s.Frequency, w.f, 1e-12}, {"magnitude", s.Magnitude, w.m, 1e-9}, {"phase", s.Phase, w.phase, 1e-9},
		{"reference", s.Reference, w.reference, 1e-9}, {"deviation", s.Deviation, w.deviation, 1e-9}, {"clock", s.Clock, w.clock, 1e-12},
	} {
		if len(c.got) != len(c.want) || (c.got == nil) != (c.want == nil) {
			t.Errorf("%d values of %s, want %d", len(c.got), c.name, len(c.want))
			continue
		}
		for i, x := range c.want {
			off := math.Abs(c.got[i] - x)
			if c.name == "phase" {
				off = math.Abs(math.Remainder(c.got[i]-x, 2*math.Pi))
			}
			if !(off <= c.tolerance*math.Max(math.Abs(x), 1e-3)) {
				t.Errorf("%s %d is %v, want %v", c.name, i, c.got[i], x)
				break
			}
		}
	}
	if s.Unit != w.unit || s.Part != w.part || s.Decibels != w.decibels {
		t.Errorf("unit %q, part %q, decibels %v, want %q, %q, %v", s.Unit, s.Part, s.Decibels, w.unit, w.part, w.decibels)
	}
	if t.Failed() {
		var b strings.Builder
		s.Explain(&b)
		t.Log(b.String())
	}
}

// TestSweepUnits: every unit of frequency, response and phase that a table may name.
func TestSweepUnits(t *testing.T) {
	d := newDriven()
	type shape struct {
		name, text string
		w          swept
	}
	var all []shape
	gain := swept{f: d.f, m: d.m}
	for head, k := range map[string]float64{"f (kHz)": 1e-3, "Freq [MHz]": 1e-6, "Hz": 1, "kHz": 1e-3, "f_kHz": 1e-3, "f kHz": 1e-3, "f / kHz": 1e-3, "frequency in kHz": 1e-3,
		"FREQUENCY(KHZ)": 1e-3, "frequency (kilohertz)": 1e-3, "f (1/s)": 1, "omega (rad/s)": 2 * math.Pi, "w [rad/s]": 2 * math.Pi, "angular frequency (rad/s)": 2 * math.Pi,
		"ω (1/s)": 2 * math.Pi, "ω": 2 * math.Pi, "omega (krad/s)": 2e-3 * math.Pi, "frequency (rad/s)": 2 * math.Pi} {
		all = append(all, shape{head, tabled(head+",gain", timesAll(d.f, k), timesAll(d.m, 1)), gain})
	}
	all = append(all, shape{"unit of frequency in the preamble", "# Frequency unit: kHz\n" + tabled("f,gain", timesAll(d.f, 1e-3), timesAll(d.m, 1)), gain})
	level := swept{f: d.f, m: d.m, decibels: true}
	weak := swept{f: d.f, decibels: true}
	for _, m := range d.m {
		weak.m = append(weak.m, m/100)
	}
	for _, head := range []string{"gain (dB)", "Gain dB", "|H| [dB]", "H_dB", "20 log|H|", "20*log10(Vout/Vin)", "S21 (dB)", "dB", "Magnitude (decibels)", "DB(S21)", "gain in dB"} {
		all = append(all, shape{head, tabled("f (Hz),"+head, timesAll(d.f, 1), inDecibels(d.m, 1)), level})
	}
	for head, c := range map[string]struct {
		zero float64
		unit string
		part Part
	}{"Level (dBm)": {1, "sqrt(mW)", ""}, "V_C (dBV)": {1, "V", Capacitor}, "out (dBu)": {math.Sqrt(0.6), "V", ""}, "level (dBuV)": {1e-6, "V", ""}, "level [dBmV]": {1e-3, "V", ""}, "dBc": {1, "", ""}} {
		w := level
		w.unit, w.part = c.unit, c.part
		all = append(all, shape{head, tabled("f (Hz),"+head, timesAll(d.f, 1), inDecibels(d.m, c.zero)), w})
	}
	for head, c := range map[string]struct {
		scale float64
		unit  string
		part  Part
	}{"Vout/Vin (%)": {100, "", ""}, "gain [%]": {100, "", ""}, "gain (mV/V)": {1e3, "", ""}, "gain (V/V)": {1, "", ""}, "V_R (uV)": {1e6, "V", Resistor}, "V_C (Vpp)": {1, "V", Capacitor},
		"V_C (mVpp)": {1e3, "V", Capacitor}, "V_L (mV rms)": {1e3, "V", Inductor}, "|Z| (ohm)": {1, "ohm", ""}} {
		all = append(all, shape{head, tabled("f (Hz),"+head, timesAll(d.f, 1), timesAll(d.m, c.scale)), swept{f: d.f, m: d.m, unit: c.unit, part: c.part}})
	}
	all = append(all,
		shape{"power", tabled("f (Hz),power (mW)", timesAll(d.f, 1), func(i int) float64 { return 1e3 * d.m[i] * d.m[i] }), swept{f: d.f, m: d.m, unit: "sqrt(W)"}},
		shape{"attenuation", tabled("f (Hz),attenuation (dB)", timesAll(d.f, 1), func(i int) float64 { return -20 * math.Log10(d.m[i]/100) }), weak},
		shape{"a loss that is told as a gain", tabled("f (Hz),insertion loss (dB)", timesAll(d.f, 1), inDecibels(d.m, 100)), weak},
	)
	turned := swept{f: d.f, m: d.m, phase: d.phase}
	for head, k := range map[string]float64{"phase (deg)": 180 / math.Pi, "phase (rad)": 1, "phase (mrad)": 1e3, "phase (cycles)": 0.5 / math.Pi, "phase (turns)": 0.5 / math.Pi, "phase/pi": 1 / math.Pi,
		"phase/2pi": 0.5 / math.Pi, "phase (π rad)": 1 / math.Pi, "phase (gon)": 200 / math.Pi, "phase": 180 / math.Pi, "φ": 1, "Phase [Degree]": 180 / math.Pi, "arg(H)": 1, "phase in °": 180 / math.Pi} {
		all = append(all, shape{head, tabled("f (Hz),gain,"+head, timesAll(d.f, 1), timesAll(d.m, 1), timesAll(d.phase, k)), turned})
	}
	all = append(all,
		shape{"phase from 0 to 360", tabled("f (Hz),gain,phase (deg)", timesAll(d.f, 1), timesAll(d.m, 1), func(i int) float64 { return 360 + d.phase[i]*180/math.Pi }), turned},
		shape{"a unit of phase that nobody knows", tabled("f (Hz),gain,phase (mils)", timesAll(d.f, 1), timesAll(d.m, 1), timesAll(d.phase, 1018.6)), gain},
		shape{"a delay is no clock", tabled("f (Hz),gain,delay (us)", timesAll(d.f, 1), timesAll(d.m, 1), timesAll(d.phase, 1)), gain},
		shape{"units in a row of their own", tabled("f,V_C,phase\nkHz,mVpp,deg", timesAll(d.f, 1e-3), timesAll(d.m, 1e3), timesAll(d.phase, 180/math.Pi)), swept{f: d.f, m: d.m, phase: d.phase, unit: "V", part: Capacitor}},
	)
	for _, c := range all {
		t.Run(c.name, func(t *testing.T) { compareSwept(t, readSweep(t, c.text, SweepOptions{}), c.w) })
	}
}

// TestSweepShapes: complex responses, sources, places of columns.
func TestSweepShapes(t *testing.T) {
	d := newDriven()
	f, m, one := timesAll(d.f, 1), timesAll(d.m, 1), func(int) float64 { return 1 }
	reim := swept{f: d.f, phase: d.phase}
	var ones, clock, tenth []float64
	for i := range d.f {
		reim.m = append(reim.m, math.Hypot(d.re[i], d.im[i]))
		ones, clock, tenth = append(ones, 1), append(clock, 30*float64(i)), append(tenth, d.m[i]/10)
	}
	reim.phase = nil
	for i := range d.f {
		reim.phase = append(reim.phase, math.Atan2(d.im[i], d.re[i]))
	}
	unit := func(w swept, unit string, part Part) swept { w.unit, w.part = unit, part; return w }
	gain := swept{f: d.f, m: d.m}
	over := swept{f: d.f, m: d.out, reference: d.source, unit: "V"}
	type shape struct {
		name, text string
		w          swept
	}
	var all []shape
	for _, head := range []string{"re,im", "Re(H),Im(H)", "S21 Re,S21 Im", "Re S21,Im S21", "H_real,H_imag", "X,Y", "I,Q", "Re{H},Im{H}", "real part,imaginary part"} {
		all = append(all, shape{head, tabled("f (Hz),"+head, f, timesAll(d.re, 1), timesAll(d.im, 1)), reim})
	}
	for _, head := range []string{"V1 (V),V2 (V)", "CH1 (V),CH2 (V)", "Vin (V),Vout (V)", "input (V),output (V)", "drive (V),response (V)"} {
		all = append(all, shape{head, tabled("f (Hz),"+head, f, timesAll(d.source, 1), timesAll(d.out, 1)), over})
	}
	levels := over
	levels.decibels, levels.part = true, Capacitor
	pp := over
	pp.reference = nil
	for _, v := range d.source {
		pp.reference = append(pp.reference, 2*v)
	}
	all = append(all,
		shape{"resistance and reactance", tabled("f (Hz),R (ohm),X (ohm)", f, timesAll(d.re, 1), timesAll(d.im, 1)), unit(reim, "ohm", "")},
		shape{"conductance and susceptance", tabled("f (Hz),G (S),B (S)", f, timesAll(d.re, 1), timesAll(d.im, 1)), unit(reim, "S", "")},
		shape{"in phase, in quadrature, both and their angle", tabled("f (Hz),X (V),Y (V),R (V),Theta (deg)", f, timesAll(d.re, 1), timesAll(d.im, 1), m, timesAll(d.phase, 180/math.Pi)), unit(reim, "V", "")},
		shape{"two complex voltages", tabled("f (Hz),CH1 Re (V),CH1 Im (V),CH2 Re (V),CH2 Im (V)", f, one, func(int) float64 { return 0 }, timesAll(d.re, 1), timesAll(d.im, 1)), func() swept {
			w := unit(reim, "V", "")
			w.reference = ones
			return w
		}()},
		shape{"source in volts, response in millivolts", tabled("f (Hz),V_S (V),V_C (mV)", f, timesAll(d.source, 1), timesAll(d.out, 1e3)), unit(over, "V", Capacitor)},
		shape{"both in levels", tabled("f (Hz),V_S (dBV),V_C (dBV)", f, inDecibels(d.source, 1), inDecibels(d.out, 1)), levels},
		shape{"one in levels", tabled("f (Hz),V_S (V),V_C (dBV)", f, timesAll(d.source, 1), inDecibels(d.out, 1)), levels},
		shape{"levels of power, and volts", tabled("f (Hz),V_S (V),level (dBm)", f, timesAll(d.source, 1), inDecibels(d.out, 1)), swept{f: d.f, m: d.out, unit: "sqrt(mW)", decibels: true}},
		shape{"peak and peak to peak", tabled("f (Hz),Vin (Vpk),Vout (Vpp)", f, timesAll(d.source, 1), timesAll(d.out, 1)), pp},
		shape{"frequency last", tabled("V_C (V),f (kHz)", m, timesAll(d.f, 1e-3)), unit(gain, "V", Capacitor)},
		shape{"frequency last, no names", strings.TrimPrefix(tabled("", m, f), "\n"), gain},
		shape{"rows counted, no names", strings.TrimPrefix(tabled("", func(i int) float64 { return float64(i + 1) }, f, m), "\n"), gain},
		shape{"a mean of runs, and its deviation", tabled("f (Hz),run 1 (V),run 2 (V),mean (V),std (V)", f, timesAll(d.m, 0.9), timesAll(d.m, 1.1), m, timesAll(d.m, 0.1)), func() swept {
			w := unit(gain, "V", "")
			w.deviation = tenth
			return w
		}()},
		shape{"a deviation in per cent", tabled("f (Hz),V_C (V),std (%)", f, m, func(int) float64 { return 10 }), func() swept {
			w := unit(gain, "V", Capacitor)
			w.deviation = tenth
			return w
		}()},
		shape{"minutes", tabled("elapsed (min),f (Hz),V_C (V)", func(i int) float64 { return float64(i) / 2 }, f, m), func() swept {
			w := unit(gain, "V", Capacitor)
			w.clock = clock
			return w
		}()},
		shape{"a date and a clock", strings.ReplaceAll(tabled("date,time,f (Hz),V_C (V)", func(i int) float64 { return 0 }, func(i int) float64 { return float64(i) }, f, m), "\n0,", "\n2031-03-04,12:00:"), swept{}},
		shape{"a footer", tabled("f (Hz),V_C (V)", f, m) + "Mean,3.2\nend of sweep\n", unit(gain, "V", Capacitor)},
		shape{"lines in quotes", `"` + strings.TrimSuffix(strings.ReplaceAll(tabled("f (Hz),V_C (V)", f, m), "\n", "\"\n\""), `"`), unit(gain, "V", Capacitor)},
		shape{"an option line without a blank", "! sweep\n" + strings.ReplaceAll(tabled("#HZ S RI R 50", f, one, one, timesAll(d.re, 1), timesAll(d.im, 1), one, one, one, one), ",", " "), reim},
	)
	for _, c := range all {
		t.Run(c.name, func(t *testing.T) {
			s := readSweep(t, c.text, SweepOptions{})
			if c.w.f == nil { // clock times of two digits
				c.w = unit(gain, "V", Capacitor)
				for i := range d.f {
					c.w.clock = append(c.w.clock, float64(i))
				}
			}
			compareSwept(t, s, c.w)
			if c.name == "a footer" && s.Layout.FooterLine != sweptRows+2 {
				t.Errorf("footer in line %d", s.Layout.FooterLine)
			}
		})
	}
}

// What a sweep cannot be is refused with what was found.
func TestSweepShapesRefused(t *testing.T) {
	d := newDriven()
	f := timesAll(d.f, 1)
	for _, c := range []struct{ name, text, message string }{
		{"logarithms of frequencies", tabled("log10(f/Hz),gain", func(i int) float64 { return math.Log10(d.f[i]) }, timesAll(d.m, 1)), `line 1, column 1: found "log10(f/Hz)", expected frequencies and not their logarithms`},
		{"a row without frequency", "f,V_C\n0,1\n" + tabled("", f, timesAll(d.m, 1))[1:], "line 2, column 1: found 0, expected a frequency greater than zero"},
		{"numbers of two parts in one cell", "f (Hz),H\n" + lines(sweptRows, func(i int) string { return fmt.Sprintf("%g,%g%+gi", d.f[i], d.re[i], d.im[i]) }), `line 2, column 2: found "6.260851-1.249996i", expected numbers, real and imaginary part in columns of their own`},
		{"three complex voltages", tabled("f,a re,a im,b re,b im,c re,c im", f, f, f, f, f, f, f), `no samples: found several pairs of real and imaginary part: 1 "f", 2 "a re", 3 "a im", 4 "b re", 5 "b im", 6 "c re", 7 "c im", expected one, or a source and a response`},
		{"two that could be either", tabled("f,a re,a im,b re,b im", f, f, f, f, f), `no samples: found several pairs of real and imaginary part: 1 "f", 2 "a re", 3 "a im", 4 "b re", 5 "b im", expected one, or a source and a response`},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := ReadSweep(strings.NewReader(c.text), "sweep.csv", SweepOptions{})
			if err == nil || err.Error() != "sweep.csv: "+c.message {
				t.Errorf("%v, want %s", err, c.message)
			}
		})
	}
}
