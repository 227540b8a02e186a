package capture

import (
	"bytes"
	"fmt"
	"math"
	"slices"
)

// How a layout is found, from the head of the text (headSize bytes, or more
// where the preamble is longer):
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
	headSize = 256 << 10 // bytes looked at to find the layout
	headMost = 8 << 20   // the same where the preamble is longer
	roleRows = 256       // rows looked at to decide roles
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
	wrapped bool  // every line is in quotes as a whole
	first   int   // index in lines of the first row of samples
	sample  []row // the first rows of samples
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
	h.unwrap()
	if h.rows == 0 {
		return nil, h.noData()
	}
	h.first = h.firstRow()
	if h.broken {
		l := h.lines[h.first]
		return nil, &Error{Err: ErrSyntax, Line: l.number, Found: quote(string(l.text)) + ", where commas part cells and fractions alike",
			Expected: "semicolons or tabs between the cells"}
	}
	// Metadata may make the first row longer than the others.
	for n := len(h.split(h.lines[h.first].text, nil)); len(h.kinds) < n; {
		h.kinds = append(h.kinds, kindBlank)
	}
	h.takeSample()
	h.dropNumbering()
	h.joinQuoted()
	for col, k := range h.kinds {
		if k == kindBlank {
			h.kinds[col] = h.endsEarly(col)
		}
	}
	return h, nil
}

// endsEarly gives the kind of a column that holds numbers from the first row on
// and is blank from some row on: a channel shorter than others. It is blank for
// any other; numbers with words to their left are metadata.
func (h *head) endsEarly(col int) kind {
	kind, n := kindBlank, 0
	for row, r := range h.sample {
		if col >= len(r.cells) || r.cells[col].blank() {
			continue
		}
		k := h.kindOf(r.cells[col])
		if k == kindMissing && n > 0 {
			k = kind
		}
		if !k.numeric() || n > 0 && k != kind || n < row || col > 0 && h.kindOf(r.cells[col-1]) == kindText && !isDate(r.cells[col-1].text) {
			return kindBlank
		}
		kind, n = k, n+1
	}
	if n < fewestRows {
		return kindBlank
	}
	return kind
}

// joinQuoted joins lines above the samples that are one, with line ends in a
// quoted cell: "Time
// (us)".
func (h *head) joinQuoted() {
	const most = 4
	var joined []line
	for i := 0; i < h.first; i++ {
		l := h.lines[i]
		for n := 1; n < most && i+n < h.first && h.leavesOpen(l.text); n++ {
			l.text = append(append(slices.Clip(l.text), ' '), h.lines[i+n].text...)
			if !h.leavesOpen(l.text) {
				i += n
				break
			}
		}
		if h.leavesOpen(l.text) {
			l = h.lines[i]
		}
		joined = append(joined, l)
	}
	if len(joined) < h.first {
		h.lines = append(joined, h.lines[h.first:]...)
		h.first = len(joined)
	}
}

func longLine(number int) *Error {
	return &Error{Err: ErrSyntax, Line: number, Expected: fmt.Sprintf("the line to end, or a table with a line for each channel of %d MiB at most", turnedMost>>20),
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

// lineRest is what a line may end in besides its line end: half of another, and
// the ends of files.
const lineRest = "\r\x1a\x00"

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
		lines = append(lines, line{bytes.TrimRight(text[at:at+n], lineRest), len(lines) + 1, at})
		at += n + 1
	}
	return lines
}

