package decay

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"dieaway/decay/quantity"
)

// The names of the parameters of a fit, in [Decay.Parameters].
const (
	ParameterRate      = "decay rate"        // alpha, 1/s
	ParameterOmega     = "angular frequency" // omega_d = 2 pi fd, rad/s
	ParameterAmplitude = "amplitude"         // A at the start of the gate
	ParameterPhase     = "phase"             // phi there, rad
	ParameterOffset    = "offset"            // c
	// Of the second ring of a decay of two modes, or of a tone beside it.
	ParameterRate2      = "decay rate of the second ring"
	ParameterOmega2     = "angular frequency of the second ring"
	ParameterAmplitude2 = "amplitude of the second ring"
	ParameterPhase2     = "phase of the second ring"
	// Of a baseline that recovers exponentially.
	ParameterBaselineRate   = "rate of the baseline"
	ParameterBaselineHeight = "height of the baseline"
	// Of a law of amplitude: what rate and frequency have more at the start of the
	// gate than in the limit of small amplitude.
	ParameterGainedRate  = "decay rate gained at the start"
	ParameterGainedOmega = "angular frequency gained at the start"
	// Of a return that does not ring: omega_0 = 2 pi f0, rad/s.
	ParameterNaturalOmega = "natural angular frequency"
)

// estimate is a parameter in physical units: its value and its derivatives by
// parameters of the fit.
type estimate struct {
	name, unit string
	value      float64
	at         [2]int
	by         [2]float64
	timed      bool // scales with the time base
}

// joint carries the covariance of the fit to the estimates by the law of propagation
// of uncertainty (GUM 5.2.2); the time base, of relative standard uncertainty
// timebase, is shared by all rates and frequencies. It is nil when the covariance
// is none.
func joint(all []estimate, full *sym, timebase float64) *quantity.Joint {
	var names, units []string
	var values []float64
	cov := mat.NewSymDense(len(all), nil)
	for i, x := range all {
		names, units, values = append(names, x.name), append(units, x.unit), append(values, x.value)
		for j, y := range all[:i+1] {
			sum := 0.0
			for k := range x.by {
				for l := range y.by {
					sum += x.by[k] * full.At(x.at[k], y.at[l]) * y.by[l]
				}
			}
			if x.timed && y.timed {
				sum += x.value * timebase * y.value * timebase
			}
			cov.SetSym(i, j, sum)
		}
	}
	out, err := quantity.NewJoint(names, units, values, cov)
	if err != nil {
		return nil
	}
	return out
}

// parameters returns the parameters of the fit in physical units with their
// covariance, from that of the fit.
func (f *ringFit) parameters(full *sym, unit string, timebase float64) *quantity.Joint {
	at, dt := f.places(), f.s.dt
	all := []estimate{rate(ParameterRate, "1/s", f.a, dt, at[0]), rate(ParameterOmega, "rad/s", f.w, dt, at[1])}
	all = append(all, phasor(ParameterAmplitude, ParameterPhase, unit, f.p, f.q, at[3])...)
	all = append(all, estimate{name: ParameterOffset, unit: unit, value: f.offset(), at: [2]int{at[2], at[2]}, by: [2]float64{1, 0}})
	if b := f.bend; b != nil {
		all = append(all, rate(ParameterGainedRate, "1/s", b.b, dt, 2), rate(ParameterGainedOmega, "rad/s", b.g, dt, 3))
	}
	switch c := f.companion; {
	case c == nil:
	case c.w > 0:
		all = append(all, rate(ParameterRate2, "1/s", c.a, dt, 2), rate(ParameterOmega2, "rad/s", c.w, dt, 3))
		all = append(all, phasor(ParameterAmplitude2, ParameterPhase2, unit, c.p, c.q, at[4]+1)...)
	default:
		height := estimate{name: ParameterBaselineHeight, unit: unit, value: c.p, at: [2]int{at[4] + 1, at[4] + 1}, by: [2]float64{1, 0}}
		all = append(all, rate(ParameterBaselineRate, "1/s", c.a, dt, 2), height)
	}
	return joint(all, full, timebase)
}

// rate is a rate or frequency x per interval dt, parameter at of the fit.
func rate(name, unit string, x, dt float64, at int) estimate {
	return estimate{name: name, unit: unit, value: x / dt, at: [2]int{at, at}, by: [2]float64{1 / dt, 0}, timed: true}
}

// phasor is amplitude and phase of p cos + q sin, p being parameter at of the fit
// and q the next.
func phasor(amplitude, phase, unit string, p, q float64, at int) []estimate {
	size := math.Hypot(p, q)
	return []estimate{
		{name: amplitude, unit: unit, value: size, at: [2]int{at, at + 1}, by: [2]float64{p / size, q / size}},
		{name: phase, unit: "rad", value: math.Atan2(-q, p), at: [2]int{at, at + 1}, by: [2]float64{q / (size * size), -p / (size * size)}},
	}
}

// secondOrderParameters are those that exist on both sides of critical damping,
// from a and D with their covariance: alpha and omega_0 = sqrt(a^2 + D).
func secondOrderParameters(a, d, dt float64, cov *sym, timebase float64) *quantity.Joint {
	s := math.Sqrt(a*a + d)
	return joint([]estimate{
		rate(ParameterRate, "1/s", a, dt, 0),
		{name: ParameterNaturalOmega, unit: "rad/s", value: s / dt, at: [2]int{0, 1}, by: [2]float64{a / s / dt, 1 / (2 * s) / dt}, timed: true},
	}, cov, timebase)
}

// ringPart is the covariance of (a, w, c, p, q) out of that of all parameters.
func (f *ringFit) ringPart(full *sym) sym {
	cov := sym{n: 5}
	where := f.places()
	for i, a := range where {
		for j, b := range where {
			cov.set(i, j, full.At(a, b))
		}
	}
	return cov
}
