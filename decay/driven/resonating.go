package driven

// Resonating returns the response that the fitted source would have given at a
// circuit of natural frequency f0 in Hz and quality factor q: magnitude in the
// unit of the result and phase in radians, as [Result.At] has them. It lays what
// another measurement predicts over the points of this one.
func (r *Result) Resonating(f0, q float64) func(f float64) (magnitude, phase float64) {
	c := r.curve
	c.f0, c.q = f0, q
	return c.at
}
