package capture

// A store keeps columns of samples while their number is not known yet: in
// segments, of which a good estimate makes one enough. Chunks write into it in
// parallel, each at the place that the count of its lines gives it.
type store struct {
	columns  int
	segments []*segment
}

type segment struct {
	columns [][]float64
	used    int // rows handed out
	chunks  []*chunk
}

// reserve gives chunk c room for its lines; expected is the number of rows
// still to come, as far as anybody knows.
func (s *store) reserve(c *chunk, expected int) {
	var g *segment
	if n := len(s.segments); n > 0 {
		g = s.segments[n-1]
	}
	if g == nil || s.columns > 0 && len(g.columns[0])-g.used < c.lines {
		g = &segment{columns: make([][]float64, s.columns)}
		for k := range g.columns {
			g.columns[k] = make([]float64, max(expected, c.lines))
			hugePages(g.columns[k])
		}
		s.segments = append(s.segments, g)
	}
	c.dst = make([][]float64, s.columns)
	for k := range c.dst {
		c.dst[k] = g.columns[k][g.used : g.used+c.lines : g.used+c.lines]
	}
	g.used += c.lines
	g.chunks = append(g.chunks, c)
}

// gather returns the columns whole, each of rows samples.
func (s *store) gather(rows int) [][]float64 {
	out := make([][]float64, s.columns)
	for k := range out {
		if len(s.segments) > 1 {
			out[k] = make([]float64, rows)
			hugePages(out[k])
		} else {
			out[k] = s.segments[0].columns[k][:rows:rows]
		}
		at := 0
		for _, g := range s.segments {
			for _, c := range g.chunks {
				// Moves down in place over the room that blank lines left.
				at += copy(out[k][at:], c.dst[k][:c.rows])
				c.dst[k] = nil
			}
			g.columns[k] = nil
		}
	}
	return out
}
