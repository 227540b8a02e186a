package decay

import (
	"cmp"
	"math"
	"slices"
)

const (
	choiceSamples = 1 << 15 // samples that a model is chosen on
	suspicion     = 20      // chi-squared from which other models are tried
	// noiseShare is the share of a window up to which a ring, or a line of what it leaves,
	// may be nothing but noise.
	noiseShare = 0.1
	// evidence is what a richer model must win by, in units of chi-squared beyond
	// the Bayesian information criterion (Schwarz 1978, from memory). Kass and
	// Raftery (1995, from memory) call ten decisive; converters and amplifiers are
	// no white Gaussian noise, hence the margin.
	evidence = 40
	// fewSamples raises the evidence wanted in short windows, where a rich model
	// follows coloured noise and makes it look smaller than it is.
	fewSamples = 300
	// unresolved is charged to two rings closer to each other than their widths:
	// they describe any departure from one exponential, so that another law goes first.
	unresolved = 200
)

// open is the model of a decay that one ring does not account for: which one
// does is decided by evidence.
const open Model = "open"

// chooseModel decides by evidence whether the decay is one ring about a constant,
// a ring beside a companion, or a ring whose loss depends on its amplitude. model
// forces the answer; "" keeps the one ring that accounts for its samples.
func (g *gate) chooseModel(s series, model Model) {
	if model == "" {
		return
	}
	window := s.slice(g.first, g.last).thinned(choiceSamples)
	plain, ok := fitRing(window, g.fit.a, g.fit.w, coarse)
	if !ok || plain.a <= 0 {
		return
	}
	candidates := g.candidates(window, &plain, model)
	if len(candidates) == 0 {
		return
	}
	best := cheapest(candidates)
	if next, ok := refit(s.slice(g.first, g.last), &best, 0, coarse); ok {
		g.fit = next
	}
}

// misfits is a quick look whether a second component or an amplitude law could
// explain more of the gate's samples than noise allows, or whether the gate holds
// no decay at all. It takes a pass or two where fitting the models takes dozens.
func (g *gate) misfits(s series) bool {
	window := s.slice(g.first, g.last).thinned(choiceSamples)
	f, ok := fitRing(window, g.fit.a, g.fit.w, coarse)
	if !ok || f.a <= 0 {
		return true
	}
	r := f.residuals(window, 0)
	v := noiseOf(r, f.sigma())
	density := sq(v.rms * v.factor(f.w))
	if energyGain(&f, v) < energyNeeded(f.n) {
		return true
	}
	// A bent ring leaves waves that look like coloured noise: its gain counts in units
	// of what it leaves itself. In noise that is coloured the evidence decides.
	bend := f.beside(f.bent())
	line, _ := lineGain(r)
	return line > suspicion || bend.gain > suspicion*math.Min(density, bend.left/float64(f.n)) || fallGain(&f)/sq(v.rms*v.factor(0)) > suspicion
}

// isNoise reports whether the ring explains little of its window, and no more than one
// does by chance.
func (f *ringFit) isNoise() bool {
	return f.rss > (1-noiseShare)*f.aboutMean() && energyGain(f, f.noise()) < energyNeeded(f.n)
}

// nothingRings reports whether noise is all that the gate and the first fit, from which
// it grew, hold: then no other model finds a decay either.
func (g *gate) nothingRings(first *gate) bool {
	if !first.fit.isNoise() || !g.fit.isNoise() {
		return false
	}
	window := g.fit.s.thinned(choiceSamples)
	r := g.fit.residuals(window, 0)
	_, share := lineGain(r)
	return share < noiseShare
}

// lineGain is what the strongest line of the residual explains beyond chance, and as a
// share of the energy, in whole, half and quarter windows.
func lineGain(r []float64) (most, share float64) {
	y := filled(slices.Clone(r))
	for n := len(y); n >= len(y)/4 && n >= windowLeast; n /= 2 {
		for _, s := range spectral(y[:min(n, coreMost)]) {
			most = math.Max(most, s.gain-2*math.Log(float64(n)))
			share = math.Max(share, -math.Expm1(-s.gain/float64(min(n, coreMost))))
		}
	}
	return most, share
}

// fallRates are the rates of the exponentials that are tried beside a ring, per
// length of the window: from a baseline that drifts to the corner of an edge.
var fallRates = []float64{0.7, 3, 10, 40}

// fallGain is what a plain exponential explains beside the ring.
func fallGain(f *ringFit) float64 {
	most := 0.0
	for _, u := range fallRates {
		most = math.Max(most, f.beside(pole{a: u / f.problem.length}).gain)
	}
	return most
}

// bent is the exponential that the quadratic law adds to first order. With
// E = exp(-an) the amplitude follows E + (B/a)(E^2 - E), so that beside the ring and
// its derivatives by a and w the curve needs a ring of the same frequency that decays
// twice as fast.
func (f *ringFit) bent() pole { return pole{2 * f.a, f.w} }

