package decay

import (
	"math"
	"math/cmplx"

	"dieaway/capture"
	"dieaway/decay/quantity"
)

// A Local is what a stretch of a decay says by itself.
type Local struct {
	// Time is in s, Amplitude of the ring in the unit of the channel.
	Time, Amplitude float64
	DampedFrequency quantity.Quantity // Hz
	Q               quantity.Quantity
}

// How a decay is cut into stretches.
const (
	stretchCycles = 3       // at least, in each
	mostStretches = 13      // at most
	mostLocal     = 1 << 14 // samples of a stretch
	localU        = 0.2     // of amplitude and phase, rad: beyond it a stretch tells nothing
)

// Along returns frequency and Q along the decay, from stretches of it that are
// measured one by one: what no single number of the fit can show. In each stretch
// the samples, less baseline and other modes of the fit, are matched by least squares
// to the real part of z exp((-alpha_fit + i omega_fit) t), and from one stretch to
// the next
//
//	omega = omega_fit + change of arg z / time, alpha = alpha_fit - change of ln|z| / time
//
// (complex demodulation). Neighbouring points share a stretch. The uncertainties are
// those of the noise. Of a very long stretch every so many samples are taken. It is nil of a decay that does not ring, and of one too short.
func (d *Decay) Along(ch *capture.Channel) []Local {
	switch d.law.(type) {
	case exponentialLaw, bentLaw:
	default:
		return nil
	}
	n := min(mostStretches, int(d.Cycles/stretchCycles))
	if n < 3 || d.Last-d.First < 8*n {
		return nil
	}
	var all []stretch
	for k := range n {
		from, to := d.First+k*(d.Last-d.First)/n, d.First+(k+1)*(d.Last-d.First)/n
		s, ok := d.stretch(ch, from, to)
		if !ok {
			break
		}
		all = append(all, s)
	}
	var out []Local
	for k := 1; k < len(all); k++ {
		out = append(out, d.between(all[k-1], all[k]))
	}
	return out
}

// A stretch is the ring of some samples: its ratio z to the ring of the fit at its
// time t in s from From, and the standard uncertainty of arg z and of ln|z|.
type stretch struct {
	t float64
	z complex128
	u float64
}

// stretch measures the samples from one up to before another.
func (d *Decay) stretch(ch *capture.Channel, from, to int) (stretch, bool) {
	origin := ch.Axis.Time(from) - d.From
	step := 1 + (to-from)/mostLocal
	ring := d.ringAt(ch, from, step, to)
	var cc, cs, ss, yc, ys, weight, moment float64
	for i := from; i < to; i += step {
		// About the stretch, so that the far end of a long decay is no zero.
		t, z := ch.Axis.Time(i)-d.From, ring()
		y := ch.Samples[i]
		if math.IsNaN(y) {
			continue
		}
		c, s, square := real(z), -imag(z), power(z)
		y = d.ringOnly(t, y)
		cc, cs, ss = cc+c*c, cs+c*s, ss+s*s
		yc, ys = yc+y*c, ys+y*s
		weight, moment = weight+square, moment+square*t
	}
	det := cc*ss - cs*cs
	if !(det > 1e-6*cc*ss) {
		return stretch{}, false
	}
	z := complex((yc*ss-ys*cs)/det, (ys*cc-yc*cs)/det)
	u := d.NoiseRMS * d.NoiseFactor / (cmplx.Abs(z) * math.Sqrt(weight/2))
	scale := complex(math.Exp(d.Quantities.DecayRate.Value*origin), 0)
	return stretch{moment / weight, z * scale, u}, u < localU
}

// ringAt returns a function that gives, one by one, exp((-alpha + i omega) t) at every
// step-th sample of a stretch, its size counted from the first.
func (d *Decay) ringAt(ch *capture.Channel, from, step, to int) func() complex128 {
	alpha, omega := d.Quantities.DecayRate.Value, 2*math.Pi*d.Quantities.DampedFrequency.Value
	start := ch.Axis.Time(from)
	first := cmplx.Exp(complex(0, omega*(start-d.From)))
	if ch.Axis.Times == nil {
		dt := ch.Axis.Interval * float64(step)
		powers, n := newWalk(pole{alpha * dt, omega * dt}, (to-from)/step+1), -1
		return func() complex128 {
			n++
			return first * powers.at(n)
		}
	}
	i := from - step
	return func() complex128 {
		i += step
		return first * pole{alpha, omega}.at(ch.Axis.Time(i)-start)
	}
}

// ringOnly takes baseline and other modes from a sample at t seconds after From.
func (d *Decay) ringOnly(t, y float64) float64 {
	if l, ok := d.law.(exponentialLaw); ok && l.companion != nil {
		v, _, _ := l.at(t)
		ring := l.amplitude * math.Exp(-l.rate*t) * math.Cos(l.omega*t+l.phase)
		return y - (v - ring)
	}
	return y - constantOf(d.law)
}

// between is frequency and Q from one stretch to the next.
func (d *Decay) between(a, b stretch) Local {
	dt := b.t - a.t
	ratio := b.z / a.z
	u := math.Hypot(a.u, b.u) / dt
	omega := 2*math.Pi*d.Quantities.DampedFrequency.Value + cmplx.Phase(ratio)/dt
	alpha := d.Quantities.DecayRate.Value - math.Log(cmplx.Abs(ratio))/dt
	t := (a.t + b.t) / 2
	l := Local{Time: d.From + t, Amplitude: math.Sqrt(cmplx.Abs(a.z)*cmplx.Abs(b.z)) * math.Exp(-d.Quantities.DecayRate.Value*t)}
	l.DampedFrequency = quantity.New(omega/(2*math.Pi), u/(2*math.Pi), "Hz")
	// Q = pi f0/alpha with f0 = hypot(omega, alpha)/2 pi; u of alpha leads.
	natural := math.Hypot(omega, alpha)
	q := natural / (2 * alpha)
	l.Q = quantity.New(q, math.Abs(q)*math.Hypot(u/alpha*omega*omega/(natural*natural), u*omega/(natural*natural)), "")
	return l
}
