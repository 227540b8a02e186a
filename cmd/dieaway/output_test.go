package main

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"testing"
)

// page is how every page begins.
const page = "<!doctype html>"

func TestOutputAppearsWhole(t *testing.T) {
	name := filepath.Join(t.TempDir(), "page.html")
	out := mustCreate(t, name)
	if _, err := out.Write([]byte("whole")); err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(name); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("the file is there before it is whole: %v", err)
	}
	if err := out.commit(); err != nil {
		t.Fatal(err)
	}
	out.discard() // does nothing now
	checkFolder(t, name, "whole")
}

func TestDiscardKeepsWhatWasThere(t *testing.T) {
	name := filepath.Join(t.TempDir(), "page.html")
	write(t, name, page+"of yesterday")
	out := mustCreate(t, name)
	if _, err := out.Write([]byte("half")); err != nil {
		t.Fatal(err)
	}
	out.discard()
	checkFolder(t, name, page+"of yesterday")
}

func TestOutputKeepsPermissionsAndLinks(t *testing.T) {
	folder := t.TempDir()
	name, link := filepath.Join(folder, "page.html"), filepath.Join(t.TempDir(), "latest.html")
	write(t, name, page+"of yesterday")
	if err := errors.Join(os.Chmod(name, 0o640), os.Symlink(name, link)); err != nil {
		t.Fatal(err)
	}
	out := mustCreate(t, link)
	if _, err := out.Write([]byte("of today")); err != nil {
		t.Fatal(err)
	}
	if err := out.commit(); err != nil {
		t.Fatal(err)
	}
	checkFolder(t, name, "of today")
	info, err := os.Lstat(link)
	if err != nil || info.Mode().Type() != fs.ModeSymlink {
		t.Errorf("the link is no longer one: %v, %v", info, err)
	}
	if info, err = os.Stat(name); err != nil || info.Mode().Perm() != 0o640 {
		t.Errorf("permissions %v, %v, want -rw-r-----", info.Mode(), err)
	}
}

func TestOutputToDevice(t *testing.T) {
	out := mustCreate(t, os.DevNull)
	if _, err := out.Write([]byte("gone")); err != nil {
		t.Error(err)
	}
	if err := out.commit(); err != nil {
		t.Error(err)
	}
	if info, err := os.Stat(os.DevNull); err != nil || info.Mode().IsRegular() {
		t.Errorf("the device was replaced: %v, %v", info, err)
	}
}

func mustCreate(t *testing.T, name string) *output {
	t.Helper()
	out, err := createOutput(name, nil)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func write(t *testing.T, name, text string) {
	t.Helper()
	if err := os.WriteFile(name, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
}

// checkFolder wants the file name with the text, and nothing else beside it.
func checkFolder(t *testing.T, name, text string) {
	t.Helper()
	got, err := os.ReadFile(name)
	if err != nil || string(got) != text {
		t.Errorf("%s holds %q, %v, want %q", name, got, err, text)
	}
	entries, err := os.ReadDir(filepath.Dir(name))
	if err != nil || len(entries) != 1 {
		t.Errorf("found %v, %v beside %s, want nothing", entries, err, name)
	}
}
