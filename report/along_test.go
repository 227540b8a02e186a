package report

import (
	"math"
	"math/rand/v2"
	"testing"

	"dieaway/decay"
)

// measuredLoop is an invented ring-down with a true analysis of it.
func measuredLoop(noise, growth float64) *RingDown {
	r := loop07().ringDown()
	random := rand.New(rand.NewPCG(8, 125))
	a, phase := 3.2, 0.0 // loss grows with the amplitude by steps of one sample
	for i := range r.Channel.Samples {
		t := r.Channel.Axis.Time(i)
		v := a
		if t >= 0 {
			v = a * math.Cos(phase)
			phase += 2 * math.Pi * 125e3 * r.Channel.Axis.Interval
			a *= math.Exp(-r.Channel.Axis.Interval / 100e-6 * (1 + growth*a))
		}
		r.Channel.Samples[i] = v + noise*random.NormFloat64()
	}
	r.curves, r.Result = nil, decay.Analyze(r.Channel, decay.Options{})
	return r
}

// TestAlongInBrowser: the charts along the decay are drawn, each with its points
// and the result, and against the amplitude they begin at small ones.
func TestAlongInBrowser(t *testing.T) {
	for _, growth := range []float64{0, 0.1} {
		r := measuredLoop(0.004, growth)
		p := open(t, browser(t), r, 1280, 900, "light")
		if n := eval[int](p, `document.querySelectorAll("figure.charts").length`); n != 3 {
			t.Fatalf("%d figures, want 3; %v", n, r.Findings())
		}
		points := len(r.Result.Decays[0].Along(r.Channel))
		for _, chart := range []string{"chart2", "chart3"} {
			instance := `echarts.getInstanceByDom(document.getElementById("` + chart + `"))`
			if n := eval[int](p, instance+`.getModel().getSeriesByIndex(1).getData().count()`); n != points || n < 5 {
				t.Errorf("%s: %d points, want %d", chart, n, points)
			}
			if n := eval[int](p, instance+`.getModel().getSeriesByIndex(4).getData().count()`); n != points {
				t.Errorf("%s: %d points of Q, want %d", chart, n, points)
			}
		}
		if unit := eval[string](p, `JSON.parse(document.getElementById("data3").textContent).time`); unit != "V" {
			t.Errorf("against %s, want V", unit)
		}
		p.quiet()
	}
}
