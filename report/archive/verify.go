package archive

import (
	"bufio"
	"compress/gzip"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
)

// A Problem is one thing wrong with an entry.
type Problem struct {
	// Path is the file or the folder, below the archive.
	Path string
	// What is "altered", "missing", "half-written", "not listed" or "unreadable",
	// and Why says how that is known.
	What, Why string
}

// A Verified is the outcome of [Verify].
type Verified struct {
	Devices, Entries, Files int
	Problems                []Problem
}

// Verify recomputes the checksums of all entries and names what is altered,
// missing or half-written. Beyond SHA256SUMS, which somebody could alter as well, the
// capture must be the one that the entry's name and its result are of. An error
// means that the archive could not be looked through.
func Verify(dir string) (*Verified, error) {
	if err := mustBeArchive(dir); err != nil {
		return nil, err
	}
	folders, err := devicesOf(dir)
	if err != nil {
		return nil, err
	}
	v := &verifier{dir: dir}
	for _, folder := range folders {
		if err := v.device(folder); err != nil {
			return nil, err
		}
	}
	return &v.Verified, nil
}

type verifier struct {
	Verified
	dir string
}

func (v *verifier) problem(path, what, format string, args ...any) {
	v.Problems = append(v.Problems, Problem{filepath.ToSlash(path), what, fmt.Sprintf(format, args...)})
}

// device verifies all entries of one device.
func (v *verifier) device(folder string) error {
	home := filepath.Join(v.dir, folder)
	left, err := temporariesLeft(v.dir, folder)
	if err != nil {
		return err
	}
	for _, name := range left {
		v.problem(filepath.Join(folder, name), "half-written", "its writer was ended in the middle; rebuild clears it away")
	}
	names, err := namesOf(home)
	if err != nil {
		return err
	}
	if len(names) > 0 {
		v.Devices++
	}
	for _, name := range names {
		v.Entries++
		v.entry(filepath.Join(folder, name))
	}
	return nil
}

// entry verifies one entry.
func (v *verifier) entry(path string) {
	sums, err := readSums(filepath.Join(v.dir, path, sumsName))
	if errors.Is(err, os.ErrNotExist) {
		v.problem(filepath.Join(path, sumsName), "missing", "the entry has no checksums: it is not known whether it is whole")
		return
	}
	if err != nil {
		v.problem(filepath.Join(path, sumsName), "altered", "%v", err)
		return
	}
	present, err := os.ReadDir(filepath.Join(v.dir, path))
	if err != nil {
		v.problem(path, "unreadable", "%v", err)
		return
	}
	for _, name := range []string{resultName, reportName} {
		if _, ok := sums[name]; !ok {
			v.problem(filepath.Join(path, sumsName), "altered", "it lists no %s", name)
		}
	}
	for _, name := range sortedKeys(sums) {
		v.file(filepath.Join(path, name), sums[name])
	}
	for _, e := range present {
		if _, ok := sums[e.Name()]; !ok && e.Name() != sumsName {
			v.problem(filepath.Join(path, e.Name()), "not listed", "it is not among the checksums of its entry")
		}
	}
	v.capture(path, sums)
}

// file compares one file with its checksum.
func (v *verifier) file(path, want string) {
	v.Files++
	got, err := digestOf(filepath.Join(v.dir, path))
	switch {
	case errors.Is(err, os.ErrNotExist):
		v.problem(path, "missing", "the entry's %s lists it", sumsName)
	case err != nil:
		v.problem(path, "unreadable", "%v", err)
	case got != want:
		v.problem(path, "altered", "its SHA-256 is %s, not %s", got, want)
	}
}

// capture makes sure that what was measured are the files that the entry's name and
// its result are of.
func (v *verifier) capture(path string, sums map[string]string) {
	name := fileOfKind(sums, "capture")
	if name == "" {
		v.problem(filepath.Join(path, sumsName), "altered", "it lists no capture")
		return
	}
	stored, inner := v.digests(filepath.Join(path, name))
	if stored == "" {
		return // said already
	}
	if _, head, _ := parseName(filepath.Base(path)); !strings.HasPrefix(stored, head) && !strings.HasPrefix(inner, head) {
		v.problem(filepath.Join(path, name), "altered", "it is not the capture that the entry is named after: SHA-256 %s", inner)
	}
	text, err := os.ReadFile(filepath.Join(v.dir, path, resultName))
	if err != nil {
		return
	}
	var o object
	_ = json.Unmarshal(text, &o)
	measured := measuredFiles(o)
	for _, kind := range sortedKeys(measured) {
		want := measured[kind]
		if name := fileOfKind(sums, kind); want != "" && name != "" {
			if stored, inner := v.digests(filepath.Join(path, name)); stored != "" && want != stored && want != inner {
				v.problem(filepath.Join(path, resultName), "altered", "it is the result of another %s: SHA-256 %s", kind, want)
			}
		}
	}
}

// digests are those of a file and of what it holds compressed, "" where there is none.
func (v *verifier) digests(path string) (stored, inner string) {
	stored, _ = digestOf(filepath.Join(v.dir, path))
	inner, _ = contentDigest(filepath.Join(v.dir, path))
	return stored, inner
}

// fileOfKind returns the name of a file that was measured, "" without one.
func fileOfKind(sums map[string]string, kind string) (name string) {
	for _, n := range sortedKeys(sums) {
		if strings.HasPrefix(n, kind+".") {
			name = n
		}
	}
	return name
}

// measuredFiles are the digests of the files that a result says it is of, by their
// kind: a cross-check is of two, components of several captures.
func measuredFiles(o object) map[string]string {
	files := map[string]string{"capture": o.text("sha256")}
	if ring := o.object("ringdown"); ring != nil {
		files["capture"], files["sweep"] = ring.text("sha256"), o.object("sweep").text("sha256")
	}
	for i, row := range o.objects("rows") {
		files[KindOf("capture", i)] = row.text("sha256")
	}
	return files
}

// readSums reads the checksums of an entry by file name.
func readSums(name string) (map[string]string, error) {
	f, err := os.Open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	sums := map[string]string{}
	lines := bufio.NewScanner(f)
	for n := 1; lines.Scan(); n++ {
		sum, file, ok := strings.Cut(lines.Text(), "  ")
		raw, err := hex.DecodeString(sum)
		if !ok || err != nil || len(raw) != sha256.Size || file != filepath.Base(file) || file == "." || file == ".." {
			return nil, fmt.Errorf("line %d is %q, expected a SHA-256, two spaces and the name of a file", n, lines.Text())
		}
		sums[file] = sum
	}
	if err := lines.Err(); err != nil {
		return nil, err
	}
	if len(sums) == 0 {
		return nil, errors.New("it is empty")
	}
	return sums, nil
}

func digestOf(name string) (string, error) {
	f, err := os.Open(name)
	if err != nil {
		return "", err
	}
	defer f.Close()
	return digest(f)
}

// contentDigest is the digest of what a compressed file holds.
func contentDigest(name string) (string, error) {
	f, err := os.Open(name)
	if err != nil {
		return "", err
	}
	defer f.Close()
	z, err := gzip.NewReader(f)
	if err != nil {
		return "", err
	}
	return digest(z)
}

func digest(r io.Reader) (string, error) {
	sum := sha256.New()
	_, err := io.Copy(sum, r)
	return hex.EncodeToString(sum.Sum(nil)), err
}

func sortedKeys(m map[string]string) []string {
	keys := make([]string, 0, len(m))
	for k := range m {
		keys = append(keys, k)
	}
	slices.Sort(keys)
	return keys
}
