package capture

import "bytes"

// A dialect is how a line is cut into cells and how a number is printed.
type dialect struct {
	// delim separates cells; ' ' stands for runs of blanks and tabs.
	delim byte
	// mark is the decimal mark.
	mark byte
}

// dialects are tried in this order; the first of equals is taken.
var dialects = []dialect{
	{';', '.'}, {';', ','}, {'\t', '.'}, {'\t', ','}, {',', '.'},
	{' ', '.'}, {' ', ','}, {'|', '.'}, {'|', ','}, {',', ','},
}

// name is the separator in words.
func (d dialect) name() string {
	switch d.delim {
	case ';':
		return "semicolon"
	case '\t':
		return "tab"
	case ' ':
		return "runs of blanks"
	case '|':
		return "vertical bar"
	}
	return "comma"
}

// A cell is one field of a line, without padding and without its quotes.
type cell struct {
	text   []byte
	quoted bool
}

func (c cell) blank() bool { return len(c.text) == 0 }

// split appends the cells of a line to cells.
func (d dialect) split(line []byte, cells []cell) []cell {
	i := 0
	line = d.undress(line)
	if d.delim == ' ' {
		line = bytes.Trim(line, " \t\r")
		if len(line) == 0 {
			return cells
		}
	}
	for {
		c, next := d.cut(line, i)
		cells = append(cells, c)
		if next < 0 {
			return cells
		}
		i = next
	}
}

// undress takes off what programs put around the numbers of a row: (1.5, 2.5),
// [1.5, 2.5], [[1.5 2.5], or 1.5, 2.5;
func (d dialect) undress(line []byte) []byte {
	n := len(line)
	if n < 2 || line[n-1]-'0' <= 9 {
		return line
	}
	bare := bytes.Trim(line, " \t,;")
	if m := len(bare); m > 1 && bytes.IndexByte([]byte("[({"), bare[0]) >= 0 && bytes.IndexByte([]byte("])}"), bare[m-1]) >= 0 {
		inner := bytes.TrimRight(bytes.TrimLeft(bare, "[({ \t"), "])} \t")
		if !bytes.ContainsAny(inner, "])}") {
			return inner
		}
		if bare = bare[1 : m-1]; bytes.IndexAny(bare, "])}") > bytes.IndexAny(bare, "[({") {
			return bare // its names have brackets of their own
		}
	}
	if last := line[n-1]; (last == ';' || last == ',') && last != d.delim && last != d.mark && bytes.IndexByte(line, last) == n-1 {
		return line[:n-1]
	}
	return line
}

// cut returns the cell that starts at line[i] and where the next one starts,
// -1 after the last.
func (d dialect) cut(line []byte, i int) (cell, int) {
	for i < len(line) && (line[i] == ' ' || line[i] == '\t' && d.delim != '\t') {
		i++
	}
	if i+1 < len(line) && line[i] == '=' && line[i+1] == '"' {
		i++ // a spreadsheet's way to keep a text: ="0.25"
	}
	if i < len(line) && line[i] == '"' {
		if end := closingQuote(line, i+1); end >= 0 {
			c := cell{text: bytes.TrimSpace(unquote(line[i+1 : end])), quoted: true}
			if rest, next := d.cutPlain(line, end+1); rest.blank() {
				return c, next
			}
		}
	}
	return d.cutPlain(line, i)
}

func (d dialect) cutPlain(line []byte, i int) (cell, int) {
	end := i
	for end < len(line) && line[end] != d.delim && (d.delim != ' ' || line[end] != '\t') {
		end++
	}
	c := cell{text: bytes.TrimSpace(line[i:end])}
	if end == len(line) {
		return c, -1
	}
	end++
	if d.delim == ' ' {
		for end < len(line) && (line[end] == ' ' || line[end] == '\t') {
			end++
		}
	}
	return c, end
}

// leavesOpen reports a line whose last quoted cell has no end.
func (d dialect) leavesOpen(line []byte) bool {
	if bytes.Count(line, []byte{'"'})%2 == 0 {
		return false
	}
	open := false
	for i := 0; i >= 0; {
		for i < len(line) && line[i] == ' ' {
			i++
		}
		open = i < len(line) && line[i] == '"' && closingQuote(line, i+1) < 0
		_, i = d.cut(line, i)
	}
	return open
}

// closingQuote is the index of the quote that ends a quoted cell, -1 if none.
func closingQuote(line []byte, i int) int {
	for ; i < len(line); i++ {
		if line[i] != '"' {
			continue
		}
		if i+1 < len(line) && line[i+1] == '"' {
			i++
			continue
		}
		return i
	}
	return -1
}

func unquote(b []byte) []byte {
	if bytes.IndexByte(b, '"') < 0 {
		return b
	}
	return bytes.ReplaceAll(b, []byte(`""`), []byte(`"`))
}
