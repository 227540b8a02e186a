package report

import (
	"math"

	"dieaway/capture"
	"dieaway/decay"
)

// How finely the fitted curve is drawn.
const (
	curvePoints    = 4000 // over a gate, when it has few enough cycles
	pointsPerCycle = 24
	envelopePoints = 800
	crestPoints    = 2500
	// mostDecays is how many decays of a record are drawn; they share the points.
	mostDecays = 20
)

// A drawn holds the curves of one decay, ready for the charts, in SI units.
type drawn struct {
	decay *decay.Decay
	curve curve
	cycle float64 // samples per cycle, NaN when unknown
	gate  indexRange
	// windows are the parts that are shown more finely.
	windows []indexRange
	// share is the number of decays that share the points of the page.
	share int
}

// bins returns how many bins of at most n the gate is shown in. A bin of most of a
// cycle would beat with the oscillation, so that it becomes a whole one.
func (w *drawn) bins(n int) int {
	samples := float64(w.gate.to - w.gate.from)
	if bin := samples / float64(n); bin > w.cycle/6 && bin < 1.5*w.cycle {
		n = int(samples / math.Ceil(1.5*w.cycle))
	}
	return max(n, 1)
}

// points returns the share of n points that this decay has.
func (w *drawn) points(n int) int { return max(n/w.share, 8) }

// drawnDecays returns what is drawn of each decay; none of a refused record.
func (r *RingDown) drawnDecays() []drawn {
	if r.refused() {
		return nil
	}
	var out []drawn
	axis := r.Channel.Axis
	shown := r.Result.Decays[:min(len(r.Result.Decays), mostDecays)]
	for i, d := range shown {
		w := drawn{decay: d, curve: r.curve(i), gate: indexRange{max(0, d.First), min(axis.N, d.Last)}, share: len(shown)}
		w.cycle = 1 / (d.Quantities.DampedFrequency.Value * axis.Interval)
		if axis.N > exactLimit {
			w.windows = windowsOf(w.gate, w.cycle)
		}
		out = append(out, w)
	}
	return out
}

// residuals is sample less curve. A curve that can do many in one go does.
func (w *drawn) residuals(ch *capture.Channel) values {
	quick, ok := w.curve.(interface {
		ResidualsInto(ch *capture.Channel, n int) func(out []float64, first int)
	})
	if ok {
		return values{fill: quick.ResidualsInto(ch, ch.Axis.N)}
	}
	return values{fill: func(out []float64, from int) {
		for i := range out {
			v, _, _ := w.curve.At(ch.Axis.Time(from + i))
			out[i] = ch.Samples[from+i] - v
		}
	}}
}

// fitted returns the fitted curve. Where the cycles are too many to draw there is
// a gap, and only the envelope tells where the curve runs.
func (w *drawn) fitted(time func(i int) float64) trace {
	var tr trace
	samples := float64(w.gate.to - w.gate.from)
	step := 1 / math.Max(1, math.Ceil(pointsPerCycle/w.cycle)) // in samples
	if !(samples/step <= float64(w.points(curvePoints))) {
		step = w.cycle / pointsPerCycle
	}
	if !(step > 0) { // no known frequency
		step = 1
	}
	if samples/step <= float64(w.points(curvePoints)) {
		w.follow(&tr, w.decay.From, w.decay.To, samples/step)
		return tr
	}
	for _, win := range w.windows {
		from := max(win.from, w.gate.from)
		w.follow(&tr, time(from), time(win.to-1), float64(win.to-from)/step)
		tr.add(time(win.to-1), math.NaN())
	}
	return tr
}

// follow draws the curve itself with about n points.
func (w *drawn) follow(tr *trace, from, to, n float64) {
	for _, t := range between(from, to, int(math.Min(n, float64(w.points(curvePoints))))+1) {
		v, _, _ := w.curve.At(t)
		tr.add(t, v)
	}
}

// outline are the smooth curves of a decay: envelope, its edges and the baseline.
type outline struct{ t, envelope, upper, lower, baseline []float64 }

// outline draws the smooth curves, with more points where the windows are.
func (w *drawn) outline(time func(i int) float64) outline {
	times := between(w.decay.From, w.decay.To, w.points(envelopePoints))
	for _, win := range w.windows {
		times = merge(times, between(math.Max(w.decay.From, time(win.from)), time(win.to-1), w.points(envelopePoints/8)))
	}
	o := outline{t: times}
	for _, t := range times {
		_, e, b := w.curve.At(t)
		o.envelope = append(o.envelope, e)
		o.upper = append(o.upper, b+e)
		o.lower = append(o.lower, b-e)
		o.baseline = append(o.baseline, b)
	}
	return o
}

// between returns n times, at least two, evenly from one to the other.
func between(from, to float64, n int) []float64 {
	n = max(n, 2)
	out := make([]float64, n)
	for i := range out {
		out[i] = from + (to-from)*float64(i)/float64(n-1)
	}
	return out
}

// merge joins two rising sequences.
func merge(a, b []float64) []float64 {
	out := make([]float64, 0, len(a)+len(b))
	for len(a) > 0 && len(b) > 0 {
		if a[0] <= b[0] {
			out, a = append(out, a[0]), a[1:]
		} else {
			out, b = append(out, b[0]), b[1:]
		}
	}
	return append(append(out, a...), b...)
}

// crests returns the peaks of |sample - baseline| from the start of the decay up
// to sample end: behind the gate they show where the noise takes over.
func (w *drawn) crests(axis *capture.Axis, samples values, end int) trace {
	half := w.cycle / 2
	if !(half > 1) {
		half = 1
	}
	n := float64(end-w.gate.from) / half
	stretch := math.Ceil(half * math.Max(1, math.Ceil(n/float64(w.points(crestPoints)))))
	return crests(axis, samples, indexRange{w.gate.from, end}, int(stretch), func(t float64) float64 {
		_, _, b := w.curve.At(math.Min(t, w.decay.To))
		return b
	})
}

// readingLine is the straight line through the logarithms of the peaks read.
func readingLine(r *decay.Result, times []float64) trace {
	var tr trace
	d := r.Decays[r.Best]
	for _, t := range times {
		tr.add(t, math.Exp(r.Readings.Line[0]+r.Readings.Line[1]*(t-d.From)))
	}
	return tr
}
