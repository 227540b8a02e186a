package decay

import "math"

const (
	driveGuard  = 0.5   // cycles behind the start where a source has surely fallen silent
	driveMean   = 0.125 // cycles that departures from the ring are averaged over,
	driveMargin = 0.125 // and cycles left out behind the last of them
	driveSigma  = 3.5   // departure of that mean, in its own uncertainty, that tells a source
	driveEdge   = 8     // departure of single samples, in noise, of an edge
)

// leaveDrive moves the start of a gate on to where the source has fallen silent. At
// the end of a burst the driven oscillation goes over into the free one without a
// kink: the two part as the square of the time, and the last driven samples, which
// the ring explains within the noise, would pull it. Seen from a fit that begins
// later, backwards, the source shows by departures that have one sign for a part of
// a cycle. An edge stands out by itself, and its place is known already.
// Behind a level only what is in the gate counts, a pulse that is not over: where the
// level ends is known better.
func (g *gate) leaveDrive(s series, level bool) {
	period := g.fit.period()
	mean := max(1, int(driveMean*period))
	behind := *g
	behind.first = g.first + max(4, int(driveGuard*period))
	if g.first < mean || behind.last-behind.first < max(4*samplesLeast, int(2*period)) {
		return
	}
	if !behind.refit(s, coarse) || behind.fit.a <= 0 {
		return
	}
	cov, ok := behind.fit.normal.jtj.inverse()
	if !ok {
		return
	}
	sigma := behind.scatter(s.step)
	origin := s.slice(g.first-mean, s.len())
	start := origin.position(behind.first - g.first + mean)
	departs := func(i int) (r, spread float64) { // of sample i of the record
		n := origin.position(i-g.first+mean) - start
		return s.y[i] - behind.fit.value(n), sigma * behind.fit.spread(&cov, n)
	}
	last := g.first - mean
	if level {
		last = g.first
	} else if r, spread := departs(g.first - 1); math.Abs(r) > driveEdge*math.Hypot(sigma, spread) {
		return
	}
	sum, n := 0.0, 0
	for i := behind.first - 1; i >= last; i-- {
		r, spread := departs(i)
		if r == r {
			sum, n = sum+r, n+1
		}
		if j := i + mean; j < behind.first {
			if old, _ := departs(j); old == old {
				sum, n = sum-old, n-1
			}
		}
		if n > 0 && math.Abs(sum/float64(n)) > driveSigma*math.Hypot(sigma/math.Sqrt(float64(n)), spread) {
			behind.first = min(behind.first, i+mean+int(driveMargin*period))
			break
		}
		if i == last {
			return // nothing but the ring
		}
	}
	if behind.first > g.first {
		g.first, g.fit = behind.first, behind.fit
		g.refit(s, coarse)
	}
}
