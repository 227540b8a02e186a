package circuit

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"strconv"

	"dieaway/capture"
)

// A SweepSimulation makes driven sweeps of the circuit of a bench file in its
// set-up Sweep: the steady state of the state equation, (j w - A) x = b u, at each
// frequency.
type SweepSimulation struct {
	Bench *Bench
	// Frequencies in Hz.
	Frequencies []float64
	// Across is the part that the response is measured across; "" is the capacitor.
	Across capture.Part
	// Source is the amplitude of the source in V; 0 stands for one.
	Source float64
	// Noise is the standard deviation in V of each of the two parts, real and
	// imaginary, of the response. Random is where it comes from; nil is a generator
	// of fixed seed.
	Noise  float64
	Random *rand.Rand
}

// Sweep returns the response at each frequency, in V, with the source as reference
// of phase.
func (s *SweepSimulation) Sweep() ([]complex128, error) {
	net, err := newNetwork(s.Bench, &s.Bench.Sweep)
	if err != nil {
		return nil, err
	}
	if net.parallel && s.Across != "" && s.Across != capture.Capacitor {
		return nil, fmt.Errorf("all parts of a parallel circuit have the voltage of the capacitor: it has none across the %s", s.Across)
	}
	if s.Across == capture.Resistor && net.fitted == 0 {
		return nil, s.Bench.lacks("circuit.resistor is not given: there is none to measure across")
	}
	rng := s.Random
	if rng == nil {
		rng = rand.New(rand.NewPCG(1, 1))
	}
	out := make([]complex128, len(s.Frequencies))
	for i, f := range s.Frequencies {
		if !(f > 0) || math.IsInf(f, 0) {
			return nil, fmt.Errorf("frequency %g Hz is not above zero", f)
		}
		out[i] = complex(s.source(), 0) * net.response(2*math.Pi*f, s.Across)
		if s.Noise > 0 {
			out[i] += complex(s.Noise*rng.NormFloat64(), s.Noise*rng.NormFloat64())
		}
	}
	return out, nil
}

func (s *SweepSimulation) source() float64 {
	if s.Source == 0 {
		return 1
	}
	return s.Source
}

// response returns the voltage across a part for a source of one volt at w rad/s.
func (n *network) response(w float64, across capture.Part) complex128 {
	a := func(i, k int) complex128 {
		x := complex(-n.a[i][k], 0)
		if i == k {
			x += complex(0, w)
		}
		return x
	}
	d := a(0, 0)*a(1, 1) - a(0, 1)*a(1, 0)
	b0, b1 := complex(n.b[0], 0), complex(n.b[1], 0)
	current := (b0*a(1, 1) - b1*a(0, 1)) / d * complex(math.Sqrt(n.capacitance/n.inductance), 0)
	capacitor := (b1*a(0, 0) - b0*a(1, 0)) / d
	coil := current * complex(n.coil, w*n.inductance)
	switch across {
	case capture.Resistor:
		return current * complex(n.fitted, 0)
	case capture.Inductor:
		return coil
	case capture.Both:
		return coil + capacitor
	default:
		return capacitor
	}
}

// columnOf names the column of the response as the reader knows it.
var columnOf = map[capture.Part]string{"": "V_C", capture.Capacitor: "V_C", capture.Inductor: "V_L",
	capture.Resistor: "V_R", capture.Both: "V_LC"}

// Write writes a sweep that [SweepSimulation.Sweep] made, as text: frequency,
// source, response, phase.
func (s *SweepSimulation) Write(w io.Writer, response []complex128) error {
	out := bufio.NewWriter(w)
	if err := writeNotes(out, notesOf(s.Bench, &s.Bench.Sweep)); err != nil {
		return err
	}
	fmt.Fprintf(out, "frequency,V_S,%s,phase\nHz,V,V,deg\n", columnOf[s.Across])
	for i, h := range response {
		number := func(x float64, digits int) string { return strconv.FormatFloat(x, 'g', digits, 64) }
		fmt.Fprintf(out, "%s,%s,%s,%s\n", number(s.Frequencies[i], 10), number(s.source(), 6),
			number(cmplx.Abs(h), 7), strconv.FormatFloat(cmplx.Phase(h)*180/math.Pi, 'f', 4, 64))
	}
	return out.Flush()
}
