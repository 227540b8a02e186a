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
		if n := eval[int](p, `document.querySelectorAll("figure.charts").length`); n != 5 {
			t.Fatalf("%d figures, want 5; %v", n, r.Findings())
		}
		points := len(r.Result.Decays[0].Along(r.Channel))
		for _, chart := range []string{"chart3", "chart4"} {
			instance := `echarts.getInstanceByDom(document.getElementById("` + chart + `"))`
			if n := eval[int](p, instance+`.getModel().getSeriesByIndex(1).getData().count()`); n != points || n < 5 {
				t.Errorf("%s: %d points, want %d", chart, n, points)
			}
			if n := eval[int](p, instance+`.getModel().getSeriesByIndex(4).getData().count()`); n != points {
				t.Errorf("%s: %d points of Q, want %d", chart, n, points)
			}
		}
		if unit := eval[string](p, `JSON.parse(document.getElementById("data4").textContent).time`); unit != "V" {
			t.Errorf("against %s, want V", unit)
		}
		p.quiet()
	}
}

// measuredDecays is an invented record of several ring-downs with a true analysis
// of each.
func measuredDecays(n int) *RingDown {
	l := loop07()
	l.samples, l.interval, l.decays, l.tau = 2500*n, 2e-7, n, 60e-6
	r := l.ringDown()
	var all []*decay.Decay
	for k := range n {
		from := float64(k) * l.end() / float64(n)
		to := from + 5*l.tau
		one := decay.Analyze(r.Channel, decay.Options{From: &from, To: &to})
		all = append(all, one.Decays...)
		r.Result = one
	}
	r.curves, r.Result.Decays, r.Result.Best = nil, all, 1%n
	return r
}

// Every decay is drawn along itself: a few apart, many under one name.
func TestAlongSeveral(t *testing.T) {
	for n, keys := range map[int]int{1: 1, 3: 3, 5: 1} {
		r := measuredDecays(n)
		if len(r.Result.Decays) != n {
			t.Fatalf("%d decays, want %d: %v", len(r.Result.Decays), n, r.Findings())
		}
		figures, err := r.alongFigures()
		if err != nil || len(figures) != 2 {
			t.Fatal(len(figures), err)
		}
		points := 0
		for _, c := range r.courses() {
			points += len(c.points)
			if c.points[0].Time < r.Channel.Axis.Start {
				t.Errorf("a stretch at %g s", c.points[0].Time)
			}
		}
		if points < 4*n {
			t.Errorf("%d points of %d decays", points, n)
		}
		for _, f := range figures {
			for _, p := range f.Panels {
				if len(p.Keys) != keys+1 {
					t.Errorf("%d decays, %s: %d keys, want %d and the result", n, p.Title, len(p.Keys), keys)
				}
			}
		}
	}
}