// firstRow is the index of the first row of samples: a line that fits, with
// lines that fit below it. A few numbers above the heading are none.
func (h *head) firstRow() int {
	var cells []cell
	first, candidate, rows := -1, -1, 0
	for i := 0; i < len(h.lines) && rows < fewestRows; i++ {
		l := h.lines[i]
		cells = h.split(l.text, cells[:0])
		switch {
		case h.passed(l.text, cells):
			if isComment(l.text) && h.wordsOnly(h.split(stripComment(l.text), cells[:0])) || h.numericColumns() == 1 && isEntry(l.text) {
				first, rows = -1, 0
			}
		case h.fits(cells):
			if rows == 0 {
				candidate = i
			}
			rows++
		case h.wordsOnly(cells):
			first, rows = -1, 0
		default:
			if rows > 1 && first < 0 {
				first = candidate // unless a heading follows, the data pass says what is wrong here
			}
			rows = 0
		}
	}
	switch {
	case first >= 0:
		return first
	case rows > 0:
		return candidate
	}
	return len(h.lines) - 1
}

// wordsOnly reports words above all columns of a table of several.
func (h *head) wordsOnly(cells []cell) bool {
	for i, k := range h.kinds {
		if k.numeric() && (i >= len(cells) || h.kindOf(cells[i]) != kindText) {
			return false
		}
	}
	return h.numericColumns() > 1
}

// dropNumbering takes a first row away that only numbers the columns, 0, 1, 2 or
// 1, 2, 3: it breaks the even steps of a column below it.
func (h *head) dropNumbering() {
	if len(h.sample) < fewestRows || !h.numbering(h.sample[0].cells) || h.first > 0 && h.wordsOnly(h.split(h.lines[h.first-1].text, nil)) {
		return
	}
	for col := range h.kinds {
		c := h.look(col)
		_, even := (&column{values: c.values[1:]}).rises()
		if step := medianStep(c.values[1:]); even && math.Abs(c.values[1]-c.values[0]-step) > 0.5*step {
			h.sample = h.sample[1:]
			h.first = h.index(h.sample[0].line.number)
			return
		}
	}
}

// numbering reports cells that say 0, 1, 2 or 1, 2, 3, blank ones aside.
func (h *head) numbering(cells []cell) bool {
	n, least := 0, 0
	for _, c := range cells {
		if c.blank() {
			continue
		}
		d, ok := parseDecimal(c.text, h.mark)
		if !ok || d.exp != 0 || d.sign != 0 || d.mant > uint64(len(cells)) {
			return false
		}
		if n == 0 {
			least = int(d.mant)
		}
		if int(d.mant) != least+n || least > 1 {
			return false
		}
		n++
	}
	return n > 1
}

// look gives the values of a column in the first rows.
func (h *head) look(col int) *column {
	c := &column{kind: h.kinds[col], whole: true}
	h.eachRow(func(_ line, cells []cell) {
		if col < len(cells) {
			c.look(h.dialect, cells[col])
		} else {
			c.values = append(c.values, math.NaN())
		}
	})
	return c
}

// index is the place in lines of the line with a number.
func (h *head) index(number int) int {
	i, _ := slices.BinarySearchFunc(h.lines, number, func(l line, n int) int { return l.number - n })
	return i
}

// preambleLines are the lines above the first row.
func (h *head) preambleLines() []line { return h.lines[:h.first] }

// numbersAbove gives the longest run of lines above the first row that hold
// numbers and nothing else, first and last; a table of another shape.
func (h *head) numbersAbove() (from, to int) {
	run := 0
	for _, l := range h.preambleLines() {
		cells := h.split(l.text, nil)
		if allBlank(cells) {
			continue
		}
		if run++; slices.ContainsFunc(cells, func(c cell) bool { return !c.blank() && h.kindOf(c) != kindNumber }) {
			run = 0
		}
		if run > to-from {
			from, to = l.number-run+1, l.number
		}
	}
	return from, to
}

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

// lists reports rows that each begin with another word, as entries of a preamble
// do: key, value.
func (h *head) lists() bool {
	if h.kinds[0] != kindText || len(h.sample) < 2 {
		return false
	}
	keys := map[string]bool{}
	for _, r := range h.sample {
		keys[string(r.cells[0].text)] = true
	}
	return 2*len(keys) > len(h.sample)
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
