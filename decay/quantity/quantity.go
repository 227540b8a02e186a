// Package quantity holds a value with its standard uncertainty and unit, its
// correlation with others, and the ways to print and read it: engineering
// notation and the GUM's short form.
//
// "GUM" is JCGM 100:2008, "JCGM 102" is JCGM 102:2011, its supplement for more
// than one output quantity.
package quantity

import (
	"encoding/json"
	"math"
)

// A Quantity is an estimate with its standard uncertainty.
type Quantity struct {
	// Value is in Unit.
	Value float64
	// U is the standard uncertainty (k = 1) in Unit; NaN when it is unknown, 0 when exact.
	U float64
	// Unit is an SI unit without prefix ("Hz", "s", "V"), or "" for a pure number.
	Unit string
}

// New returns the quantity value with standard uncertainty u, in unit.
func New(value, u float64, unit string) Quantity {
	return Quantity{Value: value, U: u, Unit: unit}
}

// Unknown returns the quantity of which nothing is known but its unit.
func Unknown(unit string) Quantity {
	return Quantity{Value: math.NaN(), U: math.NaN(), Unit: unit}
}

// Relative returns |U/Value|: NaN when either is unknown, Inf for a value of zero.
func (q Quantity) Relative() float64 { return math.Abs(q.U / q.Value) }

// Known reports whether the value is a finite number.
func (q Quantity) Known() bool { return finite(q.Value) }

// knownU reports whether the standard uncertainty is a finite number, not negative.
func (q Quantity) knownU() bool { return finite(q.U) && q.U >= 0 }

// MarshalJSON writes {"value": x, "u": y}. An unknown u is null, and so is a
// value that is not finite: JSON has no NaN.
func (q Quantity) MarshalJSON() ([]byte, error) {
	return json.Marshal(struct {
		Value *float64 `json:"value"`
		U     *float64 `json:"u"`
	}{orNil(q.Value), orNil(q.U)})
}

// En is the degree of equivalence of two results, (a - b)/sqrt(Ua^2 + Ub^2)
// with expanded uncertainties U = 2u (ISO 13528, ISO/IEC 17043). |En| <= 1
// means that they agree.
//
// cov is the covariance u(a, b) of the two, in the square of their unit: what
// they share, for example one time base, is no reason for them to differ and
// leaves the denominator as 2 cov. Zero for independent results. En is NaN when
// a value or an uncertainty is unknown, and infinite when two exact values differ.
func En(a, b Quantity, cov float64) float64 {
	d := a.Value - b.Value
	u2 := a.U*a.U + b.U*b.U - 2*cov
	if d == 0 && u2 == 0 {
		return 0
	}
	return d / (2 * math.Sqrt(u2))
}

func orNil(x float64) *float64 {
	if !finite(x) {
		return nil
	}
	return &x
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
