package capture

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"
)

// build takes the response out of the records: what is asked for, else S21 (Z21,
// Y21) of two ports, and of one port the admittance, which peaks where a series
// circuit resonates, or the impedance, which does so for a parallel one.
func (t *touchstone) build(s *Sweep, src *source, asked string) error {
	name := strings.ToUpper(strings.TrimSpace(asked))
	why := "asked for"
	if name == "" {
		name, why = t.usual()
	}
	of, err := t.responseOf(name)
	if err != nil {
		return err
	}
	re, im := make([]float64, len(t.records)), make([]float64, len(t.records))
	for i, r := range t.records {
		z := of(r)
		re[i], im[i] = real(z), imag(z)
		s.Frequency = append(s.Frequency, r[0]*math.Pow10(t.unit.exp))
	}
	if !(s.Frequency[0] > 0) {
		return &Error{Err: ErrSyntax, Line: t.lines[0], Column: 1, Found: shown(s.Frequency[0]), Expected: "a frequency greater than zero"}
	}
	s.setComplex(re, im)
	s.Lines, s.Name = t.lines, name
	switch {
	case name[0] == 'Y':
		s.Unit = "S"
	case name[0] == 'Z':
		s.Unit = "ohm"
	}
	if len(t.records[0]) == 3 && s.Unit != "" {
		s.Part = Resistor // admittance and impedance of one port have the form of the current
	}
	s.Layout = t.layout(src, name, why)
	return nil
}

// usual is the response of a file when none is asked for.
func (t *touchstone) usual() (name, why string) {
	if t.ports == 2 {
		return t.parameter + "21", "the response from port 1 to port 2"
	}
	if t.prominence("Y11") >= t.prominence("Z11") {
		return "Y11", "the admittance of the port, which peaks more than its impedance: a series resonance"
	}
	return "Z11", "the impedance of the port, which peaks more than its admittance: a parallel resonance"
}

// prominence is how far the greatest magnitude stands above both ends.
func (t *touchstone) prominence(name string) float64 {
	of, _ := t.responseOf(name)
	size := func(i int) float64 { return cmplx.Abs(of(t.records[i])) }
	most := 0.0
	for i := range t.records {
		most = math.Max(most, size(i))
	}
	return most / math.Max(size(0), size(len(t.records)-1))
}

// responseOf returns the parameter of that name as a function of a record.
// Of one port S, Y and Z follow from each other.
func (t *touchstone) responseOf(name string) (func(record []float64) complex128, error) {
	i, k := 0, 0
	if len(name) == 3 {
		i, k = int(name[1]-'0'), int(name[2]-'0')
	}
	valid := i >= 1 && i <= t.ports && k >= 1 && k <= t.ports && strings.ContainsAny(name[:1], "SYZ")
	if valid && name[:1] == t.parameter {
		return func(r []float64) complex128 { return t.element(r, i, k) }, nil
	}
	if !valid || t.ports != 1 {
		return nil, fmt.Errorf("%w: expected %q for the response, found %s parameters of %s, where S21 for example is that from port 1 to port 2",
			ErrNoColumn, name, t.parameter, plural(t.ports, "port"))
	}
	return func(r []float64) complex128 { return t.convert(t.element(r, 1, 1), name[0]) }, nil
}

// convert turns the parameter of one port into S, Y or Z.
func (t *touchstone) convert(x complex128, to byte) complex128 {
	r := complex(t.resistance, 0)
	if len(t.references) > 0 {
		r = complex(t.references[0], 0)
	}
	// As the ratio of voltage v to current i.
	var v, i complex128
	switch t.parameter {
	case "S":
		v, i = r*(1+x), 1-x
	case "Y":
		v, i = 1, x
	default:
		v, i = x, 1
	}
	switch to {
	case 'S':
		return (v - r*i) / (v + r*i)
	case 'Y':
		return i / v
	}
	return v / i
}

func (t *touchstone) layout(src *source, name, why string) Layout {
	version := "1.1"
	if t.version2 {
		version = "2.0"
	}
	return Layout{
		Encoding: src.encoding, Compressed: src.compressed, Preamble: t.first - 1, HeaderLine: t.option, FirstLine: t.first,
		Delimiter: "runs of blanks", DecimalMark: ".",
		Columns: []Column{
			{Number: 1, Name: "frequency", Unit: unitName(t.unit), Role: RoleFrequency,
				Why: fmt.Sprintf("Touchstone %s, %s parameters of %s", version, t.parameter, plural(t.ports, "port"))},
			{Number: 2, Name: name, Role: RoleResponse, Why: why},
		},
	}
}
