package report

import (
	"math"
	"strings"

	"github.com/go-echarts/go-echarts/v2/charts"
	"github.com/go-echarts/go-echarts/v2/opts"

	"dieaway/decay/quantity"
)

// A setKind is a kind of capture that the charts of a set tell apart.
type setKind struct {
	key key
	has func(*SetRow) bool
}

var setKinds = []setKind{
	{key{"good, with U (k = 2)", "ring", "samples"}, func(r *SetRow) bool { return len(r.Outlier) == 0 && r.word() == "good" }},
	{key{"doubtful, with U (k = 2)", "ring", "peak"}, func(r *SetRow) bool { return len(r.Outlier) == 0 && r.word() != "good" }},
	{key{"outliers, with U (k = 2)", "cross", "crossing"}, func(r *SetRow) bool { return len(r.Outlier) > 0 }},
}

var (
	keySetMean   = key{"mean", "line", "quiet"}
	keySetLimits = key{"limits", "dash", "fit"}
	keyCounts    = key{"captures", "line", "samples"}
)

const (
	captionRun          = "Captures should scatter about the mean without a slope or a step, as far as their bars reach or as the devices differ."
	captionDistribution = "One hump is one kind of device; two, or a tail to one side, are two lots, two set-ups, or a limit that sorts."
	barsMost            = 40
	pointsWithBars      = 1500 // beyond, points stand alone
)

// figures draw the run charts of the quantities over the captures, and how each is
// distributed.
func (s *Set) figures(spreads []spreadOf) ([]*figure, error) {
	if len(spreads) == 0 {
		return nil, nil
	}
	run, err := s.run(spreads)
	if err != nil {
		return nil, err
	}
	out := []*figure{run}
	for _, p := range spreads {
		if p.Most > p.Least {
			f, err := s.distribution(p)
			if err != nil {
				return nil, err
			}
			out = append(out, f)
		}
	}
	return out, nil
}

// run draws each quantity over the number of the capture.
func (s *Set) run(spreads []spreadOf) (*figure, error) {
	p := &plot{Line: charts.NewLine(), time: axisScale{factor: 1}}
	ends := []float64{0.5, float64(len(s.Rows)) + 0.5}
	p.time.places = 1
	for _, spread := range spreads {
		lo, hi := spread.Least-2*spread.Within, spread.Most+2*spread.Within
		scale := scaleFor(spread.Mean.Value, spread.Mean.Value, 0, spread.Mean.Unit)
		scale.places = scaleFor(lo, hi, (hi-lo)/1000, spread.Mean.Unit).places
		p.addPanel(upperFirst(spread.label), captionRun, scale.unit, false)
		for _, kind := range setKinds {
			s.points(p, spread, kind, scale)
		}
		p.addLevel(keySetMean, ends, spread.Mean.Value, scale)
		for _, v := range s.limitsOf(spread.key) {
			p.addLevel(keySetLimits, ends, v, scale)
		}
	}
	f := &figure{Panels: p.panels, Views: []view{}, Bare: true, Low: true, Name: clean(s.Heading, nameLength), Picture: "run-charts.png",
		Words: axisWords{"captures", "Captures shown in all charts", "All captures", "Earlier", "Later"}}
	for _, r := range s.Rows {
		f.Names = append(f.Names, fileName(r.File, nameLength))
	}
	var err error
	f.Option, err = p.finish(ends[0], ends[1], "Run charts: each capture's natural frequency, quality factor and time constant in their order, "+
		"with uncertainties, mean and limits. Every value stands in the table of captures.")
	return f, err
}

// points draws the captures of one kind, with their bars unless they are very many.
func (s *Set) points(p *plot, spread spreadOf, kind setKind, scale axisScale) {
	var bars, dots trace
	for i, r := range s.Rows {
		q := spread.of(r)
		if !q.Known() || !kind.has(r) {
			continue
		}
		at := float64(i + 1)
		dots.add(at, q.Value)
		if q.U > 0 {
			bars.add(at, q.Value-2*q.U)
			bars.add(at, q.Value+2*q.U)
			bars.add(at, math.NaN())
		}
	}
	if len(dots.t) == 0 {
		return
	}
	if len(s.Rows) <= pointsWithBars && len(bars.t) > 0 {
		p.addSeries(kind.key, "line", p.addTrace(bars, scale), "v", width(1.1))
	}
	p.addSeries(kind.key, "scatter", p.addTrace(dots, scale), "v", charts.WithSeriesOpts(func(o *charts.SingleSeries) {
		o.Large, o.LargeThreshold = opts.Bool(len(s.Rows) > manyEntries), manyEntries
	}))
}

