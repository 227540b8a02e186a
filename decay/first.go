package decay

import (
	"math"
	"sort"
)

// firstFit refines the best seeds of every onset and keeps the likeliest account
// of the whole record: a constant, then the ring in its window, then a constant.
// Where that ring does not fall, a source feeds it, and the decay is looked for
// behind the loudest part of the record.
func firstFit(s series, p *pyramid, fixedStart bool) (gate, bool) {
	onsets := p.onsets()
	if fixedStart {
		onsets = onsets[:1]
	}
	best, ok := p.likeliest(s, onsets)
	if ok && !fixedStart && !best.falls() {
		if later, ok := p.behindLoudest(s, &best); ok {
			return later, true
		}
	}
	return best, ok
}

// behindLoudest is firstFit behind the loudest part of the record, by the period of
// a gate.
func (p *pyramid) behindLoudest(s series, g *gate) (gate, bool) {
	quiet, ok := p.afterLoudest(g.fit.period())
	if !ok {
		return gate{}, false
	}
	later, ok := p.likeliest(s, []int{quiet})
	later.reach = int(loudReach * g.fit.period())
	return later, ok && later.falls()
}

// behindDrive replaces a first fit and the gate that grew from it, where either leaves
// much of its window, by those behind the loudest part of the record where they account
// for the record far better: a burst that rises and stays, and the decay behind it,
// may look like one slow decay.
func (p *pyramid) behindDrive(s series, first, g *gate, fixedEnd bool) {
	if first.explains() && g.explains() {
		return
	}
	later, ok := p.behindLoudest(s, first)
	if !ok {
		return
	}
	grown := later
	grown.settle(s, p, false, fixedEnd)
	if grown.explains() && !g.explains() || grown.cost(s) < g.cost(s)-companionMargin {
		*first, *g = later, grown
	}
}

// explains reports whether the fit leaves so little of its window that nothing but
// the ring is in it.
func (g *gate) explains() bool { return g.fit.rss < leftShare*g.fit.aboutMean() }

// leftShare is the share of the energy of a window that noise may leave.
const leftShare = 0.02

// falls reports whether the ring decays visibly over its window.
func (g *gate) falls() bool {
	return g.fit.a*g.fit.s.position(g.fit.s.len()-1) > steadyFall
}

const (
	loudShare = 0.7 // of the largest energy of a cycle, that the loudest part has throughout
	loudReach = 3   // cycles between the end of the loudest part and where a source fell silent
	loudCells = 1 << 16
)

// afterLoudest returns the sample of level 0 behind the last cycle of given length
// whose energy is near the largest of all.
func (p *pyramid) afterLoudest(period float64) (int, bool) {
	k := 0
	for k+1 < len(p.levels) && period/float64(scale(k+1)) >= samplesLeast {
		k++
	}
	y := p.levels[k].y
	cell := max(samplesLeast/2, int(math.Ceil(period/float64(scale(k)))), len(y)/loudCells)
	energy := make([]float64, len(y)/cell)
	most := 0.0
	for i := range energy {
		sum, squares, _ := sums(y[i*cell:(i+1)*cell], y[i*cell])
		energy[i] = squares - sum*sum/float64(cell)
		most = math.Max(most, energy[i])
	}
	for i := len(energy) - 2; i >= 0; i-- {
		if energy[i] >= loudShare*most {
			return (i + 1) * cell * scale(k), true
		}
	}
	return 0, false
}

// likeliest is firstFit for given onsets.
func (p *pyramid) likeliest(s series, onsets []int) (gate, bool) {
	levels := p.flat
	accounts := make([]account, len(onsets))
	severally(len(onsets), s.len(), func(i int) { accounts[i] = p.account(s, levels, onsets[i]) })
	least := account{left: math.Inf(1)}
	for _, a := range accounts {
		if a.left < least.left {
			least = a
		}
	}
	best := least.gate
	if math.IsInf(least.left, 1) {
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

// account is a ring in a record that is constant before and behind it, and the energy
// that is left; infinite when there is none.
type account struct {
	gate gate
	left float64
}

// account refines the best seeds of one onset.
func (p *pyramid) account(s series, levels *plateaus, onset int) account {
	best := account{left: math.Inf(1)}
	var done []seed
	for _, sd := range p.seeds(onset) {
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
		if left := levels.left(sd.first, sd.last) - explained; left < best.left {
			m := f.s.dt / s.dt
			f.a, f.w = f.a/m, f.w/m
			best = account{gate{first: p.sample(s, sd.first), last: p.sample(s, sd.last), fit: f}, left}
		}
	}
	return best
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
	k := p.levelFor(sd.last-sd.first, coreMost)
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
	ref      float64
	sum, sqs []float64 // running sums over blocks
}

const plateauBlocks = 1 << 16

// newPlateaus has room for the sums over y.
func newPlateaus(y []float64) *plateaus {
	block := (len(y) + plateauBlocks - 1) / plateauBlocks
	n := (len(y) + block - 1) / block
	return &plateaus{block: block, ref: y[len(y)/2], sum: make([]float64, n+1), sqs: make([]float64, n+1)}
}

// add sums over each of the blocks that begin among samples first to last-1 of y.
func (p *plateaus) add(y []float64, first, last int) {
	for i := (first + p.block - 1) / p.block; i*p.block < last; i++ {
		p.sum[i+1], p.sqs[i+1], _ = sums(y[i*p.block:min(len(y), (i+1)*p.block)], p.ref)
	}
}

// run makes running sums of them.
func (p *plateaus) run() {
	for i := range len(p.sum) - 1 {
		p.sum[i+1] += p.sum[i]
		p.sqs[i+1] += p.sqs[i]
	}
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

// index converts an index of s to one of level 0.
func (p *pyramid) index(s series, i int) int {
	if s.times == nil {
		return i
	}
	return min(p.levels[0].len(), int((s.time(i)-s.times[0])/s.dt+0.5))
}
