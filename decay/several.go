package decay

import (
	"math"
	"slices"

	"dieaway/capture"

	"gonum.org/v1/gonum/stat/distuv"
)

const (
	edgesMost    = 6    // cuts in search of a decay between edges
	edgeShare    = 0.2  // of the range that an edge must jump by
	edgeLevel    = 2    // of the pyramid, means of 16 samples, that edges are sought on
	stepsLeast   = 256  // steps that tell their noise,
	stepChance   = 1e-3 // and probability that one of them is so large in noise alone
	sameRing     = 0.15 // mean square departure, over the square of the amplitude, of one ring from itself
	stirring     = 3    // variance over that of the noise that is worth a look
	decayShare   = 0.05 // of the first amplitude that another decay must have
	decayTwin    = 0.25 // relative difference of frequency up to which it is the same circuit
	disagreement = 1e-3 // probability below which the decays of a record disagree
)

// findDecays finds every free decay of s: the most prominent one first in the
// search, and, where something else stirs before or behind it, those of the same
// circuit there. They are returned in order of time.
func findDecays(s series, opt Options) []gate {
	if opt.From != nil || opt.To != nil {
		if g, ok := findGate(s, opt.From != nil, opt.To != nil, opt.Model); ok {
			return []gate{g}
		}
		return nil
	}
	g, ok := decayIn(s, opt.Model, nil)
	switch {
	case ok:
	case g.last > 0:
		return []gate{g} // for the judge to say what is wrong with it
	default:
		return nil
	}
	return joined(s, slices.Concat(decaysLike(&g, s, 0, g.first, opt.Model), []gate{g}, decaysLike(&g, s, g.last, s.len(), opt.Model)))
}

// decaysLike finds the decays of the circuit of g in samples from to to-1.
func decaysLike(g *gate, s series, from, to int, model Model) []gate {
	if to-from < max(2*samplesLeast, int(g.fit.period())) || !g.stirs(s.slice(from, to)) {
		return nil
	}
	next, ok := decayIn(s.slice(from, to), model, g)
	if !ok {
		return nil
	}
	next.first, next.last, next.rank = next.first+from, next.last+from, g.rank+1
	return slices.Concat(decaysLike(g, s, from, next.first, model), []gate{next}, decaysLike(g, s, next.last, to, model))
}

// joined makes one of neighbouring gates, in order of time, that hold parts of the
// same decay: an edge or clipped samples may have led to a cut between them.
func joined(s series, list []gate) []gate {
	var out []gate
	for i := range list {
		g := &list[i]
		n := len(out)
		if n == 0 || !out[n-1].runsInto(g, s) {
			out = append(out, *g)
			continue
		}
		if whole, ok := out[n-1].upTo(g, s); ok {
			out[n-1] = whole
		} else if g.rank < out[n-1].rank {
			out[n-1] = *g // the model does not follow the decay all the way
		}
	}
	return out
}

// upTo is the gate carried on to the end of other; false when the fit then leaves more,
// or when it was cut because its tail is coarse.
func (g *gate) upTo(other *gate, s series) (gate, bool) {
	if g.cutCoarse {
		return *g, false
	}
	whole := *g
	whole.last, whole.cutAfter = other.last, other.cutAfter
	ok := whole.finish(s)
	return whole, ok && whole.fit.sigma() <= sigmaGrowth*math.Max(g.fit.sigma(), other.fit.sigma())
}

// runsInto reports whether the ring of g, continued, is that of other: then the
// two are parts of one decay that the model does not follow all the way.
func (g *gate) runsInto(other *gate, s series) bool {
	if other.first < g.last {
		return false
	}
	n := min(max(4, int(other.fit.period()/2)), other.last-other.first)
	origin := s.slice(g.first, s.len())
	sum := 0.0
	for i := range n {
		at := origin.position(other.first + i - g.first)
		d := g.fit.value(at) - other.fit.value(float64(i))
		sum += d * d
	}
	return sum < sameRing*float64(n)*sq(other.fit.size())
}

// stirs reports whether more than the noise of the decay g moves in s.
func (g *gate) stirs(s series) bool {
	sample := newRing(s.thinned(choiceSamples))
	return sample.aboutMean() > stirring*sq(g.fit.sigma())*float64(sample.n)
}

// decayIn finds a decay in s that is plausible and, unless like is nil, of the
// same circuit. A drive that switches to and fro may outweigh the ring: then it is
// looked for between the edges. Where there is none the gate is what was found in the
// whole of s, if anything.
func decayIn(s series, model Model, like *gate) (gate, bool) {
	return decayWithin(s, model, like, edgesMost)
}

func decayWithin(s series, model Model, like *gate, cuts int) (gate, bool) {
	if s.len() < 2*samplesLeast {
		return gate{}, false
	}
	whole, ok := findGate(s, false, false, model)
	if ok && whole.plausible() && (like == nil || whole.sameCircuit(like)) {
		return whole, true
	}
	if !ok {
		whole = gate{}
	}
	if cuts == 0 {
		return whole, false
	}
	p := newPyramid(s)
	at, ok := p.strongestEdge(s)
	if !ok || whole.last > 0 && whole.fit.isNoise() && !p.standsOut() {
		return whole, false
	}
	for _, part := range [][2]int{{at, s.len()}, {0, at}} {
		if g, ok := decayWithin(s.slice(part[0], part[1]), model, like, cuts-1); ok {
			g.first, g.last = g.first+part[0], g.last+part[0]
			return g, true
		}
	}
	return whole, false
}

