package main

import (
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"dieaway/capture"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
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
		&cli.StringFlag{Name: "amplitude", Usage: "of the ring when the source falls, or of the source of a sweep, in `VOLTS` (default: 1 V)"},
		&cli.StringFlag{Name: "noise", Usage: "standard deviation of the noise in `VOLTS` (default: none)"},
		&cli.StringFlag{Name: "seed", Usage: "the `NUMBER` that the noise begins with", Value: "1"},
		&cli.StringFlag{Name: "bits", Usage: "ringdown: resolution of the converter in `BITS` (default: no converter)"},
		&cli.StringFlag{Name: "full-scale", Usage: "ringdown: range of the converter from end to end in `VOLTS`; what is beyond is clipped"},
		&cli.StringFlag{Name: "offset", Usage: "ringdown: of the baseline in `VOLTS`"},
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
		return usagef("expected `dieaway simulate ringdown` or `dieaway simulate sweep`, found %q", strings.Join(c.Args().Slice(), " "))
	case !c.IsSet("bench"):
		return usagef("simulate needs the circuit: give --bench FILE")
	}
	b, err := parseBench(c)
	if err != nil {
		return err
	}
	if err := checkKind(c, kind); err != nil {
		return err
	}
	if kind == "sweep" {
		return simulateSweep(c, b)
	}
	return simulateRingDown(c, b)
}

// checkKind refuses flags of the other kind: they would be ignored.
func checkKind(c *cli.Context, kind string) error {
	for _, f := range simulateFlags() {
		name := f.Names()[0]
		of, _, only := strings.Cut(f.(*cli.StringFlag).Usage, ": ")
		if c.IsSet(name) && only && slices.Contains([]string{"ringdown", "sweep"}, of) && of != kind {
			return usagef("--%s is for `dieaway simulate %s`", name, of)
		}
	}
	return nil
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
		return usagef("%s: %w", b.File, err)
	}
	r, err := s.Record()
	if err != nil {
		return usagef("%s: %w", b.File, err)
	}
	return writeSimulated(c, b, r.Write)
}

func simulateSweep(c *cli.Context, b *circuit.Bench) error {
	s := &circuit.SweepSimulation{Bench: b, Across: capture.Part(c.String("across"))}
	if c.IsSet("across") && !slices.Contains(parts, c.String("across")) {
		return usagef("--across %s: expected one of %s", c.String("across"), strings.Join(parts, ", "))
	}
	span, points := 0.0, 61
	v := &values{c: c}
	v.take("amplitude", "V", &s.Source, above0)
	v.take("noise", "V", &s.Noise, atLeast0)
	v.take("span", "Hz", &span, above0)
	v.whole("points", &points, 5, 1e7)
	s.Random = v.random()
	if v.err != nil {
		return v.err
	}
	var err error
	if s.Frequencies, err = s.Around(span, points); err != nil {
		return usagef("%s: %w", b.File, err)
	}
	response, err := s.Sweep()
	if err != nil {
		return usagef("%s: %w", b.File, err)
	}
	return writeSimulated(c, b, func(w io.Writer) error { return s.Write(w, response) })
}

// writeSimulated writes to the file that was asked for, or to standard output.
func writeSimulated(c *cli.Context, b *circuit.Bench, write func(io.Writer) error) error {
	name := c.String("report")
	if name == "" || name == "-" {
		return write(c.App.Writer)
	}
	out, err := createFile(c.Args().First(), name, []string{b.File})
	if err != nil {
		return err
	}
	defer out.discard()
	if err := write(out); err != nil {
		return fmt.Errorf("cannot write the %s %s: %w", c.Args().First(), name, err)
	}
	return out.commit()
}

// Values reads flags that are quantities; it keeps the first error.
type values struct {
	c   *cli.Context
	err error
}

// A domain is what a value may be.
type domain string

const (
	anything domain = ""
	atLeast0 domain = "a value that is not negative"
	above0   domain = "a value above zero"
)

// take reads the flag, when it is set, as a value in unit.
func (v *values) take(name, unit string, to *float64, within domain) {
	if v.err != nil || !v.c.IsSet(name) {
		return
	}
	x, err := v.quantity(name, v.c.String(name), unit)
	switch {
	case err != nil:
		v.err = err
	case within == above0 && !(x > 0), within == atLeast0 && !(x >= 0):
		v.err = usagef("--%s %s: expected %s", name, v.c.String(name), within)
	default:
		*to = x
	}
}

func (v *values) quantity(name, text, unit string) (float64, error) {
	q, err := quantity.Parse(text, unit)
	if err != nil {
		return 0, usagef("--%s: %w", name, err)
	}
	if !math.IsNaN(q.U) {
		return 0, usagef("--%s %s: expected a value without an uncertainty", name, text)
	}
	return q.Value, nil
}

// whole reads a whole number from lo to hi.
func (v *values) whole(name string, to *int, lo, hi float64) {
	x := float64(*to)
	v.take(name, "", &x, anything)
	if v.err == nil && v.c.IsSet(name) && !(x >= lo && x <= hi && x == math.Trunc(x)) {
		v.err = usagef("--%s %s: expected a whole number from %g to %g", name, v.c.String(name), lo, hi)
	}
	*to = int(x)
}

// pretrigger returns the time before the trigger, or NaN and the share of the record.
func (v *values) pretrigger(share *float64) float64 {
	const name = "pretrigger"
	before := math.NaN()
	if !strings.HasSuffix(strings.TrimSpace(v.c.String(name)), "%") {
		v.take(name, "s", &before, atLeast0)
		return before
	}
	v.take(name, "", share, atLeast0)
	switch {
	case v.err != nil:
	case *share >= 1:
		v.err = usagef("--pretrigger %s leaves nothing of the decay", v.c.String(name))
	case !v.c.IsSet("record"):
		v.err = usagef("--pretrigger %s is a share of the record: give --record too, or a time", v.c.String(name))
	}
	return before
}

func (v *values) secondMode() *circuit.SecondMode {
	const name = "second-mode"
	if v.err != nil || !v.c.IsSet(name) {
		return nil
	}
	m := &circuit.SecondMode{}
	words := strings.Split(v.c.String(name), ",")
	if len(words) != 3 {
		v.err = usagef("--second-mode %s: expected frequency, Q and strength, for example 190k,33,0.3", v.c.String(name))
		return nil
	}
	for i, to := range []*float64{&m.Frequency, &m.Q, &m.Strength} {
		x, err := v.quantity(name, words[i], []string{"Hz", "", ""}[i])
		if err == nil && !(x > 0) {
			err = usagef("--second-mode %s: expected values above zero", v.c.String(name))
		}
		if err != nil {
			v.err = err
			return nil
		}
		*to = x
	}
	return m
}

func (v *values) random() *rand.Rand {
	seed := 1
	v.whole("seed", &seed, 0, 1<<53)
	return rand.New(rand.NewPCG(uint64(seed), 1))
}
