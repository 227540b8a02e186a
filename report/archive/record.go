package archive

import (
	"cmp"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"dieaway/decay/quantity"
	"dieaway/report"
)

// A Record is what is told of one entry without opening its page.
type Record struct {
	report.Filed
	// Device is the true name, Folder the device's folder.
	Device, Folder string
	// Schema names the form of the result; SHA256 is the digest of the capture as
	// far as it is known, "" when it is not.
	Schema, SHA256 string
	// Err says why the result could not be read; the entry is listed all the same.
	Err error
}

// Path is the entry's place below the archive, with slashes.
func (r *Record) Path() string { return r.Folder + "/" + r.Name }

// devicesOf returns the device folders of the archive, sorted.
func devicesOf(dir string) ([]string, error) {
	return foldersOf(dir, func(name string) bool { return !strings.HasPrefix(name, ".") })
}

// namesOf returns the names of a device's entries, oldest first.
func namesOf(home string) ([]string, error) {
	names, err := foldersOf(home, entryName.MatchString)
	if err != nil {
		return nil, err
	}
	slices.SortFunc(names, func(a, b string) int { // in the order that a history wants
		at, _, _ := parseName(a)
		bt, _, _ := parseName(b)
		return cmp.Or(cmp.Compare(at.UnixMilli(), bt.UnixMilli()), strings.Compare(a, b))
	})
	return names, nil
}

// foldersOf returns the folders in one folder whose names are wanted, sorted.
func foldersOf(name string, wanted func(string) bool) ([]string, error) {
	all, err := os.ReadDir(name)
	if err != nil {
		return nil, err
	}
	var names []string
	for _, e := range all {
		if e.IsDir() && wanted(e.Name()) {
			names = append(names, e.Name())
		}
	}
	return names, nil
}

// readRecord reads what an entry's result says. It never fails: what cannot be
// read is left open, so that an entry of any age and state is listed.
func readRecord(dir, folder, name string) *Record {
	r := &Record{Folder: folder, Device: folder}
	made, _, _ := parseName(name)
	r.Filed = report.Filed{Name: name, Made: made, Kind: "unknown", Status: "unknown",
		NaturalFrequency: quantity.Unknown("Hz"), Q: quantity.Unknown(""), TimeConstant: quantity.Unknown("s")}
	text, err := os.ReadFile(filepath.Join(dir, folder, name, resultName))
	if err != nil {
		r.Err = err
		return r
	}
	var o object
	if err := json.Unmarshal(text, &o); err != nil {
		r.Err = fmt.Errorf("%s is not JSON: %w", filepath.Join(dir, folder, name, resultName), err)
		return r
	}
	r.take(o)
	return r
}

// take reads a result of any version: each part by itself, and what has another
// form than today stays open.
func (r *Record) take(o object) {
	r.Schema = o.text("schema")
	r.Kind = kindOf(r.Schema)
	for _, t := range []struct {
		key  string
		into *string
	}{{"status", &r.Status}, {"device", &r.Device}, {"file", &r.File}, {"sha256", &r.SHA256}} {
		if s := o.text(t.key); s != "" {
			*t.into = s
		}
	}
	limits := o.object("limits")
	r.Verdict = limits.text("verdict")
	r.takeLimits(limits)
	q := o.object("quantities")
	if inner := o.object("ringdown"); q == nil && inner != nil { // a cross-check holds a whole ring-down
		if r.File == "" {
			r.File, r.SHA256 = inner.text("file"), inner.text("sha256")
		}
		if q = inner.object("quantities"); q == nil {
			q = inner
		}
	}
	for _, row := range o.objects("rows") { // components hold a row for each capture
		if r.File == "" {
			r.File, r.SHA256 = row.text("file"), row.text("sha256")
		}
		if added := row.number("added"); q == nil && r.Status != "refused" && added != nil && *added == 0 {
			q = row // the circuit as it is
		}
	}
	r.NaturalFrequency = q.quantity("natural_frequency_hz", "Hz")
	r.Q = q.quantity("q", "")
	r.TimeConstant = q.quantity("time_constant_s", "s")
}

// takeLimits reads the limits of the three quantities that are followed.
func (r *Record) takeLimits(limits object) {
	for _, c := range limits.objects("checks") {
		limit := report.Limits{Min: c.number("min"), Max: c.number("max")}
		switch c.text("quantity") {
		case "natural_frequency_hz":
			r.Limits.NaturalFrequency = limit
		case "q":
			r.Limits.Q = limit
		case "time_constant_s":
			r.Limits.TimeConstant = limit
		}
	}
}

// kindOf takes the kind of a measurement from its schema, "dieaway.KIND.v1".
func kindOf(schema string) string {
	if parts := strings.Split(schema, "."); len(parts) == 3 && parts[0] == "dieaway" {
		return parts[1]
	}
	return "unknown"
}

// An object is a JSON object whose values are read one by one; nil is one without any.
type object map[string]json.RawMessage

func (o object) object(key string) (inner object) {
	_ = json.Unmarshal(o[key], &inner)
	return inner
}

func (o object) objects(key string) (all []object) {
	_ = json.Unmarshal(o[key], &all)
	return all
}

func (o object) text(key string) (s string) {
	_ = json.Unmarshal(o[key], &s)
	return s
}

func (o object) number(key string) *float64 {
	var x *float64
	_ = json.Unmarshal(o[key], &x)
	return x
}

// quantity reads {"value": x, "u": y}, or a bare number.
func (o object) quantity(key, unit string) quantity.Quantity {
	q := quantity.Unknown(unit)
	inner := o.object(key)
	if inner == nil {
		if x := o.number(key); x != nil {
			q.Value = *x
		}
		return q
	}
	if x := inner.number("value"); x != nil {
		q.Value = *x
	}
	if x := inner.number("u"); x != nil {
		q.U = *x
	}
	return q
}

// List returns all entries, device by device and oldest first, from the entries
// themselves. A folder without any entry is no archive, which is an error.
func List(dir string) ([]*Record, error) {
	if err := mustBeArchive(dir); err != nil {
		return nil, err
	}
	devices, err := devicesOf(dir)
	if err != nil {
		return nil, err
	}
	var all []*Record
	for _, folder := range devices {
		names, err := namesOf(filepath.Join(dir, folder))
		if err != nil {
			return nil, err
		}
		for _, name := range names {
			all = append(all, readRecord(dir, folder, name))
		}
	}
	return all, nil
}
