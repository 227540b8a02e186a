package driven

import (
	"fmt"
	"math"
	"slices"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/quantity"
)

const (
	rowsLeast     = 5
	needGain      = 10.0    // logarithm of the likelihood beyond that of no resonance, and ln n for the search
	refuseQ       = 1.0 / 3 // relative u of Q beyond which nothing is measured
	doubtfulQ     = 0.1
	halfWidths    = 1.0 // half bandwidths that a sweep must reach to each side
	rowsInside    = 5   // rows between the half-power points
	sagNoted      = 0.05
	etaMost       = 0.03 // rate of the sweep over the square of the bandwidth (derived: swept too fast)
	dwellOnePart  = 4.61 // time constants to settle to 1 %
	dwellTenth    = 6.91 // and to 0.1 %
	readingsApart = 0.15
)

func finding(code capture.Code, s capture.Severity, message, remedy string) decay.Finding {
	return decay.Finding{Code: code, Severity: s, Message: message, Remedy: remedy}
}

// unfit refuses what cannot be fitted at all.
func unfit(d *rows) (decay.Finding, bool) {
	distinct := len(slices.Compact(slices.Clone(d.f)))
	switch {
	case d.len() == 0:
		return finding(capture.WeakSignal, capture.Fault, "No row has a response.", "Check the column of the response, and the wiring."), true
	case distinct < rowsLeast:
		return finding(capture.SparseSweep, capture.Fault, fmt.Sprintf("Only %d different frequencies have a response; at least %d are needed.", distinct, rowsLeast),
			"Measure more frequencies around the resonance."), true
	}
	return decay.Finding{}, false
}

// noResonance refuses a fit that does not measure a resonance.
func (f *fitted) noResonance(d *rows, q *Quantities) (decay.Finding, bool) {
	lo, hi := d.f[0], d.f[d.len()-1]
	gain, need := f.gainOver(d), needGain+math.Log(float64(d.len()))
	side := f.side(d)
	switch {
	case gain < need && side == "":
		return finding(capture.WeakSignal, capture.Fault,
			"No resonance stands out: a response without one follows the rows as well.",
			"Check the column of the response, and that the resonance lies inside the sweep; raise the drive."), true
	case gain < need || f.f0 < lo || f.f0 > hi:
		if side == "" {
			side = "has no resonance"
		}
		return finding(capture.NarrowSweep, capture.Fault,
			fmt.Sprintf("The response %s from %s to %s: the resonance is not inside the sweep.", side, quantity.Format(lo, "Hz", 5), quantity.Format(hi, "Hz", 5)),
			"Sweep to both sides of the resonance."), true
	case q == nil || !(q.Q.Relative() < refuseQ):
		return finding(capture.WeakSignal, capture.Fault,
			fmt.Sprintf("Q is not determined by these rows: the best fit has %s.", orNothing(q)),
			"Measure more frequencies between the half-power points and beyond them, or reduce the noise."), true
	}
	return decay.Finding{}, false
}

// side says to which side of the resonance all rows lie, "" when to both.
func (f *fitted) side(d *rows) string {
	at := extreme(d.smoothed(), f.across)
	switch {
	case f.across == capture.Both:
		return ""
	case at <= 1:
		return "only falls"
	case at >= d.len()-2:
		return "only rises"
	}
	return ""
}

func orNothing(q *Quantities) string {
	if q == nil {
		return "none"
	}
	return q.Q.String()
}

// gainOver is the logarithm of how much likelier the magnitudes are with the
// resonance than with a power of the frequency, which a constant is too.
func (f *fitted) gainOver(d *rows) float64 {
	along, _ := f.residuals(d, f.noise)
	shape, _ := f.shapes(d, f.noise)
	with := studentLikelihood(along, shape, madScale(along))
	var x, y, w []float64
	for i, m := range d.m {
		if m > 0 {
			x, y, w = append(x, math.Log(d.f[i])), append(y, math.Log(m)), append(w, sq(m/shape[i]))
		}
	}
	line, err := quantity.Line(x, y, w)
	if err != nil {
		return math.Inf(1)
	}
	rest := make([]float64, d.len())
	for i, m := range d.m {
		rest[i] = (m - math.Exp(line.Intercept+line.Slope*math.Log(d.f[i]))) / shape[i]
	}
	return with - studentLikelihood(rest, shape, madScale(rest))
}

