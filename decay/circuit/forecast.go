package circuit

import (
	"errors"
	"math"
)

// A Forecast is what a bench file lets expect of a ring-down that is yet to be made.
type Forecast struct {
	// Free is the circuit by itself, Loaded with source and probe of the set-up.
	Free, Loaded Resonance
	// Source and Probe are how the circuit rings with only one of them connected.
	Source, Probe Resonance
}

var errLoading = errors.New("the bench file gives neither inductance nor capacitance under [circuit]: what source and probe do cannot be told")

// Forecast tells what source and probe of the ring-down's set-up will do to a
// circuit that by itself has natural frequency f0 in Hz and quality factor q. Where
// either is 0 it follows from the components of the bench file.
func (b *Bench) Forecast(f0, q float64) (*Forecast, error) {
	s := newScene(b)
	own := s.own()
	whole := Tank{b.Inductance.Value, b.Capacitance.Value, orZero(b.CoilResistance)}
	if f0 == 0 || q == 0 {
		r := whole.Loaded(own)
		if math.IsNaN(r.NaturalFrequency) {
			return nil, errors.New("the bench file gives no inductance or no capacitance under [circuit]: give them, or natural frequency and Q")
		}
		if q == 0 && !b.CoilResistance.Known() {
			return nil, errors.New("the bench file gives no coil_resistance under [circuit]: give it, or Q")
		}
		if f0 == 0 {
			f0 = r.NaturalFrequency
		}
		if q == 0 {
			q = r.Q()
		}
	}
	free := Resonance{f0, math.Pi * f0 / q}
	var tank Tank
	switch {
	case b.Inductance.Known():
		tank = WithInductance(b.Inductance.Value, free, own)
	case b.Capacitance.Known():
		tank = WithCapacitance(b.Capacitance.Value, free, own)
	default:
		return nil, errLoading
	}
	source, resistor, probe := s.parts(&s.ringDown)
	f := &Forecast{Free: free, Loaded: tank.Loaded(s.load(&s.ringDown)),
		Source: tank.Loaded(source.Plus(resistor)), Probe: tank.Loaded(probe.Plus(resistor))}
	if !(f.Loaded.Q() > 0) || math.IsInf(f.Loaded.Q(), 0) {
		return nil, errors.New("no circuit of the bench file's parts rings so: check frequency, Q and components")
	}
	return f, nil
}
