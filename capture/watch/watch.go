// Package watch waits for files that appear in a folder and hands them on when they
// have stopped growing.
package watch

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"time"

	"github.com/fsnotify/fsnotify"
)

// A Folder is watched by looking at it: what the file system tells of changes only
// says when to look, so that no lost message loses a file. The zero value of every
// field but Dir is useful.
type Folder struct {
	Dir string
	// Poll looks in this interval and asks the file system for no messages, as
	// network folders need it; 0 listens, and looks every two seconds all the same.
	Poll time.Duration
	// Settle is how long a file must not have changed; 0 stands for half a second.
	Settle time.Duration
	// Accept says which entries are meant; nil means all regular files.
	Accept func(fs.DirEntry) bool
	// Say hears of a folder that is gone and of its return; nil for silence.
	Say func(message string)

	done    map[string]Stamp
	pending map[string]sighting
	gone    bool
}

// A Stamp tells one content of a file from the next.
type Stamp struct {
	Size int64
	// Time of the last change, in nanoseconds since 1970.
	Time int64
}

// A File is one that has stopped growing.
type File struct {
	// Name without the folder.
	Name string
	Stamp
}

// A sighting is a file as it was seen first in its present state.
type sighting struct {
	Stamp
	since time.Time
}

const (
	settleUsually = 500 * time.Millisecond
	lookAnyway    = 2 * time.Second
	gather        = 20 * time.Millisecond // that messages of one burst have to come together
	longAgo       = 10 * time.Second      // since when a file at rest needs no second look
)

// Skip makes a file with this stamp count as handed on already.
func (f *Folder) Skip(name string, s Stamp) {
	if f.done == nil {
		f.done = map[string]Stamp{}
	}
	f.done[name] = s
}

// Run hands on files until ctx is done, which is no error, or handle returns one.
// Each content of a file is handed on once: a file that is replaced or grows again
// comes again. A folder that does not exist yet, or no more, is waited for.
func (f *Folder) Run(ctx context.Context, handle func(context.Context, []File) error) error {
	if f.Settle == 0 {
		f.Settle = settleUsually
	}
	f.pending = map[string]sighting{}
	ear, err := f.listen()
	if err != nil {
		return err
	}
	defer ear.close()
	for ctx.Err() == nil {
		ready := f.look(time.Now())
		if len(ready) > 0 {
			if err := handle(ctx, ready); err != nil || ctx.Err() != nil {
				return err
			}
			for _, r := range ready {
				f.Skip(r.Name, r.Stamp)
			}
			continue
		}
		ear.follow(f.Dir)
		f.wait(ctx, ear)
	}
	return nil
}

// wait returns when it is time to look again.
func (f *Folder) wait(ctx context.Context, ear *ear) {
	pause := lookAnyway
	if f.Poll > 0 {
		pause = f.Poll
	}
	if len(f.pending) > 0 {
		pause = min(pause, f.Settle/2)
	}
	timer := time.NewTimer(pause)
	defer timer.Stop()
	select {
	case <-ctx.Done():
	case <-timer.C:
	case <-ear.messages():
		time.Sleep(gather)
		ear.drain()
	}
}

// look returns the files that have come to rest since, the oldest first.
func (f *Folder) look(now time.Time) []File {
	entries, err := os.ReadDir(f.Dir)
	if f.missing(err) {
		clear(f.pending)
		return nil
	}
	var ready []File
	seen := map[string]bool{}
	for _, e := range entries {
		if f.Accept != nil && !f.Accept(e) {
			continue
		}
		info, err := os.Stat(filepath.Join(f.Dir, e.Name())) // through links
		if err != nil || !info.Mode().IsRegular() || info.Size() == 0 {
			continue
		}
		seen[e.Name()] = true
		stamp := Stamp{info.Size(), info.ModTime().UnixNano()}
		if f.rests(e.Name(), stamp, now) {
			ready = append(ready, File{e.Name(), stamp})
		}
	}
	for name := range f.pending {
		if !seen[name] {
			delete(f.pending, name)
		}
	}
	slices.SortFunc(ready, func(a, b File) int { return cmp.Or(cmp.Compare(a.Time, b.Time), cmp.Compare(a.Name, b.Name)) })
	return ready
}

// rests reports whether a file that is not done has stayed as it is for long enough.
func (f *Folder) rests(name string, stamp Stamp, now time.Time) bool {
	if done, ok := f.done[name]; ok && done == stamp {
		delete(f.pending, name)
		return false
	}
	p, known := f.pending[name]
	switch {
	case !known || p.Stamp != stamp:
		f.pending[name] = sighting{stamp, now}
		return !known && now.UnixNano()-stamp.Time > int64(max(longAgo, 2*f.Settle))
	default:
		return now.Sub(p.since) >= f.Settle
	}
}

// missing notes whether the folder is there, and says so when that changes.
func (f *Folder) missing(err error) bool {
	was := f.gone
	f.gone = err != nil
	if f.Say != nil && f.gone != was {
		switch {
		case errors.Is(err, fs.ErrNotExist):
			f.Say(fmt.Sprintf("the folder %s does not exist: waiting for it", f.Dir))
		case err != nil:
			f.Say(fmt.Sprintf("cannot look into the folder: %v: trying again", err))
		default:
			f.Say(fmt.Sprintf("the folder %s is there again", f.Dir))
		}
	}
	return f.gone
}

// An ear hears from the file system that something changed. The zero value is deaf.
type ear struct {
	watcher *fsnotify.Watcher
	there   os.FileInfo // the folder that is listened to
}

func (f *Folder) listen() (*ear, error) {
	if f.Poll > 0 {
		return &ear{}, nil
	}
	w, err := fsnotify.NewWatcher()
	if err != nil {
		return nil, fmt.Errorf("the system tells no changes of files (%w): use polling", err)
	}
	return &ear{watcher: w}, nil
}

// follow listens to the folder that is at dir now: one that was removed and made
// again is another.
func (e *ear) follow(dir string) {
	if e.watcher == nil {
		return
	}
	info, err := os.Stat(dir)
	if err != nil {
		e.there = nil
		return
	}
	if e.there != nil && os.SameFile(info, e.there) {
		return
	}
	_ = e.watcher.Remove(dir) // of the old one, if it is still known
	if e.watcher.Add(dir) == nil {
		e.there = info
	}
}

// messages is nil for a deaf ear: nothing ever comes.
func (e *ear) messages() <-chan fsnotify.Event {
	if e.watcher == nil {
		return nil
	}
	return e.watcher.Events
}

// drain forgets what else was said: one look sees it all.
func (e *ear) drain() {
	for {
		select {
		case _, ok := <-e.watcher.Events:
			if !ok {
				return
			}
		case <-e.watcher.Errors:
		default:
			return
		}
	}
}

func (e *ear) close() {
	if e.watcher != nil {
		e.watcher.Close()
	}
}
