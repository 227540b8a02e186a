package archive

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"testing"
	"time"
)

// day is when the invented measurements begin.
var day = time.Date(2026, 3, 14, 9, 30, 0, 0, time.UTC)

// entryOf is an invented measurement number i of a device: loop antennas at 125 kHz
// whose Q falls slowly.
func entryOf(device string, i int) *Entry {
	text := []byte(fmt.Sprintf("time,loop\ns,V\n0,%d\n1e-7,0.5\n", i))
	sum := sha256.Sum256(text)
	name, err := json.Marshal(device)
	if err != nil {
		panic(err) // a string
	}
	digest := hex.EncodeToString(sum[:])
	return &Entry{
		Made: day.Add(time.Duration(i) * 6 * time.Hour),
		Result: func(w io.Writer) error {
			_, err := fmt.Fprintf(w, `{"schema":"dieaway.ringdown.v1","status":"good","file":"loop.csv","sha256":"%s","device":%s,`+
				`"quantities":{"natural_frequency_hz":{"value":%g,"u":1.5},"q":{"value":%g,"u":0.05},"time_constant_s":{"value":%g,"u":1e-7}},`+
				`"limits":{"verdict":"pass","checks":[{"quantity":"q","min":30,"max":null,"verdict":"pass"}]},"findings":[]}`+"\n",
				digest, name, 125034+float64(i%5), 39.2-0.01*float64(i), 9.98e-5-2e-8*float64(i))
			return err
		},
		Report:  func(w io.Writer) error { _, err := io.WriteString(w, "<!doctype html><title>page</title>"); return err },
		Sources: []Source{{Kind: "capture", Name: "bench/loop.csv", SHA256: digest, Open: opener(text)}},
	}
}

func opener(text []byte) func() (io.ReadCloser, error) {
	return func() (io.ReadCloser, error) { return io.NopCloser(bytes.NewReader(text)), nil }
}

// mustAdd files measurement i and returns its folder.
func mustAdd(t testing.TB, dir, device string, i int) string {
	t.Helper()
	folder, err := Add(dir, device, entryOf(device, i))
	if err != nil {
		t.Fatal(err)
	}
	return folder
}

// mustVerify wants so many whole entries and no problem.
func mustVerify(t testing.TB, dir string, entries int) {
	t.Helper()
	v, err := Verify(dir)
	if err != nil {
		t.Fatal(err)
	}
	if len(v.Problems) > 0 || v.Entries != entries || v.Files != 3*entries {
		t.Errorf("%d entries, %d files, %+v; want %d entries", v.Entries, v.Files, v.Problems, entries)
	}
}

func readFile(t testing.TB, elements ...string) []byte {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(elements...))
	if err != nil {
		t.Fatal(err)
	}
	return text
}
