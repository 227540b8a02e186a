package report

import (
	"math"

	"github.com/go-echarts/go-echarts/v2/charts"

	"dieaway/capture"
	"dieaway/decay/driven"
)

var (
	keyRows      = key{"rows of the sweep", "dots", "samples"}
	keyCurve     = key{"fitted curve", "line", "fit"}
	keyForetold  = key{"predicted by the ring-down", "dash", "crossing"}
	keyOutliers  = key{"rows left out", "cross", "crossing"}
	keyHalfPower = key{"half-power points read", "ring", "peak"}
	keyRest      = key{"row less fitted curve", "dots", "samples"}
	keyTwice     = key{"two standard deviations of a row", "dash", "quiet"}
)

const (
	captionCurve      = "The curve should run through the rows on both flanks and over the peak; rows that leave it on one side mean a second resonance, or another form than the one fitted."
	captionSweepOnly  = "The sweep as it was read; the findings above say why no resonance was taken from it."
	captionPhase      = "The phase of the circuit alone: that of the source is taken out. It turns by half a circle, most of it within the bandwidth."
	captionSweepRest  = "About 19 rows in 20 should lie between the lines without a pattern; waves mean that the form misses something."
	curveAcross       = 500  // points of the curve over the sweep
	curveAtResonance  = 500  // and over the resonance
	resonanceHalves   = 10.0 // half bandwidths that count as the resonance
	viewHalves        = 4.0
	rowsDrawn         = 6000
	rowsDrawnSentence = "The sweep has more rows than a page can hold: every few of them are drawn. The result comes from all."
)

// sweepPlot draws one sweep.
type sweepPlot struct {
	*plot
	r      *driven.Result
	points []driven.Point
	curve  trace // fitted magnitude
	phase  trace // fitted phase in degrees
	// The response that a ring-down predicts, and its phase in degrees; empty without one.
	predicted, predictedPhase trace
	unit                      string
}

// figure draws the sweep: the resonance curve and, unless it was refused, the
// phase, if there is one, and what the fit leaves.
func (r *Sweep) figure() (*figure, error) {
	res := r.Result
	lo, hi := r.Table.Span()
	points := res.Points
	if res.Points == nil || r.refused() {
		points = r.plainPoints()
	}
	drawn := thinned(points, rowsDrawn)
	top := 0.0
	for _, p := range points {
		if p.Magnitude > top && !math.IsInf(p.Magnitude, 0) {
			top = p.Magnitude
		}
	}
	unit := r.unit()
	if r.refused() {
		unit = clean(r.Table.Unit, unitLength)
	}
	p := &sweepPlot{plot: &plot{Line: charts.NewLine(), time: scaleFor(lo, hi, (hi-lo)/20000, "Hz"), level: scaleFor(0, top, top/20000, unit)},
		r: res, points: drawn, unit: unit}
	f := &figure{Words: wordsOfFrequency, Name: prefixed(r.Device) + clean(r.Table.Name, nameLength), Picture: "driven-sweep.png", Views: []view{}}
	if len(drawn) < len(points) {
		f.Reduced, f.Notes = true, []string{rowsDrawnSentence}
	}
	if !r.refused() {
		p.time = scaleFor(lo, hi, math.Min(hi-lo, res.Quantities.Bandwidth.Value)/2000, "Hz")
		p.follow(lo, hi, r.predicted)
		f.Views = p.views(lo, hi)
	}
	p.response(r.refused())
	if !r.refused() {
		if res.Complex {
			p.phases()
		}
		p.rest()
	}
	f.Time, f.Panels = p.time.unit, p.panels
	var err error
	f.Option, err = p.finish(lo, hi, r.description())
	return f, err
}

func (r *Sweep) description() string {
	if r.refused() {
		return "Chart of the response against frequency. The numbers are withheld; the findings say why."
	}
	return "Charts over the same frequencies: the response with the fitted resonance curve, the phase where it was measured, " +
		"and the difference of rows and curve. Every result stands in the tables of this page."
}

// plainPoints are the rows of a sweep without a fit.
func (r *Sweep) plainPoints() []driven.Point {
	var out []driven.Point
	for i, f := range r.Table.Frequency {
		out = append(out, driven.Point{Frequency: f, Magnitude: r.Table.Magnitude[i], Phase: math.NaN()})
	}
	return out
}

// thinned keeps at most n points, evenly.
func thinned(all []driven.Point, n int) []driven.Point {
	stride := (len(all) + n - 1) / n
	if stride <= 1 {
		return all
	}
	var out []driven.Point
	for i := 0; i < len(all); i += stride {
		out = append(out, all[i])
	}
	return out
}

