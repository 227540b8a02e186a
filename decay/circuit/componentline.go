package circuit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"dieaway/decay/quantity"
)

// A ComponentLine is the straight line that ring-downs with known parts added lie
// on, against all that is known to be connected. By the equations at [Tank.Loaded]
// capacitors give
//
//	(1 + R G)/omega0^2 = L (C + x)
//
// where x is the capacitance of part and probe, and resistors
//
//	alpha - G/(2 C') = (R + x)/(2 L)
//
// where x is the resistance of part, source and fitted resistor. The slope is L, or
// 1/(2 L), and the line meets zero at -C, or at -R. What stands on the left beside
// omega0 and alpha is that of the fit and of the bench file.
type ComponentLine struct {
	// Resistors tells that resistors were added, not capacitors.
	Resistors bool
	// SetUp is what the bench file adds to every part, F or ohm; 0 without one.
	SetUp float64
	// Shunt is G, the conductance across the capacitor in S; with 0 the left is
	// nothing but what was measured.
	Shunt float64
	// Points are the rows in their order.
	Points []ComponentPoint

	tank Tank
	load Load          // of a row without its part
	cov  *mat.SymDense // of ln L, ln C and R in ohm
}

// A ComponentPoint is one ring-down beside the line.
type ComponentPoint struct {
	X quantity.Quantity // F or ohm
	Y quantity.Quantity // s^2 or 1/s: the left side, as measured
	// Other is the figure that the parts should not move by themselves: the decay
	// rate (1/s) with capacitors, the natural frequency (Hz) with resistors.
	Other quantity.Quantity
}

// At returns the line at x (F or ohm) in s^2 or 1/s, with the standard uncertainty
// that inductance and intercept give it together.
func (l *ComponentLine) At(x float64) quantity.Quantity {
	t := l.tank
	y, unit := t.Inductance*(t.Capacitance+x), "s^2"
	d := []float64{y, t.Inductance * t.Capacitance, 0} // by ln L, ln C and R
	if l.Resistors {
		y, unit = (t.Resistance+x)/(2*t.Inductance), "1/s"
		d = []float64{-y, 0, 1 / (2 * t.Inductance)}
	}
	v := mat.NewVecDense(parameters, d)
	return quantity.New(y, math.Sqrt(math.Max(0, mat.Inner(v, l.cov, v))), unit)
}

// OtherAt returns what the components say of the other figure at x.
func (l *ComponentLine) OtherAt(x float64) float64 {
	load := l.load
	if l.Resistors {
		load.Resistance = x
		return l.tank.Loaded(load).NaturalFrequency
	}
	load.Capacitance = x
	return l.tank.Loaded(load).DecayRate
}

// line returns the line of a fit that has settled.
func (f *componentFit) line() (*ComponentLine, error) {
	l := &ComponentLine{Resistors: f.resistors(), tank: f.tank(), load: f.scene.load(&f.scene.ringDown)}
	l.SetUp, l.Shunt = l.load.Capacitance, l.load.Conductance
	units := [3]string{"F", "s^2", "1/s"}
	if l.Resistors {
		l.SetUp, units = l.load.Resistance, [3]string{"ohm", "1/s", "Hz"}
	}
	l.cov = mat.NewSymDense(parameters, nil)
	scales := [parameters]float64{1, 1, f.scale}
	for i := range parameters {
		for k := range i + 1 {
			l.cov.SetSym(i, k, scales[i]*f.cov.At(i, k)*scales[k])
		}
	}
	var names []result
	for i := range f.rows {
		for k, what := range []string{"known part", "measured", "other figure"} {
			names = append(names, result{fmt.Sprintf("%s %d", what, i+1), units[k]})
		}
	}
	joint, err := f.scene.propagate(names, func(y []float64) {
		for i := range f.rows {
			y[3*i], y[3*i+1], y[3*i+2] = l.figures(f.measured[i].resonance(), f.load(i))
		}
	})
	if err != nil {
		return nil, fmt.Errorf("components: %w", err)
	}
	for i := range f.rows {
		l.Points = append(l.Points, ComponentPoint{joint.At(3 * i), joint.At(3*i + 1), joint.At(3*i + 2)})
	}
	return l, nil
}

// figures returns both sides of the line's equation and the other figure of a row.
func (l *ComponentLine) figures(r Resonance, load Load) (x, y, other float64) {
	if l.Resistors {
		return load.Resistance, r.DecayRate - load.Conductance/(2*(l.tank.Capacitance+load.Capacitance)), r.NaturalFrequency
	}
	w := 2 * math.Pi * r.NaturalFrequency
	return load.Capacitance, (1 + (l.tank.Resistance+load.Resistance)*load.Conductance) / (w * w), r.DecayRate
}
