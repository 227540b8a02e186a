package main

import (
	"errors"
	"io"
	"math"
	"strings"

	"github.com/urfave/cli/v2"

	"dieaway/capture"
	"dieaway/decay/circuit"
)

func simulateCommand() *cli.Command {
	return &cli.Command{
		Name:      "simulate",
		Usage:     "write a capture or a sweep of the circuit of a bench file",
		UsageText: "dieaway simulate ringdown|sweep --bench FILE [flags]",
		Description: "Integrates the equation of the circuit, adds noise, passes it through a converter and\n" +
			"writes what a scope (ringdown) or a swept meter (sweep) would save. The same seed gives\n" +
			"the same file. What is not given is set as a careful person would.\n\n" +
			"Examples:\n" +
			"   dieaway simulate ringdown --bench loop07.toml --bits 8 --noise 5mV -o try.csv\n" +
			"   dieaway simulate ringdown --bench loop07.toml --loss-growth 20% --seed 3 | dieaway fit -\n" +
			"   dieaway simulate sweep --bench loop07.toml --points 101 --noise 1mV -o sweep.csv",
		Flags:           simulateFlags(),
		Action:          simulate,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

func simulateFlags() []cli.Flag {
	return []cli.Flag{
		benchFlag(),
		&cli.StringFlag{Name: "report", Aliases: []string{"o"}, Usage: "write to `FILE` instead of standard output"},
		&cli.StringFlag{Name: "amplitude", Usage: "amplitude of the ring when the source falls, or of the source of a sweep, in `VOLTS` (default: 1 V)"},
		&cli.StringFlag{Name: "noise", Usage: "standard deviation of the noise in `VOLTS` (default: none)"},
		&cli.StringFlag{Name: "seed", Usage: "the `NUMBER` that the noise begins with", Value: "1"},
		&cli.StringFlag{Name: "bits", Usage: "ringdown: resolution of the converter in `BITS` (default: no converter)"},
		&cli.StringFlag{Name: "full-scale", Usage: "ringdown: range of the converter from end to end in `VOLTS`; what is beyond is clipped"},
		&cli.StringFlag{Name: "offset", Usage: "ringdown: the baseline in `VOLTS` (default: 0 V)"},
		&cli.StringFlag{Name: "sample-rate", Usage: "ringdown: samples in a second, in `HERTZ`, for example 10M"},
		&cli.StringFlag{Name: "record", Usage: "ringdown: the `TIME` that is recorded (default: five time constants)"},
		&cli.StringFlag{Name: "pretrigger", Usage: "ringdown: `TIME` before the source falls, or a share as 10%", DefaultText: "10%"},
		&cli.StringFlag{Name: "noise-correlation", Usage: "ringdown: `CORRELATION` of the noise of neighbouring samples, -1 to 1; 0 is white"},
		&cli.StringFlag{Name: "square-wave", Usage: "ringdown: the source is a square wave of this frequency in `HERTZ`"},
		&cli.StringFlag{Name: "loss-growth", Usage: "ringdown: `SHARE` by which the ring decays faster at the amplitude than at small ones, as 20%"},
		&cli.StringFlag{Name: "frequency-shift", Usage: "ringdown: `SHARE` by which it rings higher at the amplitude than at small ones, as -1%"},
		&cli.StringFlag{Name: "second-mode", Usage: "ringdown: another ring, as `FREQUENCY,Q,STRENGTH`, for example 190k,33,0.3"},
		&cli.StringFlag{Name: "across", Usage: "sweep: the `PART` the response is measured across: " + strings.Join(parts, ", ") + " (default: capacitor)"},
		&cli.StringFlag{Name: "span", Usage: "sweep: from the lowest to the highest frequency in `HERTZ` (default: three bandwidths)"},
		&cli.StringFlag{Name: "points", Usage: "sweep: `NUMBER` of frequencies", Value: "61"},
	}
}

var parts = []string{string(capture.Capacitor), string(capture.Inductor), string(capture.Resistor), string(capture.Both)}

func simulate(c *cli.Context) error {
	kind := c.Args().First()
	switch {
	case c.Args().Len() != 1 || kind != "ringdown" && kind != "sweep":
		return usagef("expected `dieaway simulate ringdown` or `dieaway simulate sweep`, found %s", found(c))
	case !c.IsSet("bench"):
		return usagef("simulate needs the circuit: give --bench FILE")
	}
	b, err := parseBench(c)
	if err != nil {
		return err
	}
	if err := onlyFlagsOf(c, kind); err != nil {
		return err
	}
	if kind == "sweep" {
		return simulateSweep(c, b)
	}
	return simulateRingDown(c, b)
}

func simulateRingDown(c *cli.Context, b *circuit.Bench) error {
	s := &circuit.Simulation{Bench: b}
	rate, length, share := 0.0, math.NaN(), 0.1
	v := &values{c: c}
	v.take("amplitude", "V", &s.Amplitude, above0)
	v.take("noise", "V", &s.Noise, atLeast0)
	v.take("offset", "V", &s.Offset, anything)
	v.take("sample-rate", "Hz", &rate, above0)
	v.take("record", "s", &length, above0)
	v.take("noise-correlation", "", &s.NoiseCorrelation, anything)
	v.take("square-wave", "Hz", &s.SquareWave, above0)
	v.take("loss-growth", "", &s.LossGrowth, atLeast0)
	v.take("frequency-shift", "", &s.FrequencyShift, anything)
	v.whole("bits", &s.Converter.Bits, 1, 32)
	v.take("full-scale", "V", &s.Converter.FullScale, above0)
	before := v.pretrigger(&share)
	s.Second = v.secondMode()
	s.Random = v.random()
	if v.err != nil {
		return v.err
	}
	if s.Converter.FullScale > 0 && s.Converter.Bits == 0 {
		return usagef("--full-scale needs --bits")
	}
	if rate > 0 {
		s.Interval = 1 / rate
	}
	if math.IsNaN(before) && !math.IsNaN(length) {
		before = share * length
	}
	if err := s.Complete(before, length); err != nil {
		return unusable(err)
	}
	r, err := interruptible(c.Context, s.Record)
	if err != nil {
		return unusable(err)
	}
	return writeSimulated(c, b, r.Write)
}

func simulateSweep(c *cli.Context, b *circuit.Bench) error {
	s := &circuit.SweepSimulation{Bench: b}
	span, points := 0.0, 61
	v := &values{c: c}
	v.word("across", parts, (*string)(&s.Across))
	v.take("amplitude", "V", &s.Source, above0)
	v.take("noise", "V", &s.Noise, atLeast0)
	v.take("span", "Hz", &span, above0)
	v.whole("points", &points, 5, 10_000_000)
	s.Random = v.random()
	if v.err != nil {
		return v.err
	}
	var err error
	if s.Frequencies, err = s.Around(span, points); err != nil {
		return unusable(err)
	}
	response, err := interruptible(c.Context, s.Sweep)
	if err != nil {
		return unusable(err)
	}
	return writeSimulated(c, b, func(w io.Writer) error { return s.Write(w, response) })
}

// writeSimulated writes to the file that was asked for, or to standard output.
func writeSimulated(c *cli.Context, b *circuit.Bench, write func(io.Writer) error) error {
	name := c.String("report")
	if name == "" || name == "-" {
		return write(interruptibleWriter{c.Context, c.App.Writer})
	}
	what := map[string]string{"ringdown": "capture", "sweep": "sweep"}[c.Args().First()]
	out, err := createFile(what, name, []string{b.File})
	if err != nil {
		return err
	}
	defer out.discard()
	if err := write(interruptibleWriter{c.Context, out}); err != nil {
		return err
	}
	return out.commit()
}

// unusable is the error of a circuit or of settings that cannot be simulated.
func unusable(err error) error {
	if errors.Is(err, errInterrupted) {
		return err
	}
	return usagef("%w", err)
}
