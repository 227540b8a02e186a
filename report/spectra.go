package report

import (
	"fmt"
	"math"

	"github.com/go-echarts/go-echarts/v2/charts"
	"github.com/go-echarts/go-echarts/v2/opts"

	"dieaway/decay"
	"dieaway/decay/quantity"
)

var (
	keyRingLines   = key{"samples of the gate", "dots", "samples"}
	keyResonance   = key{"fitted resonance", "line", "fit"}
	keyRingLeft    = key{"what the fit leaves", "line", "peak"}
	keyWidth       = key{"bandwidth", "band", "gate"}
	keyRingNoise   = key{"noise, rms", "dash", "quiet"}
	keyDensity     = key{"residual", "line", "samples"}
	keyWhite       = key{"white noise of the same rms", "dash", "quiet"}
	keyWhiteBand   = key{"95 % of the lines of white noise", "band", "band"}
	keyAssumed     = key{"noise that the uncertainties allow for", "line", "fit"}
	keyAtRing      = key{"frequency of the ring", "dash", "crossing"}
	spectrumLines  = 512 // of a spectrum that are drawn one by one
	spectrumAxis   = axisScale{factor: 1, unit: "Hz", places: 6}
	wordsOfDensity = axisWords{"frequency", "Frequencies shown", "All frequencies", "Lower", "Higher"}
)

const (
	captionRing     = "Samples and fitted resonance should coincide, and what the fit leaves should stay about the level of the noise: a hump that is left over is another mode, or a loss or frequency that moves with the amplitude."
	captionDensity  = "White noise keeps to its level, 19 lines in 20 inside the band; a line that stands out is a tone, a slope is coloured noise, and a hump at the ring is signal that the model misses."
	captionDensest  = "White noise keeps to its level, the extremes of the lines drawn reaching evenly beyond the band; a line that stands out is a tone, a slope is coloured noise, and a hump at the ring is signal that the model misses."
	describeRing    = "Chart of the spectrum of the ring beside that of the fitted curve, about the resonance."
	describeDensity = "Chart of the spectral density of the residual over all frequencies, with the level and the band of white noise."
)

// spectra draws the spectra of one decay: of what the fit leaves and of the ring.
type spectra struct {
	r *RingDown
	d *decay.Decay
}

// An attempt is a figure or, where it cannot be had, why.
type attempt struct {
	figure *figure
	why    string
}

// spectraOf is nil where there is no fitted decay to draw.
func (r *RingDown) spectraOf() *spectra {
	if r.refused() || len(r.Result.Decays) == 0 || r.curves != nil {
		return nil
	}
	return &spectra{r: r, d: r.Result.Decays[r.Result.Best]}
}

// of names the decay where there are several.
func (s *spectra) of() string {
	if len(s.r.Result.Decays) > 1 {
		return fmt.Sprintf(", decay %d", s.r.Result.Best+1)
	}
	return ""
}

// none is a figure of something that cannot be had.
func none(what string, err error) attempt {
	return attempt{why: fmt.Sprintf("There is no spectrum of %s: %v.", what, err)}
}

func (s *spectra) figure(p *plot, lo, hi float64, picture, description string) (*figure, error) {
	f := &figure{Time: p.time.unit, Panels: p.panels, Views: []view{}, Bare: true, Words: wordsOfDensity,
		Picture: picture, Name: prefixed(s.r.Device) + clean(s.r.Channel.Name, nameLength)}
	var err error
	f.Option, err = p.finish(lo, hi, description)
	return f, err
}

// residual draws the density of what the fit leaves.
func (s *spectra) residual() (attempt, error) {
	d := s.d
	x, err := d.ResidualSpectrum(s.r.Channel)
	if err != nil {
		return none("the residual", err), nil
	}
	top, bottom := 0.0, math.Inf(1)
	for i, v := range x.Density {
		top, bottom = max(top, v, x.High[i]), min(bottom, max(v, x.White/30), x.Low[i])
	}
	p := &plot{Line: charts.NewLine(), time: spectrumAxis, level: scaleFor(0, top, 0, s.r.unit()+"/√Hz")}
	caption, lines := captionDensity, logOf(x.Frequency, x.Density)
	if len(lines.t) > spectrumLines {
		caption, lines = captionDensest, extremeLines(lines)
	}
	p.addPanel("Spectrum of the residual"+s.of(), caption, p.level.unit, true)
	p.bounds(bottom/1.5, top*1.5)
	ends := []float64{math.Log10(x.Frequency[0]), math.Log10(x.Frequency[len(x.Frequency)-1])}
	p.addSeries(keyDensity, "line", p.addLevels(lines), "v", p.whiteBand(x), width(1.1))
	p.addSeries(keyAssumed, "line", p.addLevels(thinLines(logOf(x.Frequency, x.Assumed))), "v")
	p.addSeries(keyWhite, "line", p.addLevels(trace{ends, []float64{x.White, x.White}}), "v")
	if f := d.Quantities.DampedFrequency.Value; f > x.Frequency[0] {
		at := math.Log10(f)
		p.addSeries(keyAtRing, "line", p.addLevels(trace{[]float64{at, at}, []float64{bottom / 1.5, top * 1.5}}), "v")
	}
	last := &p.panels[0]
	last.Keys = append(last.Keys, keyWhiteBand)
	f, err := s.figure(p, ends[0], ends[1], "residual-spectrum.png", describeDensity)
	if err != nil {
		return attempt{}, err
	}
	f.Logarithmic, f.Notes = true, []string{densityLine(x, s.r.unit())}
	return attempt{figure: f}, nil
}

