package report

import (
	"math"

	"github.com/go-echarts/go-echarts/v2/charts"
	"github.com/go-echarts/go-echarts/v2/opts"

	"dieaway/decay"
)

// The keys of the legends.
var (
	keySamples   = key{"samples", "dots", "samples"}
	keyFit       = key{"fitted curve", "line", "fit"}
	keyEdges     = key{"envelope", "dash", "envelope"}
	keyBaseline  = key{"baseline", "dash", "quiet"}
	keyCrossings = key{"crossings read", "cross", "crossing"}
	keyPeaks     = key{"peaks read", "ring", "peak"}
	keyCrests    = key{"largest sample of each half cycle", "dots", "samples"}
	keyEnvelope  = key{"fitted envelope", "line", "fit"}
	keyLogPeaks  = key{"peaks read, from baseline", "ring", "peak"}
	keyLine      = key{"line through the peaks", "dash", "peak"}
	keyNoise     = key{"noise, rms", "dash", "quiet"}
	keyPredicted = key{"predicted by the sweep", "dash", "crossing"}
	keyResidual  = key{"sample less fitted curve", "dots", "samples"}
	keyBand      = key{"two standard deviations of the noise", "band", "band"}
)

const (
	captionWaveform = "The curve should run through the samples from the first cycle to the last, and the gate should begin after the excitation has ended."
	captionRefused  = "The record as it was read; the findings above say why no decay was taken from it."
	captionEnvelope = "One decay is a straight line here: a bend means loss that changes with amplitude, a ripple a second mode, and the flat end is noise."
	captionExtremes = "The extremes of each bin reach beyond the band, but evenly: an oscillation that is left over, or a swelling, means that the model misses something."
	captionResidual = "About 19 samples in 20 should lie inside the band without a pattern; an oscillation that is left over means that the model misses something."
)

// figure draws the ring-down: the waveform and, unless it was refused, the envelope
// on a logarithmic scale and what the fit leaves.
func (r *RingDown) figure() (*figure, error) {
	ch, axis := r.Channel, r.Channel.Axis
	known := r.Result.Extremes(ch)
	samples := samplesOf(ch, known)
	lo, hi, _ := known.Limits()
	start, end := axis.Start, axis.Time(max(0, axis.N-1))
	p := &plot{Line: charts.NewLine(),
		time:  scaleFor(start, end, axis.Interval/20, "s"),
		level: scaleFor(lo, hi, (hi-lo)/20000, r.unit())}
	all := r.drawnDecays()
	var windows []indexRange
	for _, w := range all {
		windows = append(windows, w.windows...)
	}
	parts := r.parts(all, windows)
	p.waveform(r, all, reduce(axis, parts, samples))
	if len(all) > 0 {
		p.envelope(r, all, samples)
		p.residual(r, all, windows, reduced(parts))
	}
	f := &figure{Time: p.time.unit, Panels: p.panels, Views: p.views(all),
		Name: prefixed(r.Device) + clean(ch.Name, nameLength), Reduced: reduced(parts)}
	var err error
	f.Option, err = p.finish(start, end, r.description())
	return f, err
}

// description is what a screen reader says of the charts.
func (r *RingDown) description() string {
	if r.refused() {
		return "Chart of the recorded waveform. The numbers are withheld; the findings say why."
	}
	return "Three charts over the same time: the waveform with the fitted curve, its envelope on a logarithmic scale, " +
		"and the difference of samples and curve. Every result stands in the tables of this page."
}

// parts divides the record: gates are shown in finer bins than the rest.
func (r *RingDown) parts(all []drawn, windows []indexRange) []segment {
	n := r.Channel.Axis.N
	if n <= exactLimit {
		return []segment{{indexRange{0, n}, 1}}
	}
	inside := 0
	for _, w := range all {
		inside += w.gate.to - w.gate.from
	}
	var out []segment
	at := 0
	fine := max(8, binsInWindow/max(1, len(all)))
	add := func(a indexRange, bins, of int) {
		if a.from < a.to {
			share := math.Ceil(float64(bins) * float64(a.to-a.from) / float64(of))
			out = append(out, segments(a, windows, int(share), fine)...)
		}
	}
	for i := range all {
		w := &all[i]
		add(indexRange{at, w.gate.from}, binsElsewhere, n-inside)
		if w.gate.to > w.gate.from {
			out = append(out, segments(indexRange{max(at, w.gate.from), w.gate.to}, windows, w.bins(w.points(binsInGates)), fine)...)
		}
		at = max(at, w.gate.to)
	}
	bins := binsElsewhere
	if len(all) == 0 {
		bins = binsInGates + binsElsewhere
	}
	add(indexRange{at, n}, bins, n-inside)
	return out
}

