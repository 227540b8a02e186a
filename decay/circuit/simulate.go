package circuit

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
)

// A Simulation makes captures of the circuit of a bench file: the circuit's state
// equation is carried from sample to sample by the exact exponential of its matrix
// (by Runge-Kutta steps where loss and inductance depend on the amplitude), and
// what the probe sees goes through noise and converter. It knows no formula of a
// damped oscillation. The zero value of every field but Bench, Interval and
// Samples is useful.
type Simulation struct {
	// Bench is the circuit; a ring-down is made in its set-up RingDown.
	Bench *Bench
	// Interval between samples in s, their number, and how many of them come
	// before the source falls at time zero.
	Interval            float64
	Samples, Pretrigger int
	// Amplitude in V is that of the ring at time zero, sqrt(v^2 + L i^2/C). Source,
	// when it is not zero, is the voltage of the source before time zero instead.
	Amplitude, Source float64
	// SquareWave in Hz makes the source a square wave between Source and zero; 0
	// is a source that falls once.
	SquareWave float64
	// LossGrowth and FrequencyShift are the shares by which decay rate and
	// frequency differ at the starting amplitude from those of small ones.
	LossGrowth, FrequencyShift float64
	// Second is another ring in the record, nil for none.
	Second *SecondMode
	// Offset of the baseline in V.
	Offset float64
	// Noise is the standard deviation in V before the converter. NoiseCorrelation is
	// that of neighbouring samples, -1 to 1 exclusive: 0 is white noise, and more is
	// noise of low frequencies (an autoregression of first order).
	Noise, NoiseCorrelation float64
	Converter               Converter
	// Random is where noise comes from; nil is a generator of fixed seed.
	Random *rand.Rand
}

// A SecondMode is a ring beside the first.
type SecondMode struct {
	// Frequency is the natural one in Hz; Strength is the ratio of the amplitudes at
	// time zero.
	Frequency, Q, Strength float64
}

// A Converter rounds to 2^Bits levels over FullScale, in V from end to end, and
// clips what is beyond them. Bias moves zero volts off the middle of a level, in
// levels. Bits of 0 is no converter.
type Converter struct {
	Bits            int
	FullScale, Bias float64
}

// Step returns the height of a level in V, 0 without a converter.
func (c Converter) Step() float64 {
	if c.Bits == 0 {
		return 0
	}
	return math.Ldexp(c.FullScale, -c.Bits)
}

// convert returns what the converter makes of v.
func (c Converter) convert(v float64) float64 {
	step := c.Step()
	if step == 0 {
		return v
	}
	half := math.Ldexp(1, c.Bits-1)
	return step*math.Max(-half, math.Min(half-1, math.Round(v/step+c.Bias))) + 0 // never -0
}

// check refuses what cannot be simulated.
func (s *Simulation) check() error {
	switch {
	case !(s.Interval > 0) || math.IsInf(s.Interval, 0):
		return errors.New("the sampling interval is not above zero")
	case s.Samples < 1:
		return errors.New("the record has no samples: record for longer, or sample faster")
	case s.Samples > samplesMost:
		return fmt.Errorf("the record has more than %d samples: record for less time, or sample slower", samplesMost)
	case s.Pretrigger < 0 || s.Pretrigger >= s.Samples:
		return fmt.Errorf("%d of %d samples before the trigger leave nothing of the decay", s.Pretrigger, s.Samples)
	case s.Converter.Bits < 0 || s.Converter.Bits > 32:
		return fmt.Errorf("a converter of %d bits: expected 1 to 32", s.Converter.Bits)
	case s.Converter.Bits > 0 && !(s.Converter.FullScale > 0):
		return errors.New("the converter has no full scale")
	case !(s.Noise >= 0):
		return errors.New("the noise is negative")
	case !(math.Abs(s.NoiseCorrelation) < 1):
		return fmt.Errorf("a correlation of the noise of %g: expected a number between -1 and 1", s.NoiseCorrelation)
	case !(s.LossGrowth >= 0):
		return fmt.Errorf("a growth of loss of %g %%: expected none below zero", 100*s.LossGrowth)
	case !(math.Abs(s.FrequencyShift) < 0.5):
		return fmt.Errorf("a shift of frequency of %g %%: expected less than 50 %% up or down", 100*s.FrequencyShift)
	}
	return nil
}

// RingDown returns the voltage of the capacitor in V at each sample; sample number
// Pretrigger is at time zero.
func (s *Simulation) RingDown() ([]float64, error) {
	if err := s.check(); err != nil {
		return nil, err
	}
	r, err := s.begin()
	if err != nil {
		return nil, err
	}
	out := make([]float64, s.Samples)
	for i := range out {
		if i > 0 {
			r.sampleOn(float64(i-s.Pretrigger)*s.Interval, s.Interval)
		}
		out[i] = r.voltage() + s.Offset
	}
	s.disturb(out)
	return out, nil
}

