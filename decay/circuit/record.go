package circuit

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"dieaway/decay/quantity"
)

// A Record is samples on their way into a file.
type Record struct {
	// Notes come first, a name and a value in each line.
	Notes [][2]string
	// Name and Unit of the channel.
	Name, Unit string
	// Interval in s between samples, of which number Pretrigger is at time zero.
	Interval   float64
	Pretrigger int
	// Step is the height of a converter's level, 0 without one.
	Step    float64
	Samples []float64
}

// Write writes the record as text of two columns, time in s and the channel, below
// notes, interval and number of samples, names and units.
func (r *Record) Write(w io.Writer) error {
	out := bufio.NewWriter(w)
	if err := writeNotes(out, r.Notes); err != nil {
		return err
	}
	fmt.Fprintf(out, "sample interval,%s\nsamples,%d\ntime,%s\ns,%s\n",
		plainQuantity(r.Interval, "s"), len(r.Samples), cell(r.Name), cell(r.Unit))
	// The power of ten keeps times short: whole tenths of a microsecond show no
	// rounding of 1e-7.
	power := 3 * int(math.Ceil(math.Log10(r.Interval)/3-1e-9))
	unit := r.Interval / math.Pow10(power)
	places, ending := decimals(unit, 9), fmt.Sprintf("e%+03d", power)
	digits := decimals(r.Step, 9)
	for n, v := range r.Samples {
		out.WriteString(strconv.FormatFloat(float64(n-r.Pretrigger)*unit, 'f', places, 64) + ending + ",")
		if r.Step > 0 {
			out.WriteString(strconv.FormatFloat(v, 'f', digits, 64))
		} else {
			out.WriteString(strconv.FormatFloat(v, 'e', 6, 64))
		}
		out.WriteByte('\n')
	}
	return out.Flush() // it keeps the first error of all writes
}

// decimals returns how many decimal places show x to a part in a billion, most at most.
func decimals(x float64, most int) int {
	for n := range most {
		if y := x * math.Pow10(n); math.Abs(y-math.Round(y)) < 1e-9*y {
			return n
		}
	}
	return most
}

// plainQuantity prints a value with u for micro: the file is plain ASCII.
func plainQuantity(x float64, unit string) string {
	return strings.NewReplacer("µ", "u", "Ω", "ohm").Replace(quantity.Format(x, unit, 9))
}

func writeNotes(out *bufio.Writer, notes [][2]string) error {
	for _, n := range notes {
		if _, err := fmt.Fprintf(out, "%s,%s\n", cell(n[0]), cell(n[1])); err != nil {
			return err
		}
	}
	return nil
}

// cell keeps a text within its cell and line.
func cell(s string) string {
	return strings.Map(func(c rune) rune {
		switch {
		case c == ',' || c == ';' || c == '"':
			return ' '
		case c < ' ':
			return -1
		}
		return c
	}, s)
}

// Notes tells of the simulated circuit what a reader of the file wants to know.
func (s *Simulation) Notes() [][2]string { return notesOf(s.Bench, &s.Bench.RingDown) }

func notesOf(b *Bench, at *Setup) [][2]string {
	var notes [][2]string
	add := func(name, value string) {
		if value != "" {
			notes = append(notes, [2]string{name, value})
		}
	}
	add("device", b.Device)
	add("circuit", describe("in "+string(b.Topology), b.Inductance, b.Capacitance, b.Resistor, b.CoilResistance))
	add("source", describe("", at.SourceResistance))
	add("probe", describe("", at.ProbeResistance, at.ProbeCapacitance))
	add("origin", "simulated by integrating the equation of the circuit")
	return notes
}

// describe lists what is known of some parts.
func describe(ending string, parts ...quantity.Quantity) string {
	var words []string
	for _, p := range parts {
		if p.Known() {
			words = append(words, plainQuantity(p.Value, p.Unit))
		}
	}
	if len(words) == 0 {
		return ""
	}
	return strings.TrimSpace(strings.Join(words, " and ") + " " + ending)
}
