// Package quantity holds a value with its standard uncertainty and unit, its
// correlation with others, and the ways to print and read it: engineering
// notation and the GUM's short form.
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

// Relative returns |U/Value|: NaN when either is unknown, Inf for a value of zero.
func (q Quantity) Relative() float64 { return math.Abs(q.U / q.Value) }

// Known reports whether the value is a finite number.
func (q Quantity) Known() bool { return finite(q.Value) }

// MarshalJSON writes {"value": x, "u": y}. An unknown u is null, and so is a
// value that is not finite: JSON has no NaN.
func (q Quantity) MarshalJSON() ([]byte, error) {
	return json.Marshal(struct {
		Value *float64 `json:"value"`
		U     *float64 `json:"u"`
	}{orNil(q.Value), orNil(q.U)})
}

func orNil(x float64) *float64 {
	if !finite(x) {
		return nil
	}
	return &x
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
