package archive

import (
	"bytes"
	"compress/gzip"
	"crypto/sha256"
	"errors"
	"fmt"
	"io"
	"maps"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"sync"
	"testing"

	"dieaway/report"
)

// TestAddLayout wants the names of DESIGN.md: scripts depend on them.
func TestAddLayout(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "new", "archive")
	folder := mustAdd(t, dir, "loop 07", 0)
	if !regexp.MustCompile(`^loop-07-[0-9a-f]{10}$`).MatchString(filepath.Base(filepath.Dir(folder))) {
		t.Errorf("the device's folder is %s", filepath.Dir(folder))
	}
	if want := "20260314T093000.000Z-" + entryOf("", 0).Sources[0].SHA256[:8]; filepath.Base(folder) != want {
		t.Errorf("the entry is %s, want %s", filepath.Base(folder), want)
	}
	var names []string
	files, err := os.ReadDir(folder)
	for _, f := range files {
		names = append(names, f.Name())
	}
	if want := "SHA256SUMS capture.csv.gz report.html result.json"; err != nil || strings.Join(names, " ") != want {
		t.Errorf("the entry holds %v, %v, want %s", names, err, want)
	}
	z, err := gzip.NewReader(bytes.NewReader(readFile(t, folder, "capture.csv.gz")))
	if err != nil {
		t.Fatal(err)
	}
	if text, err := io.ReadAll(z); err != nil || fmt.Sprintf("%x", sha256.Sum256(text)) != entryOf("", 0).Sources[0].SHA256 {
		t.Errorf("the capture is %q, %v", text, err)
	}
	for _, page := range []string{filepath.Join(dir, "index.html"), filepath.Join(filepath.Dir(folder), "index.html")} {
		if text := readFile(t, page); !bytes.Contains(text, []byte("loop 07")) || !bytes.Contains(text, []byte("125.0340(15) kHz")) {
			t.Errorf("%s does not show the entry", page)
		}
	}
	mustVerify(t, dir, 1)
}

// TestAddNeverOverwrites files the same capture of the same instant again and again.
func TestAddNeverOverwrites(t *testing.T) {
	dir := t.TempDir()
	seen := map[string]bool{}
	for range 5 {
		seen[mustAdd(t, dir, "loop", 0)] = true
	}
	if len(seen) != 5 {
		t.Errorf("5 entries went into %d folders", len(seen))
	}
	mustVerify(t, dir, 5)
}

func TestAddKeepsCompressedFiles(t *testing.T) {
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	io.WriteString(z, "time,loop\n")
	z.Close()
	e := entryOf("loop", 0)
	e.Sources[0] = Source{Kind: "capture", Name: "LOOP.CSV.GZ", SHA256: fmt.Sprintf("%x", sha256.Sum256(b.Bytes())), Open: opener(b.Bytes())}
	e.Result = func(w io.Writer) error { _, err := io.WriteString(w, "{}\n"); return err }
	dir := t.TempDir()
	folder, err := Add(dir, "loop", e)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(readFile(t, folder, "capture.csv.gz"), b.Bytes()) {
		t.Error("the compressed capture is not kept as it is")
	}
	mustVerify(t, dir, 1)
}

// TestAddFails: whatever goes wrong, there is no entry and no trace of it, and the
// error says why.
func TestAddFails(t *testing.T) {
	broken := errors.New("no space left on device")
	for name, spoil := range map[string]func(*Entry){
		"no space left on device": func(e *Entry) { e.Report = func(io.Writer) error { return broken } },
		"no longer the file":      func(e *Entry) { e.Sources[0].Open = opener([]byte("another")) },
		"is no SHA-256":           func(e *Entry) { e.Sources[0].SHA256 = "../../x" },
		"needs its result":        func(e *Entry) { e.Sources = nil },
		"cannot be opened": func(e *Entry) {
			e.Sources[0].Open = func() (io.ReadCloser, error) { return nil, errors.New("cannot be opened") }
		},
	} {
		dir := t.TempDir()
		e := entryOf("loop", 0)
		spoil(e)
		folder, err := Add(dir, "loop", e)
		if err == nil || folder != "" || !strings.Contains(err.Error(), name) || strings.Contains(err.Error(), ".tmp") {
			t.Errorf("%s: folder %q, error %v", name, folder, err)
		}
		if left, _ := os.ReadDir(filepath.Join(dir, "loop")); len(left) > 0 {
			t.Errorf("%s: left behind: %v", name, left)
		}
	}
	if _, err := Add(t.TempDir(), "", entryOf("", 0)); err == nil {
		t.Error("an entry of a device without a name")
	}
}

func TestAddToReadOnlyFolder(t *testing.T) {
	if os.Geteuid() == 0 {
		t.Skip("the administrator may write everywhere")
	}
	dir := t.TempDir()
	if err := os.Chmod(dir, 0o555); err != nil {
		t.Fatal(err)
	}
	if _, err := Add(dir, "loop", entryOf("loop", 0)); !errors.Is(err, os.ErrPermission) {
		t.Errorf("in a folder without permission: %v", err)
	}
}

// TestAddWhereTheArchiveIsAFile wants an error that names what is in the way.
func TestAddWhereTheArchiveIsAFile(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "archive")
	if err := os.WriteFile(dir, nil, 0o666); err != nil {
		t.Fatal(err)
	}
	if _, err := Add(dir, "loop", entryOf("loop", 0)); err == nil || !strings.Contains(err.Error(), dir) {
		t.Errorf("into a file: %v", err)
	}
}

// TestAddKeepsEntryWithoutIndex: an index page that cannot be written costs no entry.
func TestAddKeepsEntryWithoutIndex(t *testing.T) {
	dir := t.TempDir()
	if err := os.MkdirAll(filepath.Join(dir, "loop", "index.html"), 0o777); err != nil {
		t.Fatal(err)
	}
	folder, err := Add(dir, "loop", entryOf("loop", 0))
	if err == nil || folder == "" || !strings.Contains(err.Error(), "rebuild") {
		t.Fatalf("folder %q, error %v", folder, err)
	}
	mustVerify(t, dir, 1)
}

// TestManyWriters: 32 at once, of four devices, all of one instant.
func TestManyWriters(t *testing.T) {
	dir := t.TempDir()
	var group sync.WaitGroup
	for i := range 32 {
		group.Go(func() {
			device := fmt.Sprintf("loop-%d", i%4)
			if _, err := Add(dir, device, entryOf(device, 0)); err != nil {
				t.Error(err)
			}
		})
	}
	group.Wait()
	mustVerify(t, dir, 32)
	mustShow(t, dir, map[string]int{"loop-0": 8, "loop-1": 8, "loop-2": 8, "loop-3": 8})
}

// mustShow wants so many entries of each device folder on its page, and all devices
// on the first page.
func mustShow(t *testing.T, dir string, want map[string]int) {
	t.Helper()
	devices, err := report.ReadDevices(readFile(t, dir, "index.html"))
	if err != nil {
		t.Fatal(err)
	}
	if shown := devices.Counts(); !maps.Equal(shown, want) {
		t.Errorf("the page of all devices shows %v, want %v", shown, want)
	}
	for folder, n := range want {
		h, err := report.ReadHistory(readFile(t, dir, folder, "index.html"))
		if err != nil || h.Len() != n {
			t.Errorf("the page of %s shows %d entries, %v, want %d", folder, h.Len(), err, n)
		}
	}
	if left, err := os.ReadDir(filepath.Join(dir, pendingName)); err != nil || len(left) > 0 {
		t.Errorf("marks of writers are left: %v, %v", left, err)
	}
}
