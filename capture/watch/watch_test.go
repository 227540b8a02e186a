package watch

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"
)

// A log collects what a folder hands on.
type log struct {
	mu    sync.Mutex
	files []File
	said  []string
}

func (l *log) names() (out []string) {
	l.mu.Lock()
	defer l.mu.Unlock()
	for _, f := range l.files {
		out = append(out, f.Name)
	}
	return out
}

func (l *log) heard(word string) bool {
	l.mu.Lock()
	defer l.mu.Unlock()
	return slices.ContainsFunc(l.said, func(s string) bool { return strings.Contains(s, word) })
}

// start watches until the test ends and returns what is handed on.
func start(t *testing.T, f *Folder) *log {
	t.Helper()
	l := &log{}
	f.Settle = 60 * time.Millisecond
	f.Say = func(s string) {
		l.mu.Lock()
		defer l.mu.Unlock()
		l.said = append(l.said, s)
	}
	ctx, cancel := context.WithCancel(t.Context())
	done := make(chan error, 1)
	go func() {
		done <- f.Run(ctx, func(_ context.Context, files []File) error {
			l.mu.Lock()
			defer l.mu.Unlock()
			l.files = append(l.files, files...)
			return nil
		})
	}()
	t.Cleanup(func() {
		cancel()
		if err := <-done; err != nil {
			t.Errorf("stopped with %v", err)
		}
	})
	return l
}

// until waits for a condition; what it waits for is given ample time.
func until(t *testing.T, what string, ok func() bool) {
	t.Helper()
	for end := time.Now().Add(20 * time.Second); time.Now().Before(end); time.Sleep(5 * time.Millisecond) {
		if ok() {
			return
		}
	}
	t.Fatalf("waited in vain for %s", what)
}

func put(t *testing.T, dir, name, text string) {
	t.Helper()
	if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
}

func both(t *testing.T, test func(t *testing.T, poll time.Duration)) {
	t.Run("listening", func(t *testing.T) { test(t, 0) })
	t.Run("polling", func(t *testing.T) { test(t, 20*time.Millisecond) })
}

// TestBurst: hundreds at once come each once.
func TestBurst(t *testing.T) {
	both(t, func(t *testing.T, poll time.Duration) {
		dir := t.TempDir()
		put(t, dir, "there.csv", "before")
		l := start(t, &Folder{Dir: dir, Poll: poll})
		for i := range 300 {
			put(t, dir, fmt.Sprintf("%03d.csv", i), "1,2\n")
		}
		until(t, "301 files", func() bool { return len(l.names()) >= 301 })
		time.Sleep(200 * time.Millisecond)
		names := l.names()
		slices.Sort(names)
		if len(names) != 301 || len(slices.Compact(names)) != 301 {
			t.Errorf("%d files handed on, want 301 different ones", len(l.names()))
		}
	})
}

// TestGrowing: a file that is being written is left alone until it rests; one that
// is replaced comes again.
func TestGrowing(t *testing.T) {
	both(t, func(t *testing.T, poll time.Duration) {
		dir := t.TempDir()
		l := start(t, &Folder{Dir: dir, Poll: poll})
		file, err := os.Create(filepath.Join(dir, "slow.csv"))
		if err != nil {
			t.Fatal(err)
		}
		for range 30 {
			fmt.Fprintln(file, "1,2")
			time.Sleep(10 * time.Millisecond)
		}
		file.Close()
		until(t, "the file", func() bool { return len(l.names()) > 0 })
		l.mu.Lock()
		last := l.files[len(l.files)-1]
		l.mu.Unlock()
		if last.Size != 120 {
			until(t, "the whole file", func() bool { l.mu.Lock(); defer l.mu.Unlock(); return l.files[len(l.files)-1].Size == 120 })
		}
		n := len(l.names())
		put(t, dir, "other.part", "3,4,5\n")
		if err := os.Rename(filepath.Join(dir, "other.part"), filepath.Join(dir, "slow.csv")); err != nil {
			t.Fatal(err)
		}
		until(t, "the other file", func() bool { return len(l.names()) > n })
	})
}

