package archive

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"dieaway/report"
)

// TestRebuild: from the entries alone come the same pages, byte for byte.
func TestRebuild(t *testing.T) {
	dir := t.TempDir()
	for i := range 12 {
		mustAdd(t, dir, fmt.Sprintf("loop-%d", i%3), i)
	}
	pages := []string{"index.html", "loop-0/index.html", "loop-1/index.html", "loop-2/index.html"}
	before := map[string][]byte{}
	for _, p := range pages {
		before[p] = readFile(t, dir, p)
		if err := os.Remove(filepath.Join(dir, p)); err != nil {
			t.Fatal(err)
		}
	}
	devices, entries, err := Rebuild(dir)
	if err != nil || devices != 3 || entries != 12 {
		t.Errorf("%d devices, %d entries, %v", devices, entries, err)
	}
	for _, p := range pages {
		if !bytes.Equal(readFile(t, dir, p), before[p]) {
			t.Errorf("%s is another page than before", p)
		}
	}
}

// TestIndexHeals: a page that is missing, cut short, of another make, or that lacks
// an entry is made good with the next entry.
func TestIndexHeals(t *testing.T) {
	for name, spoil := range map[string]func(dir string) error{
		"missing": func(dir string) error { return os.Remove(filepath.Join(dir, "loop", indexName)) },
		"cut":     func(dir string) error { return os.Truncate(filepath.Join(dir, "loop", indexName), 20000) },
		"another make": func(dir string) error {
			return os.WriteFile(filepath.Join(dir, "loop", indexName), []byte("<html>"), 0o666)
		},
		"first page missing": func(dir string) error { return os.Remove(filepath.Join(dir, indexName)) },
		"first page cut":     func(dir string) error { return os.Truncate(filepath.Join(dir, indexName), 20000) },
	} {
		dir := t.TempDir()
		mustAdd(t, dir, "other", 0)
		mustAdd(t, dir, "loop", 1)
		mustAdd(t, dir, "loop", 2)
		if err := spoil(dir); err != nil {
			t.Fatal(err)
		}
		mustAdd(t, dir, "loop", 3)
		t.Log(name)
		mustShow(t, dir, map[string]int{"other": 1, "loop": 3})
	}
}

// TestOutOfOrder: an entry with an older stamp takes its place in the pages.
func TestOutOfOrder(t *testing.T) {
	dir, other := t.TempDir(), t.TempDir()
	for _, i := range []int{3, 1, 2, 0} {
		mustAdd(t, dir, "loop", i)
		mustAdd(t, other, "loop", 3-i)
	}
	for _, page := range []string{"index.html", "loop/index.html"} {
		if !bytes.Equal(readFile(t, dir, page), readFile(t, other, page)) {
			t.Errorf("%s depends on the order in which entries were filed", page)
		}
	}
}

// TestLeftBehind: an entry whose writer was ended before the pages showed it is
// shown with the next entry of any device, and its mark is gone.
func TestLeftBehind(t *testing.T) {
	dir := t.TempDir()
	mustAdd(t, dir, "loop", 0)
	name, m, err := add(dir, "loop", entryOf("loop", 1))
	if err != nil || name == "" {
		t.Fatal(err)
	}
	mustAdd(t, dir, "other", 2) // its writer still lives
	if h, err := report.ReadHistory(readFile(t, dir, "loop", indexName)); err != nil || h.Len() != 1 {
		t.Errorf("the page shows an entry before its time: %v, %v", h, err)
	}
	m.leave()
	mustAdd(t, dir, "other", 3)
	mustShow(t, dir, map[string]int{"loop": 2, "other": 2})
}

