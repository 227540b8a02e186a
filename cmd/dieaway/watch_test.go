package main

import (
	"bytes"
	"context"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"dieaway/report/archive"
)

// A shared is a buffer that is read while the program writes.
type shared struct {
	mu sync.Mutex
	b  bytes.Buffer
}

func (s *shared) Write(p []byte) (int, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.b.Write(p)
}

func (s *shared) String() string {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.b.String()
}

// watching runs dieaway watch until stop is called, which returns the exit code.
func watching(t *testing.T, args ...string) (stdout, stderr *shared, stop func() int) {
	t.Helper()
	ctx, cancel := context.WithCancel(context.Background())
	stdout, stderr = &shared{}, &shared{}
	code := make(chan int, 1)
	go func() {
		code <- run(ctx, append([]string{"dieaway", "watch", "--settle", "100ms"}, args...), strings.NewReader(""), stdout, stderr)
	}()
	var once sync.Once
	ended := 0
	stop = func() int {
		once.Do(func() { cancel(); ended = <-code })
		return ended
	}
	t.Cleanup(func() { stop() })
	return stdout, stderr, stop
}

// lines waits until out has n lines.
func lines(t *testing.T, out, errs *shared, n int) string {
	t.Helper()
	for end := time.Now().Add(60 * time.Second); time.Now().Before(end); time.Sleep(10 * time.Millisecond) {
		if strings.Count(out.String(), "\n") >= n {
			return out.String()
		}
	}
	t.Fatalf("waited in vain for %d lines, have\n%s%s", n, out, errs)
	return ""
}

// putCapture writes a ring-down of 125 kHz in two halves.
func putCapture(t *testing.T, name string, pause time.Duration) {
	t.Helper()
	text := bytes.SplitAfter(loop07, []byte("\n"))
	file, err := os.Create(name)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	for i, half := range [][][]byte{text[:1200], text[1200:]} {
		if i > 0 {
			time.Sleep(pause)
		}
		if _, err := file.Write(bytes.Join(half, nil)); err != nil {
			t.Fatal(err)
		}
	}
}

// TestWatchBurst: a burst of files, one of them written slowly and one that is no
// capture, each come on one line; after a stop nothing is done again.
func TestWatchBurst(t *testing.T) {
	burst := 300
	if testing.Short() {
		burst = 20
	}
	dir := t.TempDir()
	stdout, stderr, stop := watching(t, dir)
	for i := range burst {
		putCapture(t, filepath.Join(dir, fmt.Sprintf("loop%03d.csv", i)), 0)
	}
	if err := os.WriteFile(filepath.Join(dir, "bad.csv"), []byte("nothing to read\n"), 0o666); err != nil {
		t.Fatal(err)
	}
	putCapture(t, filepath.Join(dir, "slow.csv"), 50*time.Millisecond)
	out := lines(t, stdout, stderr, burst+2)
	if n := strings.Count(out, "good "); n != burst+1 {
		t.Errorf("%d good results, want %d:\n%s%s", n, burst+1, out, stderr)
	}
	if strings.Count(out, "unreadable") != 1 || !strings.Contains(stderr.String(), "bad.csv: no samples") {
		t.Errorf("the bad file is not told:\n%s", stderr)
	}
	if code := stop(); code != exitUnreadable {
		t.Errorf("exit code %d after the interrupt, want %d for the bad file", code, exitUnreadable)
	}

	again, stderr, stop := watching(t, dir)
	putCapture(t, filepath.Join(dir, "new.csv"), 0)
	if out := lines(t, again, stderr, 1); strings.Count(out, "\n") != 1 || !strings.Contains(out, "new.csv") {
		t.Errorf("started again it does\n%s", out)
	}
	if code := stop(); code != exitDone {
		t.Errorf("exit code %d after the interrupt, want %d: the bad file was told before", code, exitDone)
	}
}

// TestWatchArchives: devices by the names of files, their archive, and the bell for
// one outside its limits.
func TestWatchArchives(t *testing.T) {
	dir, kept := t.TempDir(), filepath.Join(t.TempDir(), "kept")
	bench := filepath.Join(t.TempDir(), "bench.toml")
	if err := os.WriteFile(bench, []byte("[limits]\nq = { min = 40 }\n"), 0o666); err != nil {
		t.Fatal(err)
	}
	stdout, stderr, stop := watching(t, dir, "--archive", kept, "--bench", bench, "--bell", "--device-from", "(?P<device>[^_]+)_", "--poll", "30ms")
	putCapture(t, filepath.Join(dir, "loop 07_a.csv"), 0)
	putCapture(t, filepath.Join(dir, "loop 08_a.csv"), 0)
	putCapture(t, filepath.Join(dir, "nameless.csv"), 0)
	lines(t, stdout, stderr, 3)
	if err := os.Remove(filepath.Join(dir, "nameless.csv")); err != nil {
		t.Fatal(err)
	}
	putCapture(t, filepath.Join(dir, "loop 07_b.csv"), 0)
	lines(t, stdout, stderr, 4)
	if n := strings.Count(stderr.String(), "\a"); n != 4 {
		t.Errorf("the bell rang %d times, want 4", n)
	}
	if code := stop(); code != exitOutside {
		t.Errorf("exit code %d after the interrupt, want %d for captures outside the limits", code, exitOutside)
	}
	all, err := archive.List(kept)
	if err != nil {
		t.Fatal(err)
	}
	count := map[string]int{}
	for _, r := range all {
		count[r.Folder]++
	}
	if count[archive.FolderOf("loop 07")] != 2 || count[archive.FolderOf("loop 08")] != 1 || count[archive.FolderOf(filepath.Base(dir))] != 1 {
		t.Errorf("archived %v\n%s", count, stderr)
	}
	if v, err := archive.Verify(kept); err != nil || len(v.Problems) > 0 {
		t.Errorf("archive: %v %v", v.Problems, err)
	}
}

// TestWatchReplaced: a capture that failed and was replaced by one that does not is
// no failure at the end; one that cannot be filed is.
func TestWatchReplaced(t *testing.T) {
	dir, file := t.TempDir(), filepath.Join(t.TempDir(), "no folder")
	name := filepath.Join(dir, "loop.csv")
	write(t, name, "nothing to read\n")
	write(t, file, "")
	stdout, stderr, stop := watching(t, dir)
	lines(t, stdout, stderr, 1)
	putCapture(t, name, 0)
	if out := lines(t, stdout, stderr, 2); !strings.HasPrefix(out, "unreadable") || !strings.Contains(out, "\ngood ") {
		t.Errorf("printed\n%s", out)
	}
	if code := stop(); code != exitDone {
		t.Errorf("exit code %d after the interrupt, want %d: the file was replaced", code, exitDone)
	}

	stdout, stderr, stop = watching(t, dir, "--archive", file)
	putCapture(t, filepath.Join(dir, "more.csv"), 0)
	lines(t, stdout, stderr, 1)
	if code := stop(); code != exitFailed {
		t.Errorf("exit code %d after the interrupt, want %d: nothing could be filed\n%s", code, exitFailed, stderr)
	}
}
