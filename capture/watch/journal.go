package watch

import (
	"bufio"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"strconv"
	"strings"
)

// A Journal is a file that remembers what was done, one line for each content of a
// file, so that work goes on after a stop where it was. A line that was cut short
// counts as not written.
type Journal struct {
	file *os.File
	torn bool // the last line is not whole
}

// OpenJournal reads the journal name, which it makes when it is not there, and makes
// f skip what is in it.
func OpenJournal(name string, f *Folder) (*Journal, error) {
	text, err := os.ReadFile(name)
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return nil, err
	}
	for line := range strings.Lines(string(text)) {
		if file, ok := parseLine(line); ok {
			f.Skip(file.Name, file.Stamp)
		}
	}
	file, err := os.OpenFile(name, os.O_WRONLY|os.O_APPEND|os.O_CREATE, 0o666)
	if err != nil {
		return nil, err
	}
	return &Journal{file, len(text) > 0 && text[len(text)-1] != '\n'}, nil
}

// parseLine reads size, time and quoted name.
func parseLine(line string) (File, bool) {
	size, rest, _ := strings.Cut(line, " ")
	time, quoted, _ := strings.Cut(rest, " ")
	name, err := strconv.Unquote(strings.TrimSuffix(quoted, "\n"))
	s, err1 := strconv.ParseInt(size, 10, 64)
	t, err2 := strconv.ParseInt(time, 10, 64)
	return File{name, Stamp{s, t}}, strings.HasSuffix(line, "\n") && errors.Join(err, err1, err2) == nil
}

// Add remembers a file.
func (j *Journal) Add(f File) error {
	w := bufio.NewWriter(j.file)
	if j.torn {
		w.WriteByte('\n')
		j.torn = false
	}
	fmt.Fprintf(w, "%d %d %s\n", f.Size, f.Time, strconv.Quote(f.Name))
	return w.Flush()
}

// Close closes the file.
func (j *Journal) Close() error { return j.file.Close() }
