package decay

import (
	"cmp"
	"math"
	"sort"
)

// gate is the stretch of a record that one free decay fills, and the fit to it.
type gate struct {
	first, last int // samples first to last-1
	fit         ringFit
	// cutBefore and cutAfter tell that something else (an edge) bounds the gate,
	// not the record.
	cutBefore, cutAfter bool
	// coarse tells that nothing blurs the steps of the converter.
	coarse bool
}

const (
	seedsTried     = 4       // per onset
	coreCycles     = 16      // cycles of a first fit, however many samples they take
	coreMost       = 1 << 15 // samples of a first fit
	deepWindow     = 1 << 16 // samples from which a gate grows fourfold
	growRest       = 4       // share of a step below which what is left goes with it
	tailLimit      = 12      // time constants after which nothing is left to learn
	breakSigma     = 6       // departure that cannot be noise...
	breakShare     = 0.03    // ...nor a model that is slightly wrong,
	breakNeighbour = 4       // if another such sample stands less than this apart
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
	g.cutCoarseTail(s)
	if g.misfits(s) && !g.coarse {
		if two, ok := withCompanion(s, &first); ok {
			two.settleBoth(s, fixedStart, fixedEnd)
			if two.cost(s) < g.cost(s)-companionMargin {
				g = two
			}
		}
		model = cmp.Or(model, open)
	}
	g.chooseModel(s, model)
	if !fixedStart {
		g.extendBack(s)
	}
	g.skipMissing(s)
	return g, g.refit(s, fine)
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
		g.placeStart(s, p, s.len())
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

// firstFit refines the best seeds of every onset and keeps the likeliest account
// of the whole record: a constant, then the ring in its window, then a constant.
func firstFit(s series, p *pyramid, fixedStart bool) (gate, bool) {
	var best gate
	least := math.Inf(1)
	levels := newPlateaus(p)
	onsets := p.onsets()
	if fixedStart {
		onsets = onsets[:1]
	}
	for _, o := range onsets {
		var done []seed
		for _, sd := range p.seeds(o) {
			if len(done) == seedsTried {
				break
			}
			if similar(sd, done) {
				continue
			}
			done = append(done, sd)
			f, explained, ok := p.refine(sd)
			if !ok {
				continue
			}
			if left := levels.left(sd.first, sd.last) - explained; left < least {
				least = left
				m := f.s.dt / s.dt
				f.a, f.w = f.a/m, f.w/m
				best = gate{first: p.sample(s, sd.first), last: p.sample(s, sd.last), fit: f}
			}
		}
	}
	if math.IsInf(least, 1) {
		return best, false
	}
	core := max(coreMost, int(math.Min(coreCycles*best.fit.period(), float64(s.len()))))
	best.last = min(best.last, best.first+core)
	f, ok := fitRing(s.slice(best.first, best.last), best.fit.a, best.fit.w, coarse)
	if ok {
		best.fit = f
	}
	return best, ok
}

// similar reports whether a seed of the same window adds nothing to those done.
func similar(s seed, done []seed) bool {
	for _, d := range done {
		if s.first == d.first && s.last == d.last && math.Abs(s.w-d.w) < 0.05*d.w && math.Abs(s.a-d.a) < 0.3*d.a {
			return true
		}
	}
	return false
}

// refine fits the seed's window on the finest level that keeps it short, and
// returns the energy that the ring explains there beyond a constant, in units of
// samples of level 0.
func (p *pyramid) refine(sd seed) (f ringFit, explained float64, ok bool) {
	k := 0
	for k+1 < len(p.levels) && (sd.last-sd.first)/scale(k) > coreMost {
		k++
	}
	m := float64(scale(k))
	level := p.levels[k]
	window := level.slice(sd.first/scale(k), min(sd.last/scale(k), level.len()))
	if sd.w*m > math.Pi {
		return f, 0, false
	}
	if f, ok = fitRing(window, sd.a*m, sd.w*m, coarse); !ok {
		return f, 0, false
	}
	return f, m * (f.aboutMean() - f.rss), true
}

// plateaus tells how much energy is left when a record is cut in three and each
// part is taken as constant.
type plateaus struct {
	block    int
	sum, sqs []float64 // running sums over blocks
}

const plateauBlocks = 1 << 16

func newPlateaus(p *pyramid) *plateaus {
	y := p.levels[0].y
	block := (len(y) + plateauBlocks - 1) / plateauBlocks
	n := (len(y) + block - 1) / block
	out := &plateaus{block: block, sum: make([]float64, n+1), sqs: make([]float64, n+1)}
	ref := y[len(y)/2]
	halves(n, func(first, last int) func() {
		for i := first; i < last; i++ {
			out.sum[i+1], out.sqs[i+1], _ = sums(y[i*block:min(len(y), (i+1)*block)], ref)
		}
		return func() {}
	})
	for i := range n {
		out.sum[i+1] += out.sum[i]
		out.sqs[i+1] += out.sqs[i]
	}
	return out
}

// left is the energy about the means of what lies before first, between, and from last on.
func (p *plateaus) left(first, last int) float64 {
	n := len(p.sum) - 1
	i, j := min(first/p.block, n), min((last+p.block-1)/p.block, n)
	return p.about(0, i) + p.about(i, j) + p.about(j, n)
}

func (p *plateaus) about(i, j int) float64 {
	if i >= j {
		return 0
	}
	s := p.sum[j] - p.sum[i]
	return p.sqs[j] - p.sqs[i] - s*s/float64((j-i)*p.block)
}

// sample converts an index of level 0 to one of s.
func (p *pyramid) sample(s series, i int) int {
	if s.times == nil {
		return min(i, s.len())
	}
	t := p.levels[0].t0 + float64(i)*s.dt
	return sort.SearchFloat64s(s.times, t-0.5*s.dt)
}

// growForward extends the gate, doubling it, until the record ends, the decay has
// died, or the samples break with the fit.
func (g *gate) growForward(s series, fixedEnd bool) {
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
			g.last, g.cutAfter = i, true
			return
		}
		g.last = to
		g.refit(s, coarse)
	}
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
	if f.problem.covers(window) {
		return f.problem.solve(f.theta(), tolerance)
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
	departs := func(r, n float64) bool {
		r = math.Abs(r)
		return r > limit && r > limit+breakSigma*sigma*g.fit.spread(&cov, n)
	}
	var held []int // those that depart, up to the first that has another close by
	halves(to-from, func(first, last int) func() {
		own := g.departures(s.slice(g.first, s.len()), from+first, from+last, departs)
		return func() { held = append(held, own...) }
	})
	for k := range max(0, len(held)-1) {
		if neighbours(held[k:]) {
			return held[k], true
		}
	}
	return to, false
}

// neighbours reports whether the first two of list stand close to each other.
func neighbours(list []int) bool { return list[1]-list[0] < breakNeighbour }

// departures lists the samples of the record from first to last-1 whose residual r,
// n intervals after the start of origin, departs; it ends with the first two that
// are near each other.
func (g *gate) departures(origin series, first, last int, departs func(r, n float64) bool) (out []int) {
	buffer := make([]float64, min(glitchBlock, last-first))
	for at := first - g.first; at < last-g.first; at += glitchBlock {
		block := origin.slice(at, min(at+glitchBlock, last-g.first))
		for i, r := range g.fit.residualsInto(buffer, block, origin.position(at)) {
			if !departs(r, origin.position(at+i)) {
				continue
			}
			out = append(out, g.first+at+i)
			if k := len(out); k > 1 && neighbours(out[k-2:]) {
				return out
			}
		}
	}
	return out
}

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

// late returns the residual of the second half, of at most noiseSamples samples.
func (g *gate) late() []float64 {
	s := g.fit.s
	half := max(s.len()/2, s.len()-noiseSamples)
	return g.fit.residuals(s.slice(half, s.len()), s.position(half))
}
