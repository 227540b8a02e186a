package capture

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

// A sweptColumn is a column of a random table: what it is called, its unit, and its
// numbers as they are printed.
type sweptColumn struct {
	name, unit string
	print      func(i int) string
}

// A sweepMixture is a driven sweep in a table of random layout, and what it holds.
type sweepMixture struct {
	*rand.Rand
	d         *driven
	order     []int // of the rows
	sep, mark string
	columns   []sweptColumn
	text      strings.Builder
	w         swept
}

func (m *sweepMixture) one(of ...string) string { return of[m.IntN(len(of))] }

func (m *sweepMixture) some(n int) bool { return m.IntN(n) == 0 }

// TestSweepMixtures: what is written in a random mixture of units, columns and layout
// is read.
func TestSweepMixtures(t *testing.T) {
	for seed := range uint64(*mixtures) {
		m := &sweepMixture{Rand: rand.New(rand.NewPCG(seed, 11)), d: newDriven()}
		m.choose()
		m.write()
		t.Run(fmt.Sprint("mixture ", seed), func(t *testing.T) {
			s, err := ReadSweep(strings.NewReader(m.text.String()), "sweep.csv", SweepOptions{})
			if err != nil {
				t.Fatalf("%v\n%s", err, m.text.String()[:400])
			}
			if compareSwept(t, s, m.w); t.Failed() {
				t.Log(m.text.String()[:400])
			}
		})
	}
}

// add makes a column of the values times a factor and, for each row of the table, the
// values that must be understood.
func (m *sweepMixture) add(name, unit string, as func(x float64) float64, values []float64) (wanted []float64) {
	m.columns = append(m.columns, sweptColumn{name, unit, func(i int) string { return strconv.FormatFloat(as(values[m.order[i]]), 'g', 14, 64) }})
	for _, i := range m.order {
		wanted = append(wanted, values[i])
	}
	return wanted
}

func scaledBy(k float64) func(x float64) float64 { return func(x float64) float64 { return x * k } }

func decibelsOf(x float64) float64 { return 20 * math.Log10(x) }

func (m *sweepMixture) choose() {
	m.sep, m.mark = m.one(",", ";", "\t", "|", ";"), m.one(".", ".", ",")
	for i := range sweptRows {
		m.order = append(m.order, i)
	}
	switch m.IntN(4) {
	case 0:
		m.Shuffle(sweptRows, func(i, k int) { m.order[i], m.order[k] = m.order[k], m.order[i] })
	case 1:
		m.order = append(m.order, m.order[10:30]...)
	}
	if m.some(5) {
		m.columns = append(m.columns, sweptColumn{"No", "", func(i int) string { return fmt.Sprint(i + 1) }})
	}
	if m.some(5) {
		m.columns = append(m.columns, sweptColumn{"time", "s", func(i int) string { return fmt.Sprint(2 * i) }})
		for i := range m.order {
			m.w.clock = append(m.w.clock, 2*float64(i))
		}
	}
	f := [...]struct {
		name, unit string
		k          float64
	}{{"f", "kHz", 1e-3}, {"Frequency", "Hz", 1}, {"freq", "MHz", 1e-6}, {"omega", "rad/s", 2 * math.Pi}, {"Angular frequency", "krad/s", 2e-3 * math.Pi}, {"f", "Hz", 1}}[m.IntN(6)]
	m.w.f = m.add(f.name, f.unit, scaledBy(f.k), m.d.f)
	m.response()
	if m.some(4) {
		m.columns = append(m.columns, sweptColumn{"remark", "", func(i int) string { return []string{"ok", "range changed", "ok"}[i%3] }})
	}
	if m.some(3) { // the unit of a deviation tells whose it is
		m.Shuffle(len(m.columns), func(i, k int) { m.columns[i], m.columns[k] = m.columns[k], m.columns[i] })
	}
}

