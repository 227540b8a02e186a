package capture

import (
	"bytes"
	"compress/gzip"
	"fmt"
	"math"
	"strings"
	"time"
	"unicode/utf16"
)

// write writes the text.
func (m *mixture) write() {
	m.preamble()
	m.head()
	print := m.one("%.6f", "%.5E", "%+.7f", "%.9g")
	row := 0
	for i := range m.n {
		if row++; i == m.lost && i > 0 {
			row++
		}
		var cells []string
		add := func(columns []func(i int) string) {
			for _, f := range columns {
				cells = append(cells, f(i))
			}
		}
		add(m.left)
		for k := range 2 {
			if k == 1 {
				add(m.between)
			}
			gone := k == 1 && i >= m.short
			if m.timed && !m.last && (k == 0 || m.own) {
				cells = append(cells, m.when(row, gone))
			}
			cells = append(cells, m.sample(k, i, print, gone))
		}
		add(m.right)
		if m.last {
			cells = append(cells, m.when(row, false))
		}
		m.line(cells...)
	}
	if m.some(8) {
		footer := "end of record"
		if m.timed && len(m.left) == 0 && m.some(2) {
			footer = "Mean" + m.sep + m.number("0.5")
		}
		m.line(footer)
	}
	if m.wrapped {
		lines := strings.Split(m.text.String(), m.end)
		m.text.Reset()
		for i, l := range lines {
			if l != "" {
				l = `"` + strings.ReplaceAll(l, `"`, `""`) + `"`
			}
			if i > 0 {
				m.text.WriteString(m.end)
			}
			m.text.WriteString(l)
		}
	}
}

// when is the time of a row.
func (m *mixture) when(row int, gone bool) string {
	switch {
	case gone:
		return strings.Repeat(m.sep, m.parted-1)
	case m.stamped:
		t := time.Date(2031, 3, 4, 11, 59, 59, 999_900_000, time.UTC).Add(time.Duration(row) * 4 * time.Microsecond)
		switch m.parted {
		case 2:
			return t.Format("2006-01-02") + m.sep + m.number(t.Format("15:04:05.000000"))
		case 3:
			return t.Format("2006-01-02") + m.sep + t.Format("15:04:05") + m.sep + fmt.Sprint(t.Nanosecond()/1000)
		}
		return m.number(t.Format("2006-01-02 15:04:05.000000"))
	}
	return m.number(m.attach(fmt.Sprintf("%.1f", float64(row-9)*4), "us"))
}

// sample is sample i of channel k, as printed; its value is noted.
func (m *mixture) sample(k, i int, print string, gone bool) string {
	if gone {
		return ""
	}
	printed := fmt.Sprintf(print, volts(i*40+k*100))
	cell := m.number(m.attach(printed, m.units[k]))
	x := number(printed)
	if m.heading > 0 {
		x = scaledNumber(printed, map[string]int{"V": 0, "A": 0, "mV": -3, "kV": 3, "uA": -6}[m.units[k]])
	}
	if i > 20 && i < m.n-5 && m.some(200) {
		cell, x = m.one("---", "inf", "****", "OVER"), math.NaN()
	}
	m.want[k] = append(m.want[k], x)
	return cell
}

func (m *mixture) attach(printed, unit string) string {
	if m.attached {
		return printed + " " + unit
	}
	return printed
}

func (m *mixture) line(cells ...string) {
	m.text.WriteString(strings.Join(cells, m.sep))
	if m.trailing && len(cells) > 0 {
		m.text.WriteString(m.sep)
	}
	m.text.WriteString(m.end)
}

// number writes a number with the decimal mark, in quotes where that parts cells.
func (m *mixture) number(printed string) string {
	s := strings.Replace(printed, ".", m.mark, 1)
	if m.sep == m.mark || m.sep == "," && m.some(50) {
		return `"` + s + `"`
	}
	return s
}