// waveform draws samples, fitted curve, envelope, baseline, gate and readings.
func (p *plot) waveform(r *RingDown, all []drawn, samples trace) {
	caption := captionWaveform
	if len(all) == 0 {
		caption = captionRefused
	}
	p.addPanel("Waveform", caption, p.level.unit, false)
	ch := r.Channel
	data := p.addTrace(samples, p.level)
	p.addSeries(keySamples, "line", data, "v", gates(p.time, all)) // first: the bar below shows its outline
	for i := range all {
		w := &all[i]
		o := w.outline(ch.Axis.Time)
		smooth := p.addData(map[string]column{"t": p.time.column(o.t), "upper": p.level.column(o.upper),
			"lower": p.level.column(o.lower), "baseline": p.level.column(o.baseline)})
		p.addSeries(keyEdges, "line", smooth, "upper")
		p.addSeries(keyEdges, "line", smooth, "lower")
		p.addSeries(keyBaseline, "line", smooth, "baseline")
		p.addSeries(keyFit, "line", p.addTrace(w.fitted(ch.Axis.Time), p.level), "v")
	}
	p.addDots(keySamples, data)
	switch {
	case len(all) > 0 && r.predicted != nil:
		w := all[0]
		w.curve = r.predicted
		p.addSeries(keyPredicted, "line", p.addTrace(w.fitted(ch.Axis.Time), p.level), "v")
	case len(all) > 0:
		p.readingMarks(&r.Result.Readings, all[0].curve)
	}
}

// readingMarks marks the points that the readings were made at. The readings are
// of the ring alone, about a level of their own: here they ride on the baseline
// of the fit, which may move.
func (p *plot) readingMarks(read *decay.Readings, fit curve) {
	var crossings, peaks trace
	for _, t := range read.Crossings {
		_, _, b := fit.At(t)
		crossings.add(t, b)
	}
	for _, q := range read.Peaks {
		_, _, b := fit.At(q.Time)
		peaks.add(q.Time, b+q.Value-read.Baseline)
	}
	if len(crossings.t) > 0 {
		p.addSeries(keyCrossings, "scatter", p.addTrace(thin(crossings), p.level), "v")
	}
	if len(peaks.t) > 0 {
		p.addSeries(keyPeaks, "scatter", p.addTrace(thin(peaks), p.level), "v")
	}
}

// envelope draws the distance from the baseline on a logarithmic scale.
func (p *plot) envelope(r *RingDown, all []drawn, samples values) {
	p.addPanel("Envelope, logarithmic", captionEnvelope, p.level.unit, true)
	axis, read := r.Channel.Axis, &r.Result.Readings
	log := func(v []float64) column { return column{values: v, factor: p.level.factor, leading: 5} }
	for i := range all {
		w := &all[i]
		end := axis.N
		if i+1 < len(all) {
			end = all[i+1].gate.from
		}
		tr := w.crests(axis, samples, end)
		p.addSeries(keyCrests, "scatter", p.addData(map[string]column{"t": p.time.column(tr.t), "v": log(tr.v)}), "v",
			charts.WithSeriesOpts(func(s *charts.SingleSeries) { s.SymbolSize = 3 }))
	}
	var peaks trace
	for _, q := range read.Peaks {
		if v := math.Abs(q.Value - read.Baseline); v > 0 {
			peaks.add(q.Time, v)
		}
	}
	if len(peaks.t) > 0 {
		peaks = thin(peaks)
		p.addSeries(keyLogPeaks, "scatter", p.addData(map[string]column{"t": p.time.column(peaks.t), "v": log(peaks.v)}), "v")
	}
	for i := range all {
		o := all[i].outline(axis.Time)
		data := p.addData(map[string]column{"t": p.time.column(o.t), "v": log(positive(o.envelope))})
		p.addSeries(keyEnvelope, "line", data, "v", gates(p.time, all[i:i+1]))
		p.noiseFloor(all[i].decay, o.t)
	}
	if len(all) > 0 && r.predicted != nil {
		w := all[0]
		w.curve = r.predicted
		o := w.outline(axis.Time)
		p.addSeries(keyPredicted, "line", p.addData(map[string]column{"t": p.time.column(o.t), "v": log(positive(o.envelope))}), "v")
	}
	if len(all) > 0 && read.Line[1] != 0 && len(peaks.t) > 0 {
		line := readingLine(r.Result, all[0].outline(axis.Time).t)
		p.addSeries(keyLine, "line", p.addData(map[string]column{"t": p.time.column(line.t), "v": log(positive(line.v))}), "v")
	}
}

// noiseFloor draws the noise of a decay as a level.
func (p *plot) noiseFloor(d *decay.Decay, t []float64) {
	if !(d.NoiseRMS > 0) || math.IsInf(d.NoiseRMS, 0) {
		return
	}
	level := make([]float64, len(t))
	for i := range level {
		level[i] = d.NoiseRMS
	}
	data := p.addData(map[string]column{"t": p.time.column(t), "v": {values: level, factor: p.level.factor, leading: 5}})
	p.addSeries(keyNoise, "line", data, "v")
}

