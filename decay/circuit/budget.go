package circuit

import (
	"fmt"
	"math"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// The parts of a loss budget.
const (
	partSource   = "source"
	partResistor = "resistor"
	partProbe    = "probe"
	partCoil     = "coil"
	partRest     = "rest"
	partCoilRest = "coil and the rest"
	partTotal    = "total"
)

// conditionSize is the number of figures of a Condition.
const conditionSize = 4

func conditionResults(of string) []result {
	return []result{{of + " natural frequency", "Hz"}, {of + " 1/Q", ""}, {of + " damping ratio", ""}, {of + " bandwidth", "Hz"}}
}

// conditionFigures are f0, 1/Q, zeta and B: 1/Q stays finite where there is no loss.
func conditionFigures(r Resonance) []float64 {
	return []float64{r.NaturalFrequency, 1 / r.Q(), r.DampingRatio(), r.Bandwidth()}
}

func conditionAt(j *quantity.Joint, i int) Condition {
	return Condition{j.At(i), reciprocal(j.At(i + 1)), j.At(i + 2), j.At(i + 3)}
}

// reciprocal returns 1/q; not Known unless q is positive.
func reciprocal(q quantity.Quantity) quantity.Quantity {
	if !(q.Value > 0) {
		return quantity.Unknown("")
	}
	return quantity.New(1/q.Value, q.U/(q.Value*q.Value), "")
}

// partNames returns the parts of the budget in a set-up, the total last.
func (s *scene) partNames(at *setup) []string {
	var names []string
	source, resistor, probe := s.parts(at)
	for _, p := range []struct {
		name string
		load Load
	}{{partSource, source}, {partResistor, resistor}, {partProbe, probe}} {
		if p.load.Resistance != 0 || p.load.Conductance != 0 {
			names = append(names, p.name)
		}
	}
	if s.bench.CoilResistance.Known() {
		names = append(names, partCoil)
		if s.known == knownResistance {
			return append(names, partTotal) // what remains is what was given
		}
		return append(names, partRest, partTotal)
	}
	return append(names, partCoilRest, partTotal)
}

func lossResults(parts []string) (all []result) {
	for _, p := range parts {
		all = append(all, result{p + " resistance", "ohm"}, result{p + " 1/Q", ""}, result{p + " share", ""})
	}
	return all
}

// losses writes equivalent series resistance, 1/Q and share of every part to y.
// 2 alpha = R/L + G/C' is a plain sum over all resistances and conductances: a
// part that adds d to it has the equivalent resistance d L and the 1/Q d/omega0.
func (s *scene) losses(y []float64, r Resonance, t Tank, at *setup) {
	source, resistor, probe := s.parts(at)
	all := t.Capacitance + s.load(at).Capacitance
	rate := func(l Load) float64 { return l.Resistance/t.Inductance + l.Conductance/all }
	total := 2 * r.DecayRate
	for i, name := range s.partNames(at) {
		var d float64
		switch name {
		case partSource:
			d = rate(source)
		case partResistor:
			d = rate(resistor)
		case partProbe:
			d = rate(probe)
		case partCoil:
			d = s.coil / t.Inductance
		case partRest:
			d = (t.Resistance - s.coil) / t.Inductance
		case partCoilRest:
			d = t.Resistance / t.Inductance
		case partTotal:
			d = total
		}
		y[3*i], y[3*i+1], y[3*i+2] = d*t.Inductance, d/(2*math.Pi*r.NaturalFrequency), d/total
	}
}

func lossesAt(j *quantity.Joint, from int, parts []string) []Loss {
	var out []Loss
	for i, p := range parts {
		out = append(out, Loss{p, j.At(from + 3*i), reciprocal(j.At(from + 3*i + 1)), j.At(from + 3*i + 2)})
	}
	return out
}

// negativeRemainder finds fault with a budget whose last part, what remains, is
// below zero: with its expanded uncertainty, a warning; without it, a note.
func negativeRemainder(budget []Loss, total Loss, setup string) (f decay.Finding, found bool) {
	if len(budget) == 0 {
		return f, false
	}
	last := budget[len(budget)-1]
	r := last.Resistance
	if r.Value >= 0 || last.Part == partCoil {
		return f, false
	}
	f = decay.Finding{Code: capture.Loading, Severity: capture.Note,
		Message: fmt.Sprintf("Nothing remains for %s in the %s: %s of a total of %s, which is none within its uncertainty.",
			last.Part, setup, r, total.Resistance),
		Remedy: "Nothing; less loading tells more of the coil."}
	if r.Value+2*r.U < 0 {
		f.Severity = capture.Warning
		f.Message = fmt.Sprintf("The bench file takes away more loss than the %s has: of a total of %s there would remain %s for %s.",
			setup, total.Resistance, r, last.Part)
		f.Remedy = "Check the source, resistor, probe and component values of the bench file: at least one is wrong."
	}
	return f, true
}