// densityLine says in numbers what the chart shows.
func densityLine(x *decay.ResidualSpectrum, unit string) string {
	k := x.Strongest()
	which := "No line stands above it"
	if x.Density[k] > x.High[k] {
		which = fmt.Sprintf("The line that stands out most, at %s, has %.2f times the level, where the band ends at %.2f",
			quantity.Format(x.Frequency[k], "Hz", 4), x.Density[k]/x.White, x.High[k]/x.White)
	}
	return fmt.Sprintf("White noise of the same rms has the level %s; %.0f %% of %s lie inside its band. %s.",
		quantity.Format(x.White, unit+"/√Hz", 3), 100*x.Inside(), plural(len(x.Density), "line"), which)
}

// whiteBand shades the band of white noise, stretch by stretch of the frequencies
// that were averaged alike.
func (p *plot) whiteBand(x *decay.ResidualSpectrum) charts.SeriesOpts {
	var areas []any
	at := func(f, v float64) opts.MarkAreaData {
		return opts.MarkAreaData{Coord: []float64{round(math.Log10(f), p.time.places), v * p.level.factor}}
	}
	for first, i := 0, 0; i < len(x.Frequency); i++ {
		if last := i == len(x.Frequency)-1; last || x.High[i+1] != x.High[first] {
			end := x.Frequency[min(i+1, len(x.Frequency)-1)]
			areas = append(areas, []opts.MarkAreaData{at(x.Frequency[first], x.Low[first]), at(end, x.High[first])})
			first = i + 1
		}
	}
	return charts.WithSeriesOpts(func(o *charts.SingleSeries) {
		o.MarkAreas = &opts.MarkAreas{Data: areas, MarkAreaStyle: opts.MarkAreaStyle{ItemStyle: &opts.ItemStyle{Color: "@band"}}}
	})
}

// ring draws the spectrum of the ring about each resonance.
func (s *spectra) ring() (attempt, error) {
	x, err := s.d.RingSpectrum(s.r.Channel)
	if err != nil {
		return none("the ring", err), nil
	}
	lo, hi := x.Frequency[0], x.Frequency[len(x.Frequency)-1]
	_, top, _ := span(append(append([]float64{}, x.Measured...), x.Fitted...))
	bottom, _, _ := span(x.Fitted)
	if x.Noise > 0 {
		bottom = math.Min(bottom, x.Noise/8)
	}
	p := &plot{Line: charts.NewLine(), time: scaleFor(lo, hi, (hi-lo)/20000, "Hz"), level: scaleFor(0, top, 0, s.r.unit()+"/Hz")}
	p.addPanel("Spectrum of the ring"+s.of(), captionRing, p.level.unit, true)
	p.bounds(bottom/1.5, top*1.3)
	p.addSeries(keyResonance, "line", p.addLevels(banded(x, x.Fitted)), "v", p.bandwidths(x))
	p.addDotsOf(keyRingLines, p.addLevels(every(dotsApart, banded(x, x.Measured))))
	p.addSeries(keyRingLeft, "line", p.addLevels(banded(x, x.Left)), "v", width(1.1))
	if x.Noise > 0 && !math.IsInf(x.Noise, 0) {
		p.addSeries(keyRingNoise, "line", p.addLevels(trace{[]float64{lo, hi}, []float64{x.Noise, x.Noise}}), "v")
	}
	p.panels[0].Keys = append(p.panels[0].Keys, keyWidth)
	f, err := s.figure(p, lo, hi, "ring-spectrum.png", describeRing)
	if err != nil {
		return attempt{}, err
	}
	f.Views, f.Whole = p.resonances(x), len(x.Bands) == 1
	if x.Missing > 0 {
		f.Notes = []string{fmt.Sprintf("The fitted curve stands in for %s that %s missing or left out of the fit.", plural(x.Missing, "sample"), isAre(x.Missing))}
	}
	return attempt{figure: f}, nil
}

