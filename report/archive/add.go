// Package archive keeps the evidence of each device: every measurement an entry
// of its own, which is whole or absent and never overwritten, and index pages that
// are made from the entries.
//
//	DIR/index.html                                  all devices
//	DIR/<device folder>/index.html                  one device over time
//	DIR/<device folder>/<UTC stamp>-<8 hex digits>/ one entry: report.html,
//	    result.json, capture.<ext>.gz, SHA256SUMS
package archive

import (
	"bufio"
	"bytes"
	"cmp"
	"compress/gzip"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"hash"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"time"
)

// The names of the files of an entry.
const (
	reportName = "report.html"
	resultName = "result.json"
	sumsName   = "SHA256SUMS"
	indexName  = "index.html"
)

// An Entry is what is to be kept of one measurement.
type Entry struct {
	// Made is when it was measured.
	Made time.Time
	// Result and Report write the JSON and the page.
	Result, Report func(io.Writer) error
	// Sources are the files that were measured, at least one; the first names the entry.
	Sources []Source
}

// A Source is one file that was measured.
type Source struct {
	// Kind is the stem of its name in the entry, "capture" or "sweep"; see [KindOf].
	Kind string
	// Name is the file's name as it was given, for its ending.
	Name string
	// SHA256 is the lower-case hexadecimal digest of the bytes that were measured.
	SHA256 string
	// Open returns those bytes.
	Open func() (io.ReadCloser, error)
}

// KindOf is the kind of file number i (from 0) of several of one kind: "capture",
// "capture-2", "capture-3".
func KindOf(kind string, i int) string {
	if i == 0 {
		return kind
	}
	return fmt.Sprintf("%s-%d", kind, i+1)
}

// Add files an entry of the device in the archive dir, which it makes when it is
// not there, and brings the index pages up to date. It returns the entry's folder.
//
// An entry is written beside its place, made durable, and renamed into it: whatever
// happens, it is whole or absent. When the entry could be filed and the index pages
// could not, Add returns both the folder and the error.
func Add(dir, device string, e *Entry) (folder string, err error) {
	if device == "" {
		return "", errors.New("an entry of the archive needs the name of its device")
	}
	home := FolderOf(device)
	name, m, err := add(dir, home, e)
	if err != nil {
		return "", fmt.Errorf("nothing was filed in the archive %s: %w", dir, plainError(err))
	}
	folder = filepath.Join(dir, home, name)
	if err := refresh(dir, home, name, m); err != nil {
		return folder, fmt.Errorf("filed %s, but the index pages are not up to date (dieaway archive rebuild mends them): %w", folder, plainError(err))
	}
	return folder, nil
}

// plainError leaves out the hidden names of files on their way, which would only puzzle.
func plainError(err error) error {
	var path *fs.PathError
	if errors.As(err, &path) && strings.HasSuffix(path.Path, ".tmp") {
		return path.Err
	}
	return err
}

// add writes the entry into the device's folder. It returns its name and the mark
// that stays until the index pages show it.
func add(dir, folder string, e *Entry) (name string, m *mark, err error) {
	if err := check(e); err != nil {
		return "", nil, err
	}
	home := filepath.Join(dir, folder)
	if err := os.MkdirAll(home, 0o777); err != nil {
		return "", nil, err
	}
	if m, err = begin(dir, folder); err != nil {
		return "", nil, err
	}
	temp := filepath.Join(home, fmt.Sprintf(".%s.%s.tmp", nameOf(e.Made, e.Sources[0].SHA256), m.id))
	if name, err = m.fill(temp, home, e); err != nil {
		os.RemoveAll(temp)
		m.clear()
		return "", nil, err
	}
	return name, m, nil
}

// begin sets the mark of a writer.
func begin(dir, folder string) (*mark, error) {
	release, err := lock(dir)
	if err != nil {
		return nil, err
	}
	defer release()
	return setMark(dir, folder)
}

// fill writes the entry beside its place, moves it there and makes that durable.
func (m *mark) fill(temp, home string, e *Entry) (name string, err error) {
	if err := os.Mkdir(temp, 0o777); err != nil {
		return "", err
	}
	if err := write(temp, e); err != nil {
		return "", err
	}
	if name, err = place(temp, home, e); err != nil {
		return "", err
	}
	return name, cmp.Or(syncFolder(home), syncFolder(filepath.Dir(home)))
}

