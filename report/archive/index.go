package archive

import (
	"cmp"
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
	left := leftBehind(dir)
	page, entries, err := rebuild(dir)
	if err == nil {
		clearMarks(left)
	}
	return page.Len(), entries, err
}

// rebuild makes the pages of all devices and then the first one.
func rebuild(dir string) (page *report.Devices, entries int, err error) {
	page = report.NewDevices()
	folders, err := devicesOf(dir)
	if err != nil {
		return page, 0, err
	}
	for _, folder := range folders {
		h, err := rebuildDevice(dir, folder)
		if err != nil {
			return page, entries, err
		}
		if h.Len() == 0 {
			continue
		}
		if err := page.Set(folder, h); err != nil {
			return page, entries, err
		}
		entries += h.Len()
	}
	return page, entries, writePage(dir, page.WritePage)
}

// mustBeArchive refuses a folder that holds something else: it is not for us to
// put an index.html there.
func mustBeArchive(dir string) error {
	folders, err := devicesOf(dir)
	if err != nil {
		return err
	}
	var unread error
	for _, folder := range folders {
		names, err := namesOf(filepath.Join(dir, folder))
		if len(names) > 0 {
			return nil
		}
		unread = cmp.Or(unread, err)
	}
	if unread != nil {
		return unread
	}
	return fmt.Errorf("%s is not an archive: no folder in it holds an entry", dir)
}

// refresh brings the index pages up to date after the entry name of a device, and
// then clears the writer's mark. What stands in the pages is taken over, and only the
// new entry is read. A page of another make, or a damaged one, is made anew from the
// entries, and so are those of devices whose writers were ended in the middle.
func refresh(dir, folder, name string, m *mark) (err error) {
	release, err := lock(dir)
	if err != nil {
		m.leave()
		return err
	}
	defer release()
	defer func() {
		if err != nil {
			m.leave()
		} else {
			m.clear()
		}
	}()
	left := leftBehind(dir)
	changed := map[string]*report.History{folder: nil}
	for behind := range left {
		changed[behind] = nil
	}
	if left[folder] == nil {
		changed[folder] = addToPage(dir, folder, name)
	}
	for f, h := range changed {
		if h == nil {
			if changed[f], err = rebuildDevice(dir, f); err != nil {
				return err
			}
		}
	}
	if err := refreshDevices(dir, changed); err != nil {
		return err
	}
	clearMarks(left)
	return nil
}

func clearMarks(left map[string][]string) {
	for _, marks := range left {
		for _, name := range marks {
			os.Remove(name)
		}
	}
}

// addToPage adds an entry to the page of its device. It returns nil when the page
// has to be made anew.
func addToPage(dir, folder, name string) *report.History {
	page, err := os.ReadFile(filepath.Join(dir, folder, indexName))
	if err != nil {
		return nil
	}
	h, err := report.ReadHistory(page)
	if err != nil {
		return nil
	}
	r := readRecord(dir, folder, name)
	if h.Add(r.Device, &r.Filed) != nil {
		return nil
	}
	if writePage(filepath.Join(dir, folder), h.WritePage) != nil {
		return nil // what is wrong shows again
	}
	return h
}

// rebuildDevice makes the page of one device from its entries, after it has cleared
// away what was left behind; one without entries has no page.
func rebuildDevice(dir, folder string) (*report.History, error) {
	home := filepath.Join(dir, folder)
	temporaries, err := temporariesLeft(dir, folder)
	if err != nil {
		return nil, err
	}
	for _, name := range temporaries {
		os.RemoveAll(filepath.Join(home, name)) // what stays is named by Verify
	}
	names, err := namesOf(home)
	if err != nil {
		return nil, err
	}
	h := report.NewHistory()
	for _, name := range names {
		r := readRecord(dir, folder, name)
		if err := h.Add(r.Device, &r.Filed); err != nil {
			return nil, err
		}
	}
	if len(names) == 0 {
		return h, nil
	}
	return h, writePage(home, h.WritePage)
}

// refreshDevices shows what has changed on the page of all devices.
func refreshDevices(dir string, changed map[string]*report.History) error {
	text, err := os.ReadFile(filepath.Join(dir, indexName))
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return err
	}
	page, err := report.ReadDevices(text)
	if err != nil {
		_, _, err := rebuild(dir)
		return err
	}
	for folder, h := range changed {
		if h.Len() == 0 {
			continue
		}
		if err := page.Set(folder, h); err != nil {
			return err
		}
	}
	return writePage(dir, page.WritePage)
}

// writePage replaces the index page of a folder in one step. It is not made
// durable: it can always be made again.
func writePage(folder string, fill func(io.Writer) error) error {
	temp := filepath.Join(folder, fmt.Sprintf(".%s.%016x.tmp", indexName, rand.Uint64()))
	f, err := os.OpenFile(temp, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return err
	}
	err = cmp.Or(fill(f), f.Close())
	if err == nil {
		err = os.Rename(temp, filepath.Join(folder, indexName))
	}
	if err != nil {
		os.Remove(temp)
	}
	return err
}
