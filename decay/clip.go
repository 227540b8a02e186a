package decay

import (
	"math"
	"slices"

	"dieaway/capture"
)

const (
	railLeast    = 3    // samples on a rail from which they may be clipped
	cutLeast     = 0.5  // noise that they must be short by on average,
	cutSuspected = 0.25 // and by a fit that took them for whole
	railCycles   = 4    // cycles before a gate that may have been left out for being clipped
	railMatch    = 0.9  // share of their samples that lie on a rail where the ring is beyond it, and only there
	shadowSigma  = 3    // noise within which the curve must keep off a rail for a sample to be whole
)

// railed returns the samples that lie on the upper or lower end of the range: what a
// limiter or a converter may have cut off. The top of an oscillation lies there too:
// whether more was there, a fit without them tells.
func railed(s series) []int {
	e, from := s.extremes()
	if e == nil {
		return nil
	}
	var out []int
	for _, rail := range []float64{s.lo, s.hi} {
		if on := e.equal(rail, from, from+s.len()); len(on) >= railLeast {
			out = append(out, on...)
		}
	}
	for i := range out {
		out[i] -= from
	}
	slices.Sort(out)
	return out
}

// maybeClipped reports whether the railed samples look cut off in the light of decays
// that were found with them.
func maybeClipped(found []gate, s series, rails []int) bool {
	if len(rails) == 0 || len(found) == 0 {
		return len(rails) > 0
	}
	for i := range found {
		g := &found[i]
		if n, excess := g.beyond(s, rails); n > 0 && excess > cutSuspected*math.Max(s.step, g.fit.sigma()) {
			return true
		}
		if g.clippedBefore(s) {
			return true
		}
	}
	return false
}

// clippedBefore reports whether the ring, continued to before the gate, is beyond a
// rail where the samples lie on one, and nowhere else: the gate begins late for that.
func (g *gate) clippedBefore(s series) bool {
	hits, misses := 0, 0
	from := max(0, g.first-int(railCycles*g.fit.period()))
	for i := from; i < g.first; i++ {
		v := g.fit.value((s.time(i) - s.time(g.first)) / s.dt)
		over, on := v > s.hi || v < s.lo, s.y[i] == s.hi || s.y[i] == s.lo
		switch {
		case over && on:
			hits++
		case over != on:
			misses++
		}
	}
	return hits >= railLeast && float64(misses) < (1-railMatch)*float64(g.first-from)
}

// beyond reports whether a fit that never saw the railed samples runs past the
// rail there: then they were cut off.
func (g *gate) beyond(s series, list []int) (count int, excess float64) {
	sum := 0.0
	for _, i := range list {
		if i < g.first || i >= g.last {
			continue
		}
		n := (s.time(i) - s.time(g.first)) / s.dt
		d := g.fit.value(n) - s.y[i]
		if s.y[i] < g.fit.offset() {
			d = -d
		}
		sum += d
		count++
	}
	if count == 0 {
		return 0, 0
	}
	return count, sum / float64(count)
}

// cutOff tells whether any of the decays, found without the railed samples, runs past
// the rail where they were, and says so.
func cutOff(found []gate, s series, rails []int) (Finding, bool) {
	count, short := 0, 0.0
	for i := range found {
		g := &found[i]
		if n, excess := g.beyond(s, rails); n > 0 && excess > math.Max(s.step, cutLeast*g.fit.sigma()) {
			count += n
			short += float64(n) * excess / g.fit.size()
		}
	}
	if count == 0 {
		return Finding{}, false
	}
	return warning(capture.Clipped,
		sprintf("%d samples of the decay are cut off at the end of the range, %s of the amplitude short on average; they were left out of the fit.", count, percent(short/float64(count))),
		"Use a larger vertical range, or move the offset, and capture again."), true
}

// shadowed returns the samples whose curve comes so close to a rail that the noise was
// cut off on one side: those that are left there all lie on the other.
func shadowed(found []gate, s series, rails []int) (out []int) {
	lo, hi := math.Inf(-1), math.Inf(1)
	for _, i := range rails {
		if s.y[i] == s.hi {
			hi = s.hi
		} else if s.y[i] == s.lo {
			lo = s.lo
		}
	}
	for k := range found {
		g := &found[k]
		margin := shadowSigma * g.fit.sigma()
		g.fit.along(s.slice(g.first, g.last), func(i int, v float64) {
			if v > hi-margin || v < lo+margin {
				out = append(out, g.first+i)
			}
		})
	}
	return out
}