func check(e *Entry) error {
	if len(e.Sources) == 0 || e.Result == nil || e.Report == nil || e.Made.IsZero() {
		return errors.New("an entry needs its result, its page, its time and a file that was measured")
	}
	for _, s := range e.Sources {
		if sum, err := hex.DecodeString(s.SHA256); err != nil || len(sum) != sha256.Size {
			return fmt.Errorf("%s: %q is no SHA-256", s.Name, s.SHA256)
		}
	}
	return nil
}

// place renames the finished folder. Two entries of one capture within a
// millisecond both stay: the later one moves on by one.
func place(temp, home string, e *Entry) (name string, err error) {
	for made := e.Made; ; made = made.Add(time.Millisecond) {
		name = nameOf(made, e.Sources[0].SHA256)
		target := filepath.Join(home, name)
		if _, err := os.Lstat(target); err == nil {
			continue
		}
		// A folder with files in it is never replaced: the rename fails.
		err := os.Rename(temp, target)
		if err == nil {
			return name, nil
		}
		if _, there := os.Lstat(target); there != nil {
			return "", err
		}
	}
}

// write writes all files of the entry.
func write(folder string, e *Entry) error {
	var sums strings.Builder
	put := func(name string, fill func(io.Writer) error) error {
		sum := sha256.New()
		if err := writeFile(filepath.Join(folder, name), sum, fill); err != nil {
			return err
		}
		fmt.Fprintf(&sums, "%x  %s\n", sum.Sum(nil), name)
		return nil
	}
	for _, s := range e.Sources {
		if err := put(s.fileName(), s.copyTo); err != nil {
			return err
		}
	}
	if err := cmp.Or(put(resultName, e.Result), put(reportName, e.Report)); err != nil {
		return err
	}
	err := writeFile(filepath.Join(folder, sumsName), nil, func(w io.Writer) error {
		_, err := io.WriteString(w, sums.String())
		return err
	})
	return cmp.Or(err, syncFolder(folder))
}

// writeFile writes a new file, counts its bytes into sum, and makes it durable.
func writeFile(name string, sum hash.Hash, fill func(io.Writer) error) error {
	f, err := os.OpenFile(name, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return err
	}
	var out io.Writer = f
	if sum != nil {
		out = io.MultiWriter(f, sum)
	}
	b := bufio.NewWriterSize(out, 1<<16)
	err = fill(b)
	if err == nil {
		err = b.Flush()
	}
	if err == nil {
		err = f.Sync()
	}
	err = cmp.Or(err, f.Close())
	var path *fs.PathError
	if errors.As(err, &path) { // "write …/.20…tmp/report.html: no space left": the name says nothing
		return fmt.Errorf("%s: %w", filepath.Base(name), path.Err)
	}
	return err
}

// ending is the end of a file's name that is kept.
var ending = regexp.MustCompile(`^[a-z0-9]{1,12}$`)

// compressed tells by its name whether a file is kept as it is.
func (s *Source) compressed() bool { return strings.HasSuffix(strings.ToLower(s.Name), ".gz") }

// fileName is the file's name in the entry.
func (s *Source) fileName() string {
	name := strings.ToLower(filepath.Base(s.Name))
	name = strings.TrimSuffix(name, ".gz")
	ext := strings.TrimPrefix(filepath.Ext(name), ".")
	if !ending.MatchString(ext) {
		ext = "txt"
	}
	return s.Kind + "." + ext + ".gz"
}

// quick is the size in bytes from which time counts more than room.
const quick = 8 << 20

// copyTo writes the compressed file and makes sure that it is the one measured.
func (s *Source) copyTo(w io.Writer) error {
	in, err := s.Open()
	if err != nil {
		return err
	}
	defer in.Close()
	sum := sha256.New()
	read := io.TeeReader(in, sum)
	if s.compressed() {
		_, err = io.Copy(w, read)
	} else {
		err = compress(w, read)
	}
	if err != nil {
		return err
	}
	if got := hex.EncodeToString(sum.Sum(nil)); got != s.SHA256 {
		return fmt.Errorf("%s is no longer the file that was measured: its SHA-256 was %s and is %s", s.Name, s.SHA256, got)
	}
	return nil
}

func compress(w io.Writer, r io.Reader) error {
	head, err := io.ReadAll(io.LimitReader(r, quick))
	if err != nil {
		return err
	}
	level := gzip.DefaultCompression
	if len(head) == quick {
		level = gzip.BestSpeed
	}
	z, err := gzip.NewWriterLevel(w, level)
	if err != nil {
		return err
	}
	if _, err := io.Copy(z, io.MultiReader(bytes.NewReader(head), r)); err != nil {
		return err
	}
	return z.Close()
}
