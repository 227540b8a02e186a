package report

import (
	"encoding/json"
	"fmt"
	"html/template"
	"io"
	"math"
	"slices"
	"strings"
	"time"
)

// Devices is what an archive's first page shows: a row for each device.
type Devices struct {
	// Rows by the name of the device's folder.
	Rows map[string]*DeviceRow
}

// A DeviceRow is the latest of one device. The zero value is an empty row.
type DeviceRow struct {
	row  deviceRow
	line []byte // the row as a page holds it, nil when it was not read from one
}

// Count is the number of entries of the device.
func (r *DeviceRow) Count() int { return r.row.Count }

// A deviceRow is the form of a row in the page.
type deviceRow struct {
	Device  string   `json:"d"`
	Folder  string   `json:"p"`
	Count   int      `json:"c"`
	Made    int64    `json:"t"` // of the latest, milliseconds since 1970
	Status  string   `json:"s"`
	Verdict string   `json:"v,omitempty"`
	F       *float64 `json:"f,omitempty"`
	FT      string   `json:"ft,omitempty"`
	Q       *float64 `json:"q,omitempty"`
	QT      string   `json:"qt,omitempty"`
	Course  string   `json:"g,omitempty"` // of Q: a path in a box of 80 by 18
	Drift   string   `json:"dr,omitempty"`
}

// coursePoints is how many results the small line of a row shows.
const coursePoints = 30

// DeviceRow is the history's row on the page of all devices; folder is the name of
// the device's folder.
func (h *History) DeviceRow(folder string) *DeviceRow {
	latest := h.Entries[len(h.Entries)-1].row()
	r := deviceRow{Device: clean(h.Device, nameLength), Folder: folder, Count: len(h.Entries), Made: latest.Made,
		Status: latest.Status, Verdict: latest.Verdict, F: latest.F, FT: latest.FT, Q: latest.Q, QT: latest.QT, Course: h.course()}
	var drifting []string
	for i, t := range h.trends() {
		if t != nil && t.Drifts() {
			drifting = append(drifting, followedQuantities[i].letter)
		}
	}
	if len(drifting) > 0 {
		r.Drift = strings.Join(drifting, ", ") + " drifts"
		if len(drifting) > 1 {
			r.Drift = strings.Join(drifting, ", ") + " drift"
		}
	}
	return &DeviceRow{row: r}
}

// course is the path of the latest values of Q of the chief kind, evenly spaced,
// from the bottom of the box to its top; "" of fewer than two.
func (h *History) course() string {
	kind, _ := h.chiefKind()
	var q []float64
	for i := len(h.Entries) - 1; i >= 0 && len(q) < coursePoints; i-- {
		if f := h.Entries[i]; f.Kind == kind && f.Q.Known() {
			q = append(q, f.Q.Value)
		}
	}
	slices.Reverse(q)
	lo, hi, _ := span(q)
	if len(q) < 2 || math.IsInf(hi-lo, 0) {
		return ""
	}
	var b strings.Builder
	for i, v := range q {
		y := 9.0
		if hi > lo {
			y = 16 - 14*(v-lo)/(hi-lo)
		}
		fmt.Fprintf(&b, "%c%.0f %.1f", "ML"[min(i, 1)], 2+76*float64(i)/float64(len(q)-1), y)
	}
	return b.String()
}

// ReadDevices returns the rows of a page that [Devices.WritePage] wrote; an error
// means that the page is of another make or damaged.
func ReadDevices(page []byte) (*Devices, error) {
	d := &Devices{Rows: map[string]*DeviceRow{}}
	err := readRows(page, func(r *deviceRow, line []byte) { d.Rows[r.Folder] = &DeviceRow{*r, line} })
	return d, err
}

// A devicesPage is what the template shows.
type devicesPage struct {
	frame
	Course int
	First  []firstDevice
	RowSet *rowSet
}

// A firstDevice is a row of the page before its script runs.
type firstDevice struct {
	*deviceRow
	When string
}

// WritePage writes the page of all devices: one HTML page that needs no network,
// sorted and filtered in the page. It is meant to stand beside the devices' folders.
func (d *Devices) WritePage(w io.Writer) error {
	folders := make([]string, 0, len(d.Rows))
	for folder := range d.Rows {
		folders = append(folders, folder)
	}
	slices.Sort(folders)
	p := &devicesPage{Course: coursePoints,
		frame: frame{Title: "Archive of resonant circuits", Kind: "Archive", Heading: "Resonant circuits measured", More: template.JS(rowsJS)}}
	lines := make([][]byte, len(folders))
	entries, wanting := 0, 0
	for i, folder := range folders {
		r := d.Rows[folder]
		if lines[i] = r.line; r.line == nil {
			var err error
			if lines[i], err = json.Marshal(r.row); err != nil {
				return err
			}
		}
		if len(p.First) < firstRows {
			p.First = append(p.First, firstDevice{&r.row, time.UnixMilli(r.row.Made).UTC().Format(time.DateTime)})
		}
		entries += r.row.Count
		if r.row.Status != "good" || r.row.Verdict == "fail" {
			wanting++
		}
	}
	p.RowSet = joinRows(lines)
	p.What = fmt.Sprintf("%s of %s.", plural(entries, "measurement"), plural(len(folders), "device"))
	p.Status, p.Verdict = "good", "the latest result of every device"
	if wanting > 0 {
		p.Status, p.Verdict = "doubtful", fmt.Sprintf("%s whose latest result is not good or outside the limits", plural(wanting, "device"))
	}
	return p.write(w, "devices.html", p)
}