// TestFolderGoes: a folder that is removed and comes back is watched again, and
// what was done in it stays done.
func TestFolderGoes(t *testing.T) {
	both(t, func(t *testing.T, poll time.Duration) {
		dir := filepath.Join(t.TempDir(), "in")
		l := start(t, &Folder{Dir: dir, Poll: poll})
		until(t, "a word on the missing folder", func() bool { return l.heard("does not exist") })
		for i := range 2 {
			if err := os.Mkdir(dir, 0o777); err != nil {
				t.Fatal(err)
			}
			put(t, dir, fmt.Sprintf("%d.csv", i), "1,2\n")
			until(t, "the file", func() bool { return len(l.names()) > i })
			if err := os.RemoveAll(dir); err != nil {
				t.Fatal(err)
			}
			until(t, "a look at nothing", func() bool {
				l.mu.Lock()
				defer l.mu.Unlock()
				return len(l.said) == 2*i+3
			})
		}
		if got := l.names(); !slices.Equal(got, []string{"0.csv", "1.csv"}) {
			t.Errorf("handed on %v", got)
		}
	})
}

// TestJournal: what was done is not done again after a stop, though the last line
// was cut short.
func TestJournal(t *testing.T) {
	dir, name := t.TempDir(), filepath.Join(t.TempDir(), "journal")
	put(t, dir, "a.csv", "1")
	put(t, dir, "b \"\n.csv", "12")
	f := &Folder{Dir: dir}
	j, err := OpenJournal(name, f)
	if err != nil {
		t.Fatal(err)
	}
	f.pending = map[string]sighting{}
	later := time.Now().Add(time.Hour)
	ready := f.look(later)
	if len(ready) != 2 {
		t.Fatalf("%d files", len(ready))
	}
	for _, r := range ready {
		if err := j.Add(r); err != nil {
			t.Fatal(err)
		}
	}
	if err := j.Close(); err != nil {
		t.Fatal(err)
	}
	text, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	for cut, want := range map[int]int{0: 0, 3: 1} {
		put(t, filepath.Dir(name), "journal", string(text[:len(text)-cut]))
		f := &Folder{Dir: dir, pending: map[string]sighting{}}
		j, err := OpenJournal(name, f)
		if err != nil {
			t.Fatal(err)
		}
		left := f.look(later)
		if len(left) != want {
			t.Errorf("%d bytes cut off: %d files to do, want %d", cut, len(left), want)
		}
		for _, r := range left {
			if err := j.Add(r); err != nil {
				t.Fatal(err)
			}
		}
		j.Close()
		f = &Folder{Dir: dir, pending: map[string]sighting{}}
		if j, err = OpenJournal(name, f); err != nil {
			t.Fatal(err)
		}
		j.Close()
		if left := f.look(later); len(left) != 0 {
			t.Errorf("still %v to do", left)
		}
	}
}

// TestHandleFails: an error of the work ends the watch with it.
func TestHandleFails(t *testing.T) {
	dir := t.TempDir()
	put(t, dir, "a.csv", "1")
	want := errors.New("no more")
	f := &Folder{Dir: dir, Settle: time.Millisecond}
	if err := f.Run(t.Context(), func(context.Context, []File) error { return want }); !errors.Is(err, want) {
		t.Errorf("%v, want %v", err, want)
	}
}

// FuzzJournal: any text is read, and what is added after it is read back.
func FuzzJournal(f *testing.F) {
	f.Add("12 34 \"a.csv\"\n", "b.csv")
	f.Add("12 34 \"a.cs", "\n\xff")
	f.Fuzz(func(t *testing.T, text, file string) {
		name := filepath.Join(t.TempDir(), "journal")
		put(t, filepath.Dir(name), "journal", text)
		j, err := OpenJournal(name, &Folder{})
		if err != nil {
			t.Fatal(err)
		}
		want := File{file, Stamp{5, -7}}
		if err := errors.Join(j.Add(want), j.Close()); err != nil {
			t.Fatal(err)
		}
		again := &Folder{}
		if j, err = OpenJournal(name, again); err != nil {
			t.Fatal(err)
		}
		j.Close()
		if got := again.done[file]; got != want.Stamp {
			t.Errorf("%q is read back as %v", file, got)
		}
	})
}
