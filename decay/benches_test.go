package decay

import (
	"fmt"
	"maps"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
	"text/tabwriter"
)

// resonator integrates x” + (w/Q) x' + w^2 (x - drive) = 0 by classical Runge-Kutta
// steps of which some make an interval; w is in radians an interval.
type resonator struct {
	w, q  float64
	drive func(t float64) float64 // t in intervals
	x, v  float64
}

func (r *resonator) advance(t, h float64) {
	slope := func(t, x, v float64) (dx, dv float64) { return v, r.w*r.w*(r.drive(t)-x) - r.w/r.q*v }
	x1, v1 := slope(t, r.x, r.v)
	x2, v2 := slope(t+h/2, r.x+h/2*x1, r.v+h/2*v1)
	x3, v3 := slope(t+h/2, r.x+h/2*x2, r.v+h/2*v2)
	x4, v4 := slope(t+h, r.x+h*x3, r.v+h*v3)
	r.x, r.v = r.x+h/6*(x1+2*x2+2*x3+x4), r.v+h/6*(v1+2*v2+2*v3+v4)
}

// seen is the voltage across a part of a series circuit.
func (r *resonator) seen(part string, t float64) float64 {
	switch part {
	case "resistor":
		return r.v / r.w
	case "inductor":
		return r.drive(t) - r.x - r.v/(r.w*r.q)
	default:
		return r.x
	}
}

// A bench is a ring-down set-up drawn by lot: what a user may have done to it.
type bench struct {
	cycle, q, length         float64 // samples, 1, time constants
	before                   float64 // share of the record before the excitation
	rise                     float64 // of an edge, in samples
	noise, hum, humFrequency float64 // the frequency in that of the ring
	highPass, lowPass        float64 // corners in the frequency of the ring; 0: none
	bits                     int     // 0: no converter
	excitation, part         string
	averaged, clipped        bool
}

func drawBench(rng *rand.Rand) *bench {
	between := func(lo, hi float64) float64 { return lo * math.Pow(hi/lo, rng.Float64()) }
	one := func(list ...string) string { return list[rng.IntN(len(list))] }
	b := &bench{cycle: between(6, 150), q: between(1, 200), length: between(1, 8), noise: between(0.0005, 0.05),
		before: []float64{0, 0.1, 0.3}[rng.IntN(3)], bits: []int{0, 0, 8, 8, 10, 12}[rng.IntN(6)],
		excitation: one("step", "step", "square wave", "pulse", "burst", "none"), part: one("capacitor", "resistor", "inductor"),
		averaged: rng.IntN(4) == 0, clipped: rng.IntN(10) == 0}
	if rng.IntN(2) == 0 {
		b.rise = b.cycle * between(0.02, 0.6)
	}
	if rng.IntN(5) == 0 {
		b.hum, b.humFrequency = between(0.003, 0.05), between(0.001, 0.1)
	}
	if rng.IntN(5) == 0 {
		b.highPass = between(0.0005, 0.02)
	}
	if rng.IntN(4) == 0 {
		b.lowPass = between(1, 8)
	}
	if b.excitation == "none" {
		b.before = 0
	}
	return b
}

// driven returns the drive of the circuit that is excited at start, and the samples
// that this adds to the record of n.
func (b *bench) driven(rng *rand.Rand, start float64, n int) (drive func(t float64) float64, more int) {
	ramp := func(t float64) float64 {
		if b.rise == 0 {
			return math.Ceil(math.Max(0, math.Min(1, t+1e-9)))
		}
		return math.Max(0, math.Min(1, t/b.rise))
	}
	w := 2 * math.Pi / b.cycle
	switch b.excitation {
	case "step":
		return func(t float64) float64 { return 1 - ramp(t-start) }, 0
	case "square wave":
		half := (float64(n) - start) / float64(2+rng.IntN(3))
		return func(t float64) float64 {
			k := math.Floor((t - start) / half)
			x := ramp(t - start - k*half)
			if int(k)%2 == 0 {
				x = 1 - x
			}
			return x
		}, 0
	case "pulse":
		width := b.cycle * (0.1 + 0.3*rng.Float64())
		return func(t float64) float64 { return ramp(t-start) - ramp(t-start-width) }, 0
	case "burst":
		length := math.Round(3+20*rng.Float64()) * b.cycle
		off, phase := 1+0.05*(rng.Float64()-0.5), 2*math.Pi*rng.Float64()
		return func(t float64) float64 {
			if t < start || t >= start+length {
				return 0
			}
			return math.Sin(w*off*(t-start)+phase) / b.q
		}, int(length)
	}
	return func(float64) float64 { return 0 }, 0
}

