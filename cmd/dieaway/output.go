package main

import (
	"bytes"
	"cmp"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math/rand/v2"
	"os"
	"path/filepath"
)

// An output is a file that appears under its name only when it is whole: until
// then it is written beside its place. It is opened before the analysis, so
// that a name that cannot be written costs nobody their patience.
type output struct {
	file *os.File
	// name is where the file goes; file.Name() is the same when the place is a
	// device or a pipe, which is written directly.
	name string
	// what is in the file, for messages.
	what string
}

// createOutput opens the page of evidence name. It refuses a name that is one of
// inputs, by whatever path or link, and one of a file that is no page: a capture
// that stands where the name of the page belongs would be lost.
func createOutput(name string, inputs []string) (*output, error) {
	if name == "-" {
		return nil, usagef("the report cannot go to standard output: give it a file name")
	}
	o, err := createFile("report", name, inputs)
	if err == nil && !o.direct() && holdsOther(name) {
		o.discard()
		return nil, usagef("the report %s would overwrite a file that is no page: give another name, or remove it first", name)
	}
	return o, err
}

// holdsOther reports whether a file is there and holds something that is no page.
func holdsOther(name string) bool {
	f, err := os.Open(name)
	if err != nil {
		return false
	}
	defer f.Close()
	head := make([]byte, 64)
	n, _ := io.ReadFull(f, head)
	text := bytes.ToLower(bytes.TrimSpace(head[:n]))
	return n > 0 && !bytes.HasPrefix(text, []byte("<!doctype html")) && !bytes.HasPrefix(text, []byte("<html"))
}

// createFile opens an output of any kind.
func createFile(what, name string, inputs []string) (*output, error) {
	there, err := os.Stat(name)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return createBeside(what, name, 0o666)
	case err != nil:
		return nil, fmt.Errorf("cannot write the %s: %w", what, err)
	case there.IsDir():
		return nil, fmt.Errorf("cannot write the %s: %s is a folder, expected the name of a file", what, name)
	}
	if input, same := sameAsOne(there, inputs); same {
		return nil, usagef("the %s %s would overwrite the input %s", what, name, input)
	}
	if !there.Mode().IsRegular() {
		file, err := os.OpenFile(name, os.O_WRONLY, 0)
		if err != nil {
			return nil, fmt.Errorf("cannot write the %s: %w", what, err)
		}
		return &output{file: file, name: name, what: what}, nil
	}
	if name, err = filepath.EvalSymlinks(name); err != nil { // a link stays a link
		return nil, fmt.Errorf("cannot write the %s: %w", what, err)
	}
	return createBeside(what, name, there.Mode().Perm())
}

// createBeside opens a hidden file in the folder of name, with the permissions
// perm less those that the user's mask takes away.
func createBeside(what, name string, perm fs.FileMode) (*output, error) {
	folder, base := filepath.Split(name)
	hidden := fmt.Sprintf("%s.%s.%08x.tmp", folder, base, rand.Uint32())
	file, err := os.OpenFile(hidden, os.O_WRONLY|os.O_CREATE|os.O_EXCL, perm)
	if errors.Is(err, fs.ErrNotExist) {
		return nil, fmt.Errorf("cannot write the %s %s: the folder %s does not exist", what, name, filepath.Clean(folder))
	}
	o := &output{file: file, name: name, what: what}
	if err != nil {
		return nil, o.fault(err)
	}
	return o, nil
}

// sameAsOne returns the name among inputs that is the file there.
func sameAsOne(there fs.FileInfo, inputs []string) (string, bool) {
	for _, name := range inputs {
		if info, err := os.Stat(name); err == nil && os.SameFile(there, info) {
			return name, true
		}
	}
	return "", false
}

// direct reports whether the place is written directly.
func (o *output) direct() bool { return o.file.Name() == o.name }

// fault says that the output cannot be written, and why.
func (o *output) fault(err error) error {
	if err == nil {
		return nil
	}
	var path *fs.PathError
	var link *os.LinkError
	switch { // the hidden name would only puzzle
	case errors.As(err, &path):
		err = path.Err
	case errors.As(err, &link):
		err = link.Err
	}
	return fmt.Errorf("cannot write the %s %s: %w", o.what, o.name, err)
}

func (o *output) Write(p []byte) (int, error) {
	n, err := o.file.Write(p)
	return n, o.fault(err)
}

// commit makes the file appear under its name.
func (o *output) commit() error {
	var err error
	if !o.direct() {
		err = o.file.Sync() // the name must never stand for a file that a power cut emptied
	}
	err = cmp.Or(err, o.file.Close())
	if err == nil && !o.direct() {
		err = os.Rename(o.file.Name(), o.name)
	}
	if err != nil {
		o.discard()
	}
	return o.fault(err)
}

// discard leaves no trace of the file; after commit it does nothing.
func (o *output) discard() {
	o.file.Close()
	if !o.direct() {
		os.Remove(o.file.Name())
	}
}
