package report

import (
	"math"

	"github.com/go-echarts/go-echarts/v2/charts"

	"dieaway/decay/plan"
	"dieaway/decay/quantity"
)

var (
	keyPlanRate   = key{"at the sample rate of the plan", "line", "samples"}
	keyPlanFull   = key{"with samples that fill the memory", "dash", "envelope"}
	keyPlanRecord = key{"with the record of the plan", "line", "samples"}
	keyPlanSteps  = key{"settings that scopes have", "ring", "samples"}
	keyPlanWanted = key{"wanted", "dash", "quiet"}
	keyPlanChosen = key{"the plan", "cross", "fit"}
)

const (
	captionPlanRecord = "After two to three time constants the ring has died, and a longer record at one rate tells hardly more; where the memory is full, the best record is about two of them long."
	captionPlanRate   = "Four times as many samples of one record halve the uncertainty, as long as each has noise of its own."
	planPoints        = 240 // of a course
	// planReach is how many times the uncertainty of the plan, up and down, the charts show.
	planReach = 20
)

// A planCourse is one curve of expected uncertainties.
type planCourse struct {
	key      key
	settings []plan.Setting
}

// figures draw what other settings would give; none where nothing is expected.
func (p Plan) figures() ([]*figure, error) {
	c := p.Courses(planPoints)
	if c == nil {
		return nil, nil
	}
	record := &planPlot{p: p, time: axisScale{factor: 1, unit: "τ", places: 4}, x: func(s *plan.Setting) float64 { return s.TimeConstants },
		title: "Uncertainty of Q against the record after the trigger", caption: captionPlanRecord,
		courses: []planCourse{{keyPlanRate, c.Record}, {keyPlanFull, c.Full}}, steps: c.RecordSteps}
	rate := &planPlot{p: p, time: axisScale{factor: 1, unit: "S/s", places: 6}, x: func(s *plan.Setting) float64 { return math.Log10(s.SampleRate) },
		title: "Uncertainty of Q against the sample rate", caption: captionPlanRate,
		courses: []planCourse{{keyPlanRecord, c.Rate}}, steps: c.RateSteps}
	a, err := record.figure()
	if err != nil {
		return nil, err
	}
	b, err := rate.figure()
	if err != nil {
		return nil, err
	}
	a.Picture, a.Words = "plan-record.png", axisWords{"record", "Records shown", "All records", "Shorter", "Longer"}
	b.Picture, b.Words = "plan-rate.png", axisWords{"sample rate", "Sample rates shown", "All rates", "Slower", "Faster"}
	b.Logarithmic = true
	return []*figure{a, b}, nil
}

// A planPlot draws the expected uncertainty of Q against one setting, x on the common axis.
type planPlot struct {
	*plot
	p              Plan
	time           axisScale
	x              func(*plan.Setting) float64
	title, caption string
	courses        []planCourse
	steps          []plan.Setting
}

func (g *planPlot) figure() (*figure, error) {
	g.plot = &plot{Line: charts.NewLine(), time: g.time, level: axisScale{factor: 100, unit: "%"}}
	chosen := g.trace(g.p.Setting)
	from, to, lo, hi := chosen.t[0], chosen.t[0], chosen.v[0], chosen.v[0]
	near := func(v float64) bool { return v < planReach*chosen.v[0] && v > chosen.v[0]/planReach }
	if want := g.p.Wish.Want; near(want) {
		lo, hi = min(lo, want), max(hi, want)
	}
	for _, c := range g.courses {
		tr := g.trace(c.settings...)
		for i, v := range tr.v {
			from, to = min(from, tr.t[i]), max(to, tr.t[i])
			if near(v) {
				lo, hi = min(lo, v), max(hi, v)
			}
		}
	}
	room := (to - from) / 40
	from, to = from-room, to+room
	g.addPanel(g.title, g.caption, g.level.unit, true)
	g.bounds(lo/1.3, hi*1.3)
	for _, c := range g.courses {
		g.addSeries(c.key, "line", g.addLevels(g.trace(c.settings...)), "v")
	}
	f := &figure{Time: g.time.unit, Views: []view{}, Bare: true, Name: prefixed(g.p.Device) + "plan"}
	if near(g.p.Wish.Want) {
		var wanted trace
		for _, at := range between(from, to, planPoints) {
			wanted.add(at, g.p.Wish.Want)
		}
		g.addSeries(keyPlanWanted, "line", g.addLevels(wanted), "v")
	} else {
		f.Notes = []string{"The " + quantity.Percent(g.p.Wish.Want) + " that are wanted lie far outside of the chart."}
	}
	g.addSeries(keyPlanSteps, "scatter", g.addLevels(g.trace(g.steps...)), "v")
	g.addSeries(keyPlanChosen, "scatter", g.addLevels(chosen), "v", charts.WithSeriesOpts(func(s *charts.SingleSeries) { s.SymbolSize = 13 }))
	f.Panels = g.panels
	var err error
	f.Option, err = g.finish(from, to, "Chart: "+g.title+", with the setting of the plan. What the plan says stands in the tables of this page.")
	return f, err
}

// trace is the relative uncertainty of Q of settings.
func (g *planPlot) trace(all ...plan.Setting) (tr trace) {
	for i := range all {
		tr.add(g.x(&all[i]), all[i].Expected.Q.Relative())
	}
	return tr
}