func (m *mixture) preamble() {
	if !m.timed && m.heading > 0 {
		if m.counted {
			m.line(m.one("Sample Interval: 400 ns", "# Sampling interval = 0.4 us", "sampled at 2.5 MSa/s", "Sampling Period"+m.sep+"400ns", "dt = 4e-7"))
		} else {
			m.line(m.one("Sample Interval: 4 us", "# Sampling interval = 4.0 us", "sampled at 250 kSa/s", "Sampling Period"+m.sep+"4us", "dt = 4e-6"))
		}
	}
	for range m.IntN(4) * m.IntN(8) {
		switch m.IntN(10) {
		case 7:
			m.line(m.one("Horizontal Scale: 50 us", "Time per division"+m.sep+"50us", "Time Base 50 us/div"))
		case 8:
			m.line(m.one("Volts per division", "V/div"), "0.5")
		case 9:
			m.line("Record Length", fmt.Sprint(m.n))
		case 0:
			m.line("Model", m.one("bench 3", "bench 4"))
		case 1:
			m.line("# probe factor: 10")
		case 2:
			m.line("Averages: 16")
		case 3:
			m.line("Delay", "0.0", "0.0")
		case 4:
			m.line()
		case 5:
			m.line("Saved 2031-03-04 12:00:01")
		case 6:
			m.line("the loop rings")
		}
	}
	if m.heading == 0 { // a preamble that ends in words next to the samples may pass for a heading
		m.text.Reset()
	}
}

// head writes names and units.
func (m *mixture) head() {
	if m.heading == 0 {
		return
	}
	format := map[int]string{1: "%s (%s)", 2: "%s [%s]", 3: "%s / %s", 4: "%s in %s", 5: "%s"}[m.heading]
	if m.sep == "  " && (m.heading == 3 || m.heading == 4) {
		format = "%s_(%s)"
	}
	var names, units []string
	add := func(name, unit string) {
		if m.attached || m.stamped && unit == "us" {
			unit = ""
		}
		if m.heading < 5 && unit != "" {
			name = fmt.Sprintf(format, name, unit)
		}
		if m.mark == m.sep && m.some(3) {
			name = `"` + name + `"`
		}
		names, units = append(names, name), append(units, unit)
	}
	plain := func(all []string) {
		for _, name := range all {
			add(name, "")
		}
	}
	plain(m.leftNames)
	for k := range 2 {
		if k == 1 {
			plain(m.betweenNames)
		}
		if m.timed && !m.last && (k == 0 || m.own) {
			m.timeNames(add)
		}
		add(m.names[k], m.units[k])
	}
	plain(m.rightNames)
	if m.last {
		m.timeNames(add)
	}
	if m.hash {
		m.text.WriteString("# ")
	}
	m.line(names...)
	if m.heading == 5 && !m.attached {
		m.line(units...)
	}
}

// timeNames adds the names of the columns of times.
func (m *mixture) timeNames(add func(name, unit string)) {
	if m.parted > 1 {
		add("Date", "")
	}
	unit := "us"
	if m.long {
		unit = "min"
	}
	if m.parted > 1 || m.stamped {
		unit = ""
	}
	add(m.one("Time", "t", "TIME"), unit)
	if m.parted > 2 {
		add("us", "")
	}
}

// encoded is the text as the bytes of a file.
func (m *mixture) encoded() []byte {
	text := m.text.String()
	if m.some(3) {
		text = strings.TrimRight(text, "\r\n")
	}
	var b bytes.Buffer
	switch m.IntN(6) {
	case 0:
		b.WriteString("\ufeff" + text)
	case 1, 2:
		big := m.some(2)
		for _, u := range utf16.Encode([]rune("\ufeff" + text)) {
			if big {
				b.Write([]byte{byte(u >> 8), byte(u)})
			} else {
				b.Write([]byte{byte(u), byte(u >> 8)})
			}
		}
	default:
		b.WriteString(text)
	}
	if !m.some(5) {
		return b.Bytes()
	}
	var z bytes.Buffer
	w := gzip.NewWriter(&z)
	w.Write(b.Bytes())
	w.Close()
	return z.Bytes()
}