// response adds the columns of response, source and phase.
func (m *sweepMixture) response() {
	if m.some(5) {
		pair := [...][2]string{{"re", "im"}, {"Re(H)", "Im(H)"}, {"S21 real", "S21 imag"}}[m.IntN(3)]
		re, im := m.add(pair[0], "", scaledBy(1), m.d.re), m.add(pair[1], "", scaledBy(1), m.d.im)
		for i := range re {
			m.w.m, m.w.phase = append(m.w.m, math.Hypot(re[i], im[i])), append(m.w.phase, math.Atan2(im[i], re[i]))
		}
		return
	}
	if m.some(3) {
		k := [...]float64{1, 1e3}[m.IntN(2)]
		m.w.reference = m.add(m.one("V_S", "Vin", "source"), map[float64]string{1: "V", 1e3: "mV"}[k], scaledBy(k), m.d.source)
		m.w.m, m.w.unit, m.w.part = m.add("V_C", "mV", scaledBy(1e3), m.d.out), "V", Capacitor
	} else {
		r := [...]struct {
			name, unit string
			as         func(x float64) float64
			base       string
			part       Part
		}{{"gain", "dB", decibelsOf, "", ""}, {"V_C", "V", scaledBy(1), "V", Capacitor}, {"V_L", "mVpp", scaledBy(1e3), "V", Inductor}, {"Level", "dBm", decibelsOf, "sqrt(mW)", ""},
			{"Vout/Vin", "%", scaledBy(100), "", ""}, {"ratio", "", scaledBy(1), "", ""}, {"V_R", "dBV", decibelsOf, "V", Resistor}}[m.IntN(7)]
		m.w.m, m.w.unit, m.w.part, m.w.decibels = m.add(r.name, r.unit, r.as, m.d.m), r.base, r.part, strings.HasPrefix(r.unit, "dB")
		if r.unit == "V" && m.some(2) {
			m.w.deviation = m.add("std", "V", scaledBy(0.01), m.d.m)
			for i := range m.w.deviation {
				m.w.deviation[i] *= 0.01
			}
		}
	}
	if m.some(2) {
		p := [...]struct {
			name, unit string
			k          float64
		}{{"phase", "deg", 180 / math.Pi}, {"phi", "rad", 1}, {"Phase", "cycles", 0.5 / math.Pi}, {"phase", "", 180 / math.Pi}, {"theta", "°", 180 / math.Pi}}[m.IntN(5)]
		m.w.phase = m.add(p.name, p.unit, scaledBy(p.k), m.d.phase)
	}
}

func (m *sweepMixture) line(cells ...string) {
	for i, c := range cells {
		if strings.Contains(c, m.sep) {
			cells[i] = `"` + c + `"`
		}
	}
	m.text.WriteString(strings.Join(cells, m.sep) + "\n")
}

func (m *sweepMixture) write() {
	for range m.IntN(5) {
		switch m.IntN(4) {
		case 0:
			m.line("# sweep of loop 07")
		case 1:
			m.line("Points", fmt.Sprint(len(m.order)))
		case 2:
			m.line()
		case 3:
			m.line("Start", "115 kHz")
		}
	}
	format := m.one("%s (%s)", "%s [%s]", "%s / %s", "%s in %s", "row")
	var names, units []string
	for _, c := range m.columns {
		name := c.name
		if format != "row" && c.unit != "" {
			name = fmt.Sprintf(format, name, c.unit)
		}
		names, units = append(names, name), append(units, c.unit)
	}
	if m.line(names...); format == "row" {
		m.line(units...)
	}
	for i := range m.order {
		var cells []string
		for _, c := range m.columns {
			cells = append(cells, strings.Replace(c.print(i), ".", m.mark, 1))
		}
		m.line(cells...)
		if i == 20 && m.some(8) {
			m.text.WriteString("# range changed\n")
		}
	}
	if m.some(6) {
		m.line("end of sweep")
	}
	if m.some(8) {
		text := m.text.String()
		m.text.Reset()
		for l := range strings.Lines(text) {
			m.text.WriteString(`"` + strings.ReplaceAll(strings.TrimSuffix(l, "\n"), `"`, `""`) + "\"\n")
		}
	}
}
