package decay

import (
	"cmp"
	"math"
	"slices"
)

const (
	companionGain   = 60 // chi-squared beyond chance that a second component must explain
	companionMargin = 60 // logarithm of likelihood that a gate with one must win by
	companionSeeds  = 3
	steadyFall      = 0.3  // nepers over the window below which a ring is a steady tone
	baselineRatio   = 2.5  // w over a below which a second ring may stand for the baseline,
	baselineRise    = 1.25 // if a plain exponential leaves hardly more
)

// withCompanion looks for a second component in what the fit of a gate leaves: a
// second ring, or a baseline that recovers exponentially.
func withCompanion(s series, g *gate) (gate, bool) {
	if g.fit.s.len() < 4*samplesLeast {
		return gate{}, false
	}
	list := companions(&g.fit, nil)
	if len(list) == 0 {
		return gate{}, false
	}
	best := slices.MinFunc(list, func(x, y ringFit) int { return cmp.Compare(x.rss, y.rss) })
	if !decisive(&g.fit, &best) {
		return gate{}, false
	}
	out := *g
	out.fit = best
	return out, true
}

// companions fits the ring of f with the best plain exponential and with the best
// second ring beside it. known is a start value, or nil.
func companions(f *ringFit, known *pole) []ringFit {
	starts := companionStarts(f, f.residuals(f.s, 0))
	if known != nil {
		starts = append(starts, [2]pole{{f.a, f.w}, *known})
	}
	var best [2]ringFit
	var found [2]bool
	for _, st := range starts {
		next, ok := f.problem.fitSum(st[0], &st[1], coarse)
		if !ok || next.a <= 0 {
			continue
		}
		next.dampedIsBaseline()
		next.strongestFirst()
		k := 0
		if next.companion.w > 0 {
			k = 1
		}
		if !found[k] || next.rss < best[k].rss {
			best[k], found[k] = next, true
		}
	}
	var out []ringFit
	for k := range best {
		if found[k] {
			out = append(out, best[k])
		}
	}
	return out
}

// companionStarts pairs the ring with candidates from its residual r, and, where
// the first fit took the baseline for the ring, the baseline with a ring.
func companionStarts(f *ringFit, r []float64) [][2]pole {
	ring := pole{f.a, f.w}
	length := f.s.position(f.s.len() - 1)
	var out [][2]pole
	for _, u := range fallRates {
		out = append(out, [2]pole{ring, {a: u / length}})
	}
	var done []seed
	for _, sd := range newPyramid(series{y: filled(slices.Clone(r)), dt: 1}).seeds(0) {
		if len(done) == companionSeeds {
			break
		}
		if similar(sd, done) {
			continue
		}
		done = append(done, sd)
		out = append(out, [2]pole{ring, {sd.a, sd.w}})
		if f.w < heavyRatio*f.a {
			out = append(out, [2]pole{{sd.a, sd.w}, {a: f.a}})
		}
	}
	return out
}

// decisive reports whether the companion explains more than noise does: the drop
// of the residual in units of the noise density where the companion lives, both
// taken from what the richer model leaves.
func decisive(one, two *ringFit) bool {
	v := noiseOf(two.residuals(two.s.slice(0, min(two.s.len(), noiseSamples)), 0), two.sigma())
	density := sq(v.rms * v.factor(two.companion.w))
	return (one.rss-two.rss)/density > companionGain+2*math.Log(float64(two.n))
}

// dampedIsBaseline turns a ring that hardly swings into a plain exponential: with
// another ring beside it, it stands for the baseline.
func (f *ringFit) dampedIsBaseline() {
	c := f.companion
	ring, fall := pole{f.a, f.w}, pole{c.a, 0}
	switch {
	case c.w == 0:
		return
	case f.w < baselineRatio*f.a:
		ring, fall = pole{c.a, c.w}, pole{f.a, 0}
	case c.w > baselineRatio*c.a:
		return
	}
	if next, ok := f.problem.fitSum(ring, &fall, coarse); ok && next.rss < baselineRise*f.rss {
		*f = next
	}
}

// strongestFirst makes the ring with more energy the one; a plain exponential or a
// steady tone is never it.
func (f *ringFit) strongestFirst() {
	c := f.companion
	length := f.s.position(f.s.len() - 1)
	tone, second := c.steady(length), term{f.a, f.w, f.p, f.q}
	switch {
	case c.w == 0 || tone:
		return
	case second.steady(length) || c.energy() > second.energy():
		if next, ok := f.problem.fitSum(pole{c.a, c.w}, &pole{f.a, f.w}, coarse); ok {
			*f = next
		}
	}
}

// energy is that of the whole decay of a ring, up to a factor.
func (t *term) energy() float64 { return (t.p*t.p + t.q*t.q) / math.Abs(t.a) }

// steady reports whether a ring hardly decays over length intervals: a tone.
func (t *term) steady(length float64) bool { return t.w > 0 && math.Abs(t.a)*length < steadyFall }

// settleBoth settles a gate with a companion: the ends are sought with the
// companion taken off, then both are fitted anew.
func (g *gate) settleBoth(s series, fixedStart, fixedEnd bool) {
	for range 2 {
		companion := g.fit.companionPole()
		clean := g.without(s)
		one, ok := fitRing(clean.slice(g.first, g.last), g.fit.a, g.fit.w, coarse)
		if !ok {
			return
		}
		g.fit = one
		g.settle(clean, newPyramid(clean), fixedStart, fixedEnd)
		both, ok := fitSum(s.slice(g.first, g.last), pole{g.fit.a, g.fit.w}, companion, coarse)
		if !ok {
			return
		}
		g.fit = both
	}
}

// without returns a copy of s with the companion taken off from the gate's first
// sample on.
func (g *gate) without(s series) series {
	out := s
	out.y = slices.Clone(s.y)
	if s.times == nil {
		y := out.y[g.first:]
		newFollower(0, len(y), *g.fit.companion).residuals(y, y, 0)
		return out
	}
	window := s.slice(g.first, s.len())
	for i := range window.len() {
		out.y[g.first+i] -= g.fit.companion.at(window.position(i))
	}
	return out
}

// cost is the negative logarithm of the likelihood of the gate's account of s, as
// in [startSearch].
func (g *gate) cost(s series) float64 {
	v := newRing(s).aboutMean() / float64(max(1, s.count()))
	n := float64(g.fit.n)
	return -n * math.Log(v/(g.fit.rss/n+sq(modelShare)*v))
}

// ringOnly returns the window of the gate with a companion, if there is one, taken off.
func (g *gate) ringOnly(s series) series {
	if g.fit.companion == nil {
		return s.slice(g.first, g.last)
	}
	return g.without(s).slice(g.first, g.last)
}
