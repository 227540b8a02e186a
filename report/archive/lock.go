package archive

import (
	"fmt"
	"os"
	"path/filepath"
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

// abandoned reports whether an entry on its way has no writer any more. Where
// there are no locks to tell, nothing is taken for abandoned for a day.
func abandoned(folder string) bool {
	f, err := os.Open(folder)
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
