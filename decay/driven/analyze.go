// Package driven turns a driven sweep of a resonant circuit into natural
// frequency and Q, with their uncertainty and the reasons to distrust them. It
// fits the exact second-order forms of the series circuit, which at low Q no
// Lorentzian is.
package driven

import (
	"cmp"
	"math"
	"math/cmplx"
	"slices"

	"dieaway/capture"
	"dieaway/decay"
)

// Options steer [Analyze]; the zero value lets the data decide everything.
type Options struct {
	// Across says what the response was measured across; "" takes the name of the
	// column, else the form that the rows follow best.
	Across capture.Part
	// Dwell is the time in s that the source stays at each frequency before the
	// reading; 0: not known.
	Dwell float64
	// MeterBandwidth is the frequency in Hz at which a meter with one pole reads
	// low by 3 dB; 0: no correction. It cancels in a response divided by a reference.
	MeterBandwidth float64
	// TimebaseU is the relative standard uncertainty of the source's frequency; it
	// enters f0 and the bandwidth but not Q.
	TimebaseU float64
}

// Analyze fits the resonance in a sweep and says what it found. A sweep without a
// resonance that can be measured is Refused, with the finding that says why.
func Analyze(s *capture.Sweep, opt Options) *Result {
	r := &Result{Across: opt.Across, Readings: unknownReadings(s.Unit), Unit: s.Unit}
	// 1. Rows: complete ones, in rising frequency, the source's sag taken out.
	d := newRows(s, opt)
	r.Unit, r.Corrections, r.Complex = d.unit, d.corrections, d.phi != nil
	if why, unfit := unfit(d); unfit {
		return r.refuse(why)
	}
	// 2. Fit of the form that fits, from starts that need no hint, without outliers.
	f, why, guessed := choose(d, s, opt)
	if f == nil {
		return r.refuse(finding(capture.WeakSignal, capture.Fault, "No resonance follows these rows.", "Check the columns of frequency and response."))
	}
	r.Across, r.Why, r.Guessed, r.curve, r.Iterations = f.across, why, guessed, f.curve, f.iterations
	f.points(d, r)
	q, _ := f.quantities(d, opt, d.unit)
	// 3. Judgement: is it a resonance at all?
	if why, refuse := f.noResonance(d, q); refuse {
		return r.refuse(why)
	}
	r.Quantities = q
	// 4. Readings, which know nothing of the fit but its outliers.
	f.readings(d, s, r)
	r.Findings = f.doubts(d, s, opt, r)
	return r.settle()
}

// points tells the rows as they were fitted.
func (f *fitted) points(d *rows, r *Result) {
	along, _ := f.shapes(d, f.noise)
	top := 0.0
	for i, x := range d.f {
		p := Point{Frequency: x, Magnitude: d.m[i], Phase: math.NaN(), Deviation: along[i] * f.noise.along, Outlier: f.out[i]}
		size, phase := f.at(x)
		if d.phi != nil {
			turn := cmplx.Rect(1, f.sign*d.phi[i]-f.phase-phase)
			p.Phase = phase + cmplx.Phase(turn)
		}
		if size > top {
			top, r.NoiseRMS = size, p.Deviation
		}
		r.Points = append(r.Points, p)
	}
}

// readings makes the classical readings of the rows that are no outliers.
func (f *fitted) readings(d *rows, s *capture.Sweep, r *Result) {
	var fs, m, u []float64
	for _, p := range r.Points {
		if !p.Outlier {
			fs, m, u = append(fs, p.Frequency), append(m, p.Magnitude), append(u, p.Deviation)
		}
	}
	r.Readings = read(fs, m, u, f.across, d.unit)
	c, l := s.Voltage(capture.Capacitor), s.Voltage(capture.Inductor)
	if c == nil || l == nil {
		return
	}
	pick := func(v []float64) []float64 {
		out := make([]float64, d.len())
		for k, i := range d.from {
			out[k] = v[i]
		}
		return out
	}
	r.Readings.reactance(d.f, pick(c), pick(l))
}

// refuse withholds the numbers.
func (r *Result) refuse(why decay.Finding) *Result {
	r.Quantities = nil
	r.Findings = append(r.Findings, why)
	return r.settle()
}

var weight = map[capture.Severity]int{capture.Fault: 0, capture.Warning: 1, capture.Note: 2}

// settle sorts the findings, gravest first, and draws the status from them.
func (r *Result) settle() *Result {
	slices.SortStableFunc(r.Findings, func(a, b decay.Finding) int {
		return cmp.Compare(weight[a.Severity], weight[b.Severity])
	})
	r.Status = decay.Good
	if len(r.Findings) > 0 {
		switch r.Findings[0].Severity {
		case capture.Fault:
			r.Status, r.Quantities = decay.Refused, nil
		case capture.Warning:
			r.Status = decay.Doubtful
		}
	}
	return r
}
