package capture

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// A column is a column of the table with what its role was decided from.
type column struct {
	Column
	kind   kind
	unit   unit        // base "" when nothing names it
	values []float64   // of the first rows, as printed (quantities in base units); NaN where there is none
	whole  bool        // all of them are printed without fraction and exponent
	time   int         // index of the column with the time of this one, -1: none
	parts  *stampParts // columns that go with this one of clock times
	part   bool        // it is one of them
	codes  *codeScale  // what its whole numbers are worth, nil where nothing says it
}

func (c *column) is(r Role, why string, args ...any) {
	c.Role, c.Why = r, fmt.Sprintf(why, args...)
}

// newColumns reads the first rows into columns that have no role yet.
func newColumns(h *head, hd heading) []column {
	cols := make([]column, len(h.kinds))
	for i := range cols {
		cols[i] = column{Column: Column{Number: i + 1, Name: hd.names[i], Unit: unitName(hd.units[i])},
			kind: h.kinds[i], unit: hd.units[i], whole: true, time: -1}
		if cols[i].kind == kindMissing {
			cols[i].kind = kindNumber // over range so far
		}
	}
	h.eachRow(func(_ line, cells []cell) {
		for i := range cols {
			if i < len(cells) {
				cols[i].look(h.dialect, cells[i])
			} else {
				cols[i].values = append(cols[i].values, math.NaN())
			}
		}
	})
	takeUnitColumns(h, cols)
	joinStamps(h, cols)
	return cols
}

// takeUnitColumns takes the unit of a column from the one behind it, which says
// it in every row.
func takeUnitColumns(h *head, cols []column) {
	for i := 1; i < len(cols); i++ {
		c, of := &cols[i], &cols[i-1]
		if c.kind != kindText || c.Name != "" && !strings.HasPrefix(fold(c.Name), "unit") || of.kind != kindNumber || of.unit.base != "" {
			continue
		}
		text, same := "", true
		h.eachRow(func(_ line, cells []cell) {
			if i < len(cells) {
				same = same && (text == "" || text == string(cells[i].text))
				text = string(cells[i].text)
			}
		})
		if u, ok := parseUnit(toUTF8([]byte(text))); ok && same {
			of.unit, of.Unit = u, unitName(u)
			c.is(RoleMetadata, "the unit of column %d in every row", i)
		}
	}
}

// look appends the value of a cell of the first rows.
func (c *column) look(d dialect, x cell) {
	v := math.NaN()
	if n, text, ok := d.number(x); ok {
		v = n.float(0, text, d.mark)
		c.whole = c.whole && n.exp == 0
	} else if n, u, text, ok := d.quantity(x); ok && c.kind == kindQuantity {
		v = n.float(u.exp, text, d.mark)
		if c.unit.exp, c.whole = 0, false; u.base != "" {
			c.unit.base = u.base
		}
	} else if s, ok := parseStamp(x.text, false); ok && c.kind == kindStamp {
		v = s.since(0)
	}
	c.values = append(c.values, v)
}

// unitName writes a unit with its prefix.
func unitName(u unit) string {
	switch u.level = 0; u {
	case minute:
		return "min"
	case hour:
		return "h"
	case day:
		return "d"
	case unit{base: u.base}:
		return u.base
	}
	for _, p := range prefixes {
		if p.exp == u.exp && u.base != "" && u.many == 0 {
			return p.text + u.base
		}
	}
	return fmt.Sprintf("%g %s", u.times(), u.base)
}

// assignRoles gives every column its role, from its name, unit and first
// values; interval gives the declared one for a column. finishRoles corrects
// the roles by all values.
func assignRoles(h *head, cols []column, interval func(col int) declared) {
	for i := range cols {
		c := &cols[i]
		switch {
		case c.Role != "":
		case c.kind == kindBlank && h.metadataBeside(i) && (c.Name == "" || meanings[fold(c.Name)] != meansNothing):
			c.is(RoleMetadata, "words or numbers beside the first samples only")
		case c.kind == kindBlank && h.metadataBeside(i):
			c.is(RoleText, "a few cells only hold anything")
		case c.kind == kindBlank:
			c.is(RoleBlank, "no cell in it holds anything")
		case c.kind == kindText && c.Name == "" && h.metadataBeside(i):
			c.is(RoleMetadata, "words or numbers beside the first samples only")
		case c.kind == kindText:
			c.is(RoleText, "words instead of numbers")
		}
	}
	assignSpectra(cols)
	assignTime(cols, interval)
	for i := range cols {
		if c := &cols[i]; c.Role == "" {
			if of := deviationOf(cols, i); of >= 0 {
				c.is(RoleDeviation, "its name is %q beside %q", c.Name, cols[of].Name)
			} else {
				assignByName(c)
			}
		}
	}
	assignDeviations(cols)
	for i, last := 0, -1; i < len(cols); i++ {
		switch {
		case cols[i].Role == RoleTime && !cols[i].part:
			last = i
		case cols[i].Role == "":
			cols[i].is(RoleChannel, "numbers")
			cols[i].time = last
		}
	}
	// Channels left of the only time column belong to it as well.
	for i := range cols {
		if cols[i].Role == RoleChannel && cols[i].time < 0 {
			cols[i].time = firstWithRole(cols, RoleTime)
		}
	}
}

