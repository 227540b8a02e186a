package decay

import (
	"cmp"
	"math"
)

// gate is the stretch of a record that one free decay fills, and the fit to it.
type gate struct {
	first, last int // samples first to last-1
	fit         ringFit
	// cutBefore and cutAfter tell that something else (an edge) bounds the gate,
	// not the record.
	cutBefore, cutAfter bool
	// reach is how far the start may be off, in samples; 0: any distance.
	reach int
	// rank is 0 for the decay that the search found first, and more for others.
	rank int
	// coarse tells that nothing blurs the steps of the converter.
	coarse bool
	// cutCoarse tells that the tail was cut for that.
	cutCoarse bool
	// checked are the stretches that the gate grew over, in order.
	checked []checked
}

const (
	seedsTried     = 4        // per onset
	coreCycles     = 16       // cycles of a first fit, however many samples they take
	coreMost       = 1 << 15  // samples of a first fit
	deepWindow     = 1 << 16  // samples from which a gate grows fourfold
	growRest       = 4        // share of a step below which what is left goes with it
	tailLimit      = 12       // time constants after which nothing is left to learn
	breakSigma     = 6        // departure that cannot be noise...
	breakShare     = 0.03     // ...nor a model that is slightly wrong,
	breakMargin    = 1.0 / 16 // cycles left out before the samples leave the fit
	breakNeighbour = 4        // if another such sample stands less than this apart
)

// findGate finds the free decay in s: where it begins, after the edge that
// shocked the circuit, and where to stop. The first fit grows from the best seed
// to both sides as long as the samples follow it. Where one ring does not account
// for its samples the same is done with a companion taken off, the likelier of
// the two accounts is kept, and other models are tried.
func findGate(s series, fixedStart, fixedEnd bool, model Model) (gate, bool) {
	p := newPyramid(s)
	first, ok := firstFit(s, p, fixedStart)
	if !ok {
		return gate{}, false
	}
	g := first
	g.settle(s, p, fixedStart, fixedEnd)
	if !fixedStart {
		p.behindDrive(s, &first, &g, fixedEnd)
	}
	g.cutCoarseTail(s)
	plain := g
	if !g.nothingRings(&first) && g.misfits(s) && !g.coarse {
		if two, ok := withCompanion(s, &first); ok {
			two.settleBoth(s, fixedStart, fixedEnd)
			if two.cost(s) < g.cost(s)-companionMargin {
				g = two
			}
		}
		model = cmp.Or(model, open)
	}
	g.chooseModel(s, model)
	if !fixedStart && g.fit.earned(model) {
		g.extendBack(s)
		g.leaveDrive(s, false)
	}
	g.skipMissing(s)
	if !g.finish(s) {
		return plain, plain.finish(s)
	}
	return g, true
}

// finish fits the gate for good.
func (g *gate) finish(s series) bool {
	ok := g.refit(s, fine)
	g.fit.rival = g.fit.findRival()
	return ok
}

// skipMissing lets the gate begin with a sample that is there.
func (g *gate) skipMissing(s series) {
	for g.first < g.last-samplesLeast && math.IsNaN(s.y[g.first]) {
		g.first++
	}
}

// settle moves both ends of the gate to where the decay begins and ends. The start
// is looked for again where the samples that tell it have come to light only then.
func (g *gate) settle(s series, p *pyramid, fixedStart, fixedEnd bool) {
	if !fixedStart {
		g.placeStart(s, p, cmp.Or(g.reach, s.len()))
	}
	last := g.last
	g.growForward(s, fixedEnd)
	switch window := s.slice(g.first, g.last); {
	case fixedStart || last == g.last || g.fit.problem.covers(window) && last-g.first >= startWindow(&g.fit):
	case last-g.first >= startWindow(&g.fit):
		g.refit(s, coarse)
	default:
		g.placeStart(s, p, int(g.fit.period()/2)) // the rest of the decay moves it no further
		g.growForward(s, fixedEnd)
	}
}

// growForward extends the gate, doubling it, until the record ends, the decay has
// died, or the samples break with the fit.
func (g *gate) growForward(s series, fixedEnd bool) {
	g.checked = nil
	for {
		limit := s.len()
		if g.fit.a > 0 && !fixedEnd {
			limit = min(limit, g.first+int(math.Max(tailLimit/g.fit.a, 16)))
		}
		if g.last >= limit {
			g.last = limit
			g.cutAfter = false
			return
		}
		step := max(g.last-g.first, 8)
		if step > deepWindow {
			step *= 3 // so long a window predicts far ahead, and each fit is a few passes
		}
		to := g.last + step
		if to > limit-step/growRest {
			to = limit // rather than a last step that adds little
		}
		if i, broken := g.breakIn(s, g.last, to); broken && !fixedEnd {
			g.last, g.cutAfter = max(g.last, g.lastBefore(s, i)), true
			return
		}
		g.last = to
		g.refit(s, coarse)
	}
}

