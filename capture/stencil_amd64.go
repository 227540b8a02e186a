package capture

import "golang.org/x/sys/cpu"

// canReadFitting tells whether the processor has the instructions of readFitting.
var canReadFitting = cpu.X86.HasAVX2

// readFitting reads the rows that stand one behind the other from *text on, as long as
// they are made of the parts, up to most of them, and none that begins behind text[last].
// The number of row r in part k goes to parts[k].to[r]. It returns the bytes and the
// number of the rows. Behind the start of each part there must be partBytes+1 of text.
//
//go:noescape
func readFitting(parts []rowPart, text *byte, last, most int) (size, n int)
