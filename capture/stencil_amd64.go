package capture

import "golang.org/x/sys/cpu"

// canReadFitting tells whether the processor has the instructions of readFitting.
var canReadFitting = cpu.X86.HasAVX2 && cpu.X86.HasBMI1

// readFitting reads the rows that stand one behind the other from *text on, as long as
// they are made of the parts, up to most of them, and none that begins behind text[last].
// It returns the bytes and the number of the rows. The number that begins part k of row r
// goes to parts[k].to[r], its decimal places to parts[k].places[r]. Behind text[last]
// there must be as much text as a row can hold, and partBytes more.
//
//go:noescape
func readFitting(parts []rowPart, shapes *numberShapes, text *byte, last, most int) (size, n int)
