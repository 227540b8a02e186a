package report

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"github.com/go-echarts/go-echarts/v2/charts"

	"dieaway/decay"
	"dieaway/decay/quantity"
)

var keyQuoted = key{"result", "line", "fit"}

// stretchKeys tell a few decays apart, by mark and colour; more share one.
var stretchKeys = []key{{"", "ring", "samples"}, {"", "cross", "crossing"}, {"", "ring", "peak"}, {"", "cross", "envelope"}}

const stretchName = "stretch by stretch, with U (k = 2)"

const (
	captionFrequencyAlong   = "Steady along the decay, within the bars, is what one exponential asks for; a slope is a reactance that changes with the amplitude, a wave another mode."
	captionQAlong           = "A slope here is loss that changes with the amplitude: a clamp or a core at the first cycles, a source that still feeds the circuit at the last."
	captionFrequencyAgainst = "The same stretches against the amplitude of the ring, as a magnetic core or a diode is judged by; the result of a decay that depends on it is the limit at the left."
	captionQAgainst         = "A Q that falls to the right is loss that grows with the amplitude; decays that part here were not loaded alike."
)

var wordsOfAmplitude = axisWords{"amplitude", "Amplitudes shown in both charts", "All amplitudes", "Smaller", "Larger"}

// A course is what the stretches of one decay say.
type course struct {
	key    key
	points []decay.Local
}

// courses are those of all decays drawn that tell something stretch by stretch.
func (r *RingDown) courses() (out []course) {
	all := r.Result.Decays[:min(len(r.Result.Decays), mostDecays)]
	for i, d := range all {
		points := d.Along(r.Channel)
		if len(points) < 2 {
			continue
		}
		k := stretchKeys[0]
		k.Name = stretchName
		if len(all) > 1 && len(all) <= len(stretchKeys) {
			k = stretchKeys[i]
			k.Name = fmt.Sprintf("decay %d, %s", i+1, stretchName)
		}
		out = append(out, course{k, points})
	}
	return out
}

// alongFigures draw frequency and Q of the decays against time and against
// amplitude; none where they tell nothing stretch by stretch.
func (r *RingDown) alongFigures() ([]*figure, error) {
	all := r.courses()
	if len(all) == 0 {
		return nil, nil
	}
	time := &along{courses: all, quoted: r.Result.Quantities, unit: "s", captions: [2]string{captionFrequencyAlong, captionQAlong},
		x: func(l decay.Local) float64 { return l.Time }}
	amplitude := &along{courses: all, quoted: r.Result.Quantities, unit: r.unit(), captions: [2]string{captionFrequencyAgainst, captionQAgainst},
		x: func(l decay.Local) float64 { return math.Log10(l.Amplitude) }, logarithmic: true}
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

// along draws what the stretches of decays say over one quantity x.
type along struct {
	*plot
	courses  []course
	quoted   *decay.Quantities
	x        func(decay.Local) float64
	unit     string
	captions [2]string
	// logarithmic says that x is the logarithm of a quantity in unit.
	logarithmic bool
	cut         bool // whether bars reach beyond the charts
}

// figure draws both panels.
func (a *along) figure(title string, words axisWords) (*figure, error) {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, c := range a.courses {
		for _, l := range c.points {
			lo, hi = min(lo, a.x(l)), max(hi, a.x(l))
		}
	}
	room := (hi - lo) / 20
	lo, hi = lo-room, hi+room
	a.plot = &plot{Line: charts.NewLine(), time: scaleFor(lo, hi, (hi-lo)/1000, a.unit)}
	if a.logarithmic {
		a.time = axisScale{factor: 1, unit: a.unit, places: 6}
	}
	ends := []float64{lo, hi}
	a.panel("Frequency "+title, a.captions[0], ends, a.quoted.DampedFrequency, func(l decay.Local) quantity.Quantity { return l.DampedFrequency })
	a.panel("Quality factor "+title, a.captions[1], ends, a.quoted.Q, func(l decay.Local) quantity.Quantity { return l.Q })
	f := &figure{Time: a.time.unit, Panels: a.panels, Words: words, Bare: true, Logarithmic: a.logarithmic}
	if a.cut {
		f.Notes = []string{noteCut}
	}
	var err error
	f.Option, err = a.finish(lo, hi, "Two charts: damped frequency and quality factor of stretches of the decay "+title+", with their uncertainties and the result.")
	return f, err
}

const noteCut = "The charts are scaled to the two thirds of the stretches that are known best; the bars of others reach beyond them."

// better are two thirds of the quantities, those that are known best.
func better(all []quantity.Quantity) []quantity.Quantity {
	out := slices.Clone(all)
	slices.SortStableFunc(out, func(x, y quantity.Quantity) int { return cmp.Compare(x.U, y.U) })
	return out[:(2*len(out)+2)/3]
}

// spanOfBars reaches over the bars of two standard uncertainties and the result.
func spanOfBars(all []quantity.Quantity, quoted quantity.Quantity) (lo, hi float64) {
	lo, hi = quoted.Value, quoted.Value
	for _, q := range all {
		lo, hi = min(lo, q.Value-2*q.U), max(hi, q.Value+2*q.U)
	}
	return lo, hi
}

// evenBounds ends the last panel's vertical axis at round numbers that hold lo to hi.
func (p *plot) evenBounds(lo, hi float64, s axisScale) {
	lo, hi = lo*s.factor, hi*s.factor
	const most = 7 // steps
	power := math.Pow10(int(math.Floor(math.Log10((hi - lo) / most))))
	step := power
	for _, m := range []float64{2, 5, 10} {
		if hi-lo > most*step {
			step = m * power
		}
	}
	y := &p.YAxisList[len(p.panels)-1]
	y.Min, y.Max = round(math.Floor(lo/step)*step, s.places+2), round(math.Ceil(hi/step)*step, s.places+2)
	y.SplitNumber = int(math.Ceil(hi/step) - math.Floor(lo/step))
}

// panel draws one quantity: bars, points, and the result as a level.
func (a *along) panel(title, caption string, ends []float64, quoted quantity.Quantity, of func(decay.Local) quantity.Quantity) {
	bars, dots := make([]trace, len(a.courses)), make([]trace, len(a.courses))
	var all []quantity.Quantity
	for i, c := range a.courses {
		for _, l := range c.points {
			x, q := a.x(l), of(l)
			dots[i].add(x, q.Value)
			bars[i].add(x, q.Value-2*q.U)
			bars[i].add(x, q.Value+2*q.U)
			bars[i].add(x, unknown.Value) // a gap
			all = append(all, q)
		}
	}
	lo, hi := spanOfBars(all, quoted)
	scale := scaleFor(quoted.Value, quoted.Value, 0, quoted.Unit)
	from, to := spanOfBars(better(all), quoted)
	scale.places = scaleFor(from, to, (to-from)/1000, quoted.Unit).places
	a.addPanel(title, caption, scale.unit, false)
	if to-from < (hi-lo)/2 {
		a.evenBounds(from, to, scale)
		a.cut = true
	}
	for i, c := range a.courses {
		a.addSeries(c.key, "line", a.addTrace(bars[i], scale), "v")
		a.addSeries(c.key, "scatter", a.addTrace(dots[i], scale), "v")
	}
	a.addSeries(keyQuoted, "line", a.addTrace(trace{ends, []float64{quoted.Value, quoted.Value}}, scale), "v")
}
