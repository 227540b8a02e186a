package capture

// A progression is a run of stamps whose printed digits rise by the same whole
// number: it needs no arithmetic with fractions, and no memory.
type progression struct {
	n          int
	last, step int64 // in units of 10^exp seconds
	exp        int
}

// goesOn takes a stamp that continues a progression of at least two.
func (r *progression) goesOn(t *instant) bool {
	m := t.d.integer()
	if m-r.last != r.step || t.d.exp != r.exp || t.real || r.n < 2 {
		return false
	}
	r.last = m
	return true
}

// progresses reports whether all stamps so far are a progression, and gives its last
// and its step.
func (s *span) progresses() (last, step int64, ok bool) {
	return s.run.last, s.run.step, s.n == s.run.n && s.n > 1
}

// goOn takes in n stamps that continue the progression.
func (s *span) goOn(n int) {
	s.run.last += int64(n) * s.run.step
	s.run.n += n
	s.n += n
}

// starts takes a stamp that can be the first or second of a progression.
// Beyond 2^53 the stamps could not be written out exactly.
func (r *progression) starts(t *instant) bool {
	if r.n > 1 || t.real || t.d.mant >= 1<<53 {
		return false
	}
	m := t.d.integer()
	if r.n == 1 {
		if r.step = m - r.last; r.step <= 0 || t.d.exp != r.exp {
			return false
		}
	}
	r.last, r.exp = m, t.d.exp
	return true
}

// value is the stamp number i of the progression.
func (r *progression) value(i int) float64 {
	m := r.last - int64(r.n-1-i)*r.step
	d := decimal{mant: uint64(m), exp: r.exp}
	if m < 0 {
		d.mant, d.sign = uint64(-m), 1
	}
	return d.float(0, nil, '.')
}
