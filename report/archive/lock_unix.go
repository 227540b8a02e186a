//go:build unix

package archive

import (
	"errors"
	"os"
	"syscall"
)

// tryLock takes the lock of an open file or folder; the system frees it when the
// process ends in whatever way. taken is false while another holds it. A file
// system without locks counts as taken: there the index pages can fall behind for
// a moment, while entries are safe by themselves.
func tryLock(f *os.File) (taken bool, supported bool) {
	for {
		err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
		switch {
		case err == nil:
			return true, true
		case errors.Is(err, syscall.EINTR):
		case errors.Is(err, syscall.EWOULDBLOCK):
			return false, true
		default:
			return true, false
		}
	}
}

// syncFolder makes the names in a folder durable. Some network file systems
// cannot; they do it by themselves.
func syncFolder(name string) error {
	f, err := os.Open(name)
	if err != nil {
		return err
	}
	defer f.Close()
	if err := f.Sync(); err != nil && !errors.Is(err, syscall.EINVAL) && !errors.Is(err, syscall.ENOTSUP) {
		return err
	}
	return nil
}
