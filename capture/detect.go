package capture

import (
	"bytes"
	"fmt"
)

// How a layout is found, from the head of the text (headSize bytes):
//
//  1. findShape: cut into lines; for every dialect take the block of like lines
//     at the end of the head, where the samples are, and keep the dialect that
//     explains the most numbers.
//  2. firstRow: from the top, the first line that has numbers where the block
//     has them. What stands above is preamble.
//  3. findNames (names.go): the names row and the units row in the preamble.
//  4. readPreamble (preamble.go): what the preamble, and columns of metadata
//     beside the first samples, tell of interval, start and units.
//  5. assignRoles (roles.go): what each column is, and why.

const (
	headSize   = 256 << 10 // bytes looked at to find the layout
	blockLines = 64        // lines of the block that decides the dialect
	roleRows   = 256       // rows looked at to decide roles
)

// A line is one line of the head, without its line end.
type line struct {
	text   []byte
	number int // from 1
	offset int // in the head
}

// A head is the beginning of a text and what was understood of it.
type head struct {
	bytes []byte
	whole bool // the text ends with it
	term  byte // the byte that ends a line
	lines []line
	shape
	first  int   // index in lines of the first row of samples
	sample []row // the first rows of samples
}

// A shape is the dialect of a block of lines and the kind of each column.
type shape struct {
	dialect
	kinds []kind
	score float64 // numeric cells explained, less half of those that are not
	rows  int
	full  []int // rows with something in the column
	now   []kind
}

// newHead cuts the head into lines and finds the block of samples.
func newHead(text []byte, whole bool) (*head, *Error) {
	h := &head{bytes: text, whole: whole, term: '\n'}
	if bytes.IndexByte(text, '\n') < 0 && bytes.IndexByte(text, '\r') >= 0 {
		h.term = '\r'
	}
	h.lines = splitLines(text, h.term, whole)
	if len(h.lines) == 0 {
		if whole {
			return nil, &Error{Err: ErrNoData, Found: "an empty file", Expected: "columns of samples"}
		}
		return nil, longLine(1)
	}
	h.shape = findShape(h.lines)
	if h.rows == 0 {
		return nil, h.noData()
	}
	h.first = h.firstRow()
	// Metadata may make the first row longer than the others.
	for n := len(h.split(h.lines[h.first].text, nil)); len(h.kinds) < n; {
		h.kinds = append(h.kinds, kindBlank)
	}
	h.takeSample()
	return h, nil
}

func longLine(number int) *Error {
	return &Error{Err: ErrSyntax, Line: number, Expected: "the line to end",
		Found: fmt.Sprintf("more than %d KiB without a line end", headSize>>10)}
}

// noData says what the text holds instead of samples.
func (h *head) noData() *Error {
	e := &Error{Err: ErrNoData, Found: "nothing but blank lines", Expected: "columns of samples"}
	for _, l := range h.lines {
		if text := bytes.TrimSpace(l.text); len(text) > 0 {
			e.Found = fmt.Sprintf("%s from %s on without a row of numbers", plural(len(h.lines), "line"), quote(string(text)))
			break
		}
	}
	return e
}

// splitLines cuts text at term; a last line without term counts when the text
// is whole.
func splitLines(text []byte, term byte, whole bool) []line {
	lines := make([]line, 0, bytes.Count(text, []byte{term})+1)
	for at := 0; at < len(text); {
		n := bytes.IndexByte(text[at:], term)
		if n < 0 {
			if !whole {
				break
			}
			n = len(text) - at
		}
		lines = append(lines, line{bytes.TrimRight(text[at:at+n], "\r\x1a"), len(lines) + 1, at})
		at += n + 1
	}
	return lines
}

// findShape returns the shape that explains the most numbers of the block of
// like lines at the end; its rows are 0 when no line holds a number.
func findShape(lines []line) shape {
	var best shape
	for _, d := range dialects {
		if s := d.block(lines); s.rows > 0 && (best.rows == 0 || s.score > best.score) {
			best = s
		}
	}
	return best
}

// block finds the best block of like lines near the end of lines: a footer of
// up to blockLines or a last line that was cut off must not hide it.
func (d dialect) block(lines []line) shape {
	var best shape
	tries := 0
	for last := len(lines) - 1; last >= max(0, len(lines)-blockLines) && tries < 8; last-- {
		s := d.blockUpTo(lines[:last+1])
		if s.rows == 0 {
			continue
		}
		tries++
		if best.rows == 0 || s.score > best.score {
			best = s
		}
		if s.rows >= blockLines/2 {
			break
		}
	}
	return best
}

