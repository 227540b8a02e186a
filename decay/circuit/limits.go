package circuit

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"dieaway/decay"
	"dieaway/decay/driven"
	"dieaway/decay/quantity"
)

// A Rule says how the uncertainty of a result counts against its limits.
type Rule string

// Guarded keeps a distance of the expanded uncertainty U (k = 2) from the limits:
// what lies nearer is undecided. Simple takes the value as it is.
const (
	Guarded Rule = "guarded"
	Simple  Rule = "simple"
)

// Limits are what the bench file wants kept.
type Limits struct {
	Rule   Rule
	Ranges []Range
}

// A Range is one quantity with its limits.
type Range struct {
	// Quantity is the key of the bench file, Unit its SI unit.
	Quantity, Unit string
	// Min and Max are in Unit; NaN where there is none.
	Min, Max float64
}

// A Verdict on limits.
type Verdict string

// The verdicts.
const (
	Pass      Verdict = "pass"
	Fail      Verdict = "fail"
	Undecided Verdict = "undecided"
)

// A Check is one result held against its limits.
type Check struct {
	Range
	Result  quantity.Quantity
	Verdict Verdict
}

// A Judgement is all checks and what follows from them: fail when one fails,
// else undecided when one is, else pass.
type Judgement struct {
	Rule    Rule
	Verdict Verdict
	Checks  []Check
}

// limitKey is a quantity that can have limits.
type limitKey struct {
	key, unit string
	of        func(q *decay.Quantities, a *Analysis) quantity.Quantity
}

// limitKeys are in the order of the checks: those of the circuit as it was
// connected, then those that need the bench file's components.
var limitKeys = []limitKey{
	{"damped_frequency", "Hz", func(q *decay.Quantities, _ *Analysis) quantity.Quantity { return q.DampedFrequency }},
	{"natural_frequency", "Hz", func(q *decay.Quantities, _ *Analysis) quantity.Quantity { return q.NaturalFrequency }},
	{"time_constant", "s", func(q *decay.Quantities, _ *Analysis) quantity.Quantity { return q.TimeConstant }},
	{"decay_rate", "1/s", func(q *decay.Quantities, _ *Analysis) quantity.Quantity { return q.DecayRate }},
	{"q", "", func(q *decay.Quantities, _ *Analysis) quantity.Quantity { return q.Q }},
	{"damping_ratio", "", func(q *decay.Quantities, _ *Analysis) quantity.Quantity { return q.DampingRatio }},
	{"log_decrement", "", func(q *decay.Quantities, _ *Analysis) quantity.Quantity { return q.LogDecrement }},
	{"bandwidth", "Hz", func(q *decay.Quantities, _ *Analysis) quantity.Quantity { return q.Bandwidth }},
	{"unloaded_natural_frequency", "Hz", found(func(a *Analysis) quantity.Quantity { return a.Unloaded.NaturalFrequency })},
	{"unloaded_q", "", found(func(a *Analysis) quantity.Quantity { return a.Unloaded.Q })},
	{"inductance", "H", found(func(a *Analysis) quantity.Quantity { return a.Inductance })},
	{"capacitance", "F", found(func(a *Analysis) quantity.Quantity { return a.Capacitance })},
	{"coil_resistance", "ohm", found(func(a *Analysis) quantity.Quantity { return a.Resistance })},
}

func found(of func(a *Analysis) quantity.Quantity) func(*decay.Quantities, *Analysis) quantity.Quantity {
	return func(_ *decay.Quantities, a *Analysis) quantity.Quantity {
		if a == nil {
			return quantity.Unknown("")
		}
		return of(a)
	}
}

// Judge holds the results of a ring-down against the limits. q is nil when it was
// refused and a nil when nothing is known of the circuit: what is not known is
// undecided. Without limits there is no judgement and Judge returns nil.
func (l *Limits) Judge(q *decay.Quantities, a *Analysis) *Judgement {
	if len(l.Ranges) == 0 {
		return nil
	}
	j := &Judgement{Rule: l.Rule, Verdict: Pass}
	for _, r := range l.Ranges {
		c := Check{Range: r, Result: quantity.Unknown(r.Unit)}
		for _, k := range limitKeys {
			if k.key == r.Quantity && q != nil {
				c.Result = k.of(q, a)
			}
		}
		c.Result.Unit = r.Unit
		c.Verdict = r.verdict(c.Result, l.Rule)
		j.Checks = append(j.Checks, c)
		if c.Verdict == Fail || c.Verdict == Undecided && j.Verdict == Pass {
			j.Verdict = c.Verdict
		}
	}
	return j
}

// JudgeSweep holds the results of a driven sweep against the limits, as Judge does
// those of a ring-down.
func (l *Limits) JudgeSweep(q *driven.Quantities, a *Analysis) *Judgement {
	return l.Judge(ringOf(q), a)
}

