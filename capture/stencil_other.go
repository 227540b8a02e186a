//go:build !amd64

package capture

// canReadFitting is false where nothing is faster than fastRow.
var canReadFitting = false

func readFitting([]rowPart, *numberShapes, *byte, int, int) (size, n int) { return 0, 0 }
