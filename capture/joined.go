package capture

import (
	"bytes"
	"math"
	"slices"
	"strings"
)

// A stamp may stand in several columns: a date, a clock time, AM or PM, and a
// fraction of the second.

// stampParts are the columns, from 0, that belong to the clock time between or
// beside them; -1 where there is none.
type stampParts struct {
	date, noon, fraction int
	shift                int // power of ten of the fraction's unit in seconds
}

// all are the columns that there are.
func (s *stampParts) all() []int {
	return slices.DeleteFunc([]int{s.date, s.noon, s.fraction}, func(i int) bool { return i < 0 })
}

// stampText is the date and clock time of a row whose clock time is in column k:
// the words of several columns are joined by a blank.
func (s *stampParts) text(cells []cell, k int) []byte {
	if s == nil {
		return cells[k].text
	}
	var words [][]byte
	for _, i := range []int{s.date, k, s.noon} {
		if i >= 0 && i < len(cells) {
			words = append(words, cells[i].text)
		}
	}
	return bytes.Join(words, []byte{' '})
}

// shown is the stamp as it is printed.
func (s *stampParts) shown(cells []cell, k int) string {
	text := string(s.text(cells, k))
	if s != nil && s.fraction >= 0 && s.fraction < len(cells) {
		text += " " + string(cells[s.fraction].text)
	}
	return quote(text)
}

// stamp reads the stamp of a row whose clock time is in column k.
func (d dialect) stamp(cells []cell, k int, s *stampParts, dayFirst bool) (stamp, bool) {
	t, ok := parseStamp(s.text(cells, k), dayFirst)
	if !ok || s == nil || s.fraction < 0 {
		return t, ok
	}
	if s.fraction >= len(cells) {
		return t, false
	}
	n, digits, ok := d.number(cells[s.fraction])
	if !ok {
		return t, false
	}
	t.fraction += n.float(s.shift, digits, d.mark)
	t.places = max(t.places, int32(max(0, min(18, -n.exp-s.shift))))
	return t, t.fraction >= 0 && t.fraction < 1
}

// joinStamps finds the columns that belong to those of clock times.
func joinStamps(h *head, cols []column) {
	for k := range cols {
		if cols[k].kind != kindStamp {
			continue
		}
		s := &stampParts{date: -1, noon: -1, fraction: -1}
		if !h.every(k, func(text []byte) bool { t, _ := parseStamp(text, false); return t.period == 0 }) {
			s.date = h.beside(cols, k, isDate)
		}
		next := max(k, s.date) + 1
		if next < len(cols) && h.beside(cols, next-1, isNoon) == next {
			s.noon = next
			next++
		}
		if next < len(cols) && h.isFraction(cols, k, next, s) {
			s.fraction = next
		}
		if len(s.all()) == 0 {
			continue
		}
		cols[k].parts = s
		for _, i := range s.all() {
			cols[i].part = true
			cols[i].is(RoleTime, "it goes with the clock times of column %d", k+1)
		}
		for i, r := range h.sample {
			if t, ok := h.stamp(r.cells, k, s, false); ok && k < len(r.cells) {
				cols[k].values[i] = t.since(0)
			}
		}
	}
}

// every reports that the cells of a column in the first rows are as asked, all but
// a few that may be broken.
func (h *head) every(col int, as func(text []byte) bool) bool {
	not := 0
	h.eachRow(func(_ line, cells []cell) {
		if col >= len(cells) || cells[col].blank() || !as(cells[col].text) {
			not++
		}
	})
	return few(not, len(h.sample))
}

// few of the first rows may be broken: the data pass says so.
func few(broken, rows int) bool { return 20*broken <= rows }

// beside is the column of words to the right or left of column k that are all as
// asked; -1 if there is none.
func (h *head) beside(cols []column, k int, as func(text []byte) bool) int {
	for _, i := range []int{k - 1, k + 1} {
		if i >= 0 && i < len(cols) && cols[i].kind == kindText && cols[i].Role == "" && h.every(i, as) {
			return i
		}
	}
	return -1
}

// isDate reports a date without a clock time.
func isDate(text []byte) bool {
	t, ok := parseStamp(append(slices.Clip(text), " 0:00:00"...), false)
	return ok && t.period == 0
}

func isNoon(text []byte) bool {
	switch strings.ToLower(string(text)) {
	case "am", "pm":
		return true
	}
	return false
}

// fractions are names of columns with a fraction of the second, and its unit.
var fractions = map[string]int{
	"fraction": 0, "frac": 0, "subsecond": 0, "subseconds": 0, "subsec": 0, "fractionalsecond": 0, "fractionalseconds": 0,
	"ms": -3, "msec": -3, "millis": -3, "millisec": -3, "millisecs": -3, "millisecond": -3, "milliseconds": -3,
	"us": -6, "µs": -6, "μs": -6, "usec": -6, "micros": -6, "microsec": -6, "microsecs": -6, "microsecond": -6, "microseconds": -6,
	"ns": -9, "nsec": -9, "nanos": -9, "nanosec": -9, "nanosecond": -9, "nanoseconds": -9,
}

// isFraction reports a column i of fractions of the seconds in column k, and sets
// their unit: its name says it, or it begins anew with each new second.
func (h *head) isFraction(cols []column, k, i int, s *stampParts) bool {
	c := &cols[i]
	if c.kind != kindNumber || c.Role != "" || !h.every(k, func(text []byte) bool { t, _ := parseStamp(text, false); return t.places == 0 }) {
		return false
	}
	shift, named := fractions[fold(c.Name)]
	var shifts []int
	switch {
	case named && shift < 0:
		shifts = []int{shift}
	case !c.whole:
		shifts = []int{0}
	default:
		shifts = append(h.paddedTo(i), -3, -6, -9)
	}
	for _, shift := range shifts {
		if rising, even, anew := h.goesOn(cols, k, c.values, shift); rising && (named || anew && (even || !c.whole || shift == shifts[0] && len(shifts) > 3)) {
			s.shift = shift
			return true
		}
	}
	return false
}

// paddedTo is the power of ten of whole numbers that are all printed to as many
// digits, zeros in front: 007.
func (h *head) paddedTo(col int) []int {
	width, padded := 0, false
	same := h.every(col, func(text []byte) bool {
		padded = padded || text[0] == '0' && len(text) > 1
		if width == 0 {
			width = len(text)
		}
		return len(text) == width
	})
	if same && padded {
		return []int{-width}
	}
	return nil
}

// goesOn adds fractions to the clock times of column k: whether each is one, and
// the sums rise from row to row, evenly; and whether the fractions fall whenever
// the second is a new one, which it is at least once.
func (h *head) goesOn(cols []column, k int, fractions []float64, shift int) (rising, even, anew bool) {
	clock, unit := cols[k].values, math.Pow10(shift)
	sums := make([]float64, len(clock))
	var falls, odd, seconds, steady int
	for i, t := range clock {
		f := fractions[i] * unit
		if sums[i] = t + f; !(f >= 0 && f < 1) || i > 0 && !(sums[i] > sums[i-1]) {
			falls++
		}
		if i > 0 && t > clock[i-1] {
			seconds++
			if !(fractions[i] < fractions[i-1]) {
				steady++
			}
		}
	}
	step := medianStep(sums)
	for i := 1; i < len(sums); i++ {
		if !(math.Abs(sums[i]-sums[i-1]-step) < 0.1*step) {
			odd++
		}
	}
	n := len(clock)
	return few(falls, n), few(odd, n), seconds > 0 && few(steady, n)
}
