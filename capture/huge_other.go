//go:build !linux

package capture

// hugePages does nothing where the system has no such hint.
func hugePages([]float64) {}
