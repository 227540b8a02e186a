package circuit

import (
	"fmt"
	"math"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/driven"
	"dieaway/decay/quantity"
)

// An Analysis is what a ring-down or a sweep says of the circuit, given a bench file. What
// cannot be told is not Known, and the findings say why.
type Analysis struct {
	Topology Topology
	// Known is the component of the bench file that the others are found from:
	// "inductance", "capacitance", "coil resistance", or "" when it gives none.
	Known string
	// Inductance (H), Capacitance (F) and Resistance (ohm) of the circuit by
	// itself; Resistance is in series with the coil, the coil's own and the rest.
	Inductance, Capacitance, Resistance quantity.Quantity
	// Unloaded is how the circuit rings without source and probe; the fitted
	// resistor belongs to it.
	Unloaded Condition
	// Budget is where the loss sits, Total the sum of it.
	Budget []Loss
	Total  Loss
	// Given are the values of the bench file that the measurement can be held against.
	Given    []GivenValue
	Findings []decay.Finding
}

// A Condition is how a circuit rings with certain things connected.
type Condition struct {
	NaturalFrequency quantity.Quantity // Hz
	Q                quantity.Quantity
	DampingRatio     quantity.Quantity
	Bandwidth        quantity.Quantity // Hz
}

// A Loss is one part of what the circuit loses.
type Loss struct {
	// Part is "source", "resistor" (the fitted one), "probe", and "coil and the
	// rest" or, when the bench file gives the coil's resistance, "coil" and "rest".
	Part string
	// Resistance in series with the coil that loses as much, ohm.
	Resistance quantity.Quantity
	// Q if this part alone took power: all 1/Q add up to that of the whole.
	Q quantity.Quantity
	// Share of 1/Q, 1 for all of it.
	Share quantity.Quantity
}

// A GivenValue sets a value of the bench file beside the one found.
type GivenValue struct {
	Name         string
	Given, Found quantity.Quantity
	// En is found less given over the expanded uncertainty of the difference; NaN
	// where the bench file gives no uncertainty.
	En float64
}

// The inputs of the time bases.
const (
	clock        = "clock of the ring-down"
	clockOfSweep = "clock of the sweep"
)

// Analyze works out component values, unloaded resonance and loss budget from the
// result of a ring-down that was made in the set-up [Bench.RingDown]. The
// uncertainties of q must contain that set-up's TimebaseU, as those of
// [decay.Options] do.
func Analyze(b *Bench, q *decay.Quantities) *Analysis {
	s := newScene(b)
	w := &sideWork{m: &measured{clock: &s.clock}, at: &s.ringDown, name: "ring-down"}
	return s.analyze(w, q.DampedFrequency.Known() && q.DecayRate.Known(), func() {
		s.addRingDown(w.m, q, b.RingDown.TimebaseU)
		s.add(clock, quantity.New(0, b.RingDown.TimebaseU, ""), &s.clock)
	})
}

// AnalyzeSweep does so from the result of a driven sweep that was made in the set-up
// [Bench.Sweep].
func AnalyzeSweep(b *Bench, q *driven.Quantities) *Analysis {
	s := newScene(b)
	s.withSweep()
	w := &sideWork{m: &measured{clock: &s.sweepClock}, at: &s.sweep, name: "sweep"}
	return s.analyze(w, q.NaturalFrequency.Known() && q.Q.Known(), func() {
		s.addSweep(w.m, q.NaturalFrequency, q.Q, q.Correlation, b.Sweep.TimebaseU)
		s.add(clockOfSweep, quantity.New(0, b.Sweep.TimebaseU, ""), &s.sweepClock)
	})
}

// analyze works out what one measurement says; bind makes inputs of its result.
func (s *scene) analyze(w *sideWork, rings bool, bind func()) *Analysis {
	a := emptyAnalysis(s.bench)
	if !a.feasible(s, w.at, rings) {
		return a
	}
	bind()
	if tank := s.tank(w.m.resonance(), w.at); !a.possibleIn(tank, s.load(w.at)) {
		return a
	}
	parts := s.partNames(w.at)
	joint, err := s.propagate(analysisResults(parts), func(y []float64) {
		r := w.m.resonance()
		tank := s.tank(r, w.at)
		free := tank.Loaded(s.own())
		y = y[copy(y, []float64{tank.Inductance, tank.Capacitance, tank.Resistance}):]
		y = y[copy(y, conditionFigures(free)):]
		s.losses(y, r, tank, w.at)
	})
	if err != nil { // an uncertainty that is not known
		a.note("Component values were not worked out: an uncertainty of the result is not known.")
		return a
	}
	a.take(joint, parts)
	a.compare(s, w.name)
	if f, wrong := negativeRemainder(a.Budget, a.Total, w.name); wrong {
		a.Findings = append(a.Findings, f)
	}
	return a
}