// blockUpTo grows a block upwards from the last line, as long as lines are alike.
func (d dialect) blockUpTo(lines []line) shape {
	s := shape{dialect: d}
	var cells []cell
	for i := len(lines) - 1; i >= 0 && s.rows < blockLines; i-- {
		if cells = d.split(lines[i].text, cells[:0]); allBlank(cells) {
			if s.rows == 0 {
				return s // the caller tries the line above
			}
			continue
		}
		if !s.admit(cells) {
			break
		}
	}
	for i := range s.kinds {
		if s.sparse(i) {
			s.kinds[i] = kindBlank
		}
	}
	return s
}

// sparse reports a column that is blank in most rows: what stands in it is
// beside the samples.
func (s *shape) sparse(col int) bool {
	return s.rows >= 4 && col < len(s.full) && 4*s.full[col] < s.rows
}

func allBlank(cells []cell) bool {
	for _, c := range cells {
		if !c.blank() {
			return false
		}
	}
	return true
}

// admit takes a line into the block when its cells are like the block's.
func (s *shape) admit(cells []cell) bool {
	kinds := s.now[:0]
	numeric, text := 0, 0
	for _, c := range cells {
		k := s.kindOf(c)
		if kinds = append(kinds, k); k.numeric() {
			numeric++
		} else if k == kindText {
			text++
		}
	}
	s.now = kinds
	if numeric == 0 || s.delim == ' ' && text > numeric {
		return false
	}
	if s.rows > 0 && !s.alike(kinds) {
		return false
	}
	for i, k := range kinds {
		if i == len(s.kinds) {
			s.kinds, s.full = append(s.kinds, k), append(s.full, 0)
		} else if old := s.kinds[i]; old == kindBlank || old == kindMissing && k != kindBlank {
			s.kinds[i] = k
		}
		if k != kindBlank {
			s.full[i]++
		}
	}
	s.rows++
	s.score += float64(numeric) - 0.5*float64(text)
	return true
}

// alike reports whether kinds contradict the block nowhere. Blank and missing
// cells fit any column; cells beyond the last may only be blank.
func (s *shape) alike(kinds []kind) bool {
	if s.delim == ' ' && len(kinds) != len(s.kinds) {
		return false
	}
	at := func(kinds []kind, i int) kind {
		if i < len(kinds) {
			return kinds[i]
		}
		return kindBlank
	}
	for i := range max(len(kinds), len(s.kinds)) {
		a, b := at(s.kinds, i), at(kinds, i)
		free := s.sparse(i) || a == kindBlank || a == kindMissing || b == kindBlank || b == kindMissing
		if !free && a != b || (i >= len(kinds) || i >= len(s.kinds)) && (a.numeric() || b.numeric()) && !s.sparse(i) {
			return false
		}
	}
	return true
}

// fits reports a line that has the block's kind of number, or nothing, in every
// column of numbers, and a number in at least half of them.
func (s *shape) fits(cells []cell) bool {
	found, wanted := 0, 0
	for i, k := range s.kinds {
		if !k.numeric() && k != kindMissing {
			continue
		}
		wanted++
		if i >= len(cells) {
			return false
		}
		switch got := s.kindOf(cells[i]); {
		case got == k && k.numeric(), got == kindNumber && k == kindMissing:
			found++
		case got == kindBlank || got == kindMissing:
		default:
			return false
		}
	}
	return found > 0 && 2*found >= wanted
}

// firstRow is the index of the first row of samples: a line that fits, with
// the next line that is not blank fitting too.
func (h *head) firstRow() int {
	var cells []cell
	candidate := -1
	for i, l := range h.lines {
		cells = h.split(l.text, cells[:0])
		switch {
		case allBlank(cells):
		case !h.fits(cells):
			candidate = -1
		case candidate >= 0:
			return candidate
		default:
			candidate = i
		}
	}
	if candidate >= 0 {
		return candidate
	}
	return len(h.lines) - 1
}

// preambleLines are the lines above the first row.
func (h *head) preambleLines() []line { return h.lines[:h.first] }

// eachRow calls f with the cells of the first rows of samples.
func (h *head) eachRow(f func(l line, cells []cell)) {
	for _, r := range h.sample {
		f(r.line, r.cells)
	}
}

// A row is a line of samples, cut into cells.
type row struct {
	line  line
	cells []cell
}

// takeSample cuts the first rows of samples, up to roleRows of them.
func (h *head) takeSample() {
	var flat []cell
	for _, l := range h.lines[h.first:] {
		from := len(flat)
		flat = h.split(l.text, flat)
		cells := flat[from:len(flat):len(flat)]
		if allBlank(cells) || !h.fits(cells) {
			continue
		}
		if h.sample = append(h.sample, row{l, cells}); len(h.sample) == roleRows {
			return
		}
	}
}
