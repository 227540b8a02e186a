package report

import (
	"math"

	"github.com/go-echarts/go-echarts/v2/charts"

	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

var (
	keyCaptures    = key{"captures, with U (k = 2)", "ring", "samples"}
	keyStraight    = key{"fitted line", "line", "fit"}
	keyExtension   = key{"the line beyond the captures", "dash", "fit"}
	keyStraightU   = key{"U (k = 2) of the line", "line", "quiet"}
	keyComponents  = key{"as the components say", "line", "fit"}
	keyOffFreq     = key{"natural frequency", "ring", "samples"}
	keyOffRate     = key{"decay rate", "cross", "crossing"}
	keyTwiceU      = key{"two standard uncertainties", "dash", "quiet"}
	keyInterceptOf = map[bool]key{false: {"own capacitance, with U (k = 2)", "cross", "peak"}, true: {"series resistance, with U (k = 2)", "cross", "peak"}}
)

const (
	captionCapacitors = "Each capture against all known capacitance, part and probe: the slope is the inductance, and the line meets zero at the circuit's own capacitance, its sign turned. A point off the line by more than its bars is a wrong part or value."
	captionResistors  = "Each capture against all known resistance, part and set-up: the slope is 1/2L, and the line meets zero at the circuit's own series resistance, its sign turned. A point off the line by more than its bars is a wrong part or value."
	captionRateOver   = "Added capacitors should not add loss: points that leave the curve mean a loss that changes with the frequency (skin effect, a core), or that of the added parts."
	captionFreqOver   = "Added resistors should not move the frequency: points that leave the curve mean that something else changed, the inductance of a resistor or the leads."
	captionOffBy      = "How far each capture lies off the components, in standard uncertainties u of its own: nearly all should lie between the lines."
	noteShunt         = "The conductance across the capacitor that the bench file tells of is taken out of these points."
	linePoints        = 400
	barPoints         = 9 // of a bar along the common axis: a zoom cuts it between two of them
)

// A componentPlot draws components and what they were found from.
type componentPlot struct {
	*plot
	c *Components
	*circuit.ComponentLine
	lo, hi float64 // of the known parts, F or ohm
}

func (c *Components) plot() *componentPlot {
	p := &componentPlot{plot: &plot{Line: charts.NewLine()}, c: c, ComponentLine: c.Result.Line, lo: math.Inf(1), hi: math.Inf(-1)}
	for _, q := range p.Points {
		p.lo, p.hi = min(p.lo, q.X.Value), max(p.hi, q.X.Value)
	}
	return p
}

// figures are the line down to where it meets zero, and what the captures say beside it.
func (c *Components) figures() ([]*figure, error) {
	if c.Result == nil {
		return nil, nil
	}
	line, err := c.plot().line()
	if err != nil {
		return nil, err
	}
	beside, err := c.plot().beside()
	if err != nil {
		return nil, err
	}
	for _, f := range []*figure{line, beside} {
		f.Name, f.Bare = prefixed(c.Device)+"components", true
		f.Words = axisWords{"capacitance", "Capacitances shown", f.Words.Whole, "Less", "More"}
		if c.Result.Line.Resistors {
			f.Words = axisWords{"resistance", "Resistances shown", f.Words.Whole, "Less", "More"}
		}
	}
	return []*figure{line, beside}, nil
}

// own is the component that the line meets zero at.
func (p *componentPlot) own() quantity.Quantity {
	if p.Resistors {
		return p.c.Result.Resistance
	}
	return p.c.Result.Capacitance
}

// line draws the captures and their line.
func (p *componentPlot) line() (*figure, error) {
	own := p.own()
	from, to := min(-own.Value, p.lo), max(-own.Value, p.hi)
	room := (to - from) / 25
	from, to = from-room, to+room
	p.time = scaleFor(from, to, (to-from)/20000, own.Unit)
	top := p.At(to).Value
	title, caption, scale := "Decay rate against known resistance", captionResistors, scaleFor(0, top, top/20000, "1/s")
	if !p.Resistors {
		title, caption, scale = "1/ω₀² against known capacitance", captionCapacitors, scaleOfSquare(top)
	}
	p.addPanel(title, caption, scale.unit, false)
	p.straight(from, to, scale)
	var x, y []quantity.Quantity
	for _, q := range p.Points {
		x, y = append(x, q.X), append(y, q.Y)
	}
	p.barred(keyCaptures, x, y, scale)
	p.barred(keyInterceptOf[p.Resistors], []quantity.Quantity{quantity.New(-own.Value, own.U, own.Unit)}, []quantity.Quantity{quantity.New(0, 0, own.Unit)}, scale)
	f := &figure{Panels: p.panels, Picture: "components.png", Whole: true, Words: axisWords{Whole: "Whole line"}}
	f.Views = []view{p.view("Captures", p.lo, p.hi), p.view("Intercept", -own.Value-3*own.U, -own.Value+3*own.U)}
	if p.Shunt != 0 {
		f.Notes = []string{noteShunt}
	}
	return f, p.close(f, from, to, "Chart of "+title+" with the fitted line down to where it meets zero.")
}

// straight draws the line, solid where captures carry it, and its uncertainty.
func (p *componentPlot) straight(from, to float64, s axisScale) {
	own := p.own() // where the line is looked at more closely
	all := merge(between(from, to, linePoints), between(max(from, -own.Value-4*own.U), min(to, -own.Value+4*own.U), linePoints/4))
	var upper, lower, inside, beyond trace
	for _, x := range merge(all, []float64{p.lo, p.hi}) {
		q := p.At(x)
		upper.add(x, q.Value+2*q.U)
		lower.add(x, q.Value-2*q.U)
		if x >= p.lo && x <= p.hi {
			inside.add(x, q.Value)
		}
		if x <= p.lo || x >= p.hi {
			beyond.add(x, q.Value)
		}
		if x == p.lo {
			beyond.add(x, unknown.Value) // a gap
		}
	}
	p.addSeries(keyStraight, "line", p.addTrace(inside, s), "v")
	p.addSeries(keyExtension, "line", p.addTrace(beyond, s), "v")
	p.addSeries(keyStraightU, "line", p.addTrace(upper, s), "v", width(0.8))
	p.addSeries(keyStraightU, "line", p.addTrace(lower, s), "v", width(0.8))
}

// beside draws the figure that the parts should not move, and the residuals.
func (p *componentPlot) beside() (*figure, error) {
	room := (p.hi - p.lo) / 15
	for _, q := range p.Points {
		room = max(room, 2.2*q.X.U)
	}
	from, to := p.lo-room, p.hi+room
	p.time = scaleFor(from, to, (to-from)/20000, p.own().Unit)
	p.other(from, to)
	p.residuals(from, to)
	f := &figure{Panels: p.panels, Views: []view{}, Picture: "captures.png", Words: axisWords{Whole: "All captures"}}
	return f, p.close(f, from, to, "Charts of what the added parts should not move, and of how far each capture lies off the components.")
}

// other draws the figure that the parts should not move by themselves.
func (p *componentPlot) other(from, to float64) {
	title, caption, unit := "Decay rate", captionRateOver, "1/s"
	if p.Resistors {
		title, caption, unit = "Natural frequency", captionFreqOver, "Hz"
	}
	var x, y []quantity.Quantity
	for _, q := range p.Points {
		x, y = append(x, q.X), append(y, q.Other)
	}
	lo, hi := spanOfBars(y, y[0])
	scale := scaleFor(lo, hi, (hi-lo)/2000, unit)
	p.addPanel(title, caption, scale.unit, false)
	var curve trace
	for _, at := range between(from, to, linePoints) {
		curve.add(at, p.OtherAt(at))
	}
	p.addSeries(keyComponents, "line", p.addTrace(curve, scale), "v")
	p.barred(keyCaptures, x, y, scale)
}

// residuals draws how far the captures lie off the components, in units of u.
func (p *componentPlot) residuals(from, to float64) {
	scale := axisScale{factor: 1, unit: "u", places: 3}
	p.addPanel("Residuals", captionOffBy, scale.unit, false)
	var frequency, rate trace
	most := 2.5
	for i, r := range p.c.Result.Rows {
		f, a := residualsOf(&r, p.Resistors)
		frequency.add(p.Points[i].X.Value, f.Value/f.U)
		rate.add(p.Points[i].X.Value, a.Value/a.U)
		most = max(most, math.Abs(f.Value/f.U), math.Abs(a.Value/a.U))
	}
	p.evenBounds(-most, most, scale)
	for _, level := range []float64{2, -2} {
		var tr trace
		for _, x := range between(from, to, linePoints) {
			tr.add(x, level)
		}
		p.addSeries(keyTwiceU, "line", p.addTrace(tr, scale), "v")
	}
	p.addSeries(keyOffFreq, "scatter", p.addTrace(frequency, scale), "v")
	p.addSeries(keyOffRate, "scatter", p.addTrace(rate, scale), "v")
}

// barred draws points with bars of two standard uncertainties both ways.
func (p *plot) barred(k key, x, y []quantity.Quantity, s axisScale) {
	var bars, points trace
	for i := range x {
		points.add(x[i].Value, y[i].Value)
		if u := 2 * y[i].U; u > 0 {
			bars.add(x[i].Value, y[i].Value-u)
			bars.add(x[i].Value, y[i].Value+u)
			bars.add(x[i].Value, unknown.Value) // a gap
		}
		if u := 2 * x[i].U; u > 0 {
			for _, at := range between(x[i].Value-u, x[i].Value+u, barPoints) {
				bars.add(at, y[i].Value)
			}
			bars.add(x[i].Value+u, unknown.Value)
		}
	}
	p.addSeries(k, "line", p.addTrace(bars, s), "v")
	p.addSeries(k, "scatter", p.addTrace(points, s), "v")
}

// view is a stretch of the common axis with some room.
func (p *componentPlot) view(name string, from, to float64) view {
	room := (to - from) / 10
	return view{name, p.at(from - room), p.at(to + room)}
}

func (p *componentPlot) close(f *figure, from, to float64, description string) error {
	f.Time = p.time.unit
	var err error
	f.Option, err = p.finish(from, to, description+" Every result stands in the tables of this page.")
	return err
}

// scaleOfSquare is the scale for squares of times up to top in s^2: 4e-18 s^2 are 4 ns².
func scaleOfSquare(top float64) axisScale {
	factor, unit := quantity.Scale(math.Sqrt(top), "s")
	s := axisScale{factor: factor * factor, unit: unit + "²"}
	s.places = max(0, min(15, int(math.Ceil(-math.Log10(top*s.factor/20000)))))
	return s
}

// residualsOf returns how far natural frequency and decay rate of a row are off.
func residualsOf(r *circuit.Row, resistors bool) (frequency, rate quantity.Quantity) {
	if resistors {
		return r.Other, r.Residual
	}
	return r.Residual, r.Other
}
