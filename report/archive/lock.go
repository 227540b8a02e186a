package archive

import (
	"errors"
	"fmt"
	"io/fs"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"time"
)

// lockName is the file whose lock the index pages are written under.
const lockName = ".lock"

// patience is how long another program may hold the lock, which takes it a few
// milliseconds each time.
const patience = 30 * time.Second

// lock waits for the lock of the archive.
func lock(dir string) (release func(), err error) {
	f, err := os.OpenFile(filepath.Join(dir, lockName), os.O_RDWR|os.O_CREATE, 0o666)
	if err != nil {
		return nil, err
	}
	begun, pause := time.Now(), time.Millisecond
	for {
		if taken, _ := tryLock(f); taken {
			return func() { f.Close() }, nil
		}
		if time.Since(begun) > patience {
			f.Close()
			return nil, fmt.Errorf("another program has held the lock %s for %s", f.Name(), patience)
		}
		time.Sleep(pause)
		pause = min(2*pause, 20*time.Millisecond)
	}
}

// pendingName is the folder of the marks of writers at work. A mark is there from
// before an entry gets its place until the index pages show it, locked by its writer.
// One without a lock tells of a writer that was ended in between, so that the next
// one looks after that device instead of after all.
const pendingName = ".pending"

// A mark is that of one writer.
type mark struct {
	file *os.File
	id   string // its part of the names of mark and temporary folder
}

// setMark makes the mark of a writer for a device's folder. It is called under the
// archive's lock, so that nobody takes it for left behind before it is locked.
func setMark(dir, folder string) (*mark, error) {
	pending := filepath.Join(dir, pendingName)
	if err := os.MkdirAll(pending, 0o777); err != nil {
		return nil, err
	}
	id := fmt.Sprintf("%016x", rand.Uint64())
	f, err := os.OpenFile(filepath.Join(pending, folder+"."+id), os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return nil, err
	}
	tryLock(f)
	return &mark{f, id}, nil
}

// leave frees the mark and lets it lie, as a writer does that is ended.
func (m *mark) leave() { m.file.Close() }

// clear takes the mark away.
func (m *mark) clear() {
	os.Remove(m.file.Name())
	m.file.Close()
}

// abandoned reports whether the writer of a mark is no more. Where there are no
// locks to tell, nothing is taken for abandoned for a day.
func abandoned(name string) bool {
	f, err := os.OpenFile(name, os.O_WRONLY, 0)
	if errors.Is(err, fs.ErrNotExist) {
		return true
	}
	if err != nil {
		return false
	}
	defer f.Close()
	taken, supported := tryLock(f)
	if supported {
		return taken
	}
	info, err := f.Stat()
	return err == nil && time.Since(info.ModTime()) > 24*time.Hour
}

// leftBehind returns the marks of writers that are no more, by device folder.
func leftBehind(dir string) map[string][]string {
	left := map[string][]string{}
	all, err := os.ReadDir(filepath.Join(dir, pendingName))
	if err != nil {
		return left
	}
	for _, e := range all {
		name := filepath.Join(dir, pendingName, e.Name())
		if folder, _, ok := strings.Cut(e.Name(), "."); ok && abandoned(name) {
			left[folder] = append(left[folder], name)
		}
	}
	return left
}

// temporariesLeft returns the folders of entries in a device's folder that their
// writers cannot finish any more.
func temporariesLeft(dir, folder string) ([]string, error) {
	names, err := foldersOf(filepath.Join(dir, folder), temporary.MatchString)
	if err != nil {
		return nil, err
	}
	var left []string
	for _, name := range names {
		id := temporary.FindStringSubmatch(name)[1]
		if abandoned(filepath.Join(dir, pendingName, folder+"."+id)) {
			left = append(left, name)
		}
	}
	return left, nil
}
