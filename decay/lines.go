package decay

import (
	"math"

	"dieaway/decay/quantity"
)

// decrement fits ln|extreme - baseline| against time, each point weighted by the
// square of its height because the noise of the logarithm is the noise over the
// height, and reads log decrement, Q and time constant off the line.
func (r *reader) decrement(out *Readings) (slope quantity.Quantity, ok bool) {
	if len(r.peaks) < 3 {
		return slope, false
	}
	line, ok := r.logLine(r.level)
	if !ok || line.Slope >= 0 {
		return slope, false
	}
	moved, ok := r.logLine(r.level + r.uLevel)
	if !ok {
		return slope, false
	}
	u := math.Hypot(lineU(line), moved.Slope-line.Slope)
	slope = quantity.New(line.Slope, u, "1/s")
	rel := u / -line.Slope
	// The period that turns the rate into a decrement is known far better than the rate.
	delta := -line.Slope * r.period
	out.LogDecrement = quantity.New(delta, delta*rel, "")
	x := math.Pi / delta
	q := math.Sqrt(0.25 + x*x)
	out.Q = quantity.New(q, x*x/q*rel, "")
	out.TimeConstant = quantity.New(-1/line.Slope, rel/-line.Slope, "s")
	start := r.s.time(0)
	out.Line = [2]float64{line.Intercept + line.Slope*(start-r.peaks[0].t), line.Slope}
	return slope, true
}

// logLine fits the line with time counted from the first extreme. The weights of
// the second pass come from the line of the first: weights that follow the noise
// of their own points would lift the faint ones.
func (r *reader) logLine(level float64) (quantity.LineFit, bool) {
	n := len(r.peaks)
	x, y, w := make([]float64, n), make([]float64, n), make([]float64, n)
	for i, p := range r.peaks {
		h := (p.v - level) * p.sign
		if h <= 0 {
			return quantity.LineFit{}, false
		}
		x[i], y[i] = p.t-r.peaks[0].t, math.Log(h)
		w[i] = r.logWeight(h)
	}
	f, err := quantity.Line(x, y, w)
	if err != nil {
		return f, false
	}
	for i := range w {
		w[i] = r.logWeight(math.Exp(f.Intercept + f.Slope*x[i]))
	}
	f, err = quantity.Line(x, y, w)
	return f, err == nil
}

// logWeight is the inverse variance of the logarithm of an extreme of height h.
func (r *reader) logWeight(h float64) float64 { return 1 / (sq(r.u/h) + sq(r.bend)) }

// lineU is the uncertainty of the slope: from the noise, and from the scatter
// about the line where that is larger and there are points enough to tell.
func lineU(f quantity.LineFit) float64 {
	u := math.Sqrt(f.VarSlope)
	if f.Degrees >= 4 {
		u *= math.Sqrt(math.Max(1, f.ChiSquare/float64(f.Degrees)))
	}
	return u
}

// crossings reads the times at which the ring crosses the baseline, midway between
// the extremes, and takes the damped frequency from a straight line through them.
func (r *reader) crossings(out *Readings, slope quantity.Quantity) {
	times, line, ok := r.crossingLine(r.level, slope.Value)
	if !ok {
		return
	}
	_, moved, ok := r.crossingLine(r.level+r.uLevel, slope.Value)
	if !ok {
		return
	}
	out.Crossings = times
	half := line.Slope
	u := math.Hypot(lineU(line), moved.Slope-half)
	f := 1 / (2 * half)
	out.DampedFrequency = quantity.New(f, f*u/half, "Hz")
}

func (r *reader) crossingLine(level, rate float64) ([]float64, quantity.LineFit, bool) {
	var k, t, w []float64
	omega := 2 * math.Pi / r.period
	for i, p := range r.peaks {
		at, ok := r.crossing(p.t+r.period/4, level)
		// The envelope at the crossing, from the extreme before it.
		h := (p.v - level) * p.sign * math.Exp(rate*r.period/4)
		if !ok || h <= 0 || i > 0 && at <= t[len(t)-1] {
			break
		}
		n := float64(2*r.width + 1)
		k, t = append(k, p.half), append(t, at)
		w = append(w, 1/(sq(r.sigma/(h*omega))/n+sq(r.skew)))
	}
	if len(t) < 2 {
		return nil, quantity.LineFit{}, false
	}
	f, err := quantity.Line(k, t, w)
	return t, f, err == nil && f.Slope > 0
}

// crossing fits a straight line about t, moves to where it crosses level, and fits again.
func (r *reader) crossing(t, level float64) (float64, bool) {
	from := t
	for range 4 {
		c, ok := r.local(t, 1)
		if !ok || c[1] == 0 {
			return 0, false
		}
		shift := (level - c[0]) / c[1]
		t += shift
		if math.Abs(t-from) > r.period/4 {
			return 0, false
		}
		if math.Abs(shift) < r.s.dt*1e-3 {
			break
		}
	}
	return t, true
}
