package main

import (
	"io"
	"os"
	"sync"
	"time"

	"github.com/schollz/progressbar/v3"
	"golang.org/x/term"
)

// progress shows on a terminal how far work is that takes longer than a second:
// bytes read of one file, or files of many. The zero value shows nothing.
type progress struct {
	out   io.Writer
	begun time.Time
	mu    sync.Mutex
	bar   *progressbar.ProgressBar
}

// patience is how long work may take before its progress is shown.
const patience = time.Second

// newProgress shows on stderr when that is a terminal and the user wants words.
func newProgress(stderr io.Writer, quiet bool) *progress {
	file, ok := stderr.(*os.File)
	if quiet || !ok || !term.IsTerminal(int(file.Fd())) {
		return &progress{}
	}
	return &progress{out: stderr, begun: time.Now()}
}

// at reports done of total units; total is 0 or less when it is not known.
func (p *progress) at(done, total int64, what string, bytes bool) {
	if p.out == nil || total <= 0 || time.Since(p.begun) < patience {
		return
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	if p.bar == nil {
		p.bar = progressbar.NewOptions64(total, progressbar.OptionSetWriter(p.out),
			progressbar.OptionSetDescription(what), progressbar.OptionShowBytes(bytes),
			progressbar.OptionShowCount(), progressbar.OptionSetWidth(30),
			progressbar.OptionThrottle(100*time.Millisecond), progressbar.OptionClearOnFinish())
	}
	_ = p.bar.Set64(done)
}

// clear takes the bar off the screen before other words are printed.
func (p *progress) clear() {
	p.mu.Lock()
	defer p.mu.Unlock()
	if p.bar != nil {
		_ = p.bar.Clear()
	}
}