func firstWithRole(cols []column, r Role) int {
	for i := range cols {
		if cols[i].Role == r && !cols[i].part {
			return i
		}
	}
	return -1
}

// metadataBeside reports text in a column that ends before the first rows do.
func (h *head) metadataBeside(col int) bool {
	row, lastText, found := 0, 0, false
	h.eachRow(func(_ line, cells []cell) {
		row++
		if col < len(cells) && !cells[col].blank() {
			lastText, found = row, true
		}
	})
	return found && lastText < row
}

// sameValues reports columns equal in every row, NaN counting as equal.
func sameValues(a, b []float64) bool {
	if len(a) != len(b) {
		return false
	}
	for i, v := range a {
		if v != b[i] && !(math.IsNaN(v) && math.IsNaN(b[i])) {
			return false
		}
	}
	return true
}

// assignByName gives a role to a column whose name says that it is no channel.
func assignByName(c *column) {
	if m := meanings[fold(c.Name)]; m == meansInterval || m == meansStart {
		c.is(RoleMetadata, "its name is %q", c.Name)
		return
	}
	if deviationName(c.Name) {
		c.is(RoleDeviation, "its name is %q", c.Name)
	}
	if segmentName(c.Name) && c.whole {
		c.is(RoleMetadata, "its name is %q, and it holds whole numbers", c.Name)
	}
	if logicName(c.Name) && c.whole {
		c.is(RoleLogic, "its name is %q, and it holds whole numbers", c.Name)
	}
}

// deviationName reports a name with a word for error or deviation.
func deviationName(name string) bool {
	return slices.ContainsFunc(words(name), func(w string) bool {
		switch w {
		case "error", "err", "errors", "std", "stdev", "stddev", "sigma", "deviation", "dev", "sd", "uncertainty", "unc", "±", "sem":
			return true
		}
		return false
	})
}

// deviationOf returns the column whose standard deviation a column is by its
// name, dV or uV beside V, and by its values; -1 if there is none.
func deviationOf(cols []column, i int) int {
	for j := range cols {
		name, of := cols[i].Name, cols[j].Name
		if i == j || of == "" || len(name) <= len(of) || !strings.HasSuffix(name, of) {
			continue
		}
		switch strings.Trim(name[:len(name)-len(of)], " _") {
		case "d", "u", "s", "e", "Δ", "δ", "σ", "D", "U", "S", "E":
			if small(cols[i].values, cols[j].values) {
				return j
			}
		}
	}
	return -1
}

// small reports values that are nowhere negative and small against the span of
// those they stand beside.
func small(u, values []float64) bool {
	lo, hi, largest := math.Inf(1), math.Inf(-1), 0.0
	for i, v := range values {
		if u[i] < 0 {
			return false
		}
		if !math.IsNaN(v) {
			lo, hi = min(lo, v), max(hi, v)
		}
		if !math.IsNaN(u[i]) {
			largest = max(largest, u[i])
		}
	}
	return largest < (hi-lo)/5
}

func words(name string) []string {
	return strings.FieldsFunc(strings.ToLower(name), func(r rune) bool { return strings.ContainsRune(" _-.,()[]{}<>/:", r) })
}

func logicName(name string) bool {
	w := fold(name)
	if strings.HasPrefix(w, "digital") || strings.HasPrefix(w, "logic") || strings.HasPrefix(w, "bit") || strings.HasPrefix(w, "pod") {
		return true
	}
	return len(w) > 1 && w[0] == 'd' && w[1]-'0' <= 9 && strings.Trim(w, "d0123456789") == "" // D3, D7-D0
}

// segmentName reports a column that numbers the records of a file.
func segmentName(name string) bool {
	switch fold(name) {
	case "segment", "seg", "segmentnumber", "segmentno", "segmentindex", "frame", "framenumber", "burst", "record", "recordnumber", "acquisition", "event":
		return true
	}
	return false
}

// assignDeviations finds columns of standard deviations in a table without
// names: x, u(x), y, u(y), … or x, y, u(y), each u positive throughout and
// small against the span of the values it stands behind.
func assignDeviations(cols []column) {
	var numeric []int
	for i := range cols {
		if cols[i].Name != "" {
			return
		}
		if cols[i].kind == kindNumber && cols[i].Role != RoleIndex {
			numeric = append(numeric, i)
		}
	}
	var of [][2]int // deviation, values
	switch n := len(numeric); {
	case n >= 4 && n%2 == 0:
		for i := 0; i < n; i += 2 {
			of = append(of, [2]int{numeric[i+1], numeric[i]})
		}
	case n == 3:
		of = append(of, [2]int{numeric[2], numeric[1]})
	}
	for _, pair := range of {
		if cols[pair[0]].Role != "" || !deviates(cols[pair[0]].values, cols[pair[1]].values) {
			return
		}
	}
	for _, pair := range of {
		cols[pair[0]].is(RoleDeviation, "positive throughout and small against column %d, as every second column is", pair[1]+1)
	}
}

func deviates(u, values []float64) bool {
	varies := false
	for _, x := range u {
		if !(x > 0) {
			return false
		}
		varies = varies || x != u[0]
	}
	return varies && small(u, values)
}
