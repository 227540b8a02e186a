package archive

import (
	"crypto/sha256"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// TestVerifyNamesTampering alters, truncates, replaces and removes each kind of
// file of one entry among others: Verify names that file and nothing else.
func TestVerifyNamesTampering(t *testing.T) {
	flip := func(name string) error {
		text, err := os.ReadFile(name)
		if err != nil {
			return err
		}
		text[len(text)/2] ^= 1
		return os.WriteFile(name, text, 0o666)
	}
	cut := func(name string) error { return os.Truncate(name, 5) }
	empty := func(name string) error { return os.Truncate(name, 0) }
	for _, file := range []string{"report.html", "result.json", "capture.csv.gz", "SHA256SUMS"} {
		for how, spoil := range map[string]func(string) error{"flip": flip, "cut": cut, "empty": empty, "remove": os.Remove} {
			dir := t.TempDir()
			mustAdd(t, dir, "loop", 0)
			spoilt := mustAdd(t, dir, "loop", 1)
			mustAdd(t, dir, "other", 2)
			if err := spoil(filepath.Join(spoilt, file)); err != nil {
				t.Fatal(err)
			}
			v, err := Verify(dir)
			if err != nil {
				t.Fatal(err)
			}
			want := "altered"
			if how == "remove" {
				want = "missing"
			}
			named := false
			for _, p := range v.Problems {
				named = named || strings.HasSuffix(p.Path, filepath.Base(spoilt)+"/"+file) && p.What == want
				if !strings.Contains(p.Path, filepath.Base(spoilt)) {
					t.Errorf("%s of %s: %+v is of a whole entry", how, file, p)
				}
			}
			// A flipped digit of a checksum shows as a file that does not fit it.
			if !named && !(file == "SHA256SUMS" && how == "flip" && len(v.Problems) > 0) {
				t.Errorf("%s of %s: %+v", how, file, v.Problems)
			}
		}
	}
}

// TestVerifyNamesForgery: capture and checksums exchanged together do not fit the
// name of the entry, nor its result.
func TestVerifyNamesForgery(t *testing.T) {
	dir := t.TempDir()
	a, b := mustAdd(t, dir, "loop", 0), mustAdd(t, dir, "loop", 1)
	for _, file := range []string{"capture.csv.gz", "SHA256SUMS", "report.html", "result.json"} {
		if err := os.WriteFile(filepath.Join(a, file), readFile(t, b, file), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	v, err := Verify(dir)
	if err != nil || len(v.Problems) != 1 || v.Problems[0].What != "altered" || !strings.HasSuffix(v.Problems[0].Path, "capture.csv.gz") {
		t.Errorf("%+v, %v", v, err)
	}
}

// TestVerifyNamesExchanged: one of several files that were measured is exchanged, with its
// checksum; the result, of a cross-check or of components, is of another file.
func TestVerifyNamesExchanged(t *testing.T) {
	for second, result := range map[string]string{
		"sweep":     `{"schema":"dieaway.crosscheck.v1","status":"good","ringdown":{"sha256":%[1]q},"sweep":{"sha256":%[2]q}}`,
		"capture-2": `{"schema":"dieaway.components.v1","status":"good","rows":[{"file":"a.csv","sha256":%[1]q},{"file":"b.csv","sha256":%[2]q}]}`,
	} {
		dir := t.TempDir()
		e, other := entryOf("loop", 0), entryOf("loop", 1)
		also := other.Sources[0]
		also.Kind = second
		e.Sources = append(e.Sources, also)
		e.Result = func(w io.Writer) error {
			_, err := fmt.Fprintf(w, result, e.Sources[0].SHA256, also.SHA256)
			return err
		}
		folder, err := Add(dir, "loop", e)
		if err != nil {
			t.Fatal(err)
		}
		if v, err := Verify(dir); err != nil || len(v.Problems) != 0 || v.Files != 4 {
			t.Fatalf("%s: %+v, %v", second, v, err)
		}
		name := second + ".csv.gz"
		old, changed := readFile(t, folder, name), readFile(t, folder, "capture.csv.gz")
		sums := strings.Replace(string(readFile(t, folder, "SHA256SUMS")), fmt.Sprintf("%x  %s", sha256.Sum256(old), name), fmt.Sprintf("%x  %s", sha256.Sum256(changed), name), 1)
		for name, text := range map[string][]byte{name: changed, "SHA256SUMS": []byte(sums)} {
			if err := os.WriteFile(filepath.Join(folder, name), text, 0o666); err != nil {
				t.Fatal(err)
			}
		}
		v, err := Verify(dir)
		if err != nil || len(v.Problems) != 1 || v.Problems[0].What != "altered" || !strings.Contains(v.Problems[0].Why, "the result of another "+second) {
			t.Errorf("%s: %+v, %v", second, v, err)
		}
	}
}

func TestVerifyNamesStrangers(t *testing.T) {
	dir := t.TempDir()
	folder := mustAdd(t, dir, "loop", 0)
	if err := os.WriteFile(filepath.Join(folder, "notes.txt"), nil, 0o666); err != nil {
		t.Fatal(err)
	}
	v, err := Verify(dir)
	if err != nil || len(v.Problems) != 1 || v.Problems[0].What != "not listed" {
		t.Errorf("%+v, %v", v, err)
	}
}

// TestVerifyNamesHalfWritten: what a writer left that was ended in the middle is
// named, not counted as an entry, and cleared away by Rebuild.
func TestVerifyNamesHalfWritten(t *testing.T) {
	dir := t.TempDir()
	folder := mustAdd(t, dir, "loop", 0)
	half := filepath.Join(filepath.Dir(folder), "."+filepath.Base(folder)+".0123456789abcdef.tmp")
	if err := os.Mkdir(half, 0o777); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(half, "result.json"), []byte("{"), 0o666); err != nil {
		t.Fatal(err)
	}
	v, err := Verify(dir)
	if err != nil || v.Entries != 1 || len(v.Problems) != 1 || v.Problems[0].What != "half-written" {
		t.Errorf("%+v, %v", v, err)
	}
	if _, _, err := Rebuild(dir); err != nil {
		t.Fatal(err)
	}
	mustVerify(t, dir, 1)
}

func TestVerifyOfNoArchive(t *testing.T) {
	dir := t.TempDir()
	if _, err := Verify(dir); err == nil || !strings.Contains(err.Error(), "not an archive") {
		t.Errorf("an empty folder: %v", err)
	}
	if _, err := Verify(filepath.Join(dir, "nowhere")); err == nil {
		t.Error("a folder that is not there")
	}
	if _, _, err := Rebuild(dir); err == nil {
		t.Error("an index page for a folder that is no archive")
	}
}