// plausible reports whether the gate holds a decay that is worth a second look.
func (g *gate) plausible() bool {
	f := &g.fit
	v := f.noise()
	cov, ok := f.covariance(v)
	return ok && f.a > decaySigma*math.Sqrt(cov.At(0, 0)) && energyGain(f, v) > energyNeeded(f.s.len())
}

// strongestEdge finds where the means of stretches of 16 samples jump most, if by
// a notable share of the range.
func (p *pyramid) strongestEdge(s series) (int, bool) {
	if len(p.levels) <= edgeLevel || s.times != nil {
		return 0, false
	}
	y := p.levels[edgeLevel].y
	i := p.steepest(edgeLevel, 1, len(y)-1)
	if i+2 >= len(y) || math.Abs(y[i+2]-y[i]) < edgeShare*(s.hi-s.lo) {
		return 0, false
	}
	for j := edgeLevel - 1; j >= 0; j-- {
		i *= pyramidRatio
		i = p.steepest(j, i, i+3*pyramidRatio)
	}
	return i + 1, i > 0
}

// standsOut reports whether on some level a step is larger than the largest of as many
// steps of Gaussian noise of any colour: slow noise has steep places everywhere, and to
// cut it there finds no decay. A few steps tell nothing of that.
func (p *pyramid) standsOut() bool {
	for k, level := range p.levels {
		y, n := level.y, level.len()-2
		if n < stepsLeast {
			return k == 0
		}
		steps := make([]float64, 0, min(n, noiseSamples))
		for i := 0; i < n; i += 1 + n/noiseSamples {
			steps = append(steps, y[i+2]-y[i])
		}
		i := min(p.steepest(k, 0, level.len()), n-1)
		most := math.Max(math.Abs(y[i+1]-y[i]), math.Abs(y[i+2]-y[i]))
		if most > math.Sqrt(2*math.Log(float64(n)/stepChance))*robustSigma(steps) {
			return true
		}
	}
	return false
}

// sameCircuit reports whether g is a measurable decay of the circuit of other.
func (g *gate) sameCircuit(other *gate) bool {
	f, o := &g.fit, &other.fit
	if f.a <= 0 || f.size() < decayShare*o.size() || math.Abs(f.w-o.w) > decayTwin*o.w || f.a > 2*o.a || f.a < o.a/2 {
		return false
	}
	return energyGain(f, f.noise()) > energyNeeded(f.s.len())
}

// combined weighs the rates and frequencies of several decays by their
// covariances. The chi-squared of their differences tests whether they agree; a
// Birge ratio (Birge 1932, from memory) above one widens the uncertainty.
type combined struct {
	a, w   float64
	cov    sym
	chi2   float64
	degree int
	birge  float64
}

// combine takes the pairs (a, w) with their 2 x 2 covariances.
func combine(a, w []float64, cov []sym) (combined, bool) {
	var out combined
	info := sym{n: 2}
	var rhs [2]float64
	weights := make([]sym, len(cov))
	for i := range cov {
		pair := sym{n: 2}
		for j := range 2 {
			for k := range 2 {
				pair.set(j, k, cov[i].At(j, k))
			}
		}
		inv, ok := pair.inverse()
		if !ok {
			return out, false
		}
		weights[i] = inv
		for j := range 2 {
			for k := range 2 {
				info.v[j*parametersMost+k] += inv.At(j, k)
			}
			rhs[j] += inv.At(j, 0)*a[i] + inv.At(j, 1)*w[i]
		}
	}
	var ok bool
	if out.cov, ok = info.inverse(); !ok {
		return out, false
	}
	out.a = out.cov.At(0, 0)*rhs[0] + out.cov.At(0, 1)*rhs[1]
	out.w = out.cov.At(1, 0)*rhs[0] + out.cov.At(1, 1)*rhs[1]
	for i := range weights {
		out.chi2 += weights[i].quadratic([]float64{a[i] - out.a, w[i] - out.w})
	}
	out.degree = 2 * (len(a) - 1)
	out.birge = 1
	if out.degree > 0 {
		out.birge = math.Max(1, math.Sqrt(out.chi2/float64(out.degree)))
	}
	return out, true
}

// disagree reports whether chance alone would hardly make the decays differ so much.
func (c *combined) disagree() bool {
	return c.degree > 0 && distuv.ChiSquared{K: float64(c.degree)}.Survival(c.chi2) < disagreement
}

// widened returns the covariance times the square of the Birge ratio.
func (c *combined) widened() sym {
	out := c.cov
	for i := range out.v {
		out.v[i] *= c.birge * c.birge
	}
	return out
}

// severalDecays tells how a record with several decays was treated.
func severalDecays(n int, c *combined) []Finding {
	out := []Finding{note(capture.SeveralDecays,
		sprintf("The record holds %d decays; each was fitted, and the result combines them by their uncertainties.", n),
		"Nothing; set the gate to quote one of them alone.")}
	if c.disagree() {
		out = append(out, warning(capture.DecaysDisagree,
			sprintf("The decays of the record differ by more than their uncertainties: chi-squared %s with %d degrees of freedom; the uncertainty was multiplied by %s.", figure(c.chi2, 3), c.degree, figure(c.birge, 2)),
			"Compare the decays one by one with the gate: the two edges may load the circuit differently, or it drifts."))
	}
	return out
}
