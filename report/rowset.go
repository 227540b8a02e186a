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
	"slices"
	"sync"
)

//go:embed web/rows.js
var rowsJS string

// rowsBegin and rowsEnd enclose the rows of an index page, one a line. They are
// what the next page is made from, so that a new entry costs no look at the others.
// The edition tells pages of different makes apart.
func rowsBegin() string {
	return `<script type="application/json" id="rows" data-edition="` + edition() + `">[` + "\n"
}

const rowsEnd = "\n]</script>"

// firstRows is how many rows an index page shows before a script takes over.
const firstRows = 50

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

// A rowSet is the part of an index page that holds its rows.
type rowSet struct {
	Edition string
	Rows    template.JS
}

// joinRows makes the rows of a page from their JSON.
func joinRows(lines [][]byte) *rowSet {
	return &rowSet{Edition: edition(), Rows: template.JS(bytes.Join(lines, []byte(",\n")))}
}

// errEdition says that a page holds no rows to be taken over.
var errEdition = errors.New("not an index page of this edition")

// splitRows returns the rows of a page, each as its JSON.
func splitRows(page []byte) ([][]byte, error) {
	_, rest, ok := bytes.Cut(page, []byte(rowsBegin()))
	if !ok {
		return nil, errEdition
	}
	text, _, ok := bytes.Cut(rest, []byte(rowsEnd))
	if !ok {
		return nil, errEdition
	}
	lines := bytes.Split(text, []byte(",\n"))
	return slices.DeleteFunc(lines, func(b []byte) bool { return len(b) == 0 }), nil
}

// readRows reads the rows of a page into rows of type R.
func readRows[R any](page []byte, keep func(row *R, line []byte)) error {
	lines, err := splitRows(page)
	if err != nil {
		return err
	}
	for _, line := range lines {
		row := new(R)
		if err := json.Unmarshal(line, row); err != nil {
			return err
		}
		keep(row, line)
	}
	return nil
}
