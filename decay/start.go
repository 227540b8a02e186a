package decay

import "math"

const (
	startPoints  = 16      // samples per cycle that suffice to place the start coarsely
	startReach   = 4       // samples of a coarse level within which the next one looks
	startCycles  = 32      // cycles of the decay that tell the start,
	trialStep    = 0.1     // step of a fit that is only compared with others, in variances
	heavyRatio   = 5       // w over a, twice Q, below which a ring counts as heavily damped
	startSamples = 4096    // or as many samples
	headSamples  = 1 << 15 // samples of a long gate that its start is settled with
	modelShare   = 0.005   // of the record's rms: what a slightly wrong model may leave
	trimSigma    = 3       // departure at which a sample on an edge is dropped
	trimSteps    = 64      // steps at most to do so
)

// startSearch looks for the first sample of the free decay: the cut s for which
// samples from s on, as a ring with noise of their own, and samples before s, as
// anything of the record's own variance V, are likeliest together:
//
//	J(s) = n(s) ln(RSS(s)/n(s)) + s ln V
//
// A sample is thus left out only when the ring explains it worse than chance.
type startSearch struct {
	s        series  // up to the last sample that the search needs
	whole    *poles  // one ring about them
	variance float64 // V
	floor    float64 // variance that a slightly wrong model may leave
	a, w     float64
	tried    map[int]trial
}

// trial is a fit from one start.
type trial struct {
	cost float64
	fit  ringFit
}

func newStartSearch(s series, start, last int, f *ringFit) *startSearch {
	s = s.slice(0, min(last, start+startWindow(f)))
	r := newRing(s)
	v := r.aboutMean() / float64(max(1, r.n))
	return &startSearch{s: s, whole: r, a: f.a, w: f.w, variance: v, floor: sq(modelShare) * v, tried: map[int]trial{}}
}

// startWindow is how many samples tell the start of the decay that f was fitted to.
func startWindow(f *ringFit) int { return int(math.Max(startCycles*f.period(), startSamples)) }

// at fits the decay from sample i.
func (q *startSearch) at(i int) trial {
	if t, ok := q.tried[i]; ok {
		return t
	}
	t := trial{cost: math.Inf(1)}
	if f, ok := q.fit(q.s.slice(i, q.s.len())); ok {
		n := float64(f.n)
		t = trial{cost: -n * math.Log(q.variance/(f.rss/n+q.floor)), fit: f}
	}
	q.tried[i] = t
	return t
}

// fit starts at the best estimate so far and, where the ring is so damped that a
// sample too many spoils it, afresh from the bank as well.
func (q *startSearch) fit(window series) (best ringFit, ok bool) {
	starts := []seed{{a: q.a, w: q.w}}
	if q.w < heavyRatio*q.a {
		starts = append(starts, damped(window.y)...)
	}
	for _, sd := range starts {
		f, good := q.whole.elsewhere(window).solve([]float64{sd.a, sd.w}, trialStep)
		if good && f.a > 0 && (!ok || f.rss < best.rss) {
			best, ok = f, true
		}
	}
	return best, ok
}

// search walks from start to better starts in steps that shrink by half, at first
// of up to reach.
func (q *startSearch) search(start, reach int) (int, trial) {
	at, best := start, q.at(start)
	for step := floorPower(max(1, min(reach, q.s.len()))); step >= 1; step /= 2 {
		for _, i := range []int{at - step, at + step} {
			if i < 0 || i > q.s.len()-samplesLeast {
				continue
			}
			if t := q.at(i); t.cost < best.cost {
				at, best = i, t
				q.a, q.w = t.fit.a, t.fit.w
			}
		}
	}
	return at, best
}

// floorPower is the largest power of two not above n.
func floorPower(n int) int {
	p := 1
	for p*2 <= n {
		p *= 2
	}
	return p
}

// placeStart moves the start of the gate to where the free decay begins, on the
// level that has samples enough per cycle and then on the record itself.
// reach bounds the first step, in samples.
func (g *gate) placeStart(s series, p *pyramid, reach int) {
	before, a, w := g.first, g.fit.a, g.fit.w
	k, short := 0, min(startWindow(&g.fit), s.len()) <= headSamples
	for k+1 < len(p.levels) && g.fit.period()/float64(scale(k+1)) >= startPoints && (s.whole() || !short) {
		k++
	}
	for ; k > 0; k = max(0, k-2) {
		level, m := p.levels[k], scale(k)
		first, last := p.index(s, g.first)/m, min(p.index(s, g.last)/m, level.len())
		if at, ok := g.searchStart(level, first, last, float64(m), reach/m); ok {
			g.first = min(p.sample(s, at*m), s.len()-1)
		}
		reach = min(reach, startReach*m)
	}
	if at, ok := g.searchStart(s, g.first, g.last, 1, reach); ok {
		g.first = at
	}
	g.settleStart(s, before, pole{a, w})
	g.cutBefore = g.first > 0
}