// ringOf is how a circuit rings whose sweep was measured: tau = 1/(pi B) and alpha =
// pi B with the bandwidth B, and the decrement delta = 2 pi zeta/sqrt(1 - zeta^2).
func ringOf(q *driven.Quantities) *decay.Quantities {
	if q == nil {
		return nil
	}
	b, z := q.Bandwidth, q.DampingRatio
	rest := 1 - z.Value*z.Value
	return &decay.Quantities{NaturalFrequency: q.NaturalFrequency, DampedFrequency: q.DampedFrequency, Q: q.Q, Bandwidth: b, DampingRatio: z,
		TimeConstant: quantity.New(1/(math.Pi*b.Value), b.U/(math.Pi*b.Value*b.Value), "s"),
		DecayRate:    quantity.New(math.Pi*b.Value, math.Pi*b.U, "1/s"),
		LogDecrement: quantity.New(2*math.Pi*z.Value/math.Sqrt(rest), 2*math.Pi*z.U/(rest*math.Sqrt(rest)), "")}
}

// JudgeComponents holds components against those of the limits that are on
// inductance, capacitance and coil resistance; c is nil when they were not found.
// It returns nil where there are none.
func (l *Limits) JudgeComponents(c *Components) *Judgement {
	own := &Limits{Rule: l.Rule}
	for _, r := range l.Ranges {
		if r.ofComponent() {
			own.Ranges = append(own.Ranges, r)
		}
	}
	if c == nil {
		return own.Judge(nil, nil)
	}
	return own.Judge(&decay.Quantities{}, &Analysis{Inductance: c.Inductance, Capacitance: c.Capacitance, Resistance: c.Resistance})
}

// verdict decides by the rule. Guarded: a result conforms when result +- U lies
// inside the limits, that is, between acceptance limits that are narrower by U
// (ILAC-G8:09/2019); it fails only when result +- U lies wholly outside (ISO
// 14253-1, from memory).
func (r Range) verdict(q quantity.Quantity, rule Rule) Verdict {
	low, high := r.Min, r.Max
	if math.IsNaN(low) {
		low = math.Inf(-1)
	}
	if math.IsNaN(high) {
		high = math.Inf(1)
	}
	expanded := 0.0
	if rule == Guarded {
		expanded = 2 * q.U
	}
	switch x := q.Value; {
	case math.IsNaN(x) || math.IsNaN(expanded):
		return Undecided
	case x >= low+expanded && x <= high-expanded:
		return Pass
	case x+expanded < low || x-expanded > high:
		return Fail
	}
	return Undecided
}

// ofCircuit reports whether there is a limit on what only the circuit's components tell.
func (l *Limits) ofCircuit() bool {
	return slices.ContainsFunc(l.Ranges, func(r Range) bool {
		return r.ofComponent() || strings.HasPrefix(r.Quantity, "unloaded_")
	})
}

func (r Range) ofComponent() bool {
	return r.Quantity == "inductance" || r.Quantity == "capacitance" || r.Quantity == "coil_resistance"
}

// rule takes the name of a rule.
func (l *Limits) rule(e entry) error {
	l.Rule = Rule(e.text)
	if l.Rule != Guarded && l.Rule != Simple {
		return fmt.Errorf(`expected "guarded" or "simple", found %s`, e.shown())
	}
	return nil
}

// begin returns the setter of the table that holds the limits of one quantity.
func (l *Limits) begin(k limitKey) setter {
	return func(e entry) error {
		l.rangeOf(k)
		if e.kind != kindTable {
			return fmt.Errorf("expected { min = …, max = … }, or one of them, found %s", e.shown())
		}
		return nil
	}
}

// bound returns the setter of one limit.
func (l *Limits) bound(k limitKey, upper bool) setter {
	return func(e entry) error {
		q, err := e.quantity(k.unit)
		if err != nil {
			return err
		}
		if !math.IsNaN(q.U) {
			return fmt.Errorf("expected a limit without an uncertainty, found %s", e.shown())
		}
		r := l.rangeOf(k)
		if upper {
			r.Max = q.Value
		} else {
			r.Min = q.Value
		}
		return nil
	}
}

// rangeOf returns the range of a quantity, a new one at its first limit.
func (l *Limits) rangeOf(k limitKey) *Range {
	for i := range l.Ranges {
		if l.Ranges[i].Quantity == k.key {
			return &l.Ranges[i]
		}
	}
	l.Ranges = append(l.Ranges, Range{Quantity: k.key, Unit: k.unit, Min: math.NaN(), Max: math.NaN()})
	return &l.Ranges[len(l.Ranges)-1]
}
