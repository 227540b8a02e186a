package main

import (
	"errors"
	"strings"

	"github.com/urfave/cli/v2"

	"dieaway/capture"
	"dieaway/decay/circuit"
	"dieaway/decay/driven"
	"dieaway/report"
)

func sweepCommand() *cli.Command {
	return &cli.Command{
		Name:      "sweep",
		Usage:     "measure driven sweeps: natural frequency and Q of the resonance curve",
		UsageText: "dieaway sweep [flags] SWEEP...",
		Description: "Reads each table of a driven sweep, or Touchstone file (\"-\" is standard input), fits the\n" +
			"resonance in it and prints what it found. Columns are told by their names; where that is\n" +
			"not so, name them by their heading or their number, counted from 1.\n\n" +
			"Examples:\n" +
			"   dieaway sweep sweep.csv -o sweep.html\n" +
			"   dieaway sweep sweep.csv --across resistor --reference none\n" +
			"   dieaway sweep antenna.s1p --json",
		Flags:           sweepFlags(),
		Action:          sweep,
		OnUsageError:    usageError,
		HideHelpCommand: true, // a sweep may be named "help"
	}
}

func sweepFlags() []cli.Flag {
	return append([]cli.Flag{
		&cli.StringFlag{Name: "frequency", Usage: "the `COLUMN` of the frequency"},
		&cli.StringFlag{Name: "response", Usage: "the `COLUMN` of the response; of a Touchstone file the parameter, S21 or Z11 for example"},
		&cli.StringFlag{Name: "reference", Usage: "the `COLUMN` of the source's voltage, measured at the circuit, which divides the response; none for no division"},
		&cli.StringFlag{Name: "phase", Usage: "the `COLUMN` of the phase"},
		&cli.StringFlag{Name: "across", Usage: "the `PART` that the response is measured across: " + strings.Join(parts, ", ") + " (coil and capacitor together, a notch)"},
		&cli.StringFlag{Name: "frequency-unit", Usage: "the `UNIT` of the frequency where the file does not tell: " + strings.Join(frequencyUnits, ", ")},
		&cli.StringFlag{Name: "dwell", Usage: "the `TIME` that the source stays at each frequency before the reading"},
	}, evidenceFlags()...)
}

var frequencyUnits = []string{"Hz", "kHz", "MHz", "GHz"}

// A sweepJob is a job over sweeps instead of captures.
type sweepJob struct {
	*job
	table  capture.SweepOptions
	driven driven.Options
}

func sweep(c *cli.Context) error {
	j, err := parseSweepJob(c)
	if err != nil {
		return err
	}
	files := c.Args().Slice()
	if err := firstOf(func() error { return checkFiles("sweep", files) }, func() error { return checkOnePage("sweep", files, j.job) }); err != nil {
		return err
	}
	j.inputs = files
	b, err := parseBench(c)
	if err != nil {
		return err
	}
	j.useSweepBench(b)
	for _, name := range files {
		j.sources = append(j.sources, source{name: name})
	}
	return j.runAll(c.Context, "sweeps", j.measure)
}

func parseSweepJob(c *cli.Context) (*sweepJob, error) {
	base, err := parseJob(c)
	if err != nil {
		return nil, err
	}
	j := &sweepJob{job: base}
	j.table = capture.SweepOptions{Frequency: c.String("frequency"), Response: c.String("response"),
		Reference: c.String("reference"), Phase: c.String("phase")}
	v := &values{c: c}
	v.filled("frequency", "response", "reference", "phase")
	v.word("frequency-unit", frequencyUnits, &j.table.FrequencyUnit)
	v.word("across", parts, (*string)(&j.driven.Across))
	v.take("dwell", "s", &j.driven.Dwell, above0)
	return j, v.err
}

// useSweepBench takes from the bench file what it says of the sweep.
func (j *sweepJob) useSweepBench(b *circuit.Bench) {
	j.useBench(b)
	if b == nil {
		return
	}
	j.driven.TimebaseU = b.Sweep.TimebaseU
	if b.Sweep.MeterBandwidth.Known() {
		j.driven.MeterBandwidth = b.Sweep.MeterBandwidth.Value
	}
}

// measure is one sweep to deliver.
func (j *sweepJob) measure(s source) measured {
	r := j.sweep(s)
	j.judge(r)
	m := measured{evidence: r, err: r.Err, verdict: verdictOf(r.Limits)}
	if r.Table != nil {
		m.explain = r.Table.Explain
		m.files = []measuredFile{{"capture", r.Table.File, r.Table.SHA256}}
	}
	return m
}

// judge works out what the bench file allows to, and holds the sweep against its limits.
func (j *sweepJob) judge(r *report.Sweep) {
	b := j.bench
	if b == nil || r.Result == nil {
		return
	}
	if r.Result.Quantities != nil {
		r.Circuit = circuit.AnalyzeSweep(b, r.Result.Quantities)
	}
	r.Limits = b.Limits.JudgeSweep(r.Result.Quantities, r.Circuit)
}

// sweep reads and analyses one sweep; what is wrong with it is in its Err.
func (j *sweepJob) sweep(s source) *report.Sweep {
	r := &report.Sweep{File: s.name, Device: j.device, Origin: j.origin}
	var err error
	if s.name == "-" {
		r.Table, err = capture.ReadSweep(j.stdin, "-", j.table)
	} else {
		r.Table, err = capture.ReadSweepFile(s.name, j.table)
	}
	if errors.Is(err, capture.ErrNoColumn) {
		err = &exitError{Code: exitUsage, Err: err}
	}
	if r.Err = takenForSweep(err, s.name); err != nil {
		return r
	}
	r.Result = driven.Analyze(r.Table, j.driven)
	return r
}
