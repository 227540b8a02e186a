package main

import (
	"bufio"
	"cmp"
	"context"
	"errors"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"dieaway/report"
)

// A many is what several captures have in common on their way out: a row each in
// place of a summary, and then what they share.
type many struct {
	set *report.Set
	j   *job
	csv bool
}

// picturesMost is how many captures have a picture on the page.
const picturesMost = 2000

// runMany measures several captures into a table, and a page when that is wanted.
func (j *job) runMany(ctx context.Context, csv bool) error {
	m := &many{&report.Set{Heading: j.device, Origin: j.origin}, j, csv}
	if j.bench != nil {
		m.set.Limits = j.bench.Limits.Ranges
	}
	var page *output
	pictures := false
	if j.page != "" {
		var err error
		if page, err = createOutput(j.page, j.inputs); err != nil {
			return err
		}
		defer page.discard()
		pictures = len(j.sources) <= picturesMost
	}
	name := j.page
	j.page, j.many = "", m // the page is that of the set
	ended := j.runAll(ctx, "captures", func(s source) measured {
		r := j.ringDown(s)
		out := ofRingDown(r)
		out.row = r.Row(pictures)
		return out
	})
	if ended != nil && codeOf(ended) == exitDone {
		return ended
	}
	if err := m.finish(); err != nil {
		return err
	}
	if page != nil {
		if err := m.file(page, name); err != nil {
			say(j.stderr, err)
			return &exitError{Code: max(codeOf(ended), exitFailed)}
		}
	}
	return ended
}

// codeOf returns the exit code of an error that has said all there is to say, else exitDone.
func codeOf(err error) int {
	var exit *exitError
	if errors.As(err, &exit) && exit.Err == nil {
		return exit.Code
	}
	return exitDone
}

// print writes the row of source number i.
func (m *many) print(out io.Writer, r measured, i int) error {
	m.set.Rows = append(m.set.Rows, r.row)
	head, row := m.set.WriteHead, func(w io.Writer) error { return r.row.WriteSummary(w, m.j.style) }
	switch {
	case m.j.json:
		return r.WriteJSON(out)
	case m.csv:
		head, row = report.WriteCSVHead, r.row.WriteCSV
	case m.j.quiet:
		return nil
	}
	if i == 0 {
		if err := head(out); err != nil {
			return err
		}
	}
	return row(out)
}

// finish writes what can be told when all rows are there.
func (m *many) finish() error {
	if m.csv || m.j.json || m.j.quiet {
		return nil
	}
	out := bufio.NewWriter(m.j.stdout)
	return cmp.Or(m.set.WriteSummary(out, m.j.style), out.Flush())
}

func (m *many) file(page *output, name string) error {
	out := bufio.NewWriter(page)
	if err := cmp.Or(m.set.WritePage(out), out.Flush()); err != nil {
		return err
	}
	if err := page.commit(); err != nil {
		return err
	}
	if !m.j.quiet {
		say(m.j.stderr, "wrote "+name)
	}
	return nil
}

// expand replaces each folder by the files in it that may be captures, in the order
// of their names with numbers by their value.
func expand(names []string) (out []string, err error) {
	for _, name := range names {
		info, err := os.Stat(name)
		if err != nil || !info.IsDir() {
			out = append(out, name)
			continue
		}
		entries, err := os.ReadDir(name)
		if err != nil {
			return nil, err
		}
		var files []string
		for _, e := range entries {
			if mayBeCapture(e) {
				files = append(files, filepath.Join(name, e.Name()))
			}
		}
		if len(files) == 0 {
			return nil, usagef("the folder %s holds no file that may be a capture", name)
		}
		slices.SortFunc(files, naturally)
		out = append(out, files...)
	}
	return out, nil
}

// others are endings of files that stand beside captures.
var others = []string{".html", ".htm", ".json", ".toml", ".md", ".pdf", ".png", ".jpg", ".jpeg", ".svg", ".bmp", ".tmp", ".part", ".go"}

// mayBeCapture leaves out folders, hidden files and what is surely something else.
func mayBeCapture(e fs.DirEntry) bool {
	return !e.IsDir() && !strings.HasPrefix(e.Name(), ".") && !slices.Contains(others, strings.ToLower(filepath.Ext(e.Name())))
}

// naturally compares names as people do: loop 9 comes before loop 10.
func naturally(a, b string) int {
	for a != "" && b != "" {
		x, y := leadingDigits(a), leadingDigits(b)
		if x == "" || y == "" {
			if a[0] != b[0] {
				return strings.Compare(a, b)
			}
			a, b = a[1:], b[1:]
			continue
		}
		m, n := strings.TrimLeft(x, "0"), strings.TrimLeft(y, "0")
		if len(m) != len(n) {
			return len(m) - len(n)
		}
		if c := strings.Compare(m, n); c != 0 {
			return c
		}
		a, b = a[len(x):], b[len(y):]
	}
	return len(a) - len(b)
}

func leadingDigits(s string) string {
	return s[:len(s)-len(strings.TrimLeft(s, "0123456789"))]
}
