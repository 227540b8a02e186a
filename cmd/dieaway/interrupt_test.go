package main

import (
	"bytes"
	"context"
	"errors"
	"strings"
	"testing"
)

// TestInterrupted: work that does not look for an interrupt is left alone with it,
// and nothing is written after it.
func TestInterrupted(t *testing.T) {
	ctx, interrupt := context.WithCancel(t.Context())
	interrupt()
	forever := make(chan struct{})
	defer close(forever)
	if _, err := interruptible(ctx, func() (int, error) { <-forever; return 1, nil }); !errors.Is(err, errInterrupted) {
		t.Errorf("got %v, want %v", err, errInterrupted)
	}
	var out bytes.Buffer
	if n, err := (interruptibleWriter{ctx, &out}).Write([]byte("late")); n != 0 || !errors.Is(err, errInterrupted) || out.Len() > 0 {
		t.Errorf("wrote %d, %v: %q", n, err, &out)
	}
	if got, err := interruptible(t.Context(), func() (int, error) { return 7, nil }); got != 7 || err != nil {
		t.Errorf("got %v, %v, want 7", got, err)
	}
}

// TestMessagesAreOneLine: names of files hold anything, and a terminal obeys.
func TestMessagesAreOneLine(t *testing.T) {
	var out, messages bytes.Buffer
	if code := run(t.Context(), []string{"dieaway", "fit", "a\nb\x1b[31m.csv"}, strings.NewReader(""), &out, &messages); code != exitFailed {
		t.Errorf("exit code %d, want %d", code, exitFailed)
	}
	if s := messages.String(); strings.Count(s, "\n") != 1 || strings.Contains(s, "\x1b") {
		t.Errorf("message %q", s)
	}
}
