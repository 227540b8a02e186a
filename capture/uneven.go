package capture

import (
	"fmt"
	"math"
)

// Stamps that are not even are kept as they are. What is wanted of them besides
// is the nominal interval, that of the steps where no row is missing and none is
// written twice. Such breaks part the stamps into runs. Parallel lines through
// the runs give the interval; where it makes every step over a break so many
// whole intervals, the samples have numbers, and one line over these numbers
// gives interval and times.

// A run is a stretch of stamps without a break.
type run struct {
	from, to int // rows
	number   int // of its first sample, missing ones counted
}

// nominal finds the runs of the stamps, the interval, and how many samples are
// missing between the runs.
func (k *clock) nominal() {
	k.stamps = k.times()
	if len(k.gaps) == 0 && !k.repeats() {
		return // one run: the regression is done
	}
	k.cut()
	sxy, sxx := 0.0, 0.0
	for _, r := range k.runs {
		t := k.stamps[r.from:r.to]
		half := float64(len(t)-1) / 2
		for i, v := range t {
			sxy += (float64(i) - half) * (v - t[0])
		}
		sxx += sumOfSquares(len(t))
	}
	if sxx == 0 || sxy <= 0 {
		k.interval = (k.stamps[k.n-1] - k.stamps[0]) / float64(k.n-1)
		return
	}
	k.interval = sxy / sxx
	k.slopeU = k.slopeError(sxx)
	if k.count() {
		k.line()
	}
}

// cut finds the runs.
func (k *clock) cut() {
	from, gaps := 0, k.gaps
	for i := 1; i <= k.n; i++ {
		missing := len(gaps) > 0 && gaps[0].row == i
		if missing {
			gaps = gaps[1:]
		}
		if i == k.n || missing || k.repeats() && k.stamps[i] == k.stamps[i-1] {
			k.runs = append(k.runs, run{from: from, to: i})
			from = i
		}
	}
}

// repeats reports that a step of zero is a stamp repeated, and not the print.
func (k *clock) repeats() bool { return k.zeroSteps > 0 && k.resolution < 0.5*k.typical }

// count numbers the samples by the whole intervals between the runs. It says no
// where the interval is not known well enough for that.
func (k *clock) count() bool {
	sure := true
	gaps := k.gaps
	k.lost = 0
	for i := 1; i < len(k.runs); i++ {
		r, before := &k.runs[i], &k.runs[i-1]
		steps := math.Round((k.stamps[r.from] - k.stamps[r.from-1]) / k.interval)
		sure = sure && steps*k.slopeU < 0.1*k.interval && steps < 1e9
		r.number = before.number + before.to - before.from - 1 + int(steps)
		if len(gaps) > 0 && gaps[0].row == r.from {
			gaps[0].lost = max(1, int(steps)-1)
			k.lost += gaps[0].lost
			gaps = gaps[1:]
		}
	}
	return sure
}

// line makes one line over the numbers of the samples the time axis, if it gives
// every stamp to within its print.
func (k *clock) line() {
	middle, mean := 0.0, 0.0
	k.numbered(func(i int, number float64) {
		middle += number / float64(k.n)
		mean += (k.stamps[i] - k.stamps[0]) / float64(k.n)
	})
	sxy, sxx := 0.0, 0.0
	k.numbered(func(i int, number float64) {
		sxy += (number - middle) * (k.stamps[i] - k.stamps[0])
		sxx += (number - middle) * (number - middle)
	})
	interval, off := sxy/sxx, 0.0
	start := k.stamps[0] + mean - interval*middle
	k.numbered(func(i int, number float64) {
		off = math.Max(off, math.Abs(start+interval*number-k.stamps[i]))
	})
	if off > math.Max(k.resolution, negligible*interval) {
		return
	}
	k.ruled = true
	k.start, k.interval, k.middle = start, interval, middle
	k.slopeU = k.slopeError(sxx)
}

// numbered calls f with the row and the number of every sample.
func (k *clock) numbered(f func(row int, number float64)) {
	for _, r := range k.runs {
		for i := r.from; i < r.to; i++ {
			f(i, float64(r.number+i-r.from))
		}
	}
}

// crooked makes the axis of stamps that are not even: their true times, or those
// of a line with samples missing.
func (k *clock) crooked(a *Axis, decl declared, given bool) {
	a.Times, a.Interval = k.stamps, k.interval
	a.Source = fmt.Sprintf("time column, the %d stamps as they are", k.n)
	if k.ruled {
		k.settle(a, fmt.Sprintf("time column, regression over %d stamps and their numbers", k.n), decl, given)
		start := k.begin(a, decl)
		k.numbered(func(i int, number float64) { a.Times[i] = start + number*a.Interval })
	}
	a.Start = a.Times[0]
}

// uneven says what is uneven: rows missing, stamps repeated, jitter.
func uneven(c *Capture, k *clock, a *Axis) {
	said := len(c.Findings)
	if len(k.gaps) > 0 {
		g := k.gaps[0]
		where := fmt.Sprintf("before sample %d at %s", g.row+1, seconds(g.time))
		if n := len(k.gaps); n > 1 {
			where = fmt.Sprintf("in %d gaps, the first %s", n, where)
		}
		c.note(MissingSamples, Warning, fmt.Sprintf("%s of time missing: %s", plural(k.lost, "row"), where),
			"save the record again; the fit uses the true times of the samples that are there")
	}
	if k.repeats() {
		message := "1 stamp repeats the one before it"
		if k.zeroSteps > 1 {
			message = fmt.Sprintf("%d stamps repeat the one before them", k.zeroSteps)
		}
		c.note(UnevenTime, Warning, message,
			"look for rows that were written twice")
	}
	rms, worst := k.jitter(a.Times)
	if worst <= math.Max(k.resolution, 2*negligible*k.typical) {
		if said == len(c.Findings) { // a drift too slow to show from step to step
			c.note(UnevenTime, Note, fmt.Sprintf("stamps depart from even sampling by up to %s, %.2g of the interval", seconds(k.off), k.off/a.Interval),
				"nothing: the fit uses the true times")
		}
		return
	}
	severity := Note
	if worst > 0.2*k.typical {
		severity = Warning
	}
	c.note(UnevenTime, severity,
		fmt.Sprintf("stamps are not even: steps scatter by %.2g %% of the interval of %s, at most by %.2g %%", 100*rms/k.typical, seconds(k.typical), 100*worst/k.typical),
		"nothing, if the sampling is known to jitter: the fit uses the true times")
}

// jitter is the rms and largest departure of steps from their mean, gaps and
// repeated stamps left out.
func (k *clock) jitter(times []float64) (rms, worst float64) {
	regular := func(d float64) bool { return d > 0 && d <= 1.5*k.typical }
	sum, n := 0.0, 0
	for i := 1; i < len(times); i++ {
		if d := times[i] - times[i-1]; regular(d) {
			sum += d
			n++
		}
	}
	mean, squares := sum/float64(max(n, 1)), 0.0
	for i := 1; i < len(times); i++ {
		if d := times[i] - times[i-1]; regular(d) {
			squares += (d - mean) * (d - mean)
			worst = math.Max(worst, math.Abs(d-mean))
		}
	}
	return math.Sqrt(squares / float64(max(n, 1))), worst
}
