package decay

import (
	"math"

	"dieaway/capture"

	"gonum.org/v1/gonum/stat/distuv"
)

const (
	decayShare   = 0.05 // of the first amplitude that another decay must have
	decayTwin    = 0.25 // relative difference of frequency up to which it is the same circuit
	disagreement = 1e-3 // probability below which the decays of a record disagree
)

// findDecays finds every free decay of s: the most prominent one, and, where an
// edge bounds it, those of the same circuit before and after.
func findDecays(s series, opt Options) []gate {
	g, ok := findGate(s, opt.From != nil, opt.To != nil, opt.Model)
	if !ok {
		return nil
	}
	list := []gate{g}
	if opt.To == nil && g.cutAfter {
		list = append(list, decaysLike(&g, s, g.last, s.len(), opt.Model)...)
	}
	if opt.From == nil && g.first > (g.last-g.first)/2 {
		list = append(decaysLike(&g, s, 0, g.first, opt.Model), list...)
	}
	return list
}

// decaysLike finds the decays of the circuit of g in samples from to to-1.
func decaysLike(g *gate, s series, from, to int, model Model) []gate {
	var out []gate
	least := max(2*samplesLeast, int(g.fit.period()))
	for to-from >= least {
		next, ok := findGate(s.slice(from, to), false, false, model)
		if !ok || !next.sameCircuit(g) {
			return out
		}
		next.first, next.last = next.first+from, next.last+from
		out = append(out, next)
		if !next.cutAfter {
			return out
		}
		from = next.last
	}
	return out
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
		"Nothing to do; set the gate to quote one of them alone.")}
	if c.disagree() {
		out = append(out, warning(capture.DecaysDisagree,
			sprintf("The decays of the record differ by more than their uncertainties: chi-squared %.3g for %d degrees of freedom; the uncertainty was widened by %.2g.", c.chi2, c.degree, c.birge),
			"Compare the decays one by one with the gate: the two edges may load the circuit differently, or it drifts."))
	}
	return out
}
