package circuit

import (
	"math"

	"dieaway/decay/quantity"
)

// What a record has when nobody says otherwise.
const (
	usualCycle  = 20  // samples in a cycle, at least
	usualLength = 5   // time constants
	usualBefore = 0.1 // share of the record before the trigger
	usualRange  = 2.2 // vertical range over the amplitude
)

// Complete gives settings that are zero the values that a careful person would
// set: Interval in a step of 1-2-5 with 20 samples in a cycle or more, Samples for
// five time constants behind the trigger, a tenth of the record before it, one
// volt, and a full scale that holds the ring. before is the time before the
// trigger in s and length that of the record, NaN to let them be chosen.
func (s *Simulation) Complete(before, length float64) error {
	net, err := newNetwork(s.Bench, &s.Bench.RingDown)
	if err != nil {
		return err
	}
	if s.Amplitude == 0 && s.Source == 0 {
		s.Amplitude = 1
	}
	if s.Interval == 0 {
		s.Interval = 1 / quantity.StepUp(usualCycle*math.Sqrt(net.determinant())/(2*math.Pi))
	}
	if math.IsNaN(length) {
		decay := math.Max(-2/net.trace(), -net.trace()/net.determinant()) // the slow part, when overdamped
		length = usualLength * decay / (1 - usualBefore)
		if !math.IsNaN(before) {
			length = usualLength*decay + before
		}
	}
	if math.IsNaN(before) {
		before = usualBefore * length
	}
	s.Samples, s.Pretrigger = count(length, s.Interval), count(before, s.Interval)
	if c := &s.Converter; c.Bits > 0 && c.FullScale == 0 {
		size := math.Max(math.Abs(s.Amplitude), math.Abs(s.Source)) + math.Abs(s.Offset)
		c.FullScale = quantity.StepUp(usualRange * size)
	}
	return nil
}

// samplesMost keeps a record that nobody can mean from filling the memory.
const samplesMost = 100_000_000

// count returns the intervals in a time; one more than may be is enough to refuse it.
func count(time, interval float64) int {
	return int(math.Max(0, math.Min(samplesMost+1, math.Round(time/interval))))
}

// Record makes the capture, ready to be written.
func (s *Simulation) Record() (*Record, error) {
	y, err := s.RingDown()
	if err != nil {
		return nil, err
	}
	return &Record{Notes: s.Notes(), Name: "capacitor voltage", Unit: "V", Interval: s.Interval,
		Pretrigger: s.Pretrigger, Step: s.Converter.Step(), Samples: y}, nil
}

// Around returns n frequencies in Hz over span in Hz, evenly spaced, about the
// natural frequency of the circuit in its set-up Sweep; a span of 0 is three
// bandwidths, and at most what keeps the frequencies above zero.
func (s *SweepSimulation) Around(span float64, n int) ([]float64, error) {
	net, err := newNetwork(s.Bench, &s.Bench.Sweep)
	if err != nil {
		return nil, err
	}
	f0 := math.Sqrt(net.determinant()) / (2 * math.Pi)
	if span == 0 {
		span = -3 * net.trace() / (2 * math.Pi)
	}
	span = math.Min(span, 1.9*f0)
	f := make([]float64, n)
	for i := range f {
		f[i] = f0 - span/2 + span*float64(i)/float64(max(1, n-1))
	}
	return f, nil
}
