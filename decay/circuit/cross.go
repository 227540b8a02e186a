package circuit

import (
	"math"
	"slices"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/driven"
	"dieaway/decay/quantity"
)

// The conditions of a comparison.
const (
	AsMeasured = "as measured"
	Unloaded   = "unloaded"
)

// A CrossCheck holds a ring-down and a driven sweep of one circuit against each other.
type CrossCheck struct {
	// RingDown and Sweep are the two sides.
	RingDown, Sweep Side
	// Comparisons are of f0, Q, damping ratio and bandwidth, as measured and, where
	// the bench file tells how, unloaded. It is empty when one side was refused.
	Comparisons []Comparison
	// Decisive is the condition that Agrees goes by: [Unloaded] where there is one,
	// else [AsMeasured].
	Decisive string
	Agrees   bool
	// Explanations say in plain words where differences come from.
	Explanations []string
	// Findings are those of the comparison; those of ring-down and sweep stay there.
	Findings []decay.Finding
}

// A Side is one of the two measurements.
type Side struct {
	AsMeasured Condition
	// Unloaded is without source and probe; not Known where they cannot be taken out.
	Unloaded Condition
	// Budget is where the loss sits in this set-up, Total the sum; nil when unknown.
	Budget []Loss
	Total  Loss
	// Predicted is what this measurement says of the other set-up; not Known where
	// the bench file does not tell the difference between the two.
	Predicted Condition
}

// A Comparison is one quantity by both measurements.
type Comparison struct {
	// Quantity is "natural_frequency_hz", "q", "damping_ratio" or "bandwidth_hz".
	Quantity  string
	Condition string
	// Difference is ring-down less sweep; what both share cancels in its uncertainty.
	RingDown, Sweep, Difference quantity.Quantity
	// En is the difference over its expanded uncertainty (k = 2).
	En     float64
	Agrees bool // |En| <= 1
}

// Compare holds the two results of one circuit against each other. b is nil when
// there is no bench file. The uncertainties of both results must contain the
// TimebaseU of their set-ups.
func Compare(b *Bench, ringDown *decay.Result, sweep *driven.Result) *CrossCheck {
	if b == nil {
		b = emptyBench()
	}
	c := &comparer{CrossCheck: &CrossCheck{Decisive: AsMeasured}, ringDown: ringDown, driven: sweep}
	none := emptyAnalysis(b).Unloaded
	c.RingDown = Side{AsMeasured: none, Unloaded: none, Predicted: none}
	c.Sweep = c.RingDown
	if ringDown.Quantities == nil || sweep.Quantities == nil {
		return c.CrossCheck
	}
	c.bind(b)
	c.plan()
	if c.compute() != nil {
		c.Findings = append(c.Findings, decay.Finding{Code: capture.Loading, Severity: capture.Warning,
			Message: "The two cannot be compared: an uncertainty of one of them is not known.", Remedy: "Look at the findings of ring-down and sweep."})
		return c.CrossCheck
	}
	c.judge()
	c.explain()
	return c.CrossCheck
}

// A comparer is a cross-check under way.
type comparer struct {
	*CrossCheck
	scene    *scene
	ringDown *decay.Result
	driven   *driven.Result
	rd, sw   measured
	// unload and predict say what the bench file allows.
	unload, predict bool
	alike           bool // both set-ups load the circuit with the same
}

// bind makes inputs of both results, the bench file and the clocks.
func (c *comparer) bind(b *Bench) {
	s := newScene(b)
	s.withSweep()
	c.scene = s
	c.rd.clock, c.sw.clock = &s.clock, &s.sweepClock
	q, w := c.ringDown.Quantities, c.driven.Quantities
	if q.DampedFrequency.Known() {
		s.addRingDown(&c.rd, q, b.RingDown.TimebaseU)
	} else {
		s.addSweep(&c.rd, q.NaturalFrequency, q.Q, 0, b.RingDown.TimebaseU)
	}
	s.addSweep(&c.sw, w.NaturalFrequency, w.Q, w.Correlation, b.Sweep.TimebaseU)
	s.add(clock, quantity.New(0, b.RingDown.TimebaseU, ""), &s.clock)
	if b.Sweep.SharedClock {
		s.share(&s.clock, &s.sweepClock)
	} else {
		s.add(clockOfSweep, quantity.New(0, b.Sweep.TimebaseU, ""), &s.sweepClock)
	}
}

