package capture

import (
	"bytes"
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

var mixtures = flag.Int("mixtures", 600, "texts of random layout to read")

// A mixture is a text of a random layout, and what it holds.
type mixture struct {
	*rand.Rand
	sep, mark, end string
	n              int
	names, units   [2]string
	timed, own     bool // a time column, one for each channel
	heading        int  // 0: none, then ways to write names and units
	lost           int  // row before which one is missing, 0: none
	short          int  // rows of the second channel, where it has a time column
	last           bool // the time column is the last
	stamped        bool // times are dates and clock times
	parted         int  // in so many columns
	counted        bool // no times, but a count of which every tenth is kept
	wrapped        bool // every line is in quotes
	long           bool // times in minutes
	attached       bool // numbers have their units behind them
	trailing       bool // a separator at the end of every line
	hash           bool // the heading is a comment
	text           strings.Builder
	want           [2][]float64
	left, right    []func(i int) string // columns beside time and channels
	between        []func(i int) string
	leftNames      []string
	rightNames     []string
	betweenNames   []string
}

func (m *mixture) one(of ...string) string { return of[m.IntN(len(of))] }

// some is true once in n times.
func (m *mixture) some(n int) bool { return m.IntN(n) == 0 }

// TestMixtures: what is written in a random mixture of encoding, separators,
// preamble, heading, columns and print is read, to the last bit.
func TestMixtures(t *testing.T) {
	for seed := range uint64(*mixtures) {
		m := &mixture{Rand: rand.New(rand.NewPCG(seed, 7))}
		m.choose()
		m.write()
		text := m.encoded()
		opt := Options{}
		if !m.timed && m.heading == 0 {
			opt.Interval = 4e-6
		}
		c, err := Read(bytes.NewReader(text), "loop 07.csv", opt)
		if err == nil {
			err = m.compare(c)
		}
		if err != nil {
			var b strings.Builder
			if c != nil {
				c.Explain(&b)
			}
			t.Errorf("mixture %d: %v\n%s\n%s", seed, err, m.text.String()[:min(m.text.Len(), 900)], b.String())
		}
	}
}

func (m *mixture) choose() {
	m.sep = m.one(",", ",", ";", ";", "\t", "|", "  ")
	m.mark = m.one(".", ".", ",")
	m.end = m.one("\n", "\r\n", "\r", "\r\r\n")
	m.n = 30 + m.IntN(300)
	m.timed = !m.some(6)
	m.own = m.timed && m.some(4)
	m.heading = m.IntN(6)
	m.names = [2]string{m.one("CH1", "V_S", "Coil voltage", "A"), m.one("CH2", "I_L", "Shunt", "B")}
	if m.sep == "  " {
		m.names[0] = strings.ReplaceAll(m.names[0], " ", "_")
	}
	m.units = [2]string{m.one("V", "mV", "kV"), m.one("V", "A", "uA")}
	if m.timed && m.some(4) {
		m.lost = 10 + m.IntN(m.n-20)
	}
	blanks := m.sep == "  "
	m.short = m.n
	if m.own && !blanks && m.some(2) {
		m.short = m.n * 2 / 3
	}
	m.last = m.timed && !m.own && m.heading > 0 && m.some(6)
	m.attached = !blanks && m.heading > 0 && m.some(6)
	m.stamped = m.timed && m.heading > 0 && !blanks && !m.attached && m.some(5)
	if m.parted = 1; m.stamped && m.heading < 5 {
		m.parted += m.IntN(3)
	}
	m.counted = !m.timed && m.heading > 0 && m.some(2)
	m.wrapped = m.some(8)
	m.long = m.timed && !m.stamped && !m.attached && m.heading > 0 && m.some(6)
	m.trailing = !blanks && m.some(4)
	m.hash = m.heading > 0 && m.heading < 5 && !blanks && m.some(6)
	m.left, m.leftNames = m.aside("left")
	if m.counted {
		m.left = append(m.left, func(i int) string { return fmt.Sprint(10 * i) })
		m.leftNames = append(m.leftNames, m.one("Sample", "Index", "Point"))
	}
	m.right, m.rightNames = m.aside("right")
	if !m.own {
		m.between, m.betweenNames = m.aside("between")
	}
	if m.sep == "  " && m.heading == 5 { // a blank cell of the units row could not be seen
		m.heading = 1
	}
}

// aside makes columns that are no channels.
func (m *mixture) aside(where string) (columns []func(i int) string, names []string) {
	blanks := m.sep == "  "
	if where == "left" && m.some(5) && m.timed && m.heading > 0 {
		columns, names = append(columns, func(i int) string { return fmt.Sprint(i + 1) }), append(names, "No")
	}
	if m.some(5) && !blanks {
		columns, names = append(columns, func(int) string { return "" }), append(names, "")
	}
	if m.some(6) && m.heading > 0 && (!blanks || where == "between") {
		words := []string{"run", "armed", "run"}
		columns, names = append(columns, func(i int) string { return words[i%3] }), append(names, "State")
	}
	if m.some(6) && m.heading > 0 {
		columns, names = append(columns, func(i int) string { return fmt.Sprint(i / 7 % 2) }), append(names, "D3")
	}
	return columns, names
}

func (m *mixture) compare(c *Capture) error {
	if len(c.Channels) != 2 {
		return fmt.Errorf("%d channels", len(c.Channels))
	}
	scale, start := 1e-6, 0.0
	if m.heading == 0 {
		scale = 1
	}
	if m.long {
		scale = 60
	}
	interval := 4 * scale
	if !m.timed {
		interval = 4e-6
	} else if !m.stamped {
		start = -8 * 4 * scale
	}
	for k, ch := range c.Channels {
		name, unit := m.names[k], strings.TrimLeft(m.units[k], "mku")
		if m.heading == 0 {
			name, unit = fmt.Sprintf("channel %d", k+1), ""
		}
		if ch.Name != name || ch.Unit != unit {
			return fmt.Errorf("channel %q in %q, want %q in %q", ch.Name, ch.Unit, name, unit)
		}
		a, n := ch.Axis, m.n
		if k == 1 {
			n = m.short
		}
		gap := m.lost > 0 && m.lost < n
		if a.N != n || len(ch.Samples) != n || math.Abs(a.Interval-interval) > 1e-9*interval || math.Abs(a.Start-start) > 1e-6*interval || (a.Times != nil) != gap {
			return fmt.Errorf("%s: %+v, want %d from %v every %v", ch.Name, a, n, start, interval)
		}
		if last := start + interval*float64(n-1); gap && math.Abs(a.Time(n-1)-last-interval) > 1e-6*interval {
			return fmt.Errorf("%s: last at %v", ch.Name, a.Time(n-1))
		}
		for i, v := range ch.Samples {
			if x := m.want[k][i]; v != x && !(math.IsNaN(v) && math.IsNaN(x)) {
				return fmt.Errorf("%s: sample %d is %v, want %v", ch.Name, i, v, x)
			}
		}
	}
	return nil
}