// searchStart returns the start of the decay in s, whose intervals are m times those of
// the record, sought from first on, and notes the rate and frequency that fit there.
func (g *gate) searchStart(s series, first, last int, m float64, reach int) (int, bool) {
	f := g.fit
	f.a, f.w = f.a*m, f.w*m
	q := newStartSearch(s, first, last, &f)
	at, t := q.search(min(first, max(0, q.s.len()-samplesLeast)), reach)
	if math.IsInf(t.cost, 1) {
		return first, false
	}
	g.fit.a, g.fit.w = t.fit.a/m, t.fit.w/m
	return at, true
}

// settleStart fits the gate from where its start has come to, and moves it by the
// few samples that the edge and the level before it take. was is the ring that was
// fitted from the sample before. Of a long gate the first cycles do; the whole is
// fitted anew only where its start has moved.
func (g *gate) settleStart(s series, before int, was pole) {
	head := *g
	head.last = min(g.last, g.first+max(headSamples, int(startCycles*g.fit.period())))
	long := head.last < g.last
	if !long && g.first == before && was.w > heavyRatio*was.a {
		head.fit.a, head.fit.w = was.a, was.w // the whole window knows them better
	} else {
		head.refit(s, coarse)
	}
	head.trim(s)
	head.leaveDrive(s, head.leaveLevel(s))
	switch {
	case !long:
		*g = head
	case head.first == before:
		g.first, g.fit.a, g.fit.w = before, was.a, was.w
	default:
		g.first = head.first
		g.fit.a, g.fit.w = head.fit.a, head.fit.w
		g.refit(s, coarse)
	}
}

// trim drops the samples of the edge itself, a few at most, that a finite rise
// time leaves between the levels; of a ring of many samples a cycle several at a time.
func (g *gate) trim(s series) {
	if g.first == 0 {
		return
	}
	sigma := g.lateSigma()
	most := min(g.first+max(2, int(g.fit.period()/16)), g.last-2*samplesLeast)
	step := max(1, (most-g.first)/trimSteps)
	for g.first < most {
		r := g.fit.residuals(g.fit.s.slice(0, 1), 0)[0]
		if math.Abs(r) < trimSigma*sigma {
			return
		}
		g.first = min(g.first+step, most)
		g.refit(s, coarse)
	}
}

const (
	levelLeast = 8   // samples of a level before the edge that tell it
	levelFlat  = 2.5 // variance over that of the late noise up to which it is flat
	levelLeft  = 4   // departure, in noise, at which the ring has left the level
	levelDoubt = 2   // chi-squared by which an earlier start must do better
)

// leaveLevel settles the start where a flat level went before. A ring that leaves
// its level without a kink, as a capacitor voltage does, hardly differs from it at
// first, and samples of the level that the ring explains within the noise would
// pull it. Seen from a fit behind the moment when the level is clearly left, every
// sample before goes to the level or to the ring, whichever explains it better,
// and in doubt to the level. It is false where there was no such level.
func (g *gate) leaveLevel(s series) bool {
	guard := 2 + int(g.fit.period()/4)
	from := max(0, g.first-guard)
	if from < levelLeast {
		return false
	}
	before := newRing(s.slice(max(0, from-levelSamples), from))
	sigma := g.scatter(s.step)
	if before.n < levelLeast || before.aboutMean() > levelFlat*sq(sigma)*float64(before.n) {
		return false
	}
	level := before.ref + before.y/float64(before.n)
	left := from
	for end := min(g.first+guard, g.last-2*samplesLeast); ; left++ {
		if left >= end {
			return true
		}
		if math.Abs(s.y[left]-level) > levelLeft*sigma && math.Abs(s.y[left+1]-level) > levelLeft*sigma {
			break
		}
	}
	behind := *g
	behind.first = left
	behind.refit(s, coarse)
	cov, ok := behind.fit.normal.jtj.inverse()
	if !ok || behind.fit.a <= 0 {
		return true
	}
	start, cost, best := left, 0.0, -float64(levelDoubt)
	for i := left - 1; i >= from; i-- {
		n := float64(i - left)
		spread := behind.fit.spread(&cov, n)
		variance := sq(sigma) * (1 + spread*spread)
		// What the ring explains worse than the level counts against it.
		cost += sq(s.y[i]-behind.fit.value(n))/variance + math.Log1p(spread*spread) - sq((s.y[i]-level)/sigma)
		if cost < best {
			start, best = i, cost
		}
	}
	if start != g.first {
		g.first, g.fit = start, behind.fit
		g.refit(s, coarse)
	}
	return true
}

// levelSamples bounds the stretch that the level before an edge is taken from.
const levelSamples = 4096
