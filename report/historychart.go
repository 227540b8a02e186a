package report

import (
	"fmt"

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

const captionHistory = "Points should scatter about the mean as far as their bars reach, without a slope; one far off deserves a look at its page."

// manyEntries is from how many entries the points are drawn in one go.
const manyEntries = 2000

// historyPlot draws the quantities of a history over time.
type historyPlot struct {
	*plot
	*History
	from, to float64 // milliseconds since 1970
	fills    []fill
}

// figure draws frequency, Q and time constant over time.
func (h *History) figure(trends [3]*quantity.Trend, latest []*filedRow) (*figure, error) {
	p := &historyPlot{plot: &plot{Line: charts.NewLine(), time: axisScale{factor: 1, unit: "UTC"}}, History: h}
	room := max(float64(h.sums.Last-h.sums.First)/50, 3.6e6) // an hour at least
	p.from, p.to = float64(h.sums.First)-room, float64(h.sums.Last)+room
	for i, what := range followedQuantities {
		if trends[i].N > 0 {
			p.panel(i, trends[i], limitsOf(latest, what))
		}
	}
	f := &figure{Time: "UTC", Dates: true, Bare: true, Low: true, Panels: p.panels, Views: []view{}, Name: clean(h.sums.Device, nameLength), Fill: p.fills,
		Picture: "history.png", Words: axisWords{"time", "Time shown in all charts", "All entries", "Earlier", "Later"}}
	var err error
	f.Option, err = p.finish(p.from, p.to, fmt.Sprintf("%d charts over the same time: natural frequency, quality factor and time constant "+
		"of the device with their uncertainties. Every value stands in the table of entries.", len(p.panels)))
	return f, err
}

// limitsOf are the limits of the newest of the entries that has any.
func limitsOf(latest []*filedRow, what followed) *[2]*float64 {
	for _, row := range latest {
		if l := what.limits(row); l != nil {
			return l
		}
	}
	return nil
}

// panel draws one quantity: a bar and a point for each entry, mean and limits.
func (p *historyPlot) panel(i int, trend *quantity.Trend, limits *[2]*float64) {
	what := followedQuantities[i]
	scale := scaleFor(trend.Mean.Value, trend.Mean.Value, 0, what.unit)
	scale.places = 12 // a slow drift is small beside the value
	p.addPanel(upperFirst(what.label), captionHistory, scale.unit, false)
	p.XAxisList[len(p.panels)-1].Type = "time"
	for _, k := range kindNames {
		if sums := p.sums.Kinds[k.kind]; sums != nil && sums.Trends[i].N > 0 {
			p.points(key{k.name + ", with U (k = 2)", "ring", k.color}, fill{Kind: k.kind, Value: what.value, U: what.u, Factor: scale.factor})
		}
	}
	p.level(keyMean, trend.Mean.Value, scale)
	if limits == nil {
		return
	}
	for _, limit := range limits {
		if limit != nil {
			p.level(keyLimits, *limit, scale)
		}
	}
}

// points draws the entries of one kind; the page fills in their numbers.
func (p *historyPlot) points(k key, f fill) {
	empty := map[string]column{"t": {}, "v": {}}
	f.Dataset, f.Bars = p.addData(empty), true
	p.fills = append(p.fills, f)
	p.addSeries(k, "line", f.Dataset, "v")
	f.Dataset, f.Bars = p.addData(empty), false
	p.fills = append(p.fills, f)
	p.addSeries(k, "scatter", f.Dataset, "v", charts.WithSeriesOpts(func(s *charts.SingleSeries) {
		s.Large, s.LargeThreshold = opts.Bool(p.sums.N > manyEntries), manyEntries
	}))
}

// level draws a level over the whole time.
func (p *historyPlot) level(k key, value float64, scale axisScale) {
	data := p.addData(map[string]column{"t": p.time.column([]float64{p.from, p.to}), "v": scale.column([]float64{value, value})})
	p.addSeries(k, "line", data, "v")
}
