package driven

import (
	"math"
	"slices"

	"dieaway/capture"
)

// A kind says how the scatter of the rows goes with the response.
type kind int

const (
	constant     kind = iota
	proportional      // to the response, as of readings in dB, or of few digits on changing ranges
	divided           // of a voltage and a reference that scatter alike, after the division
)

// noise is the scatter of magnitude (along the curve) and of phase (across it):
// its kind, and how large it is where the shape of the kind is one.
type noise struct {
	kindAlong, kindAcross kind
	along, across         float64
}

// firstNoise is the kind to begin with.
func (d *rows) firstNoise() noise {
	switch {
	case d.decibels:
		return noise{kindAlong: proportional, kindAcross: proportional}
	case d.reference != nil:
		return noise{kindAlong: divided, kindAcross: divided}
	}
	return noise{}
}

// otherNoises are the kinds that may be likelier than v.
func (d *rows) otherNoises(v noise) (out []noise) {
	kinds := []kind{constant, proportional}
	if d.reference != nil {
		kinds = append(kinds, divided)
	}
	for _, along := range kinds {
		for _, across := range kinds {
			o := noise{kindAlong: along, kindAcross: across}
			if d.dev != nil {
				o.kindAlong = v.kindAlong // stated: nothing to choose
			}
			if d.phi == nil || d.cartesian {
				o.kindAcross = o.kindAlong
			}
			if o.kindAlong == v.kindAlong && (o.kindAcross == v.kindAcross || d.phi == nil) || slices.Contains(out, o) {
				continue
			}
			out = append(out, o)
		}
	}
	return out
}

// The least response, as a part of the greatest, that a scatter in proportion to
// it is believed at. In a notch the few rows near zero would else decide alone.
const (
	scaleFloor = 1e-4
	notchFloor = 0.05
)

// shapes are the standard deviations of the rows but for the factors of the
// noise: stated, constant, or in proportion to the curve.
func (s *state) shapes(d *rows, v noise) (along, across []float64) {
	along, across = make([]float64, d.len()), make([]float64, d.len())
	size := make([]float64, d.len())
	for i, f := range d.f {
		size[i] = s.gain * s.size(f)
	}
	floor := scaleFloor * slices.Max(size)
	if s.across == capture.Both {
		floor = notchFloor * slices.Max(size)
	}
	shape := func(k kind, i int) float64 {
		switch k {
		case proportional:
			return math.Max(size[i], floor)
		case divided: // u^2(V/R) = u^2 (1 + (V/R)^2)/R^2
			return math.Hypot(1, size[i]) / d.reference[i]
		}
		return 1
	}
	for i := range d.f {
		along[i], across[i] = shape(v.kindAlong, i), shape(v.kindAcross, i)
		if d.dev != nil {
			along[i] = d.dev[i]
		}
		if d.cartesian {
			across[i] = along[i]
		}
	}
	return along, across
}

// residuals are what the curve leaves of the rows, in parts of their shapes.
func (s *state) residuals(d *rows, v noise) (along, across []float64) {
	along, across = s.shapes(d, v)
	for i := range d.f {
		a, c := s.residual(d, i)
		along[i], across[i] = a/along[i], c/across[i]
	}
	return along, across
}

// madScale is the standard deviation of normal noise with the median absolute
// value of r; where half of r is all but zero it is that of the rest.
func madScale(r []float64) float64 {
	abs, sum := make([]float64, len(r)), 0.0
	for i, x := range r {
		abs[i] = math.Abs(x)
		sum += x * x
	}
	slices.Sort(abs)
	n := len(abs)
	median := (abs[(n-1)/2] + abs[n/2]) / 2
	return math.Max(median/0.674490, 0.02*math.Sqrt(sum/float64(n)))
}

// measure sets the factors of the noise from the residuals.
func (v *noise) measure(d *rows, along, across []float64) {
	v.along = madScale(along)
	if d.phi != nil {
		v.across = madScale(across)
	}
	if d.cartesian {
		v.along = madScale(slices.Concat(along, across))
		v.across = v.along
	}
	v.atLeast(d)
}

// finest is the scatter, as a part of the response, that is taken for the rounding
// of a computed sweep rather than for noise: no meter reads nine digits.
const finest = 1e-9

// atLeast keeps the factors of the noise above rounding.
func (v *noise) atLeast(d *rows) {
	v.along = math.Max(v.along, d.rounding(v.kindAlong))
	if d.phi != nil {
		v.across = math.Max(v.across, d.rounding(v.kindAcross))
	}
}

// rounding is the least factor of the noise.
func (d *rows) rounding(k kind) float64 {
	if k == proportional || d.dev != nil {
		return finest
	}
	return finest * slices.Max(d.m)
}

// computed reports rows without noise, of which no kind of noise can be told.
func (v *noise) computed(d *rows) bool { return v.along <= 2*d.rounding(v.kindAlong) }