// doubts says what speaks against the numbers.
func (f *fitted) doubts(d *rows, s *capture.Sweep, opt Options, r *Result) []decay.Finding {
	var all []decay.Finding
	for _, list := range [][]decay.Finding{
		f.extent(d, r.Quantities), f.speed(d, s, opt), sag(s), f.outliers(d), f.waves(d), uncertain(r.Quantities), disagreement(r),
	} {
		all = append(all, list...)
	}
	return all
}

// extent judges the span of the sweep and how many rows lie at the resonance.
func (f *fitted) extent(d *rows, q *Quantities) (all []decay.Finding) {
	half := f.f0 / (2 * f.q)
	below, above := (f.f0-d.f[0])/half, (d.f[d.len()-1]-f.f0)/half
	if reach := math.Min(below, above); reach < halfWidths {
		all = append(all, finding(capture.NarrowSweep, capture.Warning,
			fmt.Sprintf("The sweep reaches %.2g half bandwidths below the resonance and %.2g above; Q rests on the form of the peak alone, and is known to %s.",
				below, above, quantity.Percent(q.Q.Relative())),
			fmt.Sprintf("Sweep from %s to %s at least, two to three bandwidths in all.", quantity.Format(math.Max(f.f0-3*half, 0.1*f.f0), "Hz", 4), quantity.Format(f.f0+3*half, "Hz", 4))))
	}
	inside, last := 0, math.NaN()
	for i, x := range d.f {
		if math.Abs(x-f.f0) <= half && x != last && !f.out[i] {
			inside, last = inside+1, x
		}
	}
	if inside < rowsInside {
		all = append(all, finding(capture.SparseSweep, capture.Warning,
			fmt.Sprintf("Only %d of %d rows lie within the bandwidth of %s.", inside, d.len(), quantity.Format(2*half, "Hz", 3)),
			fmt.Sprintf("Measure every %s or closer around %s.", quantity.Format(half/5, "Hz", 2), quantity.Format(f.f0, "Hz", 6))))
	}
	return all
}

// speed judges the dwell at each frequency, given or from the clock, and the rate
// of a sweep that goes on.
func (f *fitted) speed(d *rows, s *capture.Sweep, opt Options) (all []decay.Finding) {
	tau, b := f.q/(math.Pi*f.f0), f.f0/f.q
	if opt.Dwell > 0 {
		n := opt.Dwell / tau
		severity := capture.Warning
		if n >= dwellOnePart {
			severity = capture.Note
		}
		if n < dwellTenth {
			all = append(all, finding(capture.SweptTooFast, severity,
				fmt.Sprintf("A dwell of %s is %.2g time constants of %s: the response is up to %s from its end when it is read.",
					quantity.Format(opt.Dwell, "s", 3), n, quantity.Format(tau, "s", 3), quantity.Percent(math.Exp(-n))),
				fmt.Sprintf("Stay at least %s at each frequency.", quantity.Format(dwellTenth*tau, "s", 2))))
		}
		return all
	}
	rate := f.rate(d, s)
	if eta := rate / (b * b); eta > etaMost {
		all = append(all, finding(capture.SweptTooFast, capture.Warning,
			fmt.Sprintf("The sweep runs at %s/s, %.2g times the square of the bandwidth a second: the curve lags by up to %s, and Q reads low by about %s.",
				quantity.Format(rate, "Hz", 3), eta, quantity.Format(eta/math.Pi*b, "Hz", 2), quantity.Percent(math.Min(0.5*eta*eta, 0.5))),
			fmt.Sprintf("Sweep at no more than %s/s.", quantity.Format(etaMost*b*b, "Hz", 2))))
	}
	return all
}

// rate is the median rate in Hz/s of the rows near the resonance, 0 when unknown.
func (f *fitted) rate(d *rows, s *capture.Sweep) float64 {
	if s.Clock == nil {
		return 0
	}
	var rates []float64
	for i := 1; i < len(s.Frequency); i++ {
		dt := math.Abs(s.Clock[i] - s.Clock[i-1])
		near := math.Abs(s.Frequency[i]-f.f0) < 3*f.f0/f.q
		if df := math.Abs(s.Frequency[i] - s.Frequency[i-1]); dt > 0 && df > 0 && near {
			rates = append(rates, df/dt)
		}
	}
	if len(rates) == 0 {
		return 0
	}
	slices.Sort(rates)
	return rates[len(rates)/2]
}

