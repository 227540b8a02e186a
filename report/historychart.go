package report

import (
	"fmt"
	"math"
	"time"

	"github.com/go-echarts/go-echarts/v2/charts"
	"github.com/go-echarts/go-echarts/v2/opts"

	"dieaway/decay/quantity"
)

// A fill says from which numbers of the page's rows a data set is made.
type fill struct {
	Dataset int     `json:"dataset"`
	Kind    string  `json:"kind"`
	Value   string  `json:"value"`
	U       string  `json:"u"`
	Factor  float64 `json:"factor"`
	Bars    bool    `json:"bars,omitempty"`
}

var (
	keyMean   = key{"mean", "line", "quiet"}
	keyLimits = key{"limits of the latest", "dash", "fit"}
)

const captionHistory = "Points should scatter about the mean about as far as their bars reach, without a slope; a point far off deserves a look at its page."

// manyEntries is from how many entries the points are drawn in one go.
const manyEntries = 2000

// historyPlot draws the quantities of a history over time.
type historyPlot struct {
	*plot
	*History
	from, to time.Time
	fills    []fill
}

// figure draws frequency, Q and time constant over time.
func (h *History) figure(trends []*quantity.Trend) (*figure, error) {
	p := &historyPlot{plot: &plot{Line: charts.NewLine(), time: axisScale{factor: 1, unit: "UTC"}}, History: h,
		from: h.Entries[0].Made, to: h.Entries[len(h.Entries)-1].Made}
	room := max(p.to.Sub(p.from)/50, time.Hour)
	p.from, p.to = p.from.Add(-room), p.to.Add(room)
	for i, what := range followedQuantities {
		if trends[i] != nil {
			p.panel(what, trends[i])
		}
	}
	f := &figure{Time: "UTC", Dates: true, Panels: p.panels, Views: []view{}, Name: clean(h.Device, nameLength), Fill: p.fills,
		Picture: "history.png", Words: axisWords{"time", "Time shown in all charts", "All entries", "Earlier", "Later"}}
	var err error
	f.Option, err = p.finish(p.ms(p.from), p.ms(p.to), fmt.Sprintf("%d charts over the same time: %s of the device with their uncertainties. "+
		"Every value stands in the table of entries.", len(p.panels), "natural frequency, quality factor and time constant"))
	return f, err
}

func (p *historyPlot) ms(t time.Time) float64 { return float64(t.UnixMilli()) }

// panel draws one quantity: a bar and a point for each entry, mean and limits.
func (p *historyPlot) panel(what followed, trend *quantity.Trend) {
	lo, hi := math.Inf(1), math.Inf(-1)
	present := map[string]bool{}
	for _, f := range p.Entries {
		if v := what.of(f).Value; !math.IsNaN(v) {
			lo, hi = math.Min(lo, v), math.Max(hi, v)
			present[f.Kind] = true
		}
	}
	scale := scaleFor(lo, hi, 0, trend.Mean.Unit)
	scale.places = 12 // a slow drift is small beside the value
	p.addPanel(upperFirst(what.label), captionHistory, scale.unit, false)
	p.XAxisList[len(p.panels)-1].Type = "time"
	for _, k := range kindNames {
		if present[k.kind] {
			p.points(key{k.name + ", with U (k = 2)", "ring", k.color}, what, fill{Kind: k.kind, Value: what.value, U: what.u, Factor: scale.factor})
		}
	}
	p.level(keyMean, trend.Mean.Value, scale)
	limits := what.limits(&p.Entries[len(p.Entries)-1].Limits)
	for _, limit := range []*float64{limits.Min, limits.Max} {
		if limit != nil {
			p.level(keyLimits, *limit, scale)
		}
	}
}

// points draws the entries of one kind; the page fills in their numbers.
func (p *historyPlot) points(k key, what followed, f fill) {
	empty := map[string]column{"t": {}, "v": {}}
	f.Dataset, f.Bars = p.addData(empty), true
	p.fills = append(p.fills, f)
	p.addSeries(k, "line", f.Dataset, "v")
	f.Dataset, f.Bars = p.addData(empty), false
	p.fills = append(p.fills, f)
	p.addSeries(k, "scatter", f.Dataset, "v", charts.WithSeriesOpts(func(s *charts.SingleSeries) {
		s.Large, s.LargeThreshold = opts.Bool(len(p.Entries) > manyEntries), manyEntries
	}))
}

// level draws a level over the whole time.
func (p *historyPlot) level(k key, value float64, scale axisScale) {
	data := p.addData(map[string]column{"t": p.time.column([]float64{p.ms(p.from), p.ms(p.to)}), "v": scale.column([]float64{value, value})})
	p.addSeries(k, "line", data, "v")
}
