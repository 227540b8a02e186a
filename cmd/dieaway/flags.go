package main

import (
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/urfave/cli/v2"

	"dieaway/capture"
	"dieaway/decay"
)

// outputFlags are the flags of every command that measures.
func outputFlags() []cli.Flag {
	return []cli.Flag{
		&cli.BoolFlag{Name: "json", Usage: "print one JSON object per file and nothing else", DisableDefaultText: true},
		&cli.StringFlag{Name: "report", Aliases: []string{"o"}, Usage: "write the page of evidence to `FILE` (HTML)"},
		&cli.BoolFlag{Name: "quiet", Usage: "print no summary, only errors", DisableDefaultText: true},
	}
}

// evidenceFlags are the flags of every command whose result is evidence to keep.
func evidenceFlags() []cli.Flag {
	return append([]cli.Flag{
		&cli.StringFlag{Name: "device", Usage: "the `NAME` of what was measured"},
		archiveFlag(),
		benchFlag(),
		&cli.BoolFlag{Name: "strict", Usage: "exit with code 6 when there is a warning", DisableDefaultText: true},
		&cli.BoolFlag{Name: "explain", Usage: "print what was understood of the file before the result", DisableDefaultText: true},
	}, outputFlags()...)
}

// fitFlags are the flags of fit. Texts are plain strings: the library splits
// slices at commas, and takes NaN for a number.
func fitFlags() []cli.Flag {
	return append([]cli.Flag{
		&cli.StringFlag{Name: "channel", Usage: "measure the channel of this `NAME` or number, not the one that rings most"},
		&cli.StringFlag{Name: "from", Usage: "begin at this `TIME` of the record, for example 2.2us"},
		&cli.StringFlag{Name: "to", Usage: "end at this `TIME` of the record"},
		&cli.StringFlag{Name: "interval", Usage: "the sampling interval `TIME` of a file without a time axis"},
		&cli.StringFlag{Name: "time-unit", Usage: "the `UNIT` of the time column where the file does not tell: s, ms, us, ns or ps"},
		&cli.StringFlag{Name: "model", Usage: "the `LAW` of the decay: " + strings.Join(models, ", "), Value: "auto"},
		&cli.StringFlag{Name: "probe", Usage: "multiply voltages by this `FACTOR`, where the scope was set to the wrong probe"},
	}, evidenceFlags()...)
}

// without returns flags but for those named.
func without(flags []cli.Flag, names ...string) []cli.Flag {
	return slices.DeleteFunc(flags, func(f cli.Flag) bool { return slices.Contains(names, f.Names()[0]) })
}

var (
	models    = []string{"auto", string(decay.Exponential), string(decay.Amplitude), string(decay.TwoMode)}
	timeUnits = []string{"s", "ms", "us", "ns", "ps"}
)

// parseJob returns what the flags of the command ask for.
func parseJob(c *cli.Context) (*job, error) {
	j := &job{
		channel: c.String("channel"),
		device:  c.String("device"),
		json:    c.Bool("json"),
		page:    c.String("report"),
		archive: c.String("archive"),
		quiet:   c.Bool("quiet"),
		strict:  c.Bool("strict"),
		explain: c.Bool("explain"),
		probe:   1,
		origin:  originOf(c.App),
		style:   styleOf(c.App.Writer),
		stdin:   c.App.Reader,
		stdout:  c.App.Writer,
		stderr:  c.App.ErrWriter,
	}
	if j.json && j.explain {
		return nil, usagef("--json prints nothing but JSON: take --explain by itself")
	}
	v := &values{c: c}
	v.filled("report", "channel", "device", "archive")
	if v.err != nil {
		return nil, v.err
	}
	return j, firstOf(
		func() error { return parseRead(c, &j.read) },
		func() error { return parseAnalysis(c, &j.analysis) },
		func() error { return parseProbe(c, &j.probe) },
	)
}

func firstOf(steps ...func() error) error {
	for _, step := range steps {
		if err := step(); err != nil {
			return err
		}
	}
	return nil
}

func parseRead(c *cli.Context, opt *capture.Options) error {
	v := &values{c: c}
	v.take("interval", "s", &opt.Interval, above0)
	v.word("time-unit", timeUnits, &opt.TimeUnit)
	return v.err
}

func parseAnalysis(c *cli.Context, opt *decay.Options) error {
	v := &values{c: c}
	opt.From, opt.To = v.time("from"), v.time("to")
	model := models[0]
	v.word("model", models, &model)
	switch {
	case v.err != nil:
		return v.err
	case opt.From != nil && opt.To != nil && *opt.From >= *opt.To:
		return usagef("--from %s is not before --to %s", c.String("from"), c.String("to"))
	}
	if model != models[0] {
		opt.Model = decay.Model(model)
	}
	return nil
}

func parseProbe(c *cli.Context, factor *float64) error {
	if !c.IsSet("probe") {
		return nil
	}
	text := c.String("probe")
	x, err := strconv.ParseFloat(text, 64)
	if err != nil || math.IsInf(x, 0) || !(x > 0) { // nor NaN
		return unexpected("probe", text, "a factor above zero such as 10")
	}
	*factor = x
	return nil
}
