package report

import (
	"bytes"
	"crypto/sha256"
	_ "embed"
	"encoding/hex"
	"encoding/json"
	"errors"
	"html/template"
	"io"
	"sync"
)

//go:embed web/rows.js
var rowsJS string

// firstRows is how many rows an index page shows before a script takes over.
const firstRows = 50

// A rowSet is the part of an index page that the next page is made from, so that a
// new entry costs no look at the others: sums over all rows, and the rows
// themselves as JSON, one a line.
type rowSet struct {
	sums any
	text []byte // rows with separators between them
}

// separator stands between rows; inside of them a line break is escaped.
const separator = ",\n"

// rowsBegin and rowsEnd enclose the rows, stateBegin and stateEnd the sums. The
// edition tells pages of different makes apart.
func rowsBegin() string {
	return `<script type="application/json" id="rows" data-edition="` + edition() + `">[` + "\n"
}

const (
	rowsEnd    = "\n]</script>"
	stateBegin = `<script type="application/json" id="state">`
	stateEnd   = "</script>"
)

// edition is a digest of what index pages are made of.
var edition = sync.OnceValue(func() string {
	sum := sha256.New()
	for _, s := range []string{pageCSS, pageJS, rowsJS, echartsJS} {
		io.WriteString(sum, s)
	}
	for _, name := range []string{"web/parts.html", "web/history.html", "web/devices.html"} {
		text, err := pageFiles.ReadFile(name)
		if err != nil {
			panic(err) // embedded
		}
		sum.Write(text)
	}
	return hex.EncodeToString(sum.Sum(nil)[:8])
})

// errEdition says that a page holds no rows to be taken over.
var errEdition = errors.New("not an index page of this edition")

// readRowSet takes sums and rows from a page.
func readRowSet(page []byte, sums any) (*rowSet, error) {
	head, rest, ok := bytes.Cut(page, []byte(rowsBegin()))
	end := bytes.LastIndex(rest, []byte(rowsEnd))
	if !ok || end < 0 {
		return nil, errEdition
	}
	_, state, ok := bytes.Cut(head, []byte(stateBegin))
	if !ok {
		return nil, errEdition
	}
	state, _, _ = bytes.Cut(state, []byte(stateEnd))
	if err := json.Unmarshal(state, sums); err != nil {
		return nil, err
	}
	return &rowSet{sums, rest[:end:end]}, nil
}

// add appends a row.
func (s *rowSet) add(row any) error {
	line, err := json.Marshal(row) // escaped for a script element
	if err != nil {
		return err
	}
	if len(s.text) > 0 {
		s.text = append(s.text, separator...)
	}
	s.text = append(s.text, line...)
	return nil
}

// first and last return up to n rows from the beginning and, newest first, from the end.
func (s *rowSet) first(n int) (rows [][]byte) {
	for rest := s.text; len(rest) > 0 && len(rows) < n; {
		var row []byte
		row, rest, _ = bytes.Cut(rest, []byte(separator))
		rows = append(rows, row)
	}
	return rows
}

func (s *rowSet) last(n int) (rows [][]byte) {
	for rest := s.text; len(rest) > 0 && len(rows) < n; {
		at := bytes.LastIndex(rest, []byte(separator))
		if at < 0 {
			return append(rows, rest)
		}
		rows, rest = append(rows, rest[at+len(separator):]), rest[:at]
	}
	return rows
}

// Edition, State and Rows are for the template.
func (s *rowSet) Edition() string { return edition() }

// State is the sums as JSON.
func (s *rowSet) State() (template.JS, error) {
	text, err := json.Marshal(s.sums)
	return template.JS(text), err
}

// Rows are the rows as JSON, without the brackets around them.
func (s *rowSet) Rows() template.JS { return template.JS(s.text) }
