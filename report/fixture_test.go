package report

import (
	"math"
	"math/rand/v2"
	"time"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

// A loop is an invented ring-down of a loop antenna at 125 kHz, with the truth as
// its fit: these tests are of layout, not of measurement.
type loop struct {
	samples   int
	interval  float64 // s
	start     float64 // s
	frequency float64 // Hz
	tau       float64 // s
	amplitude float64 // V
	offset    float64 // V
	noise     float64 // V
	decays    int
}

func loop07() loop {
	return loop{samples: 2500, interval: 2e-7, start: -50e-6, frequency: 125034.2, tau: 100e-6,
		amplitude: 3.2, offset: 0.04, noise: 0.012, decays: 1}
}

func (l loop) end() float64 { return l.start + float64(l.samples)*l.interval }

// ring is the law of one decay from its start on.
type ring struct {
	loop
	from float64
}

func (r ring) At(t float64) (value, envelope, baseline float64) {
	e := r.amplitude * math.Exp(-(t-r.from)/r.tau)
	return r.offset + e*math.Cos(2*math.Pi*r.frequency*(t-r.from)), e, r.offset
}

// ringDown returns the capture of l and the result that a perfect fit would have.
func (l loop) ringDown() *RingDown {
	rng := rand.New(rand.NewPCG(7, 125))
	period := l.end() / float64(l.decays)
	y := make([]float64, l.samples)
	for i := range y {
		t := l.start + float64(i)*l.interval
		y[i] = l.offset + l.amplitude + l.noise*rng.NormFloat64() // the source holds the circuit before it lets go
		if t >= 0 {
			v, _, _ := ring{l, math.Floor(t/period) * period}.At(t)
			y[i] = v + l.noise*rng.NormFloat64()
		}
	}
	axis := &capture.Axis{N: l.samples, Start: l.start, Interval: l.interval, Source: "time column, regression over all stamps"}
	ch := &capture.Channel{Number: 1, Name: "CH1", Unit: "V", Axis: axis, Samples: y}
	r := &RingDown{
		Capture: &capture.Capture{File: "loop07.csv", SHA256: "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08",
			Channels: []*capture.Channel{ch}, Layout: layout()},
		Channel: ch, Device: "loop 07",
		Origin: Origin{Version: "1.0.0", CommandLine: "dieaway fit --device 'loop 07' -o loop07.html loop07.csv",
			Made: time.Date(2026, 3, 14, 9, 30, 0, 0, time.UTC)},
		Result: &decay.Result{Status: decay.Good, Model: decay.Exponential},
	}
	for k := range l.decays {
		l.addDecay(r, float64(k)*period, period)
	}
	r.Result.Quantities = &r.Result.Decays[0].Quantities
	r.Result.Readings = l.readings(r.Result.Decays[0])
	return r
}

func layout() capture.Layout {
	return capture.Layout{Encoding: "UTF-8", Preamble: 3, HeaderLine: 4, UnitsLine: 5, FirstLine: 6, Delimiter: "comma", DecimalMark: ".",
		Columns: []capture.Column{
			{Number: 1, Name: "Time", Unit: "us", Role: capture.RoleTime, Why: "its name and its even steps"},
			{Number: 2, Name: "CH1", Unit: "V", Role: capture.RoleChannel, Why: "numbers that vary"}}}
}

func (l loop) addDecay(r *RingDown, from, period float64) {
	a := r.Channel.Axis
	to := math.Min(from+math.Min(5*l.tau, period), l.end()-l.interval)
	d := &decay.Decay{First: a.Index(from), Last: a.Index(to), From: from, To: to, Cycles: (to - from) * l.frequency,
		Amplitude: quantity.New(l.amplitude, 0.0011, "V"), Phase: quantity.New(0, 0.00034, "rad"),
		Offset: quantity.New(l.offset, 0.00025, "V"), NoiseRMS: l.noise, ResidualRMS: l.noise,
		SNR: 20 * math.Log10(l.amplitude/l.noise), NoiseFactor: 1, Stop: decay.Converged, Iterations: 4}
	d.Used = d.Last - d.First
	alpha := 1 / l.tau
	f0 := math.Hypot(l.frequency, alpha/(2*math.Pi))
	q := math.Pi * f0 * l.tau
	rel := 3.4e-4
	d.Quantities = decay.Quantities{
		DampedFrequency: quantity.New(l.frequency, 1.1, "Hz"), NaturalFrequency: quantity.New(f0, 1.1, "Hz"),
		TimeConstant: quantity.New(l.tau, rel*l.tau, "s"), DecayRate: quantity.New(alpha, rel*alpha, "1/s"),
		Q: quantity.New(q, rel*q, ""), DampingRatio: quantity.New(1/(2*q), rel/(2*q), ""),
		LogDecrement: quantity.New(alpha/l.frequency, rel*alpha/l.frequency, ""),
		Bandwidth:    quantity.New(alpha/math.Pi, rel*alpha/math.Pi, "Hz"),
	}
	r.Result.Decays = append(r.Result.Decays, d)
	r.curves = append(r.curves, ring{l, from})
}

// readings are what crossings and peaks of the first decay would give.
func (l loop) readings(d *decay.Decay) decay.Readings {
	q := math.Pi * l.frequency * l.tau
	out := decay.Readings{DampedFrequency: quantity.New(l.frequency-3.1, 8.4, "Hz"),
		LogDecrement: quantity.New(1.004/(l.frequency*l.tau), 0.0004, ""), Q: quantity.New(q/1.004, 0.21, ""),
		TimeConstant: quantity.New(l.tau/1.004, 0.5e-6, "s"), Baseline: l.offset, Line: [2]float64{math.Log(l.amplitude), -1.004 / l.tau}}
	law := ring{l, d.From}
	half := 0.5 / l.frequency
	for k := 0; k < 2*int(d.Cycles) && float64(k)*half < 3*l.tau; k++ {
		t := d.From + float64(k)*half
		v, _, _ := law.At(t)
		out.Peaks = append(out.Peaks, decay.Point{Time: t, Value: v})
		out.Crossings = append(out.Crossings, t+half/2)
	}
	return out
}

// doubtful adds findings of every severity but fault.
func doubtful(r *RingDown) *RingDown {
	r.Result.Status = decay.Doubtful
	r.Result.Findings = []capture.Finding{
		{Code: capture.Clipped, Severity: capture.Warning, Message: "38 samples of the first 2 cycles lie at the upper edge of the converter's range, 3.20 V",
			Remedy: "set the vertical range so that the first cycle fits into it, or begin the gate behind the last clipped sample with --from"},
		{Code: capture.CoarseLevels, Severity: capture.Note, Message: "one level of the converter is 1.3 times the noise"},
	}
	r.Capture.Findings = []capture.Finding{{Code: capture.IgnoredColumns, Severity: capture.Note,
		Message: "column 3 holds text and was left out", Remedy: "nothing, unless it should have been a channel"}}
	return r
}

// refusedRecord is a record in which nothing rings.
func refusedRecord() *RingDown {
	l := loop07()
	l.amplitude = 0
	r := l.ringDown()
	r.Result = &decay.Result{Status: decay.Refused, Model: decay.Exponential, Decays: r.Result.Decays, Readings: r.Result.Readings,
		Findings: []capture.Finding{{Code: capture.NoDecay, Severity: capture.Fault,
			Message: "no oscillation stands out of the noise of 12 mV rms: the strongest line has 1.3 times the height that noise alone would give",
			Remedy:  "check that the probe is on the circuit and that the channel is the right one (--channel), then trigger on the step that excites it"}}}
	return r
}