// addLevel draws a level between the ends of the common axis.
func (p *plot) addLevel(k key, ends []float64, v float64, scale axisScale) {
	p.addSeries(k, "line", p.addTrace(trace{ends, []float64{v, v}}, scale), "v")
}

// distribution draws how many captures share a stretch of values.
func (s *Set) distribution(spread spreadOf) (*figure, error) {
	counts := s.counted(spread)
	step := (spread.Most - spread.Least) / float64(len(counts))
	lo, hi := spread.Least-step, spread.Most+step
	limits := s.limitsOf(spread.key)
	p := &plot{Line: charts.NewLine(), time: scaleFor(lo, hi, (hi-lo)/20000, spread.Mean.Unit)}
	var bars trace
	most := 0.0
	bars.add(lo, 0)
	for k, n := range counts {
		bars.add(spread.Least+float64(k)*step, n)
		most = math.Max(most, n)
	}
	bars.add(spread.Most, 0)
	bars.add(hi, 0)
	p.addPanel("Distribution of the "+spread.label, captionDistribution, "captures", false)
	counted := axisScale{factor: 1, unit: "captures"}
	p.addSeries(keyCounts, "line", p.addTrace(bars, counted), "v", charts.WithSeriesOpts(func(o *charts.SingleSeries) {
		o.Step, o.AreaStyle = "end", &opts.AreaStyle{Opacity: opts.Float(0.25), Color: "@samples"}
	}))
	upright := func(k key, v float64) {
		if v >= lo && v <= hi {
			p.addSeries(k, "line", p.addTrace(trace{[]float64{v, v}, []float64{0, most}}, counted), "v")
		}
	}
	upright(keySetMean, spread.Mean.Value)
	for _, v := range limits {
		upright(keySetLimits, v)
	}
	f := &figure{Time: p.time.unit, Panels: p.panels, Views: []view{}, Bare: true, Low: true, Name: clean(s.Heading, nameLength),
		Picture: strings.ReplaceAll(spread.label, " ", "-") + "-distribution.png",
		Words:   axisWords{spread.label, "Values shown", "All values", "Smaller", "Larger"}}
	if len(limits) > 0 && len(p.panels[0].Keys) == 2 {
		f.Notes = []string{"The limits lie beyond this chart: " + listed(formatted(limits, spread.Mean.Unit)) + "."}
	}
	var err error
	f.Option, err = p.finish(lo, hi, "Distribution of the "+spread.label+" over the captures, with its mean and the limits.")
	return f, err
}

func formatted(all []float64, unit string) (out []string) {
	for _, v := range all {
		out = append(out, quantity.Format(v, unit, 6))
	}
	return out
}

// counted are the captures in even stretches from the least value to the greatest:
// as many as the root of their number, 5 to 40.
func (s *Set) counted(p spreadOf) []float64 {
	counts := make([]float64, int(math.Min(barsMost, math.Max(5, math.Ceil(math.Sqrt(float64(p.N)))))))
	for _, r := range s.Rows {
		if q := p.of(r); q.Known() {
			counts[min(len(counts)-1, int(float64(len(counts))*(q.Value-p.Least)/(p.Most-p.Least)))]++
		}
	}
	return counts
}

// limitsOf returns the limits that the bench file sets on a quantity.
func (s *Set) limitsOf(key string) (out []float64) {
	for _, r := range s.Limits {
		if r.Quantity != key {
			continue
		}
		for _, v := range []float64{r.Min, r.Max} {
			if !math.IsNaN(v) {
				out = append(out, v)
			}
		}
	}
	return out
}
