package circuit

import (
	"math"

	"dieaway/decay/quantity"
)

// A scene binds what a bench file says of circuit and set-ups to inputs.
type scene struct {
	inputs
	bench *Bench
	known known
	// Component values; those that the file leaves out stay at zero.
	inductance, capacitance, coil, resistor float64
	ringDown, sweep                         setup
	clock, sweepClock                       float64
}

// A setup is a [Setup] in figures: what it leaves out counts as not connected.
type setup struct{ source, probe, probeC float64 }

// A known is the component that the others are found from.
type known string

const (
	nothing          known = ""
	knownInductance  known = "inductance"
	knownCapacitance known = "capacitance"
	knownResistance  known = "coil resistance"
)

// choose returns the component to rely on: of inductance and capacitance the one
// with the smaller relative uncertainty, where both or neither have one; else the
// inductance, because stray capacitance makes the other uncertain; a resistance
// only where there is neither.
func choose(b *Bench) known {
	l, c := b.Inductance, b.Capacitance
	switch {
	case l.Known() && c.Known():
		if stated := !math.IsNaN(c.U); stated && (math.IsNaN(l.U) || c.Relative() < l.Relative()) {
			return knownCapacitance
		}
		return knownInductance
	case l.Known():
		return knownInductance
	case c.Known():
		return knownCapacitance
	case b.CoilResistance.Known():
		return knownResistance
	}
	return nothing
}

// newScene binds the known component, the fitted resistor and both set-ups.
func newScene(b *Bench) *scene {
	s := &scene{bench: b, known: choose(b)}
	switch s.known {
	case knownInductance:
		s.add("inductance", b.Inductance, &s.inductance)
	case knownCapacitance:
		s.add("capacitance", b.Capacitance, &s.capacitance)
	}
	s.addKnown("coil resistance", b.CoilResistance, &s.coil)
	s.addKnown("resistor", b.Resistor, &s.resistor)
	s.bindRingDown()
	return s
}

// withSweep binds the other set-up too. A part that both have with one value and
// one uncertainty is taken to be the same: its error is no reason to differ.
func (s *scene) withSweep() {
	for _, p := range []struct {
		name         string
		first, again quantity.Quantity
		to, also     *float64
	}{
		{"sweep source", s.bench.RingDown.SourceResistance, s.bench.Sweep.SourceResistance, &s.ringDown.source, &s.sweep.source},
		{"sweep probe resistance", s.bench.RingDown.ProbeResistance, s.bench.Sweep.ProbeResistance, &s.ringDown.probe, &s.sweep.probe},
		{"sweep probe capacitance", s.bench.RingDown.ProbeCapacitance, s.bench.Sweep.ProbeCapacitance, &s.ringDown.probeC, &s.sweep.probeC},
	} {
		if p.first.Known() && p.first == p.again {
			s.share(p.to, p.also)
		} else {
			s.addKnown(p.name, p.again, p.also)
		}
	}
}

func (s *scene) bindRingDown() {
	at := &s.bench.RingDown
	s.addKnown("ring-down source", at.SourceResistance, &s.ringDown.source)
	s.addKnown("ring-down probe resistance", at.ProbeResistance, &s.ringDown.probe)
	s.addKnown("ring-down probe capacitance", at.ProbeCapacitance, &s.ringDown.probeC)
}

func (s *scene) addKnown(name string, q quantity.Quantity, target *float64) {
	if q.Known() {
		s.add(name, q, target)
	}
}

// parts returns the loads of a set-up one by one: source, fitted resistor, probe.
func (s *scene) parts(at *setup) (source, resistor, probe Load) {
	probe = Load{Conductance: inverse(at.probe), Capacitance: at.probeC}
	if s.bench.Topology == Parallel {
		return Load{Conductance: inverse(at.source)}, Load{Conductance: inverse(s.resistor)}, probe
	}
	return Load{Resistance: at.source}, Load{Resistance: s.resistor}, probe
}

// load returns all that loads the tank in a set-up.
func (s *scene) load(at *setup) Load {
	source, resistor, probe := s.parts(at)
	return source.Plus(resistor).Plus(probe)
}

// own returns what loads the tank in the circuit by itself: the fitted resistor.
func (s *scene) own() Load {
	_, resistor, _ := s.parts(&setup{})
	return resistor
}

// inverse returns 1/r, and 0 for what is not connected.
func inverse(r float64) float64 {
	if r == 0 {
		return 0
	}
	return 1 / r
}

// tank finds coil and capacitor from the resonance that was measured in a set-up.
func (s *scene) tank(r Resonance, at *setup) Tank {
	load := s.load(at)
	switch s.known {
	case knownInductance:
		return WithInductance(s.inductance, r, load)
	case knownCapacitance:
		return WithCapacitance(s.capacitance, r, load)
	default:
		return WithResistance(s.coil, r, load, s.bench.Topology == Parallel)
	}
}
