package capture

import (
	"bytes"
	"slices"
)

const blockLines = 64 // lines of the block that decides the dialect

// A shape is the dialect of a block of lines and the kind of each column.
type shape struct {
	dialect
	kinds []kind
	score float64 // numeric cells explained, less half of those that are not, and more of those that a number may be torn in
	rows  int
	full  []int // rows with something in the column
	now   []kind
	// loose are the columns that hold words in some rows and numbers in others.
	loose []bool
	// broken is true where the mark of the fractions parts cells too.
	broken bool
}

// findShape returns the shape that explains the most numbers of the block of
// like lines at the end; its rows are 0 when no line holds a number.
func findShape(lines []line) shape {
	var best shape
	for _, d := range dialects {
		if !d.occurs(lines) {
			continue
		}
		s := d.block(lines, nil)
		if d.delim == ' ' && best.explains() && best.rows >= s.rows {
			continue // blanks in its cells part thousands
		}
		if s.rows > 0 && (best.rows == 0 || s.score > best.score) {
			best = s
		}
	}
	if loose := best.mixed(lines); loose != nil {
		best = best.dialect.block(lines, loose)
	}
	if best.quotesFractions(lines) {
		return dialect{',', ','}.block(lines, nil)
	}
	if best.partsFractions(lines) {
		best.broken = true
		if len(best.kinds) == 2 {
			return dialect{';', ','}.block(lines, nil)
		}
	}
	return best
}

// occurs reports a separator that stands in one of the last lines at least. The
// semicolon is tried in any case, for a single column.
func (d dialect) occurs(lines []line) bool {
	return d.delim == ';' || slices.ContainsFunc(lines[max(0, len(lines)-2*blockLines):], func(l line) bool {
		return bytes.IndexByte(l.text, d.delim) >= 0 || d.delim == ' ' && bytes.IndexByte(l.text, '\t') >= 0
	})
}

// explains reports columns that hold numbers and nothing else.
func (s *shape) explains() bool { return len(s.kinds) > 1 && !slices.Contains(s.kinds, kindText) }

// block finds the best block of like lines near the end of lines: a footer of
// up to blockLines or a last line that was cut off must not hide it.
func (d dialect) block(lines []line, loose []bool) shape {
	var best shape
	tries := 0
	for last := len(lines) - 1; last >= max(0, len(lines)-blockLines) && tries < 8; last-- {
		s := d.blockUpTo(lines[:last+1], loose)
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
func (d dialect) blockUpTo(lines []line, loose []bool) shape {
	s := shape{dialect: d, loose: loose}
	var cells []cell
	for i := len(lines) - 1; i >= 0 && s.rows < blockLines; i-- {
		if cells = d.split(lines[i].text, cells[:0]); d.passed(lines[i].text, cells) {
			if s.rows == 0 {
				return s // the caller tries the line above
			}
			continue
		}
		if !s.admit(cells) {
			break
		}
	}
	for i, k := range s.kinds {
		if s.sparse(i) {
			s.kinds[i] = kindBlank
		} else if k == kindZero {
			s.kinds[i] = kindNumber
		}
	}
	return s
}

// sparse reports a column that is blank in most rows: what stands in it is
// beside the samples.
func (s *shape) sparse(col int) bool {
	return s.rows >= 4 && col < len(s.full) && 4*s.full[col] < s.rows
}

// passed reports a line that is passed over wherever it stands: blank, or a comment.
func (d dialect) passed(text []byte, cells []cell) bool {
	return allBlank(cells) || isComment(text) && d.kindOf(cells[0]) == kindText
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
	numeric, text, torn := 0, 0, 0
	for i, c := range cells {
		k := s.kindOf(c)
		if i < len(s.loose) && s.loose[i] && k != kindBlank {
			k = kindText
		}
		if k == kindNumber && isZero(c) {
			k = kindZero
		}
		if kinds = append(kinds, k); k.numeric() {
			numeric++
		} else if k == kindText {
			text++
			if first, last := c.text[0], c.text[len(c.text)-1]; first-'0' <= 9 || last-'0' <= 9 {
				torn++
			}
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
		} else if old := s.kinds[i]; old == kindBlank || (old == kindMissing || old == kindZero) && k != kindBlank && k != kindMissing {
			s.kinds[i] = k
		}
		if k != kindBlank {
			s.full[i]++
		}
	}
	s.rows++
	s.score += float64(numeric) - 0.5*float64(text) - 0.25*float64(torn)
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
		free = free || a == kindZero && (b == kindNumber || b == kindQuantity) || b == kindZero && (a == kindNumber || a == kindQuantity)
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
		case got == k && k.numeric(), got == kindNumber && k == kindMissing, got == kindNumber && k == kindQuantity && isZero(cells[i]):
			found++
		case got == kindBlank || got == kindMissing:
		default:
			return false
		}
	}
	return found > 0 && 2*found >= wanted
}