// residual draws what the fit leaves, with the band of the noise.
func (p *plot) residual(r *RingDown, all []drawn, windows []indexRange, reduced bool) {
	ch := r.Channel
	traces := make([]trace, len(all))
	lo, hi := 0.0, 0.0
	for i := range all {
		w := &all[i]
		bins := w.bins(w.points(binsInGates))
		if ch.Axis.N <= exactLimit {
			bins = ch.Axis.N
		}
		traces[i] = reduce(ch.Axis, segments(w.gate, windows, bins, w.points(binsInWindow)), w.residuals(ch))
		if a, b, ok := span(traces[i].v); ok {
			lo, hi = math.Min(lo, a), math.Max(hi, b)
		}
	}
	scale := scaleFor(lo, hi, (hi-lo)/5000, r.unit())
	p.addPanel("Residual", captionResidual, scale.unit, false)
	for i := range all {
		data := p.addTrace(traces[i], scale)
		p.addSeries(keyResidual, "line", data, "v", band(p.time, scale, all[i].decay))
		p.addDots(keyResidual, data)
	}
	last := &p.panels[len(p.panels)-1]
	last.Keys = append(last.Keys, keyBand)
	if reduced {
		last.Caption = captionExtremes
	}
}

func (p *plot) addTrace(tr trace, s axisScale) int {
	return p.addData(map[string]column{"t": p.time.column(tr.t), "v": s.column(tr.v)})
}

// addDots draws the points of a line as dots, in one go however many they are.
func (p *plot) addDots(k key, data int) {
	p.addSeries(k, "scatter", data, "v", charts.WithSeriesOpts(func(s *charts.SingleSeries) {
		s.Large, s.LargeThreshold = opts.Bool(true), 500
	}))
}

// gates shades the stretches of time that were fitted.
func gates(time axisScale, all []drawn) charts.SeriesOpts {
	return charts.WithSeriesOpts(func(s *charts.SingleSeries) {
		var areas []any
		for _, w := range all {
			areas = append(areas, []opts.MarkAreaData{
				{XAxis: round(w.decay.From*time.factor, time.places)}, {XAxis: round(w.decay.To*time.factor, time.places)}})
		}
		if len(areas) > 0 {
			s.MarkAreas = &opts.MarkAreas{Data: areas, MarkAreaStyle: opts.MarkAreaStyle{ItemStyle: &opts.ItemStyle{Color: "@gate"}}}
		}
	})
}

// band shades two standard deviations of the noise to both sides of zero.
func band(time, level axisScale, d *decay.Decay) charts.SeriesOpts {
	return charts.WithSeriesOpts(func(s *charts.SingleSeries) {
		h := 2 * d.NoiseRMS * level.factor
		if !(h > 0) || math.IsInf(h, 0) {
			return
		}
		s.MarkAreas = &opts.MarkAreas{
			Data: []any{[]opts.MarkAreaData{
				{Coord: []float64{round(d.From*time.factor, time.places), -h}}, {Coord: []float64{round(d.To*time.factor, time.places), h}}}},
			MarkAreaStyle: opts.MarkAreaStyle{ItemStyle: &opts.ItemStyle{Color: "@band"}},
		}
	})
}

// views returns the stretches of time that are worth a button.
func (p *plot) views(all []drawn) []view {
	if len(all) == 0 {
		return []view{}
	}
	at := func(t float64) number { return number(round(t*p.time.factor, p.time.places)) }
	d := all[0].decay
	out := []view{{"Gate", at(d.From), at(d.To)}}
	if len(all) > 1 {
		out[0] = view{"All gates", at(d.From), at(all[len(all)-1].decay.To)}
	}
	// Where the record is reduced the views stay inside of its windows.
	cycles := (d.To - d.From) / math.Max(d.Cycles, 1)
	wide := math.Min(windowCycles*0.7*cycles, (d.To-d.From)/3)
	middle := (d.From + d.To) / 2
	return append(out, view{"First cycles", at(d.From - wide/10), at(d.From + wide)},
		view{"Middle", at(middle - wide/2), at(middle + wide/2)}, view{"Last cycles", at(d.To - wide), at(d.To)})
}

// thin keeps the first points of a reading, for the view of the first cycles, and
// of the others so many that they do not merge into a bar.
func thin(tr trace) trace {
	const first, others = 40, 60
	n := len(tr.t) - first
	if n <= others {
		return tr
	}
	out := trace{t: append([]float64{}, tr.t[:first]...), v: append([]float64{}, tr.v[:first]...)}
	for i := range others {
		k := first + i*(n-1)/(others-1)
		out.add(tr.t[k], tr.v[k])
	}
	return out
}

// positive returns v with NaN for what has no logarithm.
func positive(v []float64) []float64 {
	out := make([]float64, len(v))
	for i, x := range v {
		if out[i] = x; !(x > 0) {
			out[i] = math.NaN()
		}
	}
	return out
}