// plan decides what can be worked out.
func (c *comparer) plan() {
	s := c.scene
	c.alike = s.load(&s.ringDown) == s.load(&s.sweep)
	c.unload, c.predict = false, c.alike
	if s.known == nothing {
		if !c.alike {
			c.Findings = append(c.Findings, nothingKnown)
		}
		return
	}
	for _, side := range []struct {
		m  *measured
		at *setup
	}{{&c.rd, &s.ringDown}, {&c.sw, &s.sweep}} {
		a := emptyAnalysis(s.bench)
		if !a.possibleIn(s.tank(side.m.resonance(), side.at), s.load(side.at)) {
			c.Findings = append(c.Findings, a.Findings...)
			return
		}
	}
	c.unload, c.predict = true, true
}

// sides pairs each side with what it is computed from.
func (c *comparer) sides() [2]*sideWork {
	s := c.scene
	return [2]*sideWork{{&c.RingDown, &c.rd, &s.ringDown, &s.sweep, "ring-down"}, {&c.Sweep, &c.sw, &s.sweep, &s.ringDown, "sweep"}}
}

type sideWork struct {
	*Side
	m         *measured
	at, other *setup
	name      string
}

// compute propagates everything at once, so that differences know what their
// terms share.
func (c *comparer) compute() error {
	var results []result
	sides := c.sides()
	for _, w := range sides {
		results = append(results, c.resultsOf(w)...)
	}
	differences := conditionResults("difference as measured")
	if c.unload {
		differences = append(differences, conditionResults("difference unloaded")...)
	}
	each := len(results)
	joint, err := c.scene.propagate(append(results, differences...), func(y []float64) {
		out := y
		for _, w := range sides {
			out = c.figures(out, w)
		}
		c.differ(out, y)
	})
	if err != nil {
		return err
	}
	at := 0
	for _, w := range sides {
		at = c.takeSide(joint, at, w)
	}
	c.takeDifferences(joint, each)
	return nil
}

// resultsOf names the results of one side in the order of figures.
func (c *comparer) resultsOf(w *sideWork) []result {
	all := append(conditionResults(w.name+" as measured"), conditionResults(w.name+" unloaded")...)
	all = append(all, conditionResults(w.name+" predicts")...)
	if c.unload {
		all = append(all, lossResults(c.scene.partNames(w.at))...)
	}
	return all
}

// figures writes the results of one side to y and returns the rest of y.
func (c *comparer) figures(y []float64, w *sideWork) []float64 {
	r := w.m.resonance()
	free, other := r, r
	var tank Tank
	if c.unload {
		tank = c.scene.tank(r, w.at)
		free, other = tank.Loaded(c.scene.own()), tank.Loaded(c.scene.load(w.other))
	}
	for _, r := range []Resonance{r, free, other} {
		y = y[copy(y, conditionFigures(r)):]
	}
	if c.unload {
		c.scene.losses(y, r, tank, w.at)
		y = y[3*len(c.scene.partNames(w.at)):]
	}
	return y
}

// differ writes ring-down less sweep of each figure of a condition, Q as Q.
func (c *comparer) differ(out, y []float64) {
	sweep := 3 * conditionSize
	if c.unload {
		sweep += 3 * len(c.scene.partNames(&c.scene.ringDown))
	}
	for i := range out {
		a, b := y[i], y[sweep+i]
		if i%conditionSize == 1 {
			a, b = 1/a, 1/b
		}
		out[i] = a - b
	}
}

