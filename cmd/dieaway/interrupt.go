package main

import (
	"context"
	"errors"
	"io"
)

// errInterrupted ends what the user no longer waits for.
var errInterrupted = errors.New("interrupted")

// interruptible returns what work returns, or errInterrupted as soon as ctx is
// done: for work that does not look for itself and leaves nothing half done.
func interruptible[T any](ctx context.Context, work func() (T, error)) (T, error) {
	type outcome struct {
		value T
		err   error
	}
	ended := make(chan outcome, 1)
	go func() {
		value, err := work()
		ended <- outcome{value, err}
	}()
	select {
	case o := <-ended:
		return o.value, o.err
	case <-ctx.Done():
		return *new(T), errInterrupted
	}
}

// An interruptibleWriter writes until ctx is done.
type interruptibleWriter struct {
	ctx context.Context
	io.Writer
}

func (w interruptibleWriter) Write(p []byte) (int, error) {
	if w.ctx.Err() != nil {
		return 0, errInterrupted
	}
	return w.Writer.Write(p)
}
