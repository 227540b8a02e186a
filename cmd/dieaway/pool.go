package main

import (
	"context"
	"os"
	"runtime"
	"runtime/debug"
	"sync"
)

// ahead runs measure over sources on all cores and hands the results out in the
// order of the sources. At most as many results as there are cores are held at a
// time: memory does not grow with the number of files.
type ahead[T any] struct {
	results []chan T
	slots   chan struct{}
}

// startAhead starts the work; it stops when ctx is done.
func startAhead[T any](ctx context.Context, sources []source, measure func(source) T) *ahead[T] {
	a := &ahead[T]{slots: make(chan struct{}, runtime.GOMAXPROCS(0))}
	for range sources {
		a.results = append(a.results, make(chan T, 1))
	}
	go func() {
		for i, s := range sources {
			select {
			case a.slots <- struct{}{}:
				go func() { a.results[i] <- measure(s) }()
			case <-ctx.Done():
				return
			}
		}
	}()
	return a
}

// next returns the result of source i; ok is false when ctx is done first.
func (a *ahead[T]) next(ctx context.Context, i int) (r T, ok bool) {
	select {
	case r = <-a.results[i]:
		return r, true
	case <-ctx.Done():
		return r, false
	}
}

// done frees the place of a result that was delivered.
func (a *ahead[T]) done() { <-a.slots }

const (
	deepFile     = 16 << 20 // bytes of a file that make memory dearer than time
	lazyGarbage  = 400      // growth of the heap, in percent, before garbage is collected
	eagerGarbage = 60
)

var setGarbage sync.Once

// tuneGarbage lets the heap of a program that reads small files grow, which saves
// a third of its time, and keeps that of deep records close to what they need. A
// setting of the user's stands.
func tuneGarbage(files []string) {
	if os.Getenv("GOGC") != "" {
		return
	}
	percent := lazyGarbage
	for _, name := range files {
		if info, err := os.Stat(name); err == nil && info.Size() > deepFile {
			percent = eagerGarbage
		}
	}
	setGarbage.Do(func() { debug.SetGCPercent(percent) })
}
