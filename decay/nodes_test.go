package decay

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestNodeFollower: residuals by way of nodes are those of the curve, also where a ring
// stops and in a part of a block.
func TestNodeFollower(t *testing.T) {
	const most = nodeReach / (nodeBlock / 2)
	s := series{y: make([]float64, 20011), dt: 1}
	for law, b := range map[bendLaw]float64{quadratic: most / 12, cubic: most / 12, constant: most / 100} {
		f := ringFit{s: s, a: most / 50, w: 0.31, p: 0.3, q: -0.7, ref: 0.1, bend: &bend{law, b, most / 2}, nodes: nodalOf(s, 0.31)}
		if newNodeFollower(&f, 1) == nil {
			t.Fatalf("%v: too fast", law)
		}
		for i, r := range f.residuals(s.slice(100, 20011), 100) {
			if want := -f.value(float64(100 + i)); math.Abs(r-want) > 1e-10 {
				t.Fatalf("%v: residual %.12g of sample %d, want %.12g", law, r, i, want)
			}
		}
	}
}

// TestGramByNodes: the inner products of the laws of the amplitude by way of nodes are
// those of the definition, for functions that depart from what was summed up as far as
// they may, with samples that are missing, in any window of a record, and thinned.
func TestGramByNodes(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 62))
	const w, length = 0.31, 3*parallelFrom + 77
	record := series{y: make([]float64, length), dt: 1}
	for i := range record.y {
		record.y[i] = 3.5 + math.Exp(-1e-4*float64(i))*math.Cos(w*float64(i)+1) + 0.1*rng.NormFloat64()
		if i > length/3 && i < length/2 && rng.IntN(5) == 0 || i > length-7000 && i < length-5000 {
			record.y[i] = math.NaN()
			record.gaps = true
		}
	}
	for _, window := range []series{
		record, record.slice(17, 9000), record.slice(length/2+33, length-5), record.slice(length/3, length/3+nodalFrom), record.thinned(1 << 14),
	} {
		n := nodalOf(window.slice(0, max(nodalFrom, window.len()/3)), w).over(window, w)
		m := window.spacing()
		most := nodeReach / (nodeBlock / 2) / m // radians an interval
		for _, law := range []bendLaw{quadratic, cubic, constant} {
			for _, theta := range [][]float64{
				{1e-5, w, 0, 0}, {most / 2, w, most / 12, most / 3}, {most / 9, w - most/2, most / 12, most}, {1e-5, w, 1e-5, -most / 20}, {1e-6, w, 1e-5, most / 100},
			} {
				d := newBent(window, law, n)
				got, ok := d.gramByNodes(theta)
				if !ok {
					t.Fatalf("%v %v: departs too far", law, theta)
				}
				var want gram
				want.accumulate(window, d.ref, d.width, func(t float64, f *[parametersMost]float64) { d.eval(theta, t, f) })
				for a := range d.width {
					// What is left of one function is 1e-10 of its size, and by the Cauchy-Schwarz
					// inequality bounds that of its products with the samples. A product of two
					// departs twice as far, of which the sixth power is left.
					size := math.Sqrt(want.g.At(a, a))
					if size == 0 {
						continue
					}
					within(t, "product with the samples", (got.b[a]-want.b[a])/size/math.Sqrt(d.yy), 0, 1e-10)
					for b := range d.width {
						if other := math.Sqrt(want.g.At(b, b)); other > 0 {
							within(t, "product of functions", (got.g.At(a, b)-want.g.At(a, b))/size/other, 0, 64e-10)
						}
					}
				}
				if t.Failed() {
					t.Fatalf("%v %v, %d samples from %d, %g apart", law, theta, window.len(), window.from, m)
				}
			}
		}
		_, want, count := sums(window.y, n.ref)
		if got, yy := n.energy(window); got != count || math.Abs(yy/want-1) > 1e-12 {
			t.Errorf("%d samples of energy %g, want %d of %g", got, yy, count, want)
		}
	}
}
