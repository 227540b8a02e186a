package capture

import (
	"bytes"
	"fmt"
	"math"
	"math/cmplx"
	"strconv"
	"strings"
)

// Touchstone is the open format of network parameters (IBIS Open Forum,
// Touchstone File Format Specification, versions 1.1 and 2.0): an option line
// "# GHz S MA R 50", comments behind "!", and for each frequency the pairs of
// numbers of the matrix. One and two ports are read here.

// isTouchstone reports a text whose first line that is no comment is an option
// line with a unit of frequency, or the keyword of version 2.
func isTouchstone(text []byte) bool {
	for line := range bytes.Lines(text) {
		words := strings.Fields(strings.ToLower(strings.Replace(stripBang(string(line)), "#", "# ", 1)))
		if len(words) == 0 {
			continue
		}
		if words[0] == "[version]" {
			return true
		}
		if words[0] != "#" || len(words) == 1 {
			return false
		}
		for i, w := range words[1:] {
			if _, ok := touchstoneWord(w); !ok && (i == 0 || words[i] != "r") {
				return false
			}
		}
		return true
	}
	return false
}

func stripBang(line string) string {
	line, _, _ = strings.Cut(line, "!")
	return line
}

// touchstoneWord is the meaning of a word of the option line.
func touchstoneWord(w string) (kind byte, ok bool) {
	switch w {
	case "hz", "khz", "mhz", "ghz":
		return 'f', true
	case "s", "y", "z", "g", "h":
		return 'p', true
	case "ma", "db", "ri":
		return 'c', true
	case "r":
		return 'r', true
	}
	return 0, false
}

// A touchstone is a file under way.
type touchstone struct {
	version2   bool
	unit       unit
	parameter  string // S, Y or Z
	format     string // MA, DB or RI
	resistance float64
	references []float64
	ports      int
	order12    bool   // two-port data in the order 11 12 21 22
	matrix     string // full, lower or upper
	option     int    // line of the option line
	network    bool   // the data have begun
	first      int    // line of the first of them
	wantRefs   bool   // the lines to come hold the values of [Reference]

	numbers []float64 // of the record under way
	start   int       // its line
	lines   []int
	records [][]float64
}

func (s *Sweep) readTouchstone(src *source, text []byte, opt SweepOptions) error {
	if opt.Frequency+opt.Reference+opt.Phase != "" {
		return fmt.Errorf("%w: a Touchstone file has one frequency and no reference; only the response can be chosen, S11 for example", ErrNoColumn)
	}
	t := &touchstone{unit: unit{base: "Hz", exp: 9}, parameter: "S", format: "MA", resistance: 50, matrix: "full"}
	for i, l := range splitLines(text, '\n', true) {
		if done, err := t.line(stripBang(toUTF8(l.text)), i+1); err != nil {
			return err
		} else if done {
			break
		}
	}
	if len(t.numbers) > 0 {
		return &Error{Err: ErrSyntax, Line: t.start, Found: fmt.Sprintf("%d numbers", len(t.numbers)), Expected: fmt.Sprint(t.size())}
	}
	if len(t.records) < sweepRows {
		return &Error{Err: ErrTooFew, Found: plural(len(t.records), "row"), Expected: fmt.Sprintf("at least %d", sweepRows)}
	}
	if u, ok := parseUnit(opt.FrequencyUnit); ok {
		s.unitGiven(t.unit, u)
		t.unit = u
	}
	return t.build(s, src, opt.Response)
}

// line reads one line; done is true behind the network data.
func (t *touchstone) line(text string, number int) (done bool, err error) {
	words := strings.Fields(text)
	switch {
	case len(words) == 0:
		return false, nil
	case strings.HasPrefix(words[0], "#"):
		return false, t.optionLine(strings.Fields(strings.ToLower(strings.Replace(text, "#", " ", 1))), number)
	case strings.HasPrefix(words[0], "["):
		return t.keyword(strings.TrimSpace(text), number)
	case t.option == 0 || t.version2 && !t.network && !t.wantRefs:
		if t.version2 {
			return false, nil // between [Begin Information] and [End Information]
		}
		return false, &Error{Err: ErrSyntax, Line: number, Found: quote(words[0]), Expected: "an option line, # GHz S MA R 50"}
	}
	return t.data(words, number)
}

// optionLine reads "# GHz S MA R 50"; only the first one counts.
func (t *touchstone) optionLine(words []string, number int) error {
	if t.option > 0 {
		return nil
	}
	t.option = number
	for i := 0; i < len(words); i++ {
		kind, _ := touchstoneWord(words[i])
		switch kind {
		case 'f':
			t.unit = unit{base: "Hz", exp: map[string]int{"hz": 0, "khz": 3, "mhz": 6, "ghz": 9}[words[i]]}
		case 'p':
			t.parameter = strings.ToUpper(words[i])
		case 'c':
			t.format = strings.ToUpper(words[i])
		case 'r':
			i++
			r, err := strconv.ParseFloat(wordAt(words, i), 64)
			if err != nil || !(r > 0) {
				return &Error{Err: ErrSyntax, Line: number, Found: quote(wordAt(words, i)), Expected: "the reference resistance after R"}
			}
			t.resistance = r
		default:
			return &Error{Err: ErrSyntax, Line: number, Found: quote(words[i]), Expected: "unit of frequency, S Y or Z, MA DB or RI, R and a resistance"}
		}
	}
	if t.parameter == "G" || t.parameter == "H" {
		return &Error{Err: ErrSyntax, Line: number, Found: t.parameter + " parameters", Expected: "S, Y or Z"}
	}
	return nil
}

