package decay

import (
	"errors"
	"fmt"
	"math"
	"math/cmplx"
	"slices"

	"dieaway/capture"
)

// baseband is a gate seen at a lower rate: of each block of m samples the sum of
//
//	(y(n) - offset) exp(-jwn),
//
// n counted from the first sample of the gate, of the samples and of the fitted
// curve. A band about w, narrow against the rate of the blocks, is all there in a
// few sums, however many the samples are (complex demodulation). Where a sample is
// missing the curve stands in for it.
type baseband struct {
	w, dt            float64 // radians a sample, s
	m, n             int     // samples of a block, of the gate
	measured, fitted []complex128
	missing          int

	d        *Decay
	constant float64
	table    powers
	turns    []complex128 // exp(-jwn) at every table of samples of a block
}

// mostMissing is the share of missing samples beyond which a spectrum is withheld.
const mostMissing = 0.1

// spectral says why a spectrum cannot be had, or nil.
func (d *Decay) spectral(ch *capture.Channel) error {
	switch n := d.Last - d.First; {
	case d.law == nil:
		return errors.New("there is no fitted curve")
	case ch.Axis.Times != nil:
		return errors.New("the samples stand at uneven times")
	case n < spectralLeast:
		return fmt.Errorf("the gate holds only %d samples", n)
	case float64(len(d.left)) > mostMissing*float64(n):
		return fmt.Errorf("%d of %d samples are missing or were left out of the fit", len(d.left), n)
	}
	return nil
}

// spectralLeast is the number of samples below which a spectrum shows nothing.
const spectralLeast = 32

var errNoRing = errors.New("nothing rings")

// holes lists the samples that are not there.
func (s series) holes() (out []int) {
	if !s.gaps {
		return nil
	}
	for i, v := range s.y {
		if math.IsNaN(v) {
			out = append(out, i)
		}
	}
	return out
}

// spoilt reports whether any of samples first to last-1 of the gate was left out of
// the fit.
func (d *Decay) spoilt(first, last int) bool {
	i, _ := slices.BinarySearch(d.left, first)
	return i < len(d.left) && d.left[i] < last
}

// baseband sums over blocks of m samples about w radians a sample.
func (d *Decay) baseband(ch *capture.Channel, w float64, m int) *baseband {
	b := &baseband{w: w, dt: ch.Axis.Interval, m: m, n: d.Last - d.First,
		d: d, constant: constantOf(d.law)}
	b.table.fill(pole{0, -w}, m)
	turn := newWalk(pole{0, -w}.over(blockLength), m/blockLength+1)
	for k := range m/blockLength + 1 {
		b.turns = append(b.turns, turn.at(k))
	}
	blocks := (b.n + m - 1) / m
	b.measured, b.fitted = make([]complex128, blocks), make([]complex128, blocks)
	y := ch.Samples[d.First:d.Last]
	halves(b.n, func(first, last int) func() {
		missing := 0
		for k := (first + m - 1) / m; k*m < last; k++ {
			sum, filled := b.sum(ch, y, k*m, min(k*m+m, b.n))
			b.measured[k] = sum
			missing += filled
		}
		return func() { b.missing += missing }
	})
	b.fit()
	turn = newWalk(pole{0, -w}.over(float64(m)), blocks)
	for k := range b.measured { // phases are counted from the first sample of all
		t := turn.at(k)
		b.measured[k] *= t
		b.fitted[k] *= t
	}
	return b
}

// sum is that of samples first to last-1, phases counted from the first.
func (b *baseband) sum(ch *capture.Channel, y []float64, first, last int) (sum complex128, filled int) {
	var buffer [blockLength]float64
	for at := first; at < last; at += blockLength {
		part := y[at:min(at+blockLength, last)]
		s := b.dot(part)
		if !finite(real(s)+imag(s)) || b.d.spoilt(at, at+len(part)) { // missing, or not the circuit's
			copy(buffer[:], part)
			filled += b.fill(ch, buffer[:len(part)], at)
			s = b.dot(buffer[:len(part)])
		}
		sum += s * b.turns[(at-first)/blockLength]
	}
	return sum, filled
}

// dot is the sum over up to a table of samples.
func (b *baseband) dot(y []float64) complex128 {
	var sr, si, tr, ti float64
	re, im := b.table.re[:len(y)], b.table.im[:len(y)]
	i := 0
	for ; i+1 < len(y); i += 2 {
		v, w := y[i]-b.constant, y[i+1]-b.constant
		sr += v * re[i]
		si += v * im[i]
		tr += w * re[i+1]
		ti += w * im[i+1]
	}
	if i < len(y) {
		v := y[i] - b.constant
		sr += v * re[i]
		si += v * im[i]
	}
	return complex(sr+tr, si+ti)
}

