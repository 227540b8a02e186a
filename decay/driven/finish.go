package driven

import (
	"math"
	"slices"
)

// A fitted curve with all that is needed to judge it.
type fitted struct {
	state
	noise      noise
	likelihood float64
	out        []bool // rows left out
	iterations int
}

// outlierSpan is how many standard deviations one row of n may lie off by chance
// once in a thousand sweeps (Bonferroni), and somewhat more for few rows, whose
// scale is not well known.
func outlierSpan(n int) float64 {
	return math.Sqrt2 * math.Erfinv(1-1e-3/float64(n)) * (1 + 6/float64(n))
}

// finish leaves the outliers out and ends with plain least squares, which in
// normal noise loses nothing to the bound.
func (f *fitted) finish(d *rows) {
	for range 4 {
		out := f.farOff(d)
		settled := f.out != nil && slices.Equal(out, f.out)
		f.out = out
		for range 3 {
			f.iterations += f.descend(d, f.plain(d), stepsMost)
			f.rms(d)
			if f.noise.kindAlong == constant && f.noise.kindAcross == constant {
				break // the weights do not follow the curve
			}
		}
		if settled {
			return
		}
	}
}

// farOff marks the rows that are outliers. Three or more in a row to one side are
// none: there the curve leaves the rows, not they the curve.
func (f *fitted) farOff(d *rows) []bool {
	along, across := f.residuals(d, f.noise)
	out, n := make([]bool, d.len()), 0
	span := outlierSpan(d.len())
	for i := range out {
		out[i] = math.Abs(along[i]) > span*f.noise.along || d.phi != nil && math.Abs(across[i]) > span*f.noise.across
	}
	for i := 0; i < len(out); {
		k := i
		for k < len(out) && out[k] && along[k]*along[i] > 0 {
			k++
		}
		if k-i >= 3 {
			clear(out[i:k])
		}
		i = max(k, i+1)
	}
	for _, o := range out {
		if o {
			n++
		}
	}
	if 3*n > d.len() || d.len()-n <= len(f.free)+1 { // these are no outliers, but a curve that does not fit
		clear(out)
	}
	return out
}

// plain are the weights of the rows that are not left out.
func (f *fitted) plain(d *rows) weights {
	return f.weights(d, f.noise, func(i int) float64 {
		if f.out[i] {
			return 0
		}
		return 1
	})
}

// rms sets the factors of the noise from all rows that are not left out, for the
// degrees of freedom that the parameters took.
func (f *fitted) rms(d *rows) {
	along, across := f.residuals(d, f.noise)
	sa, sc, n := 0.0, 0.0, 0.0
	for i := range along {
		if !f.out[i] {
			sa, sc, n = sa+sq(along[i]), sc+sq(across[i]), n+1
		}
	}
	p := float64(len(f.free))
	switch {
	case d.phi == nil:
		f.noise.along = spread(sa, n-p)
	case d.cartesian:
		f.noise.along = spread(sa+sc, 2*n-p)
		f.noise.across = f.noise.along
	default:
		f.noise.along, f.noise.across = spread(sa, n-p/2), spread(sc, n-p/2)
	}
	f.noise.atLeast(d)
	if d.dev != nil { // what the file states counts, unless the rows scatter more
		f.noise.along = math.Max(f.noise.along, 1)
		if d.cartesian {
			f.noise.across = f.noise.along
		}
	}
}

// spread is the standard deviation that a sum of squares tells with the given
// degrees of freedom: with few of them it is itself not well known, and the
// standard uncertainty that follows from it is that of Student's distribution,
// larger by sqrt(n/(n - 2)) (JCGM 101:2008, 6.4.9).
func spread(squares, degrees float64) float64 {
	return math.Sqrt(squares / math.Max(1, degrees-2))
}

// correlation is that of the residuals of neighbouring rows, along the curve: where
// the rows leave it in waves, for a second resonance or a wrong form, their number
// says less than it would of independent ones.
func (f *fitted) correlation(d *rows) float64 {
	along, _ := f.residuals(d, f.noise)
	products, squares := 0.0, 0.0
	last := math.NaN()
	for i, r := range along {
		if f.out[i] {
			continue
		}
		if !math.IsNaN(last) {
			products += r * last
		}
		squares, last = squares+r*r, r
	}
	rho := products / squares
	if !(rho > correlationLeast) || rho < 3/math.Sqrt(float64(d.len())) || f.noise.computed(d) {
		return 0
	}
	return math.Min(rho, 0.95)
}

// correlationLeast is where the correlation of neighbouring residuals counts.
const correlationLeast = 0.3
