package capture

import (
	"math"
	"slices"
	"strings"
)

// A stamp may stand in several columns: a date, a clock time, AM or PM, and a
// fraction of the second.

// stampParts are the columns, from 0, whose texts make a date and clock time, and
// what stands between them when they are joined.
type stampParts struct {
	columns  []int
	between  string // a byte for each column but the last
	fraction int    // column of a fraction of the second, -1: none
	shift    int    // power of ten of the fraction's unit in seconds
}

// text is the date and clock time of a row; without parts it stands in column k.
func (s *stampParts) text(cells []cell, k int) []byte {
	if s == nil {
		return cells[k].text
	}
	var joined []byte
	for n, i := range s.columns {
		if n > 0 {
			joined = append(joined, s.between[n-1])
		}
		if i < len(cells) {
			joined = append(joined, cells[i].text...)
		}
	}
	return joined
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
	joinCalendar(h, cols)
	for k := range cols {
		if cols[k].kind != kindStamp {
			continue
		}
		s := cols[k].parts
		if s == nil {
			s = h.wordsBeside(cols, k)
		}
		s.fraction = -1
		h.join(cols, k, s)
		if next := max(k, s.columns[len(s.columns)-1]) + 1; next < len(cols) && h.isFraction(cols, k, next, s) {
			s.fraction = next
			h.join(cols, k, s)
		}
		if len(s.columns) == 1 && s.fraction < 0 {
			cols[k].parts = nil
		}
	}
}

// wordsBeside finds date and AM or PM beside the clock times of column k.
func (h *head) wordsBeside(cols []column, k int) *stampParts {
	s := &stampParts{columns: []int{k}}
	last := k
	if !h.every(k, func(text []byte) bool { t, _ := parseStamp(text, false); return t.period == 0 }) {
		if date := h.beside(cols, k, isDate); date >= 0 {
			s.columns, s.between = []int{date, k}, " "
			last = max(last, date)
		}
	}
	if noon := last + 1; noon < len(cols) && h.beside(cols, last, isNoon) == noon {
		s.columns, s.between = append(s.columns, noon), s.between+" "
	}
	return s
}

// join makes the columns of s parts of the stamps of column k.
func (h *head) join(cols []column, k int, s *stampParts) {
	cols[k].kind, cols[k].parts = kindStamp, s
	for _, i := range append([]int{s.fraction}, s.columns...) {
		if i >= 0 && i != k {
			cols[i].part = true
			cols[i].is(RoleTime, "it goes with the clock times of column %d", k+1)
		}
	}
	for i, r := range h.sample {
		cols[k].values[i] = math.NaN()
		if t, ok := h.stamp(r.cells, k, s, false); ok && k < len(r.cells) {
			cols[k].values[i] = t.since(0)
		}
	}
}

// calendar are the names of columns of numbers that make a date or a clock time, in
// order, each with its largest number.
var calendar = []struct {
	names string
	most  float64
}{
	{" year yyyy ", 9999}, {" month mon mm ", 12}, {" day dd ", 31},
	{" hour hours hr hh h ", 24}, {" minute minutes min mm m ", 60}, {" second seconds sec ss s ", 61},
}

// joinCalendar finds hours, minutes and seconds in columns of their own, with year,
// month and day before them or a date, and dates and times as numbers: 20310304,
// 115930.
func joinCalendar(h *head, cols []column) {
	is := func(i, field int) bool {
		c := &cols[i]
		if c.kind != kindNumber || c.Role != "" || !c.whole && field != 5 || !strings.Contains(calendar[field].names, " "+fold(c.Name)+" ") {
			return false
		}
		lo, hi := extremes(c.values)
		return lo >= 0 && hi <= calendar[field].most
	}
	three := func(i, field int) bool {
		return i >= 0 && i+2 < len(cols) && is(i, field) && is(i+1, field+1) && is(i+2, field+2)
	}
	for i := range cols {
		switch {
		case three(i, 3) && three(i-3, 0):
			h.join(cols, i+2, &stampParts{columns: []int{i - 3, i - 2, i - 1, i, i + 1, i + 2}, between: "-- ::", fraction: -1})
		case three(i, 3):
			s := &stampParts{columns: []int{i, i + 1, i + 2}, between: "::", fraction: -1}
			if date := h.beside(cols, i, isDate); date == i-1 && date >= 0 {
				s.columns, s.between = append([]int{date}, s.columns...), " "+s.between
			}
			h.join(cols, i+2, s)
		case i > 0 && (dateName(cols[i-1].Name) || cols[i-1].Name == "") && h.compact(cols, i-1, i):
			h.join(cols, i, &stampParts{columns: []int{i - 1, i}, between: " ", fraction: -1})
		}
	}
}

// compact reports columns of numbers that are dates and clock times without strokes.
func (h *head) compact(cols []column, date, clock int) bool {
	if cols[date].kind != kindNumber || cols[clock].kind != kindNumber || !cols[date].whole {
		return false
	}
	s := &stampParts{columns: []int{date, clock}, between: " ", fraction: -1}
	good, rising, last := 0, 0, math.Inf(-1)
	h.eachRow(func(_ line, cells []cell) {
		if t, ok := h.stamp(cells, clock, s, false); ok {
			if good++; t.since(0) > last {
				rising++
			}
			last = t.since(0)
		}
	})
	return few(len(h.sample)-good, len(h.sample)) && few(good-rising, good)
}

// every reports that the cells of a column in the first rows are as asked, all but
// a few that may be broken.
func (h *head) every(col int, as func(text []byte) bool) bool {
	not, filled := 0, 0
	h.eachRow(func(_ line, cells []cell) {
		if col >= len(cells) || cells[col].blank() { // of a channel that ends early
			return
		}
		if filled++; !as(cells[col].text) {
			not++
		}
	})
	return filled >= min(fewestRows, len(h.sample)) && few(not, filled)
}

// few of the first rows may be broken: the data pass says so.
func few(broken, rows int) bool { return 20*broken <= rows }

// beside is the column of words to the right or left of column k that are all as
// asked; -1 if there is none.
func (h *head) beside(cols []column, k int, as func(text []byte) bool) int {
	for _, i := range []int{k - 1, k + 1} {
		if i >= 0 && i < len(cols) && (cols[i].kind == kindText || cols[i].kind == kindBlank) && cols[i].Role == "" && h.every(i, as) {
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
	for len(clock) > 0 && math.IsNaN(clock[len(clock)-1]) {
		clock = clock[:len(clock)-1] // a channel that ends early
	}
	sums = sums[:len(clock)]
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