func wordAt(words []string, i int) string {
	if i < len(words) {
		return words[i]
	}
	return ""
}

// keyword reads a line of version 2 that begins with a keyword in brackets.
func (t *touchstone) keyword(text string, number int) (done bool, err error) {
	key, value, _ := strings.Cut(text, "]")
	value = strings.ToLower(strings.TrimSpace(value))
	bad := func(expected string) error {
		return &Error{Err: ErrSyntax, Line: number, Found: quote(text), Expected: expected}
	}
	t.wantRefs = false
	switch strings.ToLower(key) {
	case "[version":
		t.version2 = true
		if value != "2.0" && value != "2.1" {
			return false, bad("version 2.0")
		}
	case "[number of ports":
		if t.ports, _ = strconv.Atoi(value); t.ports != 1 && t.ports != 2 {
			return false, bad("one port or two")
		}
	case "[two-port data order", "[two-port order":
		if t.order12 = value == "12_21"; !t.order12 && value != "21_12" {
			return false, bad("12_21 or 21_12")
		}
	case "[matrix format":
		if t.matrix = value; value != "full" && value != "lower" && value != "upper" {
			return false, bad("Full, Lower or Upper")
		}
	case "[mixed-mode order":
		return false, bad("single-ended ports")
	case "[reference":
		t.wantRefs = true
		if value != "" {
			return t.data(strings.Fields(value), number)
		}
	case "[network data":
		t.network = true
	case "[noise data", "[end":
		return true, nil
	}
	return false, nil
}

// size is the count of numbers of a record.
func (t *touchstone) size() int {
	switch {
	case t.ports == 1:
		return 3
	case t.matrix != "full":
		return 7
	}
	return 9
}

// data reads a line of numbers. Behind the network data of two ports version 1
// may have noise data: their frequencies begin anew.
func (t *touchstone) data(words []string, number int) (done bool, err error) {
	for i, w := range words {
		x, err := strconv.ParseFloat(w, 64)
		if err != nil || math.IsNaN(x) || math.IsInf(x, 0) {
			return false, &Error{Err: ErrSyntax, Line: number, Column: i + 1, Found: quote(w), Expected: "a number"}
		}
		if t.wantRefs {
			t.references = append(t.references, x)
			continue
		}
		if len(t.numbers) == 0 {
			t.start = number
		}
		t.numbers = append(t.numbers, x)
	}
	if t.wantRefs {
		return false, nil
	}
	if t.ports == 0 {
		switch len(words) {
		case 3:
			t.ports = 1
		case 9:
			t.ports = 2
		default:
			return false, &Error{Err: ErrSyntax, Line: number, Found: plural(len(words), "number"), Expected: "3 for one port or 9 for two"}
		}
	}
	if n := len(t.records); n > 0 && t.numbers[0] <= t.records[n-1][0] {
		if !t.version2 && t.ports == 2 && len(t.numbers) == 5 {
			t.numbers = nil
			return true, nil
		}
		return false, &Error{Err: ErrSyntax, Line: t.start, Column: 1, Found: fmt.Sprintf("the frequency %g after %g", t.numbers[0], t.records[n-1][0]), Expected: "a higher one"}
	}
	return false, t.record(number)
}

// record takes the numbers when they are complete.
func (t *touchstone) record(number int) error {
	switch n := len(t.numbers); {
	case n > t.size() || n < t.size() && !t.version2:
		return &Error{Err: ErrSyntax, Line: number, Found: plural(n, "number"), Expected: fmt.Sprint(t.size())}
	case n < t.size():
		return nil
	}
	if t.first == 0 {
		t.first = t.start
	}
	if f := t.numbers[0]; !(f >= 0) {
		return &Error{Err: ErrSyntax, Line: t.start, Column: 1, Found: shown(f), Expected: "a frequency greater than zero"}
	}
	t.records, t.lines, t.numbers = append(t.records, t.numbers), append(t.lines, t.start), nil
	return nil
}

// element is the complex parameter of ports i and k, counted from 1. Version 1
// has Y and Z in parts of the reference resistance.
func (t *touchstone) element(record []float64, i, k int) complex128 {
	pair := 0
	if t.ports == 2 {
		full := [2][2]int{{0, 2}, {1, 3}} // 11 21 12 22
		if t.order12 {
			full = [2][2]int{{0, 1}, {2, 3}}
		}
		if t.matrix != "full" { // symmetric: 11 21 22
			full = [2][2]int{{0, 1}, {1, 2}}
		}
		pair = full[i-1][k-1]
	}
	a, b := record[1+2*pair], record[2+2*pair]
	z := complex(a, b)
	switch t.format {
	case "MA":
		z = cmplx.Rect(a, b*math.Pi/180)
	case "DB":
		z = cmplx.Rect(math.Pow(10, a/20), b*math.Pi/180)
	}
	if !t.version2 && t.parameter == "Z" {
		z *= complex(t.resistance, 0)
	} else if !t.version2 && t.parameter == "Y" {
		z /= complex(t.resistance, 0)
	}
	return z
}