func emptyAnalysis(b *Bench) *Analysis {
	none := quantity.Unknown
	return &Analysis{Topology: b.Topology, Known: string(choose(b)),
		Inductance: none("H"), Capacitance: none("F"), Resistance: none("ohm"),
		Unloaded: Condition{none("Hz"), none(""), none(""), none("Hz")},
		Total:    Loss{"total", none("ohm"), none(""), none("")}}
}

// feasible says in a note why nothing can be worked out.
func (a *Analysis) feasible(s *scene, at *setup, rings bool) bool {
	switch {
	case s.known == nothing && s.load(at) == (Load{}) && !s.bench.Limits.ofCircuit():
		return false // nobody asked
	case s.known == nothing:
		a.Findings = append(a.Findings, nothingKnown)
		return false
	case !rings:
		a.note("The circuit does not ring: its component values were not worked out.")
		return false
	}
	return true
}

var nothingKnown = decay.Finding{Code: capture.Loading, Severity: capture.Note,
	Message: "The bench file gives none of inductance, capacitance and coil_resistance: neither component values nor what source and probe do can be worked out.",
	Remedy:  "Give one of them under [circuit]."}

func (a *Analysis) note(message string) {
	a.Findings = append(a.Findings, decay.Finding{Code: capture.Loading, Severity: capture.Note, Message: message,
		Remedy: "Nothing; frequency and damping stand by themselves."})
}

// possibleIn warns of a bench file that no circuit can follow.
func (a *Analysis) possibleIn(t Tank, load Load) bool {
	switch {
	case math.IsNaN(t.Inductance+t.Capacitance+t.Resistance) || !(t.Inductance > 0):
		a.wrong("No coil and capacitor can ring as measured with the source, resistor and probe of the bench file connected.",
			"Check their values, and the component that is given as known.")
	case !(t.Capacitance > 0):
		a.wrong(fmt.Sprintf("All capacitance together is %s, less than the %s of the probe in the bench file.",
			quantity.Format(t.Capacitance+load.Capacitance, "F", 3), quantity.Format(load.Capacitance, "F", 3)),
			"Check probe_capacitance and the inductance of the bench file.")
	default:
		return true
	}
	return false
}

// wrong warns that the bench file contradicts the measurement.
func (a *Analysis) wrong(message, remedy string) {
	a.Findings = append(a.Findings, decay.Finding{Code: capture.Loading, Severity: capture.Warning, Message: message, Remedy: remedy})
}

func analysisResults(parts []string) []result {
	return append(append([]result{{"inductance", "H"}, {"capacitance", "F"}, {"resistance", "ohm"}},
		conditionResults("unloaded")...), lossResults(parts)...)
}

// take reads the results in the order of analysisResults.
func (a *Analysis) take(j *quantity.Joint, parts []string) {
	a.Inductance, a.Capacitance, a.Resistance = j.At(0), j.At(1), j.At(2)
	a.Unloaded = conditionAt(j, 3)
	a.Budget = lossesAt(j, 3+conditionSize, parts)
	a.Total, a.Budget = a.Budget[len(parts)-1], a.Budget[:len(parts)-1]
}

// compare holds what the bench file gives beyond the known component against
// what was found by a measurement.
func (a *Analysis) compare(s *scene, by string) {
	b := s.bench
	for _, g := range []struct {
		name         string
		given, found quantity.Quantity
		known        known
	}{{"inductance", b.Inductance, a.Inductance, knownInductance}, {"capacitance", b.Capacitance, a.Capacitance, knownCapacitance}} {
		if !g.given.Known() || s.known == g.known {
			continue
		}
		v := GivenValue{g.name, g.given, g.found, quantity.En(g.found, g.given, 0)}
		a.Given = append(a.Given, v)
		a.judgeGiven(v, by)
	}
}

// grossError is how far a part may be from a value that is given without an
// uncertainty before the bench file is doubted: the widest usual tolerance.
const grossError = 0.2

func (a *Analysis) judgeGiven(v GivenValue, by string) {
	off := v.Found.Value/v.Given.Value - 1
	if math.Abs(v.En) > 1 || math.IsNaN(v.En) && math.Abs(off) > grossError {
		a.wrong(fmt.Sprintf("The %s is %s by the %s and the %s of the bench file, which gives %s: %+.2g %%.",
			v.Name, v.Found, by, a.Known, v.Given, 100*off),
			"Check both values of the bench file; a coil's own capacitance adds to the capacitor's.")
	}
}
