package capture

import (
	"bytes"
	"compress/gzip"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"hash"
	"io"
	"time"
	"unicode/utf16"
	"unicode/utf8"
)

// A source delivers the text of a file, decompressed and without its byte-order
// mark, and takes the digest of the file's bytes on the way.
type source struct {
	name       string
	meter      *meter
	text       io.Reader
	encoding   string
	compressed bool
	plain      bool // text is the bytes of the file
}

// openSource looks at the first bytes of r and says no to what is not text.
// size is the length of the file in bytes, 0 when unknown.
func openSource(r io.Reader, name string, size int64, opt Options) (*source, error) {
	s := &source{name: name}
	s.meter = &meter{r: r, hash: sha256.New(), size: size, progress: opt.Progress}
	head, rest, err := peek(s.meter)
	if err != nil {
		return nil, err
	}
	if bytes.HasPrefix(head, []byte{0x1f, 0x8b}) {
		s.compressed = true
		z, err := gzip.NewReader(rest)
		if err != nil {
			return nil, s.notText(fmt.Sprintf("a damaged gzip file (%v)", err))
		}
		if head, rest, err = peek(z); err != nil {
			return nil, s.readError(err)
		}
	}
	if what := foreign(head); what != "" {
		return nil, s.notText(what)
	}
	s.text, s.encoding = decode(head, rest)
	_, recoded := s.text.(*utf16Reader)
	s.plain = !s.compressed && !recoded
	return s, nil
}

func (s *source) notText(what string) error {
	return &Error{File: s.name, Found: what, Expected: "text with columns of samples", Err: ErrNotText}
}

// readError tells damage inside a gzip stream, which is the file's fault, from
// an error of the system.
func (s *source) readError(err error) error {
	if s.compressed && s.meter.err == nil {
		return s.notText(fmt.Sprintf("a damaged or cut-off gzip file (%v)", err))
	}
	return err
}

// size is the number of bytes of text to come, 0 when unknown.
func (s *source) size() int64 {
	if s.compressed {
		return 0
	}
	return s.meter.size
}

// digest reads what is left of the file, and returns the digest of all of it.
func (s *source) digest() (string, error) {
	if _, err := io.Copy(io.Discard, s.meter); err != nil {
		return "", err
	}
	return hex.EncodeToString(s.meter.hash.Sum(nil)), nil
}

// peek returns the first bytes of r and a reader of all of them.
func peek(r io.Reader) ([]byte, io.Reader, error) {
	head := make([]byte, 1024)
	n, _, err := fill(r, head)
	head = head[:n]
	return head, io.MultiReader(bytes.NewReader(head), r), err
}

// fill reads until p is full or the text ends. Unlike io.ReadFull it does not
// mistake a damaged stream for a short one.
func fill(r io.Reader, p []byte) (n int, end bool, err error) {
	for n < len(p) {
		k, err := r.Read(p[n:])
		n += k
		if err == io.EOF {
			return n, true, nil
		}
		if err != nil {
			return n, false, err
		}
	}
	return n, false, nil
}

// A meter hashes and counts the bytes that pass.
type meter struct {
	r        io.Reader
	hash     hash.Hash
	done     int64
	size     int64
	err      error // of the reader below, other than io.EOF
	ended    bool  // io.EOF has been seen
	apart    bool  // whoever reads takes the digest
	progress func(done, total int64)
	told     time.Time
}

// progressEvery is the least time between two calls of Options.Progress.
const progressEvery = 250 * time.Millisecond

func (m *meter) Read(p []byte) (int, error) {
	n, err := m.r.Read(p)
	if !m.apart {
		m.hash.Write(p[:n])
	}
	m.done += int64(n)
	if err == io.EOF {
		m.ended = true
	} else if err != nil {
		m.err = err
	}
	if m.progress != nil && time.Since(m.told) >= progressEvery {
		m.told = time.Now()
		m.progress(m.done, m.size)
	}
	return n, err
}

