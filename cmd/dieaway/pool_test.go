package main

import (
	"bytes"
	"context"
	"runtime"
	"strconv"
	"sync/atomic"
	"testing"

	"dieaway/report"
)

// TestAheadKeepsOrder: results come in the order of the sources though the first
// is the last to be ready, and no more are held than there are cores.
func TestAheadKeepsOrder(t *testing.T) {
	if runtime.GOMAXPROCS(0) < 2 {
		t.Skip("one core")
	}
	var sources []source
	for i := range 50 {
		sources = append(sources, source{name: strconv.Itoa(i)})
	}
	second := make(chan struct{})
	var held, most atomic.Int64
	a := startAhead(t.Context(), sources, func(s source) *report.RingDown {
		if n := held.Add(1); n > most.Load() {
			most.Store(n)
		}
		switch s.name {
		case "0":
			<-second
		case "1":
			close(second)
		}
		return &report.RingDown{File: s.name}
	})
	for i, s := range sources {
		r, ok := a.next(t.Context(), i)
		if !ok || r.File != s.name {
			t.Fatalf("result %d is %v", i, r)
		}
		held.Add(-1)
		a.done()
	}
	if n := most.Load(); n > int64(runtime.GOMAXPROCS(0)) {
		t.Errorf("%d results were held at a time", n)
	}
}

func TestAheadStops(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	block := make(chan struct{})
	defer close(block)
	a := startAhead(ctx, []source{{name: "0"}}, func(source) *report.RingDown { <-block; return nil })
	cancel()
	if _, ok := a.next(ctx, 0); ok {
		t.Error("a result after the interrupt")
	}
}

// TestProgressOnlyOnTerminals: nothing is drawn into a pipe or file.
func TestProgressOnlyOnTerminals(t *testing.T) {
	var out bytes.Buffer
	p := newProgress(&out, false)
	p.at(1, 2, "reading", true)
	p.clear()
	if out.Len() > 0 {
		t.Errorf("drawn: %q", out.String())
	}
}