// An addition is what another exponential does beside the ring, to first order.
type addition struct {
	gain, left float64    // what it explains of the residual sum of squares, and what is left
	by         [2]float64 // by how much rate and angular frequency of the ring then differ
}

func (f *ringFit) beside(other pole) (out addition) {
	theta, more := []float64{f.a, f.w, other.a}, []int{5}
	p := f.problem.alike(1, 1)
	if other.w > 0 {
		theta, more = append(theta, other.w), []int{5, 6}
		p = f.problem.alike(2, 0)
	}
	g := p.gram(theta)
	ring := []int{0, 1, 2, 3, 4} // the constant, the ring and its derivatives
	alone, ok := g.project(ring, p.yy)
	both, okBoth := g.project(append(ring, more...), p.yy)
	if !ok || !okBoth {
		return addition{left: f.rss}
	}
	// The derivatives are -p nC - q nS by a and q nC - p nS by w.
	nc, ns, size := both.beta[3], both.beta[4], f.p*f.p+f.q*f.q
	return addition{alone.rss - both.rss, both.rss, [2]float64{-(nc*f.p + ns*f.q) / size, (nc*f.q - ns*f.p) / size}}
}

// candidates fits the models that come into question.
func (g *gate) candidates(window series, plain *ringFit, model Model) []ringFit {
	var out []ringFit
	if model == open || model == Exponential {
		out = append(out, *plain)
	}
	if model == open || model == TwoMode || model == Exponential {
		for _, c := range companions(plain, g.fit.companionPole()) {
			if model == open || (c.companion.w > 0) == (model == TwoMode) {
				out = append(out, c)
			}
		}
	}
	if model == open || model == Amplitude {
		sums := nodalOf(window, plain.w)
		for _, law := range []bendLaw{quadratic, cubic, constant} {
			if f, ok := fitBent(window, law, sums, plain.a, plain.w, coarse); ok {
				out = append(out, f)
			}
		}
	}
	return slices.DeleteFunc(out, func(f ringFit) bool { return math.IsNaN(f.rss) })
}

// cheapest returns the candidate that explains most after the charge for its
// parameters. What it explains beyond the worst of them counts in units of the
// noise density where its addition lives, as the best of them leaves it.
func cheapest(list []ringFit) ringFit {
	byRSS := func(x, y ringFit) int { return cmp.Compare(x.rss, y.rss) }
	least, most := slices.MinFunc(list, byRSS), slices.MaxFunc(list, byRSS)
	v := noiseOf(least.residuals(least.s, 0), least.sigma())
	cost := func(f *ringFit) float64 {
		c := f.charge() - (most.rss-f.rss)/sq(v.rms*v.factor(f.addition()))
		if k := f.companion; k != nil && k.w > 0 && math.Abs(k.w-f.w) < math.Abs(k.a)+math.Abs(f.a) {
			c += unresolved
		}
		return c
	}
	return slices.MinFunc(list, func(x, y ringFit) int { return cmp.Compare(cost(&x), cost(&y)) })
}

// charge is what the fit must explain, in units of chi-squared, to pay for its
// parameters: the criterion's, and the evidence wanted of what goes beyond one ring.
func (f *ringFit) charge() float64 {
	c := float64(f.normal.jtj.n) * math.Log(float64(f.n))
	if f.companion != nil || f.bend != nil {
		c += evidence * (1 + fewSamples/float64(f.n))
	}
	return c
}

// addition is the angular frequency of what the fit has beyond one ring.
func (f *ringFit) addition() float64 {
	if f.companion != nil {
		return f.companion.w
	}
	return f.w
}

// extendBack carries the start of a decay of a richer model towards its true
// beginning: one plain ring departs from its large early swings, so that the gate
// found with it may begin too late.
func (g *gate) extendBack(s series) {
	least := max(1, int(g.fit.period()/8))
	most, late := sigmaGrowth*g.fit.sigma(), g.lateSigma()
	// Steps double as long as the samples follow, and halve from where they do not.
	growing := true
	for step := least; step >= least && g.first > 0; {
		to := max(0, g.first-step)
		head := s.slice(to, g.first)
		next, ok := refit(s.slice(to, g.last), &g.fit, -float64(g.first-to), coarse)
		if !ok || next.a <= 0 || next.sigma() > most || !next.followed(head, late) {
			growing = false
		} else {
			g.first, g.fit = to, next
			late = g.lateSigma()
		}
		if growing {
			step *= 2
		} else {
			step /= 2
		}
	}
	g.cutBefore = g.first > 0
}

// followed reports whether the samples at the head of the fitted window keep to the fit
// as those of the rest do, whose noise is late.
func (f *ringFit) followed(head series, late float64) bool {
	limit := math.Hypot(headSigma*late, headShare*f.size())
	return f.departing(head, 0, head.len(), limit, func(int, float64) bool { return false }) <= limit
}

const (
	headSigma = 5    // noise,
	headShare = 0.01 // and share of the amplitude, that the head of a decay may depart by
	// sigmaGrowth bounds how much of a misfit the head may bring in.
	sigmaGrowth = 1.15
)
