//go:build !amd64

package capture

// canReadFitting is false where nothing is faster than fastRow.
const canReadFitting = false

func readFitting(*rowLayout, *byte, int) int { return 0 }
