package capture

import (
	"bytes"
	"errors"
	"io"
	"slices"
)

// Some programs write every channel into a line of its own, its name and then all its
// samples. Such a table lies on its side: its text is turned before anything is looked
// for in it, so that all that follows sees a table that stands. Lines above it stay.

const (
	turnedMost = 32 << 20 // bytes of text that are turned, in memory
	turnedHead = 16 << 10 // bytes that show whether to read so much
	turnedRows = 64       // lines that may be such a table, and what stands above it
	wideLeast  = 16       // cells of a line of samples
	wideRatio  = 4        // cells in it for each line of the text
)

// A turned says where the lines and columns of a turned text stand in the file.
type turned struct {
	dialect
	above []line // the lines above the table
	rows  []line // those that became columns
}

// turn replaces the text by the turned one where it lies on its side; it returns nil
// where it stands.
func (s *source) turn() (*turned, error) {
	t, whole, err := s.lookTurned(turnedHead)
	if t != nil && !whole && s.size() <= turnedMost {
		t, whole, err = s.lookTurned(turnedMost)
	}
	if err != nil {
		return nil, s.readError(err)
	}
	if t == nil || !whole {
		return nil, nil
	}
	s.text, s.plain = bytes.NewReader(t.upright()), false
	return t, nil
}

// lookTurned looks at up to most bytes of the text, which stay there to be read; whole
// says that it ends with them. Of a text that goes on beyond all that is turned there
// is nothing to be seen.
func (s *source) lookTurned(most int) (t *turned, whole bool, err error) {
	var pieces [][]byte
	var again []io.Reader
	for n := 0; n < most && !whole && err == nil; {
		piece := make([]byte, min(most-n, max(turnedHead, n)))
		var k int
		k, whole, err = fill(s.text, piece)
		n += k
		pieces, again = append(pieces, piece[:k]), append(again, bytes.NewReader(piece[:k]))
	}
	s.text = io.MultiReader(append(again, s.text)...)
	if err != nil || !whole && most > turnedHead {
		return nil, false, err
	}
	return findTurned(bytes.Join(pieces, nil), whole), whole, nil
}

// findTurned finds a table that lies on its side: few lines with many numbers each, and
// above them none so wide. nil when the text is none.
func findTurned(text []byte, whole bool) *turned {
	term := byte('\n')
	if bytes.IndexByte(text, '\n') < 0 {
		term = '\r'
	}
	if bytes.Count(text, []byte{term}) > turnedRows {
		return nil
	}
	lines := splitLines(text, term, true)
	var best *turned
	most := 0
	for _, d := range dialects {
		if t, numbers := d.turned(lines, whole); numbers > most {
			best, most = t, numbers
		}
	}
	return best
}

// turned is the table as a dialect cuts it, with the count of its numbers, at the
// beginnings of its lines; 0 when it does not lie on its side. The last line goes on
// unless the text is whole.
func (d dialect) turned(lines []line, whole bool) (*turned, int) {
	t, all, widest := &turned{dialect: d}, 0, 0
	for i, l := range lines {
		cells := bytes.Count(l.text, []byte{d.delim}) + 1
		numbers, samples := 0, false
		if cells >= wideLeast {
			numbers, samples = d.wide(l.text)
		}
		switch {
		case len(bytes.TrimSpace(l.text)) == 0:
		case samples:
			t.rows, all, widest = append(t.rows, l), all+numbers, max(widest, cells)
		case len(t.rows) == 0 && cells < wideLeast:
			t.above = append(t.above, l)
		case i < len(lines)-1 || whole:
			return nil, 0
		}
	}
	if widest < wideRatio*(len(t.rows)+len(t.above)) {
		return nil, 0
	}
	return t, all
}

// wide counts the numbers among the first cells of a line, and reports whether it may
// be a row of samples: nearly all of many cells behind name and unit are numbers, or
// stand for one that is missing.
func (d dialect) wide(text []byte) (numbers int, samples bool) {
	const looked, longest = 64, 80
	text = d.undress(text)
	cells, other := 0, 0
	for at := 0; at >= 0 && cells < looked; cells++ {
		var c cell
		c, at = d.cut(text, at)
		kind := kindText
		if len(c.text) < longest {
			kind = d.kindOf(c)
		}
		switch {
		case kind.numeric():
			numbers++
		case kind == kindText && cells > 1:
			other++
		}
	}
	return numbers, cells >= wideLeast && 2*numbers >= cells && 10*other <= cells
}

// upright writes the text anew, with a line for every cell of the rows.
func (t *turned) upright() []byte {
	var out bytes.Buffer
	size := 0
	for _, l := range slices.Concat(t.above, t.rows) {
		size += len(l.text) + 1
	}
	out.Grow(size)
	for _, l := range t.above {
		out.Write(l.text)
		out.WriteByte('\n')
	}
	text, at := make([][]byte, len(t.rows)), make([]int, len(t.rows))
	for i, l := range t.rows {
		if text[i] = t.undress(l.text); t.delim == ' ' {
			text[i] = bytes.Trim(text[i], " \t")
		}
	}
	for open := len(t.rows); open > 0; {
		for i := range t.rows {
			if i > 0 {
				out.WriteByte('\t')
			}
			if at[i] < 0 {
				continue
			}
			var c cell
			if c, at[i] = t.cut(text[i], at[i]); at[i] < 0 {
				open--
			}
			writeCell(&out, c)
		}
		out.WriteByte('\n')
	}
	return out.Bytes()
}

func writeCell(out *bytes.Buffer, c cell) {
	if !c.quoted && bytes.IndexByte(c.text, '\t') < 0 {
		out.Write(c.text)
		return
	}
	out.WriteByte('"')
	out.Write(bytes.ReplaceAll(c.text, []byte(`"`), []byte(`""`)))
	out.WriteByte('"')
}

// place gives line and column of an error as they are in the file.
func (t *turned) place(err error) error {
	var e *Error
	if t == nil || !errors.As(err, &e) {
		return err
	}
	above, line, column := len(t.above), e.Line, e.Column
	if line > 0 && line <= above {
		e.Line = t.above[line-1].number
		return err
	}
	if e.Line, e.Column = 0, max(0, line-above); column > 0 && column <= len(t.rows) {
		e.Line = t.rows[column-1].number
	} else if line > above && len(t.rows) == 1 {
		e.Line = t.rows[0].number
	}
	return err
}

// tell says in a layout that lines and columns changed places.
func (t *turned) tell(l *Layout) {
	if t == nil {
		return
	}
	l.Sideways, l.Delimiter, l.Preamble = true, t.name(), len(t.above)
	for _, n := range []*int{&l.HeaderLine, &l.UnitsLine, &l.FirstLine, &l.FooterLine} {
		*n = max(0, *n-len(t.above))
	}
	l.Columns = slices.Clone(l.Columns)
	for i := range l.Columns {
		l.Columns[i].Number = t.rows[i].number
	}
}
