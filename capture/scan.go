package capture

import (
	"bytes"
	"fmt"
	"runtime"
	"sync"
	"sync/atomic"
)

const blockSize = 256 << 10 // bytes of text a worker takes at a time

// A table is what the data pass made of a text.
type table struct {
	rows    int
	values  [][]float64
	missing []int
	spans   [][]span // for each time column, in order of the rows
	holes   [][]hole // for each time column, the rows that lack it
	footer  *Error   // the first line of words below the samples
	blanks  []int    // rows above each blank line, where nothing gives the time
}

// A scanner reads a text block by block and hands the blocks to workers.
type scanner struct {
	p      *plan
	src    *source
	h      *head
	store  store
	chunks []*chunk
	line   int     // number of the next line
	rowLen float64 // mean length of a row, in bytes
	failed atomic.Bool
	free   sync.Pool
	hashes chan *chunk // blocks to hash, nil where the source does it
}

// scan reads all samples of the text whose beginning is h.
func (p *plan) scan(src *source, h *head) (*table, error) {
	s := &scanner{p: p, src: src, h: h, store: store{columns: p.values}}
	s.free.New = func() any { b := make([]byte, blockSize+1); return &b }
	start := h.lines[h.first]
	s.line = start.number
	end := bytes.LastIndexByte(h.bytes, h.term) + 1
	text, carry := h.bytes[start.offset:max(end, start.offset)], h.bytes[max(end, start.offset):]
	if h.whole && len(carry) > 0 {
		text = append(h.bytes[start.offset:len(h.bytes):len(h.bytes)], h.term)
	}
	s.rowLen = float64(len(text)) / float64(len(h.lines)-h.first)
	first := s.chunk(text, src.size()-int64(start.offset))
	if h.whole {
		p.read(first, p.worker())
	} else if err := s.stream(first, carry); err != nil {
		return nil, err
	}
	return s.finish()
}

// chunk books a block of whole lines; left is the number of bytes of text from
// its start to the end of the file, not positive when unknown.
func (s *scanner) chunk(text []byte, left int64) *chunk {
	c := &chunk{text: text, line: s.line, lines: bytes.Count(text, []byte{s.p.term})}
	c.users.Store(1)
	s.line += c.lines
	expected := 0
	if left > 0 {
		// An eighth more costs address space only: pages never written are never there.
		expected = int(1.125*float64(left)/s.rowLen) + 64
	} else if !s.h.whole {
		for _, g := range s.store.segments {
			expected += g.used
		}
		expected = max(expected, 1<<16)
	}
	s.store.reserve(c, expected)
	s.chunks = append(s.chunks, c)
	return c
}

// A worker is what is kept from one block to the next.
type worker struct {
	stamps   [][]float64 // room for the stamps of each time column
	stencils stencils
}

func (p *plan) worker() *worker { return &worker{stamps: make([][]float64, p.times)} }

// stream reads the text behind the head; carry is the beginning of its first line.
func (s *scanner) stream(first *chunk, carry []byte) error {
	jobs := make(chan *chunk, 2)
	var workers sync.WaitGroup
	for range runtime.GOMAXPROCS(0) {
		workers.Go(func() {
			w := s.p.worker()
			for c := range jobs {
				s.work(c, w)
			}
		})
	}
	stop := s.hashApart(&workers)
	jobs <- first
	err := s.blocks(jobs, carry)
	close(jobs)
	stop()
	workers.Wait()
	return err
}

// hashApart takes the digest of the blocks beside reading them, which would else wait
// for it most of the time. Text that is decoded is hashed before it gets here.
func (s *scanner) hashApart(workers *sync.WaitGroup) (stop func()) {
	m := s.src.meter
	if !s.src.plain {
		return func() {}
	}
	m.apart, s.hashes = true, make(chan *chunk, 2)
	workers.Go(func() {
		for c := range s.hashes {
			m.hash.Write(c.raw)
			s.release(c)
		}
		m.apart = false
	})
	return func() { close(s.hashes) }
}

func (s *scanner) work(c *chunk, w *worker) {
	s.p.read(c, w)
	for k := range w.stamps {
		w.stamps[k] = c.spans[k].release()
	}
	if c.err != nil {
		s.failed.Store(true)
	}
	s.release(c)
}

// release lets the text of a chunk go when its last user has done with it.
func (s *scanner) release(c *chunk) {
	if c.users.Add(-1) > 0 {
		return
	}
	if c.buffer != nil {
		s.free.Put(c.buffer)
	}
	c.text, c.raw, c.buffer = nil, nil, nil
}

// blocks cuts the text into blocks of whole lines and sends them to jobs.
func (s *scanner) blocks(jobs chan<- *chunk, carry []byte) error {
	for !s.failed.Load() {
		buffer := s.free.Get().(*[]byte)
		buf := *buffer
		kept := copy(buf, carry)
		done := s.src.meter.done
		n, last, err := fill(s.src.text, buf[kept:blockSize])
		text := buf[:kept+n]
		if err != nil {
			return s.src.readError(err)
		}
		var raw []byte
		if s.hashes != nil {
			raw = text[len(text)-int(s.src.meter.done-done):]
		}
		if last && len(text) > 0 && text[len(text)-1] != s.p.term {
			text = append(text, s.p.term)
		}
		end := bytes.LastIndexByte(text, s.p.term) + 1
		carry = append([]byte(nil), text[end:]...)
		if end > 0 {
			c := s.chunk(text[:end], s.src.size()-s.src.meter.done+int64(len(text)))
			c.buffer = buffer
			if s.hashes != nil {
				c.raw = raw
				c.users.Store(2)
				s.hashes <- c
			}
			jobs <- c
		} else if !last {
			e := longLine(s.line)
			e.File = s.src.name
			return e
		}
		if last {
			return nil
		}
		if err := s.src.grown(); err != nil {
			return err
		}
	}
	return nil
}

// finish joins what the workers made, or returns the first error in the text.
func (s *scanner) finish() (*table, error) {
	t := &table{missing: make([]int, s.p.values), spans: make([][]span, s.p.times), holes: make([][]hole, s.p.times)}
	if err := s.join(t); err != nil {
		err.File = s.src.name
		return nil, err
	}
	if t.rows < fewestRows {
		err := tooFew(t.rows)
		if n := len(s.p.steps); n > 8*t.rows {
			err.Found += fmt.Sprintf(" of %d cells", n)
			err.Expected += "; samples must stand below each other"
		}
		err.File = s.src.name
		return nil, err
	}
	t.values = s.store.gather(t.rows)
	t.close(s.p)
	return t, nil
}

// fewestRows is the least number of samples that can be a capture.
const fewestRows = 6

func tooFew(rows int) *Error {
	return &Error{Err: ErrTooFew, Found: plural(rows, "row"), Expected: fmt.Sprintf("at least %d: a decay has five unknowns", fewestRows)}
}

func (s *scanner) join(t *table) *Error {
	r := records{first: make([]float64, s.p.times), ends: make([]string, s.p.times)}
	for _, c := range s.chunks {
		if err := r.add(c, t); err != nil {
			return err
		}
		for k := range c.spans {
			if c.spans[k].n > 0 {
				t.spans[k] = append(t.spans[k], c.spans[k])
			}
		}
		t.addHoles(c)
		for _, n := range c.blanks {
			t.blanks = append(t.blanks, t.rows+n)
		}
		for k, n := range c.missing {
			t.missing[k] += n
		}
		t.rows += c.rows
	}
	t.footer = r.footer
	return r.refusal()
}