func (c *comparer) takeSide(j *quantity.Joint, at int, w *sideWork) (next int) {
	w.AsMeasured = conditionAt(j, at)
	if c.unload {
		w.Unloaded = conditionAt(j, at+conditionSize)
	}
	if c.predict {
		w.Predicted = conditionAt(j, at+2*conditionSize)
	}
	at += 3 * conditionSize
	if !c.unload {
		return at
	}
	parts := c.scene.partNames(w.at)
	all := lossesAt(j, at, parts)
	w.Budget, w.Total = all[:len(all)-1], all[len(all)-1]
	if f, wrong := negativeRemainder(w.Budget, w.Total, w.name); wrong {
		c.Findings = append(c.Findings, f)
	}
	return at + 3*len(parts)
}

func (c *comparer) takeDifferences(j *quantity.Joint, at int) {
	c.compareCondition(AsMeasured, c.RingDown.AsMeasured, c.Sweep.AsMeasured, j, at)
	if c.unload {
		c.Decisive = Unloaded
		c.compareCondition(Unloaded, c.RingDown.Unloaded, c.Sweep.Unloaded, j, at+conditionSize)
	}
}

func (c *comparer) compareCondition(name string, a, b Condition, j *quantity.Joint, at int) {
	for i, q := range []struct {
		key  string
		a, b quantity.Quantity
	}{{"natural_frequency_hz", a.NaturalFrequency, b.NaturalFrequency}, {"q", a.Q, b.Q},
		{"damping_ratio", a.DampingRatio, b.DampingRatio}, {"bandwidth_hz", a.Bandwidth, b.Bandwidth}} {
		if !q.a.Known() || !q.b.Known() { // a Q below zero is none
			continue
		}
		d := j.At(at + i)
		d.Unit = q.a.Unit
		cov := (q.a.U*q.a.U + q.b.U*q.b.U - d.U*d.U) / 2
		en := quantity.En(q.a, q.b, cov)
		c.Comparisons = append(c.Comparisons, Comparison{q.key, name, q.a, q.b, d, en, math.Abs(en) <= 1})
	}
}

// judge goes by f0 and Q of the decisive condition; zeta and bandwidth say the
// same in other words, and stand in where Q is below zero.
func (c *comparer) judge() {
	q, known := c.comparison(c.Decisive, "q")
	if !known {
		q, known = c.comparison(c.Decisive, "damping_ratio")
	}
	f, _ := c.comparison(c.Decisive, "natural_frequency_hz")
	c.Agrees = known && q.Agrees && f.Agrees
}

func (c *CrossCheck) comparison(condition, name string) (Comparison, bool) {
	i := slices.IndexFunc(c.Comparisons, func(k Comparison) bool { return k.Condition == condition && k.Quantity == name })
	if i < 0 {
		return Comparison{}, false
	}
	return c.Comparisons[i], true
}

// Compared reports whether there was anything to compare.
func (c *CrossCheck) Compared() bool { return len(c.Comparisons) > 0 }

// Transient returns the ring that this side predicts for the set-up of the decay
// d: from the same start, with the predicted frequency and damping. It returns nil
// when there is no prediction, or when it does not ring.
func (s *Side) Transient(d *decay.Decay) *Transient {
	f0, q := s.Predicted.NaturalFrequency.Value, s.Predicted.Q.Value
	r := Resonance{f0, math.Pi * f0 / q}
	fd := r.DampedFrequency()
	if math.IsNaN(fd) || fd == 0 {
		return nil
	}
	return &Transient{decay: d, rate: r.DecayRate, omega: 2 * math.Pi * fd}
}

// A Transient is a predicted ring.
type Transient struct {
	decay       *decay.Decay
	rate, omega float64
}

// At returns value, envelope and baseline at time t in s, in the unit of the channel.
func (p *Transient) At(t float64) (value, envelope, baseline float64) {
	_, _, baseline = p.decay.At(t)
	dt := t - p.decay.From
	envelope = p.decay.Amplitude.Value * math.Exp(-p.rate*dt)
	return baseline + envelope*math.Cos(p.omega*dt+p.decay.Phase.Value), envelope, baseline
}
