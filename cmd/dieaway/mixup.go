package main

import (
	"errors"
	"fmt"

	"dieaway/capture"
)

// takenForCapture adds to why a file is no capture that it is a sweep, where it is one.
func takenForCapture(err error, name string) error {
	if !errors.Is(err, capture.ErrNoData) || name == "-" {
		return err
	}
	if _, other := capture.ReadSweepFile(name, capture.SweepOptions{}); other != nil {
		return err
	}
	return fmt.Errorf("%w; it is a driven sweep, for `dieaway sweep`", err)
}

// takenForSweep adds to why a file is no sweep that it is a capture, where it has a
// column of time that names its unit.
func takenForSweep(err error, name string) error {
	var unreadable *capture.Error
	if !errors.As(err, &unreadable) || name == "-" {
		return err
	}
	c, other := capture.ReadFile(name, capture.Options{})
	if other != nil {
		return err
	}
	for _, col := range c.Layout.Columns {
		if col.Role == capture.RoleTime && col.Unit != "" {
			return fmt.Errorf("%w; it is a capture, for `dieaway fit`", err)
		}
	}
	return err
}
