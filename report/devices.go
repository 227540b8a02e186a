package report

import (
	"bytes"
	"encoding/json"
	"fmt"
	"html/template"
	"io"
	"math"
	"slices"
	"strings"
)

// Devices is what an archive's first page shows: a row for each device, in the
// order of their folders.
type Devices struct {
	sums devicesSums
	rows *rowSet
}

// devicesSums are what the page says of all devices.
type devicesSums struct {
	Devices, Entries int
	Wanting          int // devices whose latest result is not good, or outside limits
}

// A deviceRow is the form of a row in the page; the folder comes first.
type deviceRow struct {
	Folder  string   `json:"p"`
	Device  string   `json:"d"`
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

func (r *deviceRow) wanting() bool { return r.Status != "good" || r.Verdict == "fail" }

// coursePoints is how many results the small line of a row shows.
const coursePoints = 30

// deviceRow is the history's row on the page of all devices.
func (h *History) deviceRow(folder string) *deviceRow {
	rows := h.latest(2 * coursePoints)
	latest := rows[0]
	r := &deviceRow{Device: clean(h.sums.Device, nameLength), Folder: folder, Count: h.sums.N, Made: latest.Made,
		Status: latest.Status, Verdict: latest.Verdict, F: latest.F, FT: latest.FT, Q: latest.Q, QT: latest.QT}
	kind, _, _ := h.chief()
	r.Course = courseOf(rows, kind)
	var drifting []string
	for i, t := range h.trends() {
		if t.Drifts() {
			drifting = append(drifting, followedQuantities[i].letter)
		}
	}
	switch len(drifting) {
	case 0:
	case 1:
		r.Drift = drifting[0] + " drifts"
	default:
		r.Drift = strings.Join(drifting, ", ") + " drift"
	}
	return r
}

// courseOf is the path of the latest values of Q of one kind, evenly spaced, from
// the bottom of the box to its top; "" of fewer than two. The rows are newest first.
func courseOf(rows []*filedRow, kind string) string {
	var q []float64
	for _, r := range rows {
		if r.Kind == kind && r.Q != nil && len(q) < coursePoints {
			q = append(q, *r.Q)
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

// NewDevices returns the page of an archive without any device.
func NewDevices() *Devices {
	d := new(Devices)
	d.rows = &rowSet{sums: &d.sums}
	return d
}

// ReadDevices returns what a page shows that [Devices.WritePage] wrote; an error
// means that the page is of another make or damaged.
func ReadDevices(page []byte) (*Devices, error) {
	d := new(Devices)
	var err error
	d.rows, err = readRowSet(page, &d.sums)
	return d, err
}

// find returns where the row of a folder begins and ends in the text; without one,
// where it would have to stand.
func (d *Devices) find(folder string) (from, to int, found bool) {
	text := d.rows.text
	name, _ := json.Marshal(folder) // a string
	head := []byte(`{"p":` + string(name) + ",")
	if from = bytes.Index(text, head); from >= 0 {
		if n := bytes.Index(text[from:], []byte(separator)); n >= 0 {
			return from, from + n, true
		}
		return from, len(text), true
	}
	for at := 0; at < len(text); {
		if bytes.Compare(text[at:], head) > 0 {
			return at, at, false
		}
		n := bytes.Index(text[at:], []byte(separator))
		if n < 0 {
			break
		}
		at += n + len(separator)
	}
	return len(text), len(text), false
}

// Set puts the device of a folder, with its history, in place of what the page
// showed of it.
func (d *Devices) Set(folder string, h *History) error {
	row := h.deviceRow(folder)
	line, err := json.Marshal(row)
	if err != nil {
		return err
	}
	from, to, found := d.find(folder)
	switch {
	case found:
		old := new(deviceRow)
		if err := json.Unmarshal(d.rows.text[from:to], old); err != nil {
			return err
		}
		d.count(old, -1)
	case from < len(d.rows.text):
		line = append(line, separator...)
	case from > 0:
		line = append([]byte(separator), line...)
	}
	d.count(row, 1)
	d.rows.text = slices.Replace(d.rows.text, from, to, line...)
	return nil
}

func (d *Devices) count(r *deviceRow, sign int) {
	d.sums.Devices += sign
	d.sums.Entries += sign * r.Count
	if r.wanting() {
		d.sums.Wanting += sign
	}
}

// Len is the number of devices.
func (d *Devices) Len() int { return d.sums.Devices }

// Counts returns the number of entries by folder.
func (d *Devices) Counts() map[string]int {
	counts := map[string]int{}
	for _, line := range d.rows.first(d.sums.Devices) {
		row := new(deviceRow)
		if json.Unmarshal(line, row) == nil {
			counts[row.Folder] = row.Count
		}
	}
	return counts
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
	p := &devicesPage{Course: coursePoints, RowSet: d.rows,
		frame: frame{Title: "Archive of resonant circuits", Kind: "Archive", Heading: "Resonant circuits measured", More: template.JS(rowsJS)}}
	for _, line := range d.rows.first(firstRows) {
		row := new(deviceRow)
		if err := json.Unmarshal(line, row); err != nil {
			return err
		}
		p.First = append(p.First, firstDevice{row, whenOf(row.Made)})
	}
	p.What = fmt.Sprintf("%s of %s.", plural(d.sums.Entries, "measurement"), plural(d.sums.Devices, "device"))
	p.Status, p.Verdict = "good", "the latest result of every device"
	if n := d.sums.Wanting; n > 0 {
		p.Status, p.Verdict = "doubtful", fmt.Sprintf("%s whose latest result is not good, or is outside the limits", plural(n, "device"))
	}
	return p.write(w, "devices.html", p)
}
