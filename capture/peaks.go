package capture

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// Peak detection keeps the minimum and the maximum of each interval. They are
// replaced by their mean: a ring that the sampling resolves lies between them,
// and one that it does not resolve leaves no false envelope.

// joinPeaks joins minimum and maximum in columns of their own.
func (d *layoutDesign) joinPeaks(channels []int, values func(int) []float64) {
	for k := 1; k < len(channels); k++ {
		i, j := channels[k-1], channels[k]
		a, b := &d.columns[i], &d.columns[j]
		stem, ok := peakPair(a.Name, b.Name)
		if !ok || a.Role != RoleChannel || b.Role != RoleChannel || d.plan.steps[i].axis != d.plan.steps[j].axis {
			continue
		}
		lo, hi := values(i), values(j)
		if !ordered(lo, hi) && !ordered(hi, lo) {
			continue
		}
		for n := range lo {
			lo[n] = 0.5*lo[n] + 0.5*hi[n]
		}
		a.Why = fmt.Sprintf("mean of the minimum and maximum of peak detection in columns %d and %d", i+1, j+1)
		a.Name = stem
		b.is(RoleDuplicate, "other end of the peak detection of column %d; the channel is the mean of both", i+1)
	}
}

// peakPair reports names that differ at most in words for minimum and maximum,
// and what they have in common.
func peakPair(a, b string) (string, bool) {
	strip := func(name string) string {
		return strings.Join(slices.DeleteFunc(words(name), func(w string) bool {
			switch w {
			case "min", "max", "minimum", "maximum", "low", "high", "lo", "hi", "peak", "detect", "pk", "pkdetect", "peakdetect":
				return true
			}
			return false
		}), " ")
	}
	x := strip(a)
	if x != strip(b) || a == "" || b == "" {
		return "", false
	}
	if n := strings.Index(strings.ToLower(a), x); x != "" && n >= 0 && n+len(x) <= len(a) {
		return a[n : n+len(x)], true
	}
	return x, true
}

func ordered(lo, hi []float64) bool {
	for i := range lo {
		if lo[i] > hi[i] {
			return false
		}
	}
	return true
}

// joinPeakRows joins minimum and maximum in alternating rows: at the same time,
// or at times half an interval apart where the file says that they are those, or their
// means hold the signal. A ring of two samples a cycle alternates as well, but its means
// hold nothing.
func (d *layoutDesign) joinPeakRows(c *Capture, t *table, k int) {
	var on []int // columns of samples that go with the time column
	alternate := 0
	sure := repeated(t.spans[k]) || d.saysPeaks()
	for i, s := range d.plan.steps {
		if s.op != opValue || s.axis != k {
			continue
		}
		v := t.values[s.to]
		switch {
		case alternates(v) && (sure || meansHold(v)):
			alternate++
		case zerosAndOnes(v) || equalPairs(v):
		default:
			return
		}
		on = append(on, i)
	}
	if alternate == 0 || d.columns[d.timeColumn(k)].Role != RoleTime {
		return
	}
	for _, i := range on {
		s, col := d.plan.steps[i], &d.columns[i]
		v := t.values[s.to]
		logic := zerosAndOnes(v)
		t.missing[s.to] = 0
		for n := range len(v) / 2 {
			if v[n] = 0.5*v[2*n] + 0.5*v[2*n+1]; logic {
				v[n] = v[2*n]
			}
			if math.IsNaN(v[n]) {
				t.missing[s.to]++
			}
		}
		t.values[s.to] = v[:len(v)/2]
		col.Why = "mean of the minimum and maximum of peak detection in every two rows"
	}
	t.spans[k] = []span{halved(t.spans[k])}
	c.note(UnevenTime, Note, "every two rows hold the minimum and the maximum of peak detection; the samples are their means",
		"acquire without peak detection, which hides the phase of a fast ring")
}

// alternates reports samples of which every second one is the larger, or every
// second one the smaller: no step within the pairs goes the other way, and many
// between them do. Of a ring sampled without peak detection both go both ways,
// of a ramp neither does.
func alternates(v []float64) bool {
	if len(v)%2 != 0 {
		return false
	}
	var within, between struct{ up, down int }
	for i := 1; i < len(v); i++ {
		steps := &within
		if i%2 == 0 {
			steps = &between
		}
		if v[i] > v[i-1] {
			steps.up++
		} else if v[i] < v[i-1] {
			steps.down++
		}
		if within.up > 0 && within.down > 0 {
			return false
		}
	}
	n, back := within.up, between.down
	if n == 0 {
		n, back = within.down, between.up
	}
	return n >= fewestPairs && 4*n >= len(v) && 4*back >= n
}

// repeated reports stamps most of which come twice.
func repeated(spans []span) bool {
	n, twice := 0, 0
	for _, s := range spans {
		n, twice = n+s.n, twice+s.zeroSteps
	}
	return 3*twice > n
}

// saysPeaks reports a preamble or a heading that tells of peak detection.
func (d *layoutDesign) saysPeaks() bool {
	lines := d.headingLines()
	for _, l := range d.head.preambleLines() {
		lines = append(lines, toUTF8(l.text))
	}
	return slices.ContainsFunc(lines, func(line string) bool {
		for _, word := range []string{"peakdetect", "pkdetect", "minmax"} {
			if _, rest, ok := strings.Cut(fold(line), word); ok {
				rest = strings.TrimPrefix(strings.TrimPrefix(rest, "ion"), "mode")
				return !slices.Contains([]string{"0", "off", "no", "false", "disabled"}, rest)
			}
		}
		return false
	})
}

// meansHold reports samples whose means of every two scatter more than the two
// differ.
func meansHold(v []float64) bool {
	n, sum, squares, apart := 0.0, 0.0, 0.0, 0.0
	for i := 1; i < len(v); i += 2 {
		if mean, half := 0.5*v[i-1]+0.5*v[i], 0.5*v[i]-0.5*v[i-1]; !math.IsNaN(mean) {
			n, sum, squares, apart = n+1, sum+mean, squares+mean*mean, apart+half*half
		}
	}
	return squares-sum*sum/n > apart
}

// fewestPairs that all go the same way by chance only once in 30,000 records of noise.
const fewestPairs = 16

// equalPairs reports samples that are the same within every two rows.
func equalPairs(v []float64) bool {
	for i := 1; i < len(v); i += 2 {
		if v[i] != v[i-1] && !(math.IsNaN(v[i]) && math.IsNaN(v[i-1])) {
			return false
		}
	}
	return true
}

// halved is the span of the means of every two stamps.
func halved(spans []span) span {
	h := span{exp: math.MaxInt32}
	for _, s := range spans {
		h.exp, h.digits, h.period, h.wraps = min(h.exp, s.exp), max(h.digits, s.digits), s.period, s.wraps
	}
	t := (&clock{spans: spans}).times()
	for i := 0; i+1 < len(t); i += 2 {
		h.stamps = append(h.stamps, t[i]+(t[i+1]-t[i])/2)
	}
	h.n = len(h.stamps)
	h.last = h.stamps[h.n-1]
	h.finish()
	h.release()
	return h
}
