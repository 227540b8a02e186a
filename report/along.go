package report

import (
	"github.com/go-echarts/go-echarts/v2/charts"

	"dieaway/decay"
	"dieaway/decay/quantity"
)

var (
	keyLocal  = key{"stretch by stretch, with U (k = 2)", "ring", "samples"}
	keyQuoted = key{"result", "line", "fit"}
)

const (
	captionAlong     = "Steady along the decay, within the bars, is what one exponential asks for; a slope is loss or reactance that changes with the amplitude, a wave another mode."
	captionAmplitude = "The same stretches against the amplitude of the ring, as a magnetic core or a diode is judged by; the result of an amplitude-dependent decay is the limit at the left."
)

var wordsOfAmplitude = axisWords{"amplitude", "Amplitudes shown in both charts", "All amplitudes", "Smaller", "Larger"}

// alongFigures draw frequency and Q of the first decay against time and against
// amplitude; none where the decay tells nothing stretch by stretch.
func (r *RingDown) alongFigures() ([]*figure, error) {
	if r.refused() || len(r.Result.Decays) == 0 || r.curves != nil {
		return nil, nil
	}
	points := r.Result.Decays[0].Along(r.Channel)
	if len(points) < 2 {
		return nil, nil
	}
	time := &along{points: points, quoted: r.Result.Quantities, unit: "s", caption: captionAlong,
		x: func(l decay.Local) float64 { return l.Time }}
	amplitude := &along{points: points, quoted: r.Result.Quantities, unit: r.unit(), caption: captionAmplitude,
		x: func(l decay.Local) float64 { return l.Amplitude }}
	a, err := time.figure("along the decay", wordsOfTime)
	if err != nil {
		return nil, err
	}
	a.Words.Whole, a.Picture = "All stretches", "along-decay.png"
	b, err := amplitude.figure("against amplitude", wordsOfAmplitude)
	if err != nil {
		return nil, err
	}
	b.Picture = "against-amplitude.png"
	for _, f := range []*figure{a, b} {
		f.Name, f.Views = prefixed(r.Device)+clean(r.Channel.Name, nameLength), []view{}
	}
	return []*figure{a, b}, nil
}

// along draws what the stretches of a decay say over one quantity x.
type along struct {
	*plot
	points        []decay.Local
	quoted        *decay.Quantities
	x             func(decay.Local) float64
	unit, caption string
}

// figure draws both panels.
func (a *along) figure(title string, words axisWords) (*figure, error) {
	xs := make([]float64, len(a.points))
	for i, l := range a.points {
		xs[i] = a.x(l)
	}
	lo, hi, _ := span(xs)
	room := (hi - lo) / 20
	lo, hi = lo-room, hi+room
	a.plot = &plot{Line: charts.NewLine(), time: scaleFor(lo, hi, (hi-lo)/1000, a.unit)}
	a.panel("Frequency "+title, xs, []float64{lo, hi}, a.quoted.DampedFrequency, func(l decay.Local) quantity.Quantity { return l.DampedFrequency })
	a.panel("Quality factor "+title, xs, []float64{lo, hi}, a.quoted.Q, func(l decay.Local) quantity.Quantity { return l.Q })
	f := &figure{Time: a.time.unit, Panels: a.panels, Words: words, Bare: true}
	var err error
	f.Option, err = a.finish(lo, hi, "Two charts: damped frequency and quality factor of stretches of the decay "+title+", with their uncertainties and the result.")
	return f, err
}

// panel draws one quantity: bars, points, and the result as a level.
func (a *along) panel(title string, xs, ends []float64, quoted quantity.Quantity, of func(decay.Local) quantity.Quantity) {
	var bars, dots trace
	for i, l := range a.points {
		q := of(l)
		dots.add(xs[i], q.Value)
		bars.add(xs[i], q.Value-2*q.U)
		bars.add(xs[i], q.Value+2*q.U)
		bars.add(xs[i], unknown.Value) // a gap
	}
	scale := scaleFor(quoted.Value, quoted.Value, 0, quoted.Unit)
	lo, hi, _ := span(bars.v)
	scale.places = scaleFor(lo, hi, (hi-lo)/1000, quoted.Unit).places
	a.addPanel(title, a.caption, scale.unit, false)
	a.addSeries(keyLocal, "line", a.addTrace(bars, scale), "v")
	a.addSeries(keyLocal, "scatter", a.addTrace(dots, scale), "v")
	a.addSeries(keyQuoted, "line", a.addTrace(trace{ends, []float64{quoted.Value, quoted.Value}}, scale), "v")
}
