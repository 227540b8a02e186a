package main

import (
	"errors"
	"fmt"
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

// createOutput opens the report name. It refuses a name that is one of inputs, by
// whatever path or link.
func createOutput(name string, inputs []string) (*output, error) {
	if name == "-" {
		return nil, usagef("the report cannot go to standard output: give it a file name")
	}
	return createFile("report", name, inputs)
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
	if err != nil {
		var path *fs.PathError
		if errors.As(err, &path) {
			err = path.Err // the hidden name would only puzzle
		}
		return nil, fmt.Errorf("cannot write the %s %s: %w", what, name, err)
	}
	return &output{file: file, name: name, what: what}, nil
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

func (o *output) Write(p []byte) (int, error) { return o.file.Write(p) }

// commit makes the file appear under its name.
func (o *output) commit() error {
	direct := o.file.Name() == o.name
	var err error
	if !direct {
		err = o.file.Sync() // the name must never stand for a file that a power cut emptied
	}
	err = errors.Join(err, o.file.Close())
	if err == nil && !direct {
		err = os.Rename(o.file.Name(), o.name)
	}
	if err != nil {
		o.discard()
		return fmt.Errorf("cannot write the %s %s: %w", o.what, o.name, err)
	}
	return nil
}

// discard leaves no trace of the file; after commit it does nothing.
func (o *output) discard() {
	o.file.Close()
	if o.file.Name() != o.name {
		os.Remove(o.file.Name())
	}
}
