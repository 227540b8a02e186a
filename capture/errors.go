package capture

import (
	"errors"
	"fmt"
	"strings"
)

// What a file can be refused for. An [*Error] unwraps to one of them; errors
// of the system while reading (a missing file, a directory, a worn-out stick)
// come back as they are.
var (
	// ErrNotText: the bytes are not text, for example a spreadsheet or an image.
	ErrNotText = errors.New("not a text file")
	// ErrNoData: nothing in the text is a table of samples.
	ErrNoData = errors.New("no samples")
	// ErrSyntax: the table of samples is broken at a line and column.
	ErrSyntax = errors.New("broken table of samples")
	// ErrNoTime: nothing gives the time of the samples.
	ErrNoTime = errors.New("no time axis")
	// ErrBackwards: a stamp is earlier than the one before it.
	ErrBackwards = errors.New("time runs backwards")
	// ErrChanged: the file became shorter or longer while it was read.
	ErrChanged = errors.New("the file changed while it was read")
	// ErrTooFew: fewer than two rows of samples, or no span of time.
	ErrTooFew = errors.New("too few samples")
)

// An Error says why a text cannot be read as a capture.
type Error struct {
	// File is the name of the file, "-" for standard input.
	File string
	// Line is the line of the text and Column the column of its table, both
	// counted from 1; 0 where the error concerns no line or no column.
	Line, Column int
	// Found is what stands there and Expected what should, in words; both may
	// be empty.
	Found, Expected string
	// Err is the sentinel it unwraps to.
	Err error
}

// Unwrap returns the sentinel.
func (e *Error) Unwrap() error { return e.Err }

// Error gives file, line, column, what was found and what was expected, in one line.
func (e *Error) Error() string {
	var b strings.Builder
	if e.File != "" {
		b.WriteString(shownFile(e.File) + ": ")
	}
	b.WriteString(e.Reason())
	return b.String()
}

// shownFile is the name of a file in a message.
func shownFile(name string) string {
	if name == "-" {
		return "standard input"
	}
	return name
}

// Reason is the error without the name of the file.
func (e *Error) Reason() string {
	var b strings.Builder
	switch {
	case e.Line > 0 && e.Column > 0:
		fmt.Fprintf(&b, "line %d, column %d: ", e.Line, e.Column)
	case e.Line > 0:
		fmt.Fprintf(&b, "line %d: ", e.Line)
	case e.Column > 0:
		fmt.Fprintf(&b, "column %d: ", e.Column)
	}
	// A bad cell speaks for itself; every other kind needs its name.
	if e.Err != nil && (e.Err != ErrSyntax || e.Found == "") {
		b.WriteString(e.Err.Error())
		if e.Found != "" || e.Expected != "" {
			b.WriteString(": ")
		}
	}
	switch {
	case e.Found != "" && e.Expected != "":
		fmt.Fprintf(&b, "found %s, expected %s", e.Found, e.Expected)
	case e.Found != "":
		b.WriteString("found " + e.Found)
	case e.Expected != "":
		b.WriteString("expected " + e.Expected)
	}
	return b.String()
}

// quote shows a piece of the file, cut to what fits in a message.
func quote(cell string) string {
	const most = 40
	if len(cell) > most {
		cell = strings.ToValidUTF8(cell[:most], "") + "…"
	}
	return fmt.Sprintf("%q", toUTF8([]byte(cell)))
}
