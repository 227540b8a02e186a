package capture

import "fmt"

// A table may have a row for each channel at each time, which a column of words or
// numbers tells apart. Its samples are those of several channels in one column: they
// are refused.

// tidy refuses a table whose times stand in several rows each, of which another
// column says the same every time, but different things from row to row.
func (d *layoutDesign) tidy() *Error {
	k := firstWithRole(d.columns, RoleTime)
	if k < 0 {
		return nil
	}
	times := d.columns[k].values
	for i := range d.columns {
		c := &d.columns[i]
		switch {
		case c.Role == RoleText || c.Role == RoleChannel && c.whole || c.Role == RoleMetadata:
		default:
			continue
		}
		if n := d.head.channelsIn(i, times); n > 1 {
			name := ""
			if c.Name != "" {
				name = " " + quote(c.Name)
			}
			return &Error{Err: ErrNoTime, Line: d.head.sample[1].line.number, Column: k + 1, Found: fmt.Sprintf("each time in %d rows, which column %d%s tells apart", n, i+1, name),
				Expected: "one row for each time, and a column for each channel"}
		}
	}
	return nil
}

// channelsIn is the number of rows of each time, where that is the same for all times
// of the first rows, column i holds as many different things in them, and the same
// from one time to the next; else 0. Ends of peak detection are joined elsewhere, and
// zeros and ones are logic.
func (h *head) channelsIn(i int, times []float64) int {
	var labels []string
	h.eachRow(func(_ line, cells []cell) {
		label := ""
		if i < len(cells) {
			label = string(cells[i].text)
		}
		labels = append(labels, label)
	})
	n := 1
	for n < len(times) && times[n] == times[0] {
		n++
	}
	if n < 2 || n > 16 || len(times) < 4*n {
		return 0
	}
	seen := map[string]bool{}
	for row, label := range labels {
		if label == "" || label != labels[row%n] || times[row] != times[row-row%n] || row%n == 0 && row > 0 && times[row] == times[row-1] {
			return 0
		}
		seen[label] = true
	}
	if _, ends := peakPair(labels[0], labels[1]); len(seen) != n || n == 2 && (ends && h.kinds[i] == kindText || seen["0"] && seen["1"]) {
		return 0
	}
	return n
}