func (b *bench) record(rng *rand.Rand) []float64 {
	w := 2 * math.Pi / b.cycle
	n := int(math.Max(60, b.length*2*b.q/w))
	start := b.before*float64(n) + rng.Float64()
	n = min(6000, n+int(start))
	drive, more := b.driven(rng, start, n)
	r := &resonator{w: w, q: b.q, drive: drive, x: drive(-1)}
	if b.excitation == "none" {
		r.x, r.v = 1, w*rng.NormFloat64()
	}
	return b.converted(b.filtered(r, n+more), rng)
}

// filtered is what a probe with two corners shows of the circuit, sampled or
// averaged over each interval.
func (b *bench) filtered(r *resonator, n int) []float64 {
	const steps = 20
	const h = 1.0 / steps
	y := make([]float64, n)
	low := r.seen(b.part, 0)
	last, high := low, 0.0
	for i := range y {
		for k := range steps {
			t := float64(i) + float64(k)*h
			v := r.seen(b.part, t)
			if b.lowPass > 0 {
				low += h * r.w * b.lowPass * (v - low)
				v = low
			}
			if b.highPass > 0 {
				high += v - last - h*r.w*b.highPass*high
				last, v = v, high
			}
			if b.averaged {
				y[i] += v / steps
			} else if k == 0 {
				y[i] = v
			}
			r.advance(t, h)
		}
	}
	return y
}

// converted scales to -1 to 1, adds noise and hum, and passes a converter.
func (b *bench) converted(y []float64, rng *rand.Rand) []float64 {
	lo, hi := slices.Min(y), slices.Max(y)
	phase, top := 2*math.Pi*rng.Float64(), 1.3
	if b.clipped {
		top = 0.8
	}
	step := 2 * top / math.Pow(2, float64(b.bits))
	for i, v := range y {
		v = (v-lo)*2/(hi-lo) - 1 + b.noise*rng.NormFloat64() + b.hum*math.Sin(b.humFrequency*2*math.Pi/b.cycle*float64(i)+phase)
		if b.bits > 0 {
			v = step * math.Round(v/step)
		}
		y[i] = math.Max(-top, math.Min(top, v))
	}
	return y
}

// kinds names what the bench is to be counted under.
func (b *bench) kinds() []string {
	list := []string{"all", "excited by: " + b.excitation, "across the " + b.part, fmt.Sprintf("%d bits", b.bits)}
	for name, is := range map[string]bool{"clipped": b.clipped, "hum": b.hum > 0, "AC coupled": b.highPass > 0, "narrow probe": b.lowPass > 0,
		"slow edge": b.rise > 0, "averaged": b.averaged, "Q below 2": b.q < 2, "Q 2 to 5": b.q >= 2 && b.q < 5, "Q 5 to 20": b.q >= 5 && b.q < 20, "Q above 20": b.q >= 20} {
		if is {
			list = append(list, name)
		}
	}
	return list
}

// held counts how often the stated interval of 95 % holds the circuit's Q.
type held struct{ n, refused, all, good, allGood int }

func (h *held) add(r *Result, q float64) {
	h.n++
	if r.Status == Refused {
		h.refused++
		return
	}
	holds := math.Abs(r.Quantities.Q.Value-q) < 1.96*r.Quantities.Q.U
	if holds {
		h.all++
	}
	if r.Status == Good {
		h.good++
		if holds {
			h.allGood++
		}
	}
}

// TestStudyBenches draws benches by lot, thirty for each record of a study. No model
// knows of every corner of a probe: nine in ten good results are to hold the truth.
func TestStudyBenches(t *testing.T) {
	counts := map[string]*held{}
	for seed := range uint64(30 * records(10)) {
		rng := rand.New(rand.NewPCG(seed, 77))
		b := drawBench(rng)
		r := Analyze(channel(b.record(rng), 0, 1), Options{})
		for _, kind := range b.kinds() {
			if counts[kind] == nil {
				counts[kind] = &held{}
			}
			counts[kind].add(r, b.q)
		}
	}
	w := tabwriter.NewWriter(t.Output(), 0, 0, 2, ' ', 0)
	fmt.Fprintln(w, "benches\trecords\trefused\t95% Q\tgood\t95% Q")
	for _, kind := range slices.Sorted(maps.Keys(counts)) {
		h := counts[kind]
		fmt.Fprintf(w, "%s\t%d\t%d\t%.1f\t%d\t%.1f\n", kind, h.n, h.refused,
			100*float64(h.all)/float64(h.n-h.refused), h.good, 100*float64(h.allGood)/float64(h.good))
	}
	w.Flush()
	if h := counts["all"]; float64(h.allGood) < 0.88*float64(h.good) {
		t.Errorf("of %d good results %d hold the truth", h.good, h.allGood)
	}
}
