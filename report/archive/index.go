package archive

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math/rand/v2"
	"os"
	"path/filepath"

	"dieaway/report"
)

// Rebuild makes all index pages anew from the entries, and clears away what
// writers left behind that were ended in the middle. It returns the number of
// devices and of entries.
func Rebuild(dir string) (devices, entries int, err error) {
	if err := mustBeArchive(dir); err != nil {
		return 0, 0, err
	}
	release, err := lock(dir)
	if err != nil {
		return 0, 0, err
	}
	defer release()
	folders, err := devicesOf(dir)
	if err != nil {
		return 0, 0, err
	}
	all := &report.Devices{Rows: map[string]*report.DeviceRow{}}
	for _, folder := range folders {
		h, err := refreshDevice(dir, folder, nil)
		if err != nil {
			return devices, entries, err
		}
		if h != nil {
			all.Rows[folder] = h.DeviceRow(folder)
			devices++
			entries += len(h.Entries)
		}
	}
	return devices, entries, writePage(dir, all.WritePage)
}

// mustBeArchive refuses a folder that holds something else: it is not for us to
// put an index.html there.
func mustBeArchive(dir string) error {
	folders, err := devicesOf(dir)
	if err != nil {
		return err
	}
	for _, folder := range folders {
		if names, err := namesOf(filepath.Join(dir, folder)); err == nil && len(names) > 0 {
			return nil
		}
	}
	return fmt.Errorf("%s is not an archive: no folder in it holds an entry", dir)
}

// refresh brings the index pages up to date after a change to one device. What
// stands in the pages is taken over, and only entries that they lack are read; a
// page of another make, or a damaged one, is made anew.
func refresh(dir, folder string) error {
	release, err := lock(dir)
	if err != nil {
		return err
	}
	defer release()
	page, err := os.ReadFile(filepath.Join(dir, folder, indexName))
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return err
	}
	known, err := report.ReadHistory(page)
	if err != nil {
		known = nil
	}
	h, err := refreshDevice(dir, folder, known)
	if err != nil || h == nil {
		return err
	}
	return refreshDevices(dir, h.DeviceRow(folder), folder)
}

// refreshDevice writes the page of one device and returns what it shows, nil for
// a device without entries.
func refreshDevice(dir, folder string, known map[string]*report.Filed) (*report.History, error) {
	home := filepath.Join(dir, folder)
	clearAway(home)
	names, err := namesOf(home)
	if err != nil || len(names) == 0 {
		return nil, err
	}
	h := &report.History{}
	for _, name := range names {
		f := known[name]
		if f == nil {
			f = &readRecord(dir, folder, name).Filed
		}
		h.Entries = append(h.Entries, f)
	}
	h.Device = readRecord(dir, folder, names[len(names)-1]).Device
	return h, writePage(home, h.WritePage)
}

// refreshDevices writes the page of all devices. Devices that it lacks, which are
// many only when there was no such page, are read.
func refreshDevices(dir string, row *report.DeviceRow, folder string) error {
	page, err := os.ReadFile(filepath.Join(dir, indexName))
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return err
	}
	all, err := report.ReadDevices(page)
	if err != nil {
		all = &report.Devices{Rows: map[string]*report.DeviceRow{}}
	}
	all.Rows[folder] = row
	folders, err := devicesOf(dir)
	if err != nil {
		return err
	}
	there := map[string]bool{}
	for _, f := range folders {
		there[f] = true
		if all.Rows[f] != nil {
			continue
		}
		h, err := refreshDevice(dir, f, nil)
		if err != nil {
			return err
		}
		if h != nil {
			all.Rows[f] = h.DeviceRow(f)
		}
	}
	for f := range all.Rows {
		if !there[f] {
			delete(all.Rows, f)
		}
	}
	return writePage(dir, all.WritePage)
}

// clearAway removes entries that their writers cannot finish any more. It is
// called under the lock, so that none has just begun.
func clearAway(home string) {
	names, err := foldersOf(home, temporary.MatchString)
	if err != nil {
		return
	}
	for _, name := range names {
		if f := filepath.Join(home, name); abandoned(f) {
			os.RemoveAll(f) // what stays is named by Verify
		}
	}
}

// writePage replaces the index page of a folder in one step. It is not made
// durable: it can always be made again.
func writePage(folder string, fill func(io.Writer) error) error {
	temp := filepath.Join(folder, fmt.Sprintf(".%s.%016x.tmp", indexName, rand.Uint64()))
	f, err := os.OpenFile(temp, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return err
	}
	err = errors.Join(fill(f), f.Close())
	if err == nil {
		err = os.Rename(temp, filepath.Join(folder, indexName))
	}
	if err != nil {
		os.Remove(temp)
	}
	return err
}