// lastBefore goes back from a break to where the samples begin to leave the fit, on
// the side where they break, and a little further.
func (g *gate) lastBefore(s series, at int) int {
	origin, sigma := s.slice(g.first, s.len()), g.lateSigma()
	residual := func(i int) float64 { return s.y[i] - g.fit.value(origin.position(i-g.first)) }
	side := math.Copysign(1, residual(at))
	for at > g.last && residual(at-1)*side > sigma {
		at--
	}
	return at - int(breakMargin*g.fit.period())
}

// refit fits the window of the gate, from the last fit and with its model, to
// tolerance. It is false, and the fit that of another window, when none can be made.
func (g *gate) refit(s series, tolerance float64) bool {
	next, ok := refit(s.slice(g.first, g.last), &g.fit, 0, tolerance)
	if ok {
		g.fit = next
	}
	return ok
}

// refit fits window with the model of f, started at its parameters; the window
// begins shift intervals after that of f.
func refit(window series, f *ringFit, shift, tolerance float64) (ringFit, bool) {
	if f.bend != nil {
		return refitBent(window, f, shift, tolerance)
	}
	switch p := f.problem; {
	case p.covers(window):
		return p.solve(f.theta(), tolerance)
	case p.begins(window):
		return p.extended(window).solve(f.theta(), tolerance)
	case p != nil:
		return p.elsewhere(window).solve(f.theta(), tolerance)
	}
	return fitSum(window, pole{f.a, f.w}, f.companionPole(), tolerance)
}

// breakIn returns the first of the samples from to to-1 behind the fitted window
// that departs from the fit by more than noise, prediction and a slightly wrong
// model explain, provided that another does so close by.
func (g *gate) breakIn(s series, from, to int) (int, bool) {
	cov, ok := g.fit.normal.jtj.inverse()
	if !ok {
		return to, false
	}
	sigma := g.lateSigma()
	limit := breakSigma*sigma + breakShare*g.fit.size()
	origin := s.slice(g.first, s.len())
	var held []int // those that depart, up to the first that has another close by
	most := 0.0
	halves(to-from, func(first, last int) func() {
		var own []int
		largest := g.fit.departing(origin, from+first-g.first, from+last-g.first, limit, func(i int, r float64) bool {
			if math.Abs(r) > limit+breakSigma*sigma*g.fit.spread(&cov, origin.position(i)) {
				own = append(own, g.first+i)
			}
			k := len(own)
			return k < 2 || !neighbours(own[k-2:])
		})
		return func() { held, most = append(held, own...), max(most, largest) }
	})
	g.check(from, to, most)
	for k := range max(0, len(held)-1) {
		if neighbours(held[k:]) {
			return held[k], true
		}
	}
	return to, false
}

// neighbours reports whether the first two of list stand close to each other.
func neighbours(list []int) bool { return list[1]-list[0] < breakNeighbour }

// spread is the standard deviation of the curve n intervals after its start,
// in units of the noise, from the covariance inv(J'J).
func (f *ringFit) spread(cov *sym, n float64) float64 {
	j, where := f.gradient(n), f.places()
	sum := 0.0
	for i, a := range where {
		for k, b := range where {
			sum += j[i] * cov.At(a, b) * j[k]
		}
	}
	return math.Sqrt(math.Max(sum, 0))
}

// gradient of the curve with respect to a, w, c, p, q.
func (f *ringFit) gradient(n float64) [5]float64 {
	sin, cos := math.Sincos(f.w * n)
	e := math.Exp(-f.a * n)
	c, s := e*cos, e*sin
	return [5]float64{-n * (f.p*c + f.q*s), n * (f.q*c - f.p*s), 1, c, s}
}

// lateSigma is the noise in the second half of the fitted window, where neither
// an edge nor a large amplitude disturbs it, by a measure that outliers do not move.
func (g *gate) lateSigma() float64 { return robustSigma(g.late()) }

// lateRMS is the same by the mean square: rounding without noise leaves 0.29 steps.
func (g *gate) lateRMS() float64 {
	sum, n := 0.0, 0
	for _, r := range g.late() {
		if r == r {
			sum += r * r
			n++
		}
	}
	return math.Sqrt(sum / float64(max(1, n)))
}

// scatter is the noise of single samples from a converter of the given step, in whose
// late samples a robust measure may see nothing but one level.
func (g *gate) scatter(step float64) float64 {
	return max(g.lateSigma(), g.lateRMS(), step/math.Sqrt(12))
}

// late returns the residual of the second half, of at most noiseSamples samples.
func (g *gate) late() []float64 {
	s := g.fit.s
	half := max(s.len()/2, s.len()-noiseSamples)
	return g.fit.residuals(s.slice(half, s.len()), s.position(half))
}