// follow computes the fitted curve and the one predicted, if there is one, more
// finely where the resonance is.
func (p *sweepPlot) follow(lo, hi float64, predicted func(f float64) (magnitude, phase float64)) {
	q := p.r.Quantities
	wide := resonanceHalves * q.Bandwidth.Value / 2
	fs := merge(between(lo, hi, curveAcross),
		between(math.Max(lo, q.NaturalFrequency.Value-wide), math.Min(hi, q.NaturalFrequency.Value+wide), curveAtResonance))
	for _, f := range fs {
		m, phase := p.r.At(f)
		p.curve.add(f, m)
		p.phase.add(f, phase*180/math.Pi)
		if predicted != nil {
			m, phase = predicted(f)
			p.predicted.add(f, m)
			p.predictedPhase.add(f, phase*180/math.Pi)
		}
	}
}

func (p *sweepPlot) views(lo, hi float64) []view {
	q := p.r.Quantities
	at := func(f float64) number {
		return number(round(math.Max(lo, math.Min(hi, f))*p.time.factor, p.time.places))
	}
	around := func(halves float64) (number, number) {
		w := halves * q.Bandwidth.Value / 2
		return at(q.NaturalFrequency.Value - w), at(q.NaturalFrequency.Value + w)
	}
	a, b := around(viewHalves)
	c, d := around(1)
	return []view{{"Resonance", a, b}, {"Bandwidth", c, d}}
}

// kept returns a value of the rows that were fitted, or of those left out.
func (p *sweepPlot) kept(outliers bool, value func(p driven.Point) float64) (tr trace) {
	for _, x := range p.points {
		if x.Outlier == outliers {
			tr.add(x.Frequency, value(x))
		}
	}
	return tr
}

// dots draws rows as points one by one: a sweep has few.
func (p *sweepPlot) dots(k key, tr trace, s axisScale) {
	if len(tr.t) > 0 {
		p.addSeries(k, "scatter", p.addTrace(tr, s), "v", charts.WithSeriesOpts(func(o *charts.SingleSeries) {
			if k.Mark == "dots" {
				o.SymbolSize = 5
			}
		}))
	}
}

// response draws rows, curve and readings.
func (p *sweepPlot) response(refused bool) {
	caption := captionCurve
	if refused {
		caption = captionSweepOnly
	}
	p.addPanel("Response", caption, p.level.unit, false)
	if !refused {
		p.addSeries(keyCurve, "line", p.addTrace(p.curve, p.level), "v")
		p.foretold(p.predicted, p.level)
	}
	magnitude := func(x driven.Point) float64 { return x.Magnitude }
	p.dots(keyRows, p.kept(false, magnitude), p.level)
	p.dots(keyOutliers, p.kept(true, magnitude), p.level)
	if refused {
		return
	}
	var marks trace
	read := &p.r.Readings
	level := read.Peak.Magnitude.Value / math.Sqrt2
	if p.r.Across == capture.Both { // half of the power that the notch takes away
		top := 0.0
		for _, x := range p.points {
			top = math.Max(top, x.Magnitude)
		}
		level = math.Sqrt((top*top + read.Peak.Magnitude.Value*read.Peak.Magnitude.Value) / 2)
	}
	for _, f := range []float64{read.Lower.Value, read.Upper.Value} {
		if !math.IsNaN(f) {
			marks.add(f, level)
		}
	}
	p.dots(keyHalfPower, marks, p.level)
}

// foretold draws what a ring-down predicts.
func (p *sweepPlot) foretold(tr trace, s axisScale) {
	if len(tr.t) > 0 {
		p.addSeries(keyForetold, "line", p.addTrace(tr, s), "v")
	}
}

// phases draws the phase in degrees.
func (p *sweepPlot) phases() {
	scale := axisScale{factor: 1, unit: "°", places: 3}
	p.addPanel("Phase", captionPhase, scale.unit, false)
	p.addSeries(keyCurve, "line", p.addTrace(p.phase, scale), "v")
	p.foretold(p.predictedPhase, scale)
	degrees := func(x driven.Point) float64 { return x.Phase * 180 / math.Pi }
	p.dots(keyRows, p.kept(false, degrees), scale)
	p.dots(keyOutliers, p.kept(true, degrees), scale)
}

// rest draws what the fit leaves of the magnitudes, between twice their deviations.
func (p *sweepPlot) rest() {
	left := p.kept(false, func(x driven.Point) float64 {
		m, _ := p.r.At(x.Frequency)
		return x.Magnitude - m
	})
	twice := p.kept(false, func(x driven.Point) float64 { return 2 * x.Deviation })
	lo, hi, _ := span(append(append([]float64{}, left.v...), twice.v...))
	scale := scaleFor(lo, hi, (hi-lo)/5000, p.unit)
	p.addPanel("Residual", captionSweepRest, scale.unit, false)
	minus := trace{t: twice.t}
	for _, v := range twice.v {
		minus.v = append(minus.v, -v)
	}
	p.addSeries(keyTwice, "line", p.addTrace(twice, scale), "v")
	p.addSeries(keyTwice, "line", p.addTrace(minus, scale), "v")
	p.dots(keyRest, left, scale)
}