// sag tells how far the source gave way.
func sag(s *capture.Sweep) []decay.Finding {
	if len(s.Reference) == 0 {
		return nil
	}
	lo, hi := math.Inf(1), 0.0
	for _, v := range s.Reference {
		if v > 0 {
			lo, hi = math.Min(lo, v), math.Max(hi, v)
		}
	}
	if !(lo < (1-sagNoted)*hi) {
		return nil
	}
	return []decay.Finding{finding(capture.DriveSags, capture.Note,
		fmt.Sprintf("The source falls by %s under the load of the circuit; the response was divided by it, so that Q is that of the circuit without the source's resistance.", quantity.Percent(1-lo/hi)),
		"Nothing, if the reference was measured at the circuit; compare with a ring-down only after its source resistance is taken out.")}
}

// outliers tells how many rows were left out.
func (f *fitted) outliers(d *rows) []decay.Finding {
	n, first := 0, -1
	for i, out := range f.out {
		if out {
			if n++; first < 0 {
				first = i
			}
		}
	}
	if n == 0 {
		return nil
	}
	severity := capture.Note
	if 20*n > d.len() {
		severity = capture.Warning
	}
	message := fmt.Sprintf("1 of %d rows, at %s, lies far off the curve and was left out.", d.len(), quantity.Format(d.f[first], "Hz", 6))
	if n > 1 {
		message = fmt.Sprintf("%d of %d rows lie far off the curve and were left out, the first at %s.", n, d.len(), quantity.Format(d.f[first], "Hz", 6))
	}
	return []decay.Finding{finding(capture.Outliers, severity, message, "Measure these frequencies again; many of them mean a second resonance or a wrong column.")}
}

// waves tells residuals that are correlated from row to row.
func (f *fitted) waves(d *rows) []decay.Finding {
	rho := f.correlation(d)
	if rho == 0 {
		return nil
	}
	severity := capture.Note
	if rho > 0.7 {
		severity = capture.Warning
	}
	return []decay.Finding{finding(capture.ColouredNoise, severity,
		fmt.Sprintf("The rows leave the curve in waves (neighbours correlate by %.2f); the uncertainties are %.1f times those of independent rows.", rho, math.Sqrt((1+rho)/(1-rho))),
		"See the residual: a second resonance, a loss that changes with the amplitude, or a source that was swept too fast bends the curve.")}
}

func uncertain(q *Quantities) []decay.Finding {
	if q.Q.Relative() <= doubtfulQ {
		return nil
	}
	return []decay.Finding{finding(capture.WeakSignal, capture.Warning, fmt.Sprintf("Q is known to %s only.", quantity.Percent(q.Q.Relative())),
		"Measure more rows between the half-power points, or reduce the noise.")}
}

// disagreement compares the readings with the fit.
func disagreement(r *Result) (all []decay.Finding) {
	fit, read := r.Quantities.Q, r.Readings.Q
	if apart := math.Abs(read.Value - fit.Value); read.Known() && apart > readingsApart*fit.Value && apart > 6*math.Hypot(read.U, fit.U) {
		all = append(all, finding(capture.ReadingsDisagree, capture.Warning,
			fmt.Sprintf("The half-power width gives Q = %s, the fit %s: the curve is not that of one resonance.", read, fit),
			"See where the rows leave the fitted curve; check what the response was measured across."))
	}
	f0, ratio := r.Quantities.NaturalFrequency, r.Readings.ReactanceRatio
	if apart := math.Abs(ratio.Value - f0.Value); ratio.Known() && apart > 0.01*f0.Value && apart > 4*math.Hypot(ratio.U, f0.U) {
		all = append(all, finding(capture.ReadingsDisagree, capture.Warning,
			fmt.Sprintf("V_L and V_C are equal at %s, and the fit has f_0 = %s.", ratio, f0),
			"Check the columns of V_L and V_C: the resistance of the coil is in V_L, and a probe may load one of them."))
	}
	return all
}
