package main

import (
	"errors"

	"github.com/urfave/cli/v2"

	"dieaway/decay/circuit"
)

// benchFlag is the flag of every command that knows the circuit.
func benchFlag() cli.Flag {
	return &cli.StringFlag{Name: "bench", Usage: "what is known of the circuit, what loads it, and its limits, in this `FILE` (TOML)"}
}

// parseBench reads the bench file that a command line names, nil without one.
func parseBench(c *cli.Context) (*circuit.Bench, error) {
	if !c.IsSet("bench") {
		return nil, nil
	}
	if c.String("bench") == "" {
		return nil, usagef("--bench is empty")
	}
	b, err := circuit.ReadBench(c.String("bench"))
	var contents *circuit.BenchError
	if errors.As(err, &contents) {
		return nil, &exitError{Code: exitUsage, Err: err}
	}
	return b, err
}

// useBench takes from the bench file what the command line leaves open.
func (j *job) useBench(b *circuit.Bench) {
	j.bench = b
	if b == nil {
		return
	}
	j.inputs = append(j.inputs, b.File)
	j.analysis.TimebaseU = b.RingDown.TimebaseU
	if j.device == "" {
		j.device = b.Device
	}
}
