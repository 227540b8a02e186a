package capture

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"os"
)

// Options says what a file may not tell by itself. The zero value reads a file
// that tells everything.
type Options struct {
	// Interval is the sampling interval in seconds, for files that do not give
	// it; 0: as the file says. It overrides what the preamble declares.
	Interval float64
	// TimeUnit is the unit of the time column: "s", "ms", "us", "ns" or "ps";
	// "": as the file says.
	TimeUnit string
	// Progress, if not nil, is called now and then, at most four times a
	// second, with the bytes of the file read so far and the size of the file,
	// 0 when it is not known.
	Progress func(done, total int64)
}

// ReadFile reads the capture in the named file. Text that cannot be a capture
// gives an [*Error]; a file that cannot be read gives the system's error, and
// options that make no sense a plain one.
func ReadFile(name string, opt Options) (*Capture, error) {
	f, size, err := open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	return read(f, name, size, opt)
}

// open opens a file and returns its size, 0 where that is not known.
func open(name string) (f *os.File, size int64, err error) {
	if f, err = os.Open(name); err != nil {
		return nil, 0, err
	}
	info, err := f.Stat()
	switch {
	case err != nil:
	case info.IsDir():
		err = fmt.Errorf("%s is a folder, expected a file", name)
	case info.Mode().IsRegular():
		size = info.Size()
	}
	if err != nil {
		f.Close()
		return nil, 0, err
	}
	return f, size, nil
}

// Read reads a capture from r; name stands for it in messages.
func Read(r io.Reader, name string, opt Options) (*Capture, error) {
	return read(r, name, 0, opt)
}

// check refuses options that no file could go with.
func (o Options) check() error {
	if o.Interval < 0 || math.IsNaN(o.Interval) || math.IsInf(o.Interval, 0) {
		return fmt.Errorf("sampling interval of %v s: expected a positive time", o.Interval)
	}
	switch o.TimeUnit {
	case "", "s", "ms", "us", "ns", "ps":
		return nil
	}
	return fmt.Errorf("unit of time %q: expected s, ms, us, ns or ps", o.TimeUnit)
}

func read(r io.Reader, name string, size int64, opt Options) (*Capture, error) {
	if err := opt.check(); err != nil {
		return nil, err
	}
	src, err := openSource(r, name, size, opt)
	if err != nil {
		return nil, err
	}
	t, err := src.turn()
	if err != nil {
		return nil, err
	}
	c, err := src.capture(opt)
	if err != nil {
		return nil, t.place(err)
	}
	t.tell(&c.Layout)
	return c, nil
}

// capture reads a text whose samples stand below each other.
func (s *source) capture(opt Options) (*Capture, error) {
	h, d, err := layOut(s, opt)
	if err != nil {
		return nil, err
	}
	t, err := d.plan.scan(s, h)
	if err != nil {
		// A file that was cut while it was read breaks in the middle of a row.
		if s.meter.ended && s.unchanged() != nil {
			err = s.unchanged()
		}
		return nil, err
	}
	c := &Capture{File: s.name}
	if c.SHA256, err = s.digest(); err != nil {
		return nil, s.readError(err)
	}
	if err := s.unchanged(); err != nil {
		return nil, err
	}
	if refusal := d.build(c, s, t); refusal != nil {
		refusal.File = s.name
		return nil, refusal
	}
	return c, nil
}

// layOut reads the beginning of the text, or all of a short one, and finds the
// layout. Where there is none yet the preamble may be longer: it reads on.
func layOut(src *source, opt Options) (*head, *layoutDesign, error) {
	most := int64(headMost)
	if size := src.size(); size > 0 {
		most = min(most, 2*size+64) // UTF-16 may grow by half
	}
	var text []byte
	for room := min(most, headSize); ; room = min(most, 4*room) {
		from := len(text)
		text = append(make([]byte, 0, room+1), text...)[:room]
		n, whole, err := fill(src.text, text[from:])
		text = text[:from+n]
		if err != nil {
			return nil, nil, src.readError(err)
		}
		if what := foreign(text[:min(len(text), 4096)]); what != "" {
			return nil, nil, src.notText(what)
		}
		h, refusal := newHead(text, whole)
		var d *layoutDesign
		if refusal == nil {
			d, refusal = design(h, opt)
		}
		last := whole || room == most || bytes.IndexByte(text, '\n') < 0 && bytes.IndexByte(text, '\r') < 0
		if refusal == nil && (last || !h.lists()) {
			return h, d, nil
		}
		if last {
			refusal.File = src.name
			return nil, nil, refusal
		}
	}
}