// decode takes off a byte-order mark and turns UTF-16 into UTF-8. Other bytes
// pass as they are: only names can hold more than ASCII, and toUTF8 reads them.
func decode(head []byte, rest io.Reader) (io.Reader, string) {
	skip := func(n int) io.Reader {
		io.CopyN(io.Discard, rest, int64(n)) // from memory: cannot fail
		return rest
	}
	switch {
	case bytes.HasPrefix(head, []byte{0xef, 0xbb, 0xbf}):
		return skip(3), "UTF-8 with mark"
	case bytes.HasPrefix(head, []byte{0xff, 0xfe}):
		return &utf16Reader{r: skip(2)}, "UTF-16 little-endian"
	case bytes.HasPrefix(head, []byte{0xfe, 0xff}):
		return &utf16Reader{r: skip(2), big: true}, "UTF-16 big-endian"
	case utf16Unmarked(head, 0):
		return &utf16Reader{r: rest}, "UTF-16 little-endian without mark"
	case utf16Unmarked(head, 1):
		return &utf16Reader{r: rest, big: true}, "UTF-16 big-endian without mark"
	}
	return rest, "UTF-8"
}

// utf16Unmarked reports text whose every second byte, other than those from
// parity on, is zero: ASCII in UTF-16 without its mark.
func utf16Unmarked(head []byte, parity int) bool {
	for i, c := range head {
		if (c == 0) != (i%2 != parity) {
			return false
		}
	}
	return len(head) >= 4 && len(head)%2 == 0
}

// toUTF8 reads a piece of text as UTF-8, or as Latin-1 when it is not UTF-8.
func toUTF8(b []byte) string {
	if utf8.Valid(b) {
		return string(b)
	}
	runes := make([]rune, len(b))
	for i, c := range b {
		runes[i] = rune(c)
	}
	return string(runes)
}

// A utf16Reader turns UTF-16 into UTF-8.
type utf16Reader struct {
	r    io.Reader
	big  bool
	in   [8192]byte
	left int // bytes of a cut-off unit or pair at the start of in
	out  []byte
	room []byte
	err  error
}

func (u *utf16Reader) Read(p []byte) (int, error) {
	for len(u.out) == 0 {
		if u.err != nil {
			return 0, u.err
		}
		u.fill()
	}
	n := copy(p, u.out)
	u.out = u.out[n:]
	return n, nil
}

func (u *utf16Reader) fill() {
	n, err := u.r.Read(u.in[u.left:])
	n += u.left
	u.err = err
	u.room = u.room[:0]
	i := 0
	for i+2 <= n {
		r := rune(u.unit(i))
		if utf16.IsSurrogate(r) {
			if i+4 > n && err == nil {
				break // the other half comes with the next read
			}
			low := rune(utf8.RuneError)
			if i+4 <= n {
				low = rune(u.unit(i + 2))
			}
			if r = utf16.DecodeRune(r, low); r != utf8.RuneError {
				i += 2
			}
		}
		u.room = utf8.AppendRune(u.room, r)
		i += 2
	}
	u.left = copy(u.in[:], u.in[i:n])
	u.out = u.room
}

func (u *utf16Reader) unit(i int) uint16 {
	if u.big {
		return uint16(u.in[i])<<8 | uint16(u.in[i+1])
	}
	return uint16(u.in[i+1])<<8 | uint16(u.in[i])
}

// grown refuses a file that holds more than it did when it was opened.
func (s *source) grown() error {
	if s.meter.size > 0 && s.meter.done > s.meter.size {
		return s.changed()
	}
	return nil
}

// unchanged refuses a file that was not as long as it was when it was opened.
func (s *source) unchanged() error {
	if s.meter.size > 0 && s.meter.done != s.meter.size {
		return s.changed()
	}
	return nil
}

func (s *source) changed() error {
	return &Error{File: s.name, Err: ErrChanged, Found: fmt.Sprintf("%d bytes", s.meter.done),
		Expected: fmt.Sprintf("the %d it had when it was opened", s.meter.size)}
}
