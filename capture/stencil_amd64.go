package capture

import "golang.org/x/sys/cpu"

// canReadFitting tells whether the processor has the instructions of readFitting.
var canReadFitting = cpu.X86.HasAVX2

// readFitting reads the rows that stand one behind the other from *text on, as long as
// they fit the layout l, up to most of them. The numbers of each go where l tells, one
// behind the other. It returns the number of rows. From *text + l.numbers[k].at on there
// must be 16 bytes of text and from *text on those of all blocks, for each row.
//
//go:noescape
func readFitting(l *rowLayout, text *byte, most int) int
