package quantity

import "math"

// Instruments are set in steps of 1, 2 and 5 times a power of ten.

// almost lets a setting that only rounding puts beyond a step be that step.
const almost = 1e-9

// StepUp returns the smallest of 1, 2, 5, 10, 20, 50, ... that is not below x,
// which is above zero.
func StepUp(x float64) float64 {
	decade := math.Pow10(int(math.Floor(math.Log10(x) + almost)))
	for _, digit := range []float64{1, 2, 5} {
		if step := stepOf(digit, decade); step >= x*(1-almost) {
			return step
		}
	}
	return stepOf(10, decade)
}

// StepDown returns the largest of the steps that is not above x.
func StepDown(x float64) float64 {
	up := StepUp(x)
	if up <= x*(1+almost) {
		return up
	}
	return StepUp(up * 0.39) // 5 -> 2, 2 -> 1, 10 -> 5
}

// stepOf multiplies with a single rounding: 0.2 is the number that is written so.
func stepOf(digit, decade float64) float64 {
	if decade < 1 {
		return digit / math.Round(1/decade)
	}
	return digit * decade
}
