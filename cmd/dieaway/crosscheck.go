package main

import (
	"slices"

	"github.com/urfave/cli/v2"

	"dieaway/decay/circuit"
	"dieaway/report"
)

func crosscheckCommand() *cli.Command {
	return &cli.Command{
		Name:      "crosscheck",
		Usage:     "hold a ring-down and a driven sweep of one circuit against each other",
		UsageText: "dieaway crosscheck [flags] CAPTURE SWEEP",
		Description: "Measures both, compares natural frequency, Q, damping ratio and bandwidth, and says where\n" +
			"differences come from. With a bench file source and probe of both set-ups are taken out\n" +
			"and the loss is told apart. The exit code is 5 when they disagree. Flags are those of fit\n" +
			"and of sweep.\n\n" +
			"Examples:\n" +
			"   dieaway crosscheck --bench loop07.toml ring.csv sweep.csv -o check.html\n" +
			"   dieaway crosscheck ring.csv sweep.csv --json",
		Flags:           crosscheckFlags(),
		Action:          crosscheck,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

// crosscheckFlags are those of fit and of sweep, each once.
func crosscheckFlags() []cli.Flag {
	flags := fitFlags()
	for _, f := range sweepFlags() {
		if !slices.ContainsFunc(flags, func(g cli.Flag) bool { return g.Names()[0] == f.Names()[0] }) {
			flags = append(flags, f)
		}
	}
	return flags
}

func crosscheck(c *cli.Context) error {
	j, err := parseSweepJob(c)
	if err != nil {
		return err
	}
	files := c.Args().Slice()
	if len(files) != 2 {
		return usagef("expected `dieaway crosscheck CAPTURE SWEEP`, found %s", found(c))
	}
	// One page holds both.
	if err := checkFiles("capture", files); err != nil {
		return err
	}
	j.inputs = files
	b, err := parseBench(c)
	if err != nil {
		return err
	}
	j.useSweepBench(b)
	j.sources = []source{j.source(files[0])}
	return j.runAll(c.Context, "captures", func(s source) measured { return j.crosscheck(s, source{name: files[1]}) })
}

// crosscheck measures both files and compares them.
func (j *sweepJob) crosscheck(ring, sweep source) measured {
	r := &report.CrossCheck{RingDown: j.ringDown(ring), Sweep: j.sweep(sweep), Device: j.device, Origin: j.origin}
	m := measured{evidence: r, err: r.Err()}
	if m.err != nil {
		return m
	}
	m.files = append(fileOf(r.RingDown.Capture), measuredFile{"sweep", r.Sweep.Table.File, r.Sweep.Table.SHA256})
	m.explain = inTurn(r.RingDown.Capture.Explain, r.Sweep.Table.Explain)
	r.Check = circuit.Compare(j.bench, r.RingDown.Result, r.Sweep.Result)
	m.verdict = verdictOf(r.RingDown.Limits)
	if r.Check.Compared() && !r.Check.Agrees {
		m.verdict = circuit.Fail
	}
	return m
}