// fill puts the fitted curve where samples are missing or were left out of the fit;
// y begins with sample at of the gate.
func (b *baseband) fill(ch *capture.Channel, y []float64, at int) (filled int) {
	for i, v := range y {
		if !finite(v) || b.d.spoilt(at+i, at+i+1) {
			y[i], _, _ = b.d.At(ch.Axis.Time(b.d.First + at + i))
			filled++
		}
	}
	return filled
}

// fit sums over the blocks of the fitted curve.
func (b *baseband) fit() {
	whole := b.n / b.m
	if _, bent := b.d.law.(bentLaw); bent {
		for k := range whole {
			b.fitted[k] = b.curve(ringsOf(b.d.law, float64(k*b.m), float64(b.m), b.dt), b.m)
		}
	} else {
		for _, r := range ringsOf(b.d.law, 0, 0, b.dt) {
			powers := newWalk(pole{r.a, r.w}.over(float64(b.m)), whole)
			for k, image := 0, b.images(r, b.m); k < whole; k++ {
				b.fitted[k] += image.of(complex(r.p, -r.q) * powers.at(k))
			}
		}
	}
	if first := whole * b.m; first < b.n {
		b.fitted[whole] = b.curve(ringsOf(b.d.law, float64(first), float64(b.n-first), b.dt), b.n-first)
	}
}

// curve is the sum over n samples of rings.
func (b *baseband) curve(rings []term, n int) (sum complex128) {
	for _, r := range rings {
		sum += b.images(r, n).of(complex(r.p, -r.q))
	}
	return sum
}

// images are half the sums of (z/v)^n and (z*/v)^n, v = exp(jw), over a block: with a
// ring the real part of C z^n its sum over the block is that of C times the one and C*
// times the other.
type images struct{ own, other complex128 }

func (b *baseband) images(r term, n int) images {
	return images{geometric(pole{r.a, r.w - b.w}, n)[0] / 2, geometric(pole{r.a, -r.w - b.w}, n)[0] / 2}
}

func (i images) of(c complex128) complex128 { return c*i.own + cmplx.Conj(c)*i.other }

// constantOf is the constant that a law rings about.
func constantOf(l law) float64 {
	switch l := l.(type) {
	case exponentialLaw:
		return l.offset
	case bentLaw:
		return l.f.offset()
	case secondOrderLaw:
		return l.f.c
	}
	return 0
}

// ringsOf writes a law less its constant as a sum of terms, rates per interval dt,
// that hold from n intervals after the start of the gate on for span intervals.
// Sums of exponentials are that anywhere; where the rate depends on the amplitude
// it is taken as it is amid the span.
func ringsOf(l law, n, span, dt float64) []term {
	switch l := l.(type) {
	case exponentialLaw:
		sin, cos := math.Sincos(l.phase)
		out := []term{term{l.rate * dt, l.omega * dt, l.amplitude * cos, -l.amplitude * sin}.from(n)}
		if c := l.companion; c != nil {
			out = append(out, term{c.a * dt, c.w * dt, c.p, c.q}.from(n))
		}
		return out
	case bentLaw:
		return []term{l.local(n, span)}
	case secondOrderLaw:
		return l.terms(n)
	}
	return nil
}

// from counts the time of a term from n on.
func (t term) from(n float64) term {
	c := complex(t.p, -t.q) * pole{t.a, t.w}.at(n)
	return term{t.a, t.w, real(c), -imag(c)}
}

// local is the ring amid a span from n on, with the rate and the frequency that
// it has there.
func (l bentLaw) local(n, span float64) term {
	f, b := &l.f, l.f.bend
	half := (span - 1) / 2
	u, i, _, _, _, _ := b.law.shape(f.a, b.b, n+half)
	rate, shift := b.b*u, b.g*u
	switch b.law {
	case cubic:
		rate, shift = b.b*u*u, b.g*u*u
	case constant:
		rate = b.b / math.Max(u, stopped)
	}
	a := math.Min(f.a+rate, 1/math.Max(half, 1)) // a ring that stops amid the span is small
	w := f.w + shift
	ring := term{a, w, u * f.p, u * f.q}
	c := complex(ring.p, -ring.q) * cmplx.Exp(complex(0, f.w*(n+half)+b.g*i))
	return term{a, w, real(c), -imag(c)}.from(-half)
}

// terms are the two exponentials, or the ring, of a response near critical damping.
func (l secondOrderLaw) terms(n float64) []term {
	f := &l.f
	if w := math.Sqrt(f.d); w > nearlyCritical*f.a {
		return []term{term{f.a, w, f.p, f.q / w}.from(n)}
	}
	v := math.Max(math.Sqrt(-f.d), nearlyCritical*f.a)
	if f.d > 0 {
		v = nearlyCritical * f.a
	}
	return []term{
		term{a: f.a - v, p: (f.p + f.q/v) / 2}.from(n),
		term{a: f.a + v, p: (f.p - f.q/v) / 2}.from(n),
	}
}

// nearlyCritical parts two rates that are one: the curve changes by its square.
const nearlyCritical = 1e-3

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
