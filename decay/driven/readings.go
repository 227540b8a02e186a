package driven

import (
	"math"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// halfPower is what the classical reading finds on a curve of rows; NaN where the
// curve does not go that far.
type halfPower struct{ peak, top, lower, upper, q, bandwidth float64 }

func unknownReadings(unit string) Readings {
	hz := quantity.Unknown("Hz")
	r := Readings{Lower: hz, Upper: hz, Q: quantity.Unknown(""), Bandwidth: hz, ReactanceRatio: hz, Trend: quantity.Unknown("")}
	r.Peak.Frequency, r.Peak.Magnitude = hz, quantity.Unknown(unit)
	return r
}

// read makes the classical readings. u holds the standard deviation of each row;
// rows that are outliers are not there.
func read(f, m, u []float64, part capture.Part, unit string) Readings {
	r := unknownReadings(unit)
	f, m, u = merged(f, m, u)
	if len(f) < 3 {
		return r
	}
	h, used := readHalfPower(f, m, part)
	values := func(h halfPower) [6]float64 {
		return [6]float64{h.peak, h.top, h.lower, h.upper, h.q, h.bandwidth}
	}
	at := values(h)
	var variance [6]float64
	for _, i := range used { // only these rows move the readings
		moved := append([]float64{}, m...)
		moved[i] += 0.1 * u[i]
		o, _ := readHalfPower(f, moved, part)
		for k, x := range values(o) {
			variance[k] += sq((x - at[k]) / 0.1)
		}
	}
	for k, q := range []*quantity.Quantity{&r.Peak.Frequency, &r.Peak.Magnitude, &r.Lower, &r.Upper, &r.Q, &r.Bandwidth} {
		if finite(at[k]) {
			*q = quantity.New(at[k], math.Sqrt(variance[k]), q.Unit)
		}
	}
	return r
}

// merged joins rows of one frequency to their mean.
func merged(f, m, u []float64) (fs, ms, us []float64) {
	for i := 0; i < len(f); {
		k, sum, squares := i, 0.0, 0.0
		for ; k < len(f) && f[k] == f[i]; k++ {
			sum, squares = sum+m[k], squares+sq(u[k])
		}
		n := float64(k - i)
		fs, ms, us = append(fs, f[i]), append(ms, sum/n), append(us, math.Sqrt(squares)/n)
		i = k
	}
	return fs, ms, us
}

// readHalfPower reads peak and half-power frequencies, and returns the rows that
// it read them from. It reads nothing where so few rows stand between the half-power
// points that a parabola and straight lines do not follow the curve.
func readHalfPower(f, m []float64, part capture.Part) (h halfPower, used []int) {
	nan := math.NaN()
	nothing := halfPower{nan, nan, nan, nan, nan, nan}
	h = nothing
	at := extreme(m, part)
	if at == 0 || at == len(f)-1 {
		return h, nil
	}
	used = []int{at - 1, at, at + 1}
	h.peak, h.top = vertex(f[at-1:at+2], m[at-1:at+2])
	level := h.top / math.Sqrt2
	if part == capture.Both {
		base := extreme(m, capture.Resistor) // the level far off: the greatest of the rows
		used = append(used, base)
		level = math.Sqrt((sq(h.top) + sq(m[base])) / 2)
	}
	var row int
	if h.lower, row = crossing(f, m, at, -1, level, part); row >= 0 {
		used = append(used, row, row+1)
	}
	first := row
	if h.upper, row = crossing(f, m, at, 1, level, part); row >= 0 {
		used = append(used, row, row-1)
	}
	if first >= 0 && row >= 0 && row-first-1 < rowsInside {
		return nothing, nil
	}
	h.q, h.bandwidth = qOf(h.lower, h.upper, part)
	return h, distinctRows(used)
}

func distinctRows(list []int) (out []int) {
	seen := map[int]bool{}
	for _, i := range list {
		if !seen[i] {
			out = append(out, i)
		}
		seen[i] = true
	}
	return out
}

// vertex is the top of the parabola through three points.
func vertex(f, m []float64) (peak, top float64) {
	a, b := f[0]-f[1], f[2]-f[1]
	ya, yb := m[0]-m[1], m[2]-m[1]
	curvature := (ya/a - yb/b) / (a - b)
	slope := ya/a - curvature*a
	if curvature == 0 {
		return f[1], m[1]
	}
	x := -slope / (2 * curvature)
	return f[1] + x, m[1] + slope*x/2
}

// crossing goes from the peak outwards to where the response passes level, and
// interpolates in a straight line. row is the one beyond; -1 when there is none.
func crossing(f, m []float64, at, step int, level float64, part capture.Part) (x float64, row int) {
	for i := at + step; i >= 0 && i < len(f); i += step {
		if beyond := m[i] <= level; beyond != (part == capture.Both) {
			share := (m[i-step] - level) / (m[i-step] - m[i])
			return f[i-step] + share*(f[i]-f[i-step]), i
		}
	}
	return math.NaN(), -1
}

// qOf is Q and bandwidth in Hz from the half-power frequencies. For the current
// Q = sqrt(lo hi)/(hi - lo) exactly. Across the capacitor the frequencies are
// x^2 = 1 - 1/(2Q^2) -+ (1/Q) sqrt(1 - 1/(4Q^2)); with s = 1/Q^2 and r the ratio of
// difference and sum of their squares that is s = 2 (1 - 1/sqrt(1 + r^2)). Across
// the coil the same holds for the reciprocal frequencies (derived: series circuit).
func qOf(lo, hi float64, part capture.Part) (q, bandwidth float64) {
	if part == capture.Resistor || part == capture.Both {
		q = math.Sqrt(lo*hi) / (hi - lo)
		return q, hi - lo
	}
	r := (hi*hi - lo*lo) / (hi*hi + lo*lo)
	s := 2 * r * r / (1 + r*r + math.Sqrt(1+r*r)) // without the difference of near equals
	f0 := math.Sqrt((lo*lo + hi*hi) / 2 / (1 - s/2))
	if part == capture.Inductor {
		f0 = math.Sqrt((1 - s/2) / ((1/(lo*lo) + 1/(hi*hi)) / 2))
	}
	return 1 / math.Sqrt(s), f0 * math.Sqrt(s)
}

// reactance makes the readings of f0 from sqrt(V_C/V_L), row by row: V_L/V_C is
// (f/f0)^2 whatever the source does. c and l are the voltages, u the standard
// deviation that both are taken to have.
func (r *Readings) reactance(f, c, l []float64) {
	r.Rows = make([]float64, len(f))
	var x, y, w []float64
	for i := range f {
		r.Rows[i] = math.NaN()
		if !(c[i] > 0) || !(l[i] > 0) {
			continue
		}
		r.Rows[i] = f[i] * math.Sqrt(c[i]/l[i])
		x, y = append(x, f[i]), append(y, r.Rows[i])
		// Equal scatter of both voltages moves ln f0 by half of each.
		w = append(w, 1/(1/sq(c[i])+1/sq(l[i])))
	}
	if len(x) < 3 {
		return
	}
	mean, sum := 0.0, 0.0
	for i := range y {
		mean, sum = mean+w[i]*y[i], sum+w[i]
	}
	mean /= sum
	scatter := 0.0
	for i := range y {
		scatter += w[i] * sq(y[i]-mean)
	}
	r.ReactanceRatio = quantity.New(mean, math.Sqrt(scatter/sum/float64(len(y)-1)), "Hz")
	scaled := make([]float64, len(w))
	for i := range w {
		x[i], y[i], scaled[i] = x[i]/mean-1, y[i]/mean-1, w[i]/sum
	}
	if line, err := quantity.Line(x, y, scaled); err == nil {
		scatter := line.Scaled()
		r.Trend = quantity.New(scatter.Slope, math.Sqrt(scatter.VarSlope), "")
	}
}