// resonances are the views of a ring's spectrum: each resonance, the strongest first.
func (p *plot) resonances(x *decay.RingSpectrum) []view {
	out := []view{}
	top := 0.0
	for _, b := range x.Bands {
		for i, f := range b.Center {
			lo, hi := x.Frequency[b.First], x.Frequency[b.Last-1]
			if len(b.Center) > 1 || len(x.Bands) == 1 {
				lo, hi = math.Max(lo, f-2*b.Width[i]), math.Min(hi, f+2*b.Width[i])
			}
			v := view{"Around " + quantity.Format(f, "Hz", 4), p.at(lo), p.at(hi)}
			if height := largestBetween(x, lo, hi); height > top {
				top, out = height, append([]view{v}, out...)
			} else {
				out = append(out, v)
			}
		}
	}
	return out
}

// largestBetween is the height of the fitted resonance between two frequencies.
func largestBetween(x *decay.RingSpectrum, lo, hi float64) (top float64) {
	for i, f := range x.Frequency {
		if f >= lo && f <= hi {
			top = math.Max(top, x.Fitted[i])
		}
	}
	return top
}

// at is a place on the common axis.
func (p *plot) at(x float64) number { return number(round(x*p.time.factor, p.time.places)) }

// bandwidths shades the half-power bandwidth of each resonance.
func (p *plot) bandwidths(x *decay.RingSpectrum) charts.SeriesOpts {
	return charts.WithSeriesOpts(func(o *charts.SingleSeries) {
		var areas []any
		for _, b := range x.Bands {
			for i, f := range b.Center {
				half := b.Width[i] / 2
				areas = append(areas, []opts.MarkAreaData{
					{XAxis: round((f-half)*p.time.factor, p.time.places)}, {XAxis: round((f+half)*p.time.factor, p.time.places)}})
			}
		}
		o.MarkAreas = &opts.MarkAreas{Data: areas, MarkAreaStyle: opts.MarkAreaStyle{ItemStyle: &opts.ItemStyle{Color: "@gate"}}}
	})
}

// banded is a course over the bands, with gaps between them.
func banded(x *decay.RingSpectrum, v []float64) (tr trace) {
	for _, b := range x.Bands {
		for i := b.First; i < b.Last; i++ {
			tr.add(x.Frequency[i], v[i])
		}
		tr.add(x.Frequency[b.Last-1], math.NaN())
	}
	return tr
}

// addLevels adds a course of values for a logarithmic axis.
func (p *plot) addLevels(tr trace) int {
	return p.addData(map[string]column{"t": p.time.column(tr.t), "v": {values: positive(tr.v), factor: p.level.factor, leading: 5}})
}

// addDotsOf draws the points of a spectrum one by one.
func (p *plot) addDotsOf(k key, data int) {
	p.addSeries(k, "scatter", data, "v", charts.WithSeriesOpts(func(s *charts.SingleSeries) { s.SymbolSize = 4 }))
}

// bounds sets the ends of the last panel's vertical axis, given in SI units.
func (p *plot) bounds(lo, hi float64) {
	y := &p.YAxisList[len(p.panels)-1]
	y.Min, y.Max = lo*p.level.factor, hi*p.level.factor
}

// dotsApart leaves room to see the curve between the points; a spectrum bends no
// faster than over several of them.
const dotsApart = 3

// every keeps one point of n.
func every(n int, tr trace) (out trace) {
	for i := 0; i < len(tr.t); i += n {
		out.add(tr.t[i], tr.v[i])
	}
	return out
}

func width(w float32) charts.SeriesOpts {
	return charts.WithSeriesOpts(func(s *charts.SingleSeries) { s.LineStyle.Width = w })
}

// logOf is a course over the logarithm of frequency.
func logOf(f, v []float64) (tr trace) {
	for i := range f {
		tr.add(math.Log10(f[i]), v[i])
	}
	return tr
}

// extremeLines keeps of each of many bins, even along the axis, the smallest and the
// largest line, so that none that stands out is hidden.
func extremeLines(all trace) (out trace) {
	from := all.t[0]
	step := (all.t[len(all.t)-1] - from) / float64(spectrumLines)
	for i := 0; i < len(all.t); {
		bin, lo, hi := math.Floor((all.t[i]-from)/step), i, i
		for ; i < len(all.t) && math.Floor((all.t[i]-from)/step) == bin; i++ {
			if all.v[i] < all.v[lo] {
				lo = i
			}
			if all.v[i] > all.v[hi] {
				hi = i
			}
		}
		out.add(all.t[min(lo, hi)], all.v[min(lo, hi)])
		if lo != hi {
			out.add(all.t[max(lo, hi)], all.v[max(lo, hi)])
		}
	}
	return out
}

// thinLines keeps points of a smooth course, even along the axis, and its last.
func thinLines(all trace) (out trace) {
	step := (all.t[len(all.t)-1] - all.t[0]) / 200
	for i, t := range all.t {
		if n := len(out.t); n == 0 || t-out.t[n-1] >= step || i == len(all.t)-1 {
			out.add(t, all.v[i])
		}
	}
	return out
}

func isAre(n int) string {
	if n == 1 {
		return "is"
	}
	return "are"
}