// TestOlderEntries: an entry whose result has another form, is no JSON or is gone
// is listed with what is known of it, and stands in the pages.
func TestOlderEntries(t *testing.T) {
	dir := t.TempDir()
	for i, text := range []string{
		`{"schema":"dieaway.ringdown.v0","device":"loop","status":"good","natural_frequency_hz":125034,"quantities":{"q":39.2,"natural_frequency_hz":{"value":125034.2}}}`,
		`{"schema":7,"quantities":[1,2],"limits":"none","device":{"name":"x"}}`,
		`not JSON`,
		``,
	} {
		folder := mustAdd(t, dir, "loop", i)
		if err := os.WriteFile(filepath.Join(folder, resultName), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.Remove(filepath.Join(mustAdd(t, dir, "loop", 4), resultName)); err != nil {
		t.Fatal(err)
	}
	all, err := List(dir)
	if err != nil || len(all) != 5 {
		t.Fatalf("%d entries, %v", len(all), err)
	}
	if r := all[0]; r.Q.Value != 39.2 || r.NaturalFrequency.Value != 125034.2 || r.TimeConstant.Known() || r.Kind != "ringdown" || r.Device != "loop" {
		t.Errorf("of the older schema: %+v", r)
	}
	for i, r := range all[1:] {
		if r.Q.Known() || r.Status != "unknown" || (r.Err == nil) != (i == 0) {
			t.Errorf("entry %d: %+v", i+1, r)
		}
	}
	if _, entries, err := Rebuild(dir); err != nil || entries != 5 {
		t.Errorf("%d entries in the rebuilt page, %v", entries, err)
	}
	mustShow(t, dir, map[string]int{"loop": 5})
}

// TestComponentsShown: an entry of components stands in list and pages with what its
// capture without an added part gave, in whatever place; one that was refused, or has
// no such capture, with nothing.
func TestComponentsShown(t *testing.T) {
	row := func(file, added string, f, q float64) string {
		return fmt.Sprintf(`{"file":"%s","added":%s,"natural_frequency_hz":{"value":%g,"u":6},"decay_rate_per_s":{"value":9300,"u":5},"q":{"value":%g,"u":0.05},"time_constant_s":{"value":1.07e-4,"u":1e-7}}`, file, added, f, q)
	}
	bare, more := row("bare.csv", "0", 125046, 42.2), row("more.csv", "2.2e-10", 113000, 38)
	for i, c := range []struct{ status, rows, f, q, file string }{
		{"good", bare + "," + more, "125.0460(60) kHz", "42.200(50)", "bare.csv"},
		{"good", more + "," + bare, "125.0460(60) kHz", "42.200(50)", "more.csv"},
		{"good", more, "unknown", "unknown", "more.csv"},
		{"refused", bare + "," + more, "unknown", "unknown", "bare.csv"},
		{"good", `{"file":"old.csv","added":0,"natural_frequency_hz":{"value":125046,"u":6}}`, "125.0460(60) kHz", "unknown", "old.csv"},
	} {
		dir := t.TempDir()
		e := entryOf("loop", i)
		e.Result = func(w io.Writer) error {
			_, err := fmt.Fprintf(w, `{"schema":"dieaway.components.v1","status":"%s","device":"loop","inductance_h":{"value":1.62e-3,"u":1e-6},"rows":[%s]}`, c.status, c.rows)
			return err
		}
		if _, err := Add(dir, "loop", e); err != nil {
			t.Fatal(err)
		}
		all, err := List(dir)
		if err != nil || len(all) != 1 {
			t.Fatalf("%d entries, %v", len(all), err)
		}
		if r := all[0]; r.NaturalFrequency.String() != c.f || r.Q.String() != c.q || r.File != c.file || r.Kind != "components" {
			t.Errorf("%s, %s: %+v", c.status, c.rows, r)
		}
		for _, page := range []string{string(readFile(t, dir, indexName)), string(readFile(t, dir, "loop", indexName))} {
			if shown := strings.Contains(page, `<td class="n" data-label="natural frequency">125.0460(60) kHz</td>`); shown != (c.f != "unknown") {
				t.Errorf("%s, %s: the frequency stands in a page: %v", c.status, c.rows, shown)
			}
		}
	}
}

// TestOlderStamps: stamps of whole seconds are entries too, in order of time.
func TestOlderStamps(t *testing.T) {
	dir := t.TempDir()
	home := filepath.Join(dir, "loop")
	for _, name := range []string{"20260314T093000Z-01234567", "20260314T093000.500Z-01234567", "20260314T092959.900Z-01234567"} {
		if err := os.MkdirAll(filepath.Join(home, name), 0o777); err != nil {
			t.Fatal(err)
		}
	}
	names, err := namesOf(home)
	if want := "[20260314T092959.900Z-01234567 20260314T093000Z-01234567 20260314T093000.500Z-01234567]"; err != nil || fmt.Sprint(names) != want {
		t.Errorf("%v, %v, want %s", names, err, want)
	}
}

// BenchmarkAdd files one entry into an archive that has N already, of one device or
// of as many devices, and shows how little the size matters.
func BenchmarkAdd(b *testing.B) {
	for _, n := range []int{10, 1000, 10000} {
		for name, device := range map[string]func(int) string{
			"device":  func(int) string { return "loop" },
			"devices": func(i int) string { return fmt.Sprintf("loop-%05d", i) },
		} {
			b.Run(fmt.Sprintf("%s=%d", name, n), func(b *testing.B) {
				dir := b.TempDir()
				for i := range n {
					e := entryOf(device(i), i)
					folder := filepath.Join(dir, FolderOf(device(i)), nameOf(e.Made, e.Sources[0].SHA256))
					if err := os.MkdirAll(folder, 0o777); err != nil {
						b.Fatal(err)
					}
					f, err := os.Create(filepath.Join(folder, resultName))
					if err != nil {
						b.Fatal(err)
					}
					if err := e.Result(f); err != nil {
						b.Fatal(err)
					}
					f.Close()
				}
				if _, _, err := Rebuild(dir); err != nil {
					b.Fatal(err)
				}
				i := n
				for b.Loop() {
					mustAdd(b, dir, device(i%n), i)
					i++
				}
			})
		}
	}
}
