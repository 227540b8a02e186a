package decay

import "math"

// design is a separable least-squares problem given by functions of time: the
// general form, slower than [poles] but for any law. The basis holds functions
// f(t; theta); the curve is a sum of some of them with linear coefficients, and
// its derivative by each theta a sum of others with the same coefficients.
type design struct {
	s     series
	n     int     // samples that are there
	ref   float64 // level that y is counted from
	yy    float64
	width int // functions in the basis
	// eval writes the basis at time t, in intervals.
	eval func(theta []float64, t float64, f *[parametersMost]float64)
	// linear holds the functions that the curve is made of, in the order of beta.
	linear []int
	// derivative[k] pairs functions with the beta that multiplies each.
	derivative [][]product
	domain     func(theta []float64) bool
	nodes      *byNodes // how the sums follow from few values; nil when they do not
}

// product is a function of the basis times a linear parameter.
type product struct{ function, beta int }

func (d *design) size() int                  { return d.n }
func (d *design) valid(theta []float64) bool { return d.domain == nil || d.domain(theta) }

func (d *design) at(theta []float64) (normal, bool) {
	g, ok := d.gramByNodes(theta)
	if !ok {
		g.accumulate(d.s, d.ref, d.width, func(t float64, f *[parametersMost]float64) { d.eval(theta, t, f) })
	}
	out, ok := g.project(d.linear, d.yy)
	if !ok {
		return out, false
	}
	cols := make([]column, 0, parametersMost)
	for _, list := range d.derivative {
		var c column
		for i, p := range list {
			c.at[i], c.x[i] = p.function, out.beta[p.beta]
		}
		cols = append(cols, c)
	}
	for _, at := range d.linear {
		cols = append(cols, column{at: [2]int{at, at}, x: [2]float64{1, 0}})
	}
	out.fill(&g, cols, d.linear)
	return out, true
}

// prepare sums what does not depend on theta.
func (d *design) prepare() {
	if b := d.nodes; b != nil && b.sums != nil {
		d.ref = b.sums.ref
		d.n, d.yy = b.sums.energy(d.s)
		return
	}
	d.n = d.s.count()
	d.yy = 0
	for _, v := range d.s.y {
		if !math.IsNaN(v) {
			d.yy += sq(v - d.ref)
		}
	}
}

// gram holds inner products of a basis with itself and with y.
type gram struct {
	g sym
	b [parametersMost]float64
}

// accumulate sums over every sample that is there, at its true time, with y
// counted about ref, for a basis of n functions. Functions that eval does not
// write keep their value, which is 1 for the first: the constant.
func (g *gram) accumulate(s series, ref float64, n int, eval func(t float64, f *[parametersMost]float64)) {
	g.g.n = n
	halves(s.len(), func(first, last int) func() {
		own := new(gram)
		own.add(s, first, last, ref, n, eval)
		return func() { g.join(own) }
	})
	g.mirror()
}

// join adds the sums of other.
func (g *gram) join(other *gram) {
	for k := range g.b {
		g.b[k] += other.b[k]
	}
	for k := range g.g.v {
		g.g.v[k] += other.g.v[k]
	}
}

// mirror copies what is below the diagonal to above it.
func (g *gram) mirror() {
	for a := range g.g.n {
		for b := range a {
			g.g.v[b*parametersMost+a] = g.g.v[a*parametersMost+b]
		}
	}
}

// add sums over samples first to last-1; of the products of the basis with itself
// those below the diagonal.
func (g *gram) add(s series, first, last int, ref float64, n int, eval func(t float64, f *[parametersMost]float64)) {
	var f [parametersMost]float64
	f[0] = 1
	for i := first; i < last; i++ {
		v := s.y[i]
		if math.IsNaN(v) {
			continue
		}
		eval(s.position(i), &f)
		v -= ref
		for a := range n {
			fa := f[a]
			g.b[a] += fa * v
			row := g.g.v[a*parametersMost : a*parametersMost+a+1]
			for b := range row {
				row[b] += fa * f[b]
			}
		}
	}
}

// project solves for the linear parameters; yy is the energy of y about its level.
func (g *gram) project(linear []int, yy float64) (normal, bool) {
	lin := sym{n: len(linear)}
	rhs := make([]float64, len(linear))
	for i, a := range linear {
		rhs[i] = g.b[a]
		for j, b := range linear[:i+1] {
			lin.set(i, j, g.g.At(a, b))
		}
	}
	beta, ok := solveSym(&lin, rhs)
	if !ok {
		return normal{}, false
	}
	out := normal{beta: beta, rss: yy}
	for i := range beta {
		out.rss -= beta[i] * rhs[i]
	}
	out.rss = math.Max(out.rss, 0)
	return out, true
}

// column is one column of the Jacobian as a combination of at most two functions
// of the basis.
type column struct {
	at [2]int
	x  [2]float64
}

// fill computes J'J and J'r for the columns of the Jacobian, nonlinear
// parameters first.
func (out *normal) fill(g *gram, cols []column, linear []int) {
	out.jtj.n = len(cols)
	out.jtr = make([]float64, len(cols))
	var left [parametersMost]float64 // basis' r
	for i := range g.g.n {
		left[i] = g.b[i]
		for j, at := range linear {
			left[i] -= g.g.At(i, at) * out.beta[j]
		}
	}
	for i, c := range cols {
		out.jtr[i] = c.x[0]*left[c.at[0]] + c.x[1]*left[c.at[1]]
		for j, d := range cols[:i+1] {
			sum := 0.0
			for a := range 2 {
				for b := range 2 {
					sum += c.x[a] * d.x[b] * g.g.At(c.at[a], d.at[b])
				}
			}
			out.jtj.set(i, j, sum)
		}
	}
}