// disturb passes the record through noise and converter.
func (s *Simulation) disturb(y []float64) {
	rng := s.random()
	fresh := s.Noise * math.Sqrt(1-s.NoiseCorrelation*s.NoiseCorrelation)
	noise := 0.0
	for i := range y {
		switch {
		case s.Noise == 0:
		case i == 0:
			noise = s.Noise * rng.NormFloat64()
		default:
			noise = s.NoiseCorrelation*noise + fresh*rng.NormFloat64()
		}
		y[i] = s.Converter.convert(y[i] + noise)
	}
}

func (s *Simulation) random() *rand.Rand {
	if s.Random != nil {
		return s.Random
	}
	return rand.New(rand.NewPCG(1, 1))
}

// A run is a circuit under way.
type run struct {
	net     *network
	bent    *bent // nil for a linear circuit
	level   state // the settled state of the source's voltage
	x       state // less the settled state of now
	on      bool
	now     float64 // s
	edge    int     // number of the next edge: even ones fall, 0 at time zero
	half    float64 // s between edges, infinite for one edge
	byCycle *propagator
}

// begin returns the circuit at the first sample.
func (s *Simulation) begin() (*run, error) {
	net, err := newNetwork(s.Bench, &s.Bench.RingDown)
	if err != nil {
		return nil, err
	}
	one := net.settled()
	source := s.Source
	if source == 0 {
		source = s.Amplitude / one.amplitude()
	}
	if m := s.Second; m != nil {
		net.addMode(m.Frequency, m.Q, m.Strength*one.amplitude())
		one = net.settled()
	}
	r := &run{net: net, on: true, half: math.Inf(1), now: -float64(s.Pretrigger) * s.Interval, byCycle: net.propagator(s.Interval)}
	for i := range one {
		r.level[i] = source * one[i]
	}
	if s.LossGrowth != 0 || s.FrequencyShift != 0 {
		r.bent = &bent{net, s.LossGrowth, s.FrequencyShift, r.level.amplitude()}
	}
	if s.SquareWave > 0 {
		return r, r.warmUp(1/(2*s.SquareWave), net.trace())
	}
	return r, nil
}

// forgotten is for how many time constants a square wave runs before the record,
// so that nothing is left of how it began; edgesMost bounds its edges.
const (
	forgotten = 40
	edgesMost = 1e7
)

// warmUp runs the square wave until the record begins.
func (r *run) warmUp(half, trace float64) error {
	r.half = half
	first := r.now
	begun := math.Floor((first + forgotten*2/trace) / half)
	if first/half-begun > edgesMost {
		return errors.New("the square wave is too fast for this circuit: hundreds of thousands of edges fall into one time constant")
	}
	r.edge = int(begun)
	r.on = r.edge%2 == 0
	r.now = begun * half
	r.advance(first)
	return nil
}

// nextEdge returns the time of the next edge; infinite when there is none.
func (r *run) nextEdge() float64 {
	if math.IsInf(r.half, 1) {
		if r.edge > 0 {
			return math.Inf(1)
		}
		return 0
	}
	return float64(r.edge) * r.half
}

// sampleOn goes on to the next sample, at the time to, one interval away.
func (r *run) sampleOn(to, interval float64) {
	if r.bent == nil && r.nextEdge() > to-1e-9*interval && r.nextEdge() > r.now+1e-9*interval {
		r.x, r.now = r.byCycle.apply(r.x), to
		return
	}
	r.advance(to)
}

// advance goes on to the time to; an edge exactly there is left for later.
func (r *run) advance(to float64) {
	for edge := r.nextEdge(); edge < to; edge = r.nextEdge() {
		r.free(edge - r.now)
		r.now = edge
		r.turn()
	}
	r.free(to - r.now)
	r.now = to
}

// free lets the circuit ring for h seconds with the source as it is.
func (r *run) free(h float64) {
	switch {
	case h <= 0:
	case r.bent != nil:
		r.x = r.bent.advance(r.x, h)
	default:
		r.x = r.net.propagator(h).apply(r.x)
	}
}

// turn switches the source: what was settled is now a ring, or the reverse.
func (r *run) turn() {
	sign := 1.0
	if !r.on {
		sign = -1
	}
	for i := range r.x {
		r.x[i] += sign * r.level[i]
	}
	r.on = !r.on
	r.edge++
}

// voltage is what the probe sees.
func (r *run) voltage() float64 {
	v := r.x[1] + r.x[3]
	if r.on {
		v += r.level[1] + r.level[3]
	}
	return v
}
