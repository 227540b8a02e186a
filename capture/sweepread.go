package capture

import (
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
)

// ErrNoColumn: an option names a column that the table does not have.
var ErrNoColumn = errors.New("no such column")

const (
	sweepLargest = 64 << 20 // bytes of text that can be a driven sweep
	sweepRows    = 5        // the least number of rows: a resonance has three unknowns or four
)

// ReadSweepFile reads the driven sweep in the named file: a table of any layout
// with a column of frequency, or a Touchstone file of one or two ports. Text
// that cannot be a sweep gives an [*Error], a column that is not there an error
// that wraps [ErrNoColumn].
func ReadSweepFile(name string, opt SweepOptions) (*Sweep, error) {
	f, _, err := open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	return ReadSweep(f, name, opt)
}

// ReadSweep reads a driven sweep from r; name stands for it in messages.
func ReadSweep(r io.Reader, name string, opt SweepOptions) (*Sweep, error) {
	if err := opt.check(); err != nil {
		return nil, err
	}
	src, err := openSource(r, name, 0, Options{})
	if err != nil {
		return nil, err
	}
	text, err := io.ReadAll(io.LimitReader(src.text, sweepLargest+1))
	if err != nil {
		return nil, src.readError(err)
	}
	s := &Sweep{File: name}
	if s.SHA256, err = src.digest(); err != nil {
		return nil, src.readError(err)
	}
	err = s.read(src, text, opt)
	var refusal *Error
	switch {
	case errors.As(err, &refusal):
		refusal.File = name
	case err != nil:
		err = fmt.Errorf("%s: %w", shownFile(name), err)
	}
	if err != nil {
		return nil, err
	}
	return s, nil
}

func (o SweepOptions) check() error {
	switch o.FrequencyUnit {
	case "", "Hz", "kHz", "MHz", "GHz":
		return nil
	}
	return fmt.Errorf("unit of frequency %q: expected Hz, kHz, MHz or GHz", o.FrequencyUnit)
}

// read takes in the whole text.
func (s *Sweep) read(src *source, text []byte, opt SweepOptions) error {
	if len(text) > sweepLargest {
		return &Error{Err: ErrNoData, Found: fmt.Sprintf("more than %d MiB of text", sweepLargest>>20), Expected: "the table of a driven sweep"}
	}
	if what := foreign(text[:min(len(text), 4096)]); what != "" {
		return &Error{Err: ErrNotText, Found: what, Expected: "text with columns of numbers"}
	}
	if isTouchstone(text) {
		return s.readTouchstone(src, text, opt)
	}
	h, err := newHead(text[:min(len(text), headMost)], len(text) <= headMost)
	if err != nil {
		return err
	}
	d, err := newDesign(h, Options{})
	if err != nil {
		return err
	}
	t := &sweepTable{layoutDesign: d}
	if err := t.brokenSecond(); err != nil {
		return err
	}
	if err := t.readRows(text); err != nil {
		return err
	}
	return t.build(s, src, opt)
}

// A sweepTable is the table of a sweep with all its values: columns[i].values
// has one for each of lines, as printed; NaN where there is none.
type sweepTable struct {
	*layoutDesign
	lines  []int
	pairs  []complexPair // real and imaginary parts of the response, and of the source
	footer *Error        // the first line of words below the rows
}

// readRows reads every column of numbers of the table. A sweep is short, so
// that rows are read one by one, by the same rules as those of a capture.
func (t *sweepTable) readRows(text []byte) *Error {
	t.planColumns()
	lines := splitLines(text, t.head.term, true)[t.head.first:]
	c := &chunk{now: make([]instant, t.plan.times), spans: make([]span, t.plan.times), missing: make([]int, t.plan.values), dst: make([][]float64, t.plan.values)}
	for k := range c.dst {
		c.dst[k] = make([]float64, len(lines))
	}
	for i := range t.columns {
		t.columns[i].values = nil
	}
	for _, l := range lines {
		ok := t.plan.slowRow(c, l.text, l.number)
		if ok && c.footer != nil {
			return c.footer // no footer then, but a row that is broken
		}
		if c.err != nil {
			return c.err
		}
		if ok {
			t.take(c, l.number)
		}
	}
	t.footer = c.footer
	if n := len(t.lines); n < sweepRows {
		return &Error{Err: ErrTooFew, Found: plural(n, "row"), Expected: fmt.Sprintf("at least %d: a resonance has four unknowns", sweepRows)}
	}
	return nil
}

// brokenSecond refuses a line that was taken for the heading, but stands below a
// row of numbers: the second row of a short table, with a word in it.
func (t *sweepTable) brokenSecond() *Error {
	n := t.heading.namesLine
	at := t.head.index(n)
	if n == 0 || at == 0 || !t.head.fits(t.head.split(t.head.lines[at-1].text, nil)) {
		return nil
	}
	for i, c := range t.head.split(t.head.lines[at].text, nil) {
		if t.head.kindOf(c) == kindText {
			return &Error{Err: ErrSyntax, Line: n, Column: i + 1, Found: quote(string(c.text)), Expected: "a number"}
		}
	}
	return nil
}

// planColumns makes every column with numbers a column of values.
func (t *sweepTable) planColumns() {
	t.plan = plan{dialect: t.head.dialect, term: t.head.term, wrapped: t.head.wrapped, words: t.head.words(), steps: make([]step, len(t.columns))}
	for i := range t.columns {
		c, s := &t.columns[i], &t.plan.steps[i]
		switch c.kind {
		case kindNumber, kindQuantity:
			*s = step{op: opValue, to: t.plan.values, axis: -1, quantity: c.kind == kindQuantity}
			t.plan.values++
		case kindStamp:
			t.planClock(c, s)
			c.unit = unit{base: "s"}
		case kindText:
			c.is(RoleText, "words instead of numbers")
			continue
		default:
			c.is(RoleBlank, "no cell in it holds anything")
			continue
		}
		t.plan.last = i
	}
}

// take appends the row that the chunk holds.
func (t *sweepTable) take(c *chunk, line int) {
	for i, s := range t.plan.steps {
		switch s.op {
		case opValue:
			t.columns[i].values = append(t.columns[i].values, c.dst[s.to][c.rows])
		case opClock:
			t.columns[i].values = append(t.columns[i].values, c.now[s.to].seconds())
		}
	}
	t.lines = append(t.lines, line)
}

// asked returns the index of the column that an option names, by its heading or
// by its number.
func (t *sweepTable) asked(what, name string) (int, error) {
	name = strings.TrimSpace(name)
	for _, same := range []func(c column) bool{
		func(c column) bool { return c.Name == name },
		func(c column) bool { return c.Name != "" && strings.EqualFold(c.Name, name) },
		func(c column) bool { return fmt.Sprint(c.Number) == name },
	} {
		if i := slices.IndexFunc(t.columns, same); i >= 0 {
			if t.plan.steps[i].op == opSkip {
				return 0, fmt.Errorf("%w for the %s: column %d of the table holds %s", ErrNoColumn, what, i+1, t.columns[i].Why)
			}
			return i, nil
		}
	}
	return 0, fmt.Errorf("%w: expected %q for the %s, found %s", ErrNoColumn, name, what, t.listed())
}

// listed names the columns for a message.
func (t *sweepTable) listed() string {
	var list []string
	for _, c := range t.columns {
		if c.Name == "" {
			list = append(list, fmt.Sprintf("column %d", c.Number))
		} else {
			list = append(list, fmt.Sprintf("%d %q", c.Number, c.Name))
		}
	}
	return strings.Join(list, ", ")
}
