package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// TestInterrupt stops the program while it waits for standard input: it says so
// and leaves nothing behind.
func TestInterrupt(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	stdin, typed := io.Pipe()
	defer typed.Close()
	cancel()
	folder := t.TempDir()
	var stdout, stderr bytes.Buffer
	code := run(ctx, []string{"dieaway", "fit", "-", "-o", filepath.Join(folder, "page.html")}, stdin, &stdout, &stderr)
	if code != exitFailed || stdout.Len() > 0 || stderr.String() != "dieaway: interrupted\n" {
		t.Errorf("exit code %d, stdout %q, stderr %q", code, &stdout, &stderr)
	}
	if entries, err := os.ReadDir(folder); err != nil || len(entries) > 0 {
		t.Errorf("left behind: %v, %v", entries, err)
	}
}

// TestInterruptKeepsRows: the rows of files that were measured before an interrupt
// stand, whole.
func TestInterruptKeepsRows(t *testing.T) {
	name := filepath.Join(t.TempDir(), "loop07.csv")
	write(t, name, string(loop07))
	stdin, typed := io.Pipe()
	defer typed.Close()
	ctx, cancel := context.WithCancel(t.Context())
	stdout, stderr, code := &shared{}, &shared{}, make(chan int)
	go func() { code <- run(ctx, []string{"dieaway", "fit", "--csv", name, name, "-"}, stdin, stdout, stderr) }()
	lines(t, stdout, stderr, 3)
	cancel()
	if got := <-code; got != exitFailed || stderr.String() != "dieaway: interrupted\n" {
		t.Errorf("exit code %d, stderr %q", got, stderr)
	}
	rows, err := csv.NewReader(strings.NewReader(stdout.String())).ReadAll()
	if err != nil || len(rows) != 3 || rows[0][0] != "file" || rows[1][0] != name || rows[2][2] != "good" {
		t.Errorf("rows %q, %v", rows, err)
	}
}

// TestConclude wants the code of an exitError however deep it is wrapped.
func TestConclude(t *testing.T) {
	tests := []struct {
		err  error
		code int
		want string
	}{
		{nil, exitDone, ""},
		{&exitError{Code: exitRefused}, exitRefused, ""},
		{usagef("--from needs a value"), exitUsage, "dieaway: --from needs a value\n"},
		{errors.Join(usagef("wrong")), exitUsage, "dieaway: wrong\n"},
		{io.ErrShortWrite, exitFailed, "dieaway: short write\n"},
	}
	for _, test := range tests {
		var stderr bytes.Buffer
		if code := conclude(&stderr, test.err); code != test.code || stderr.String() != test.want {
			t.Errorf("conclude(%v) = %d, says %q, want %d and %q", test.err, code, &stderr, test.code, test.want)
		}
	}
}
