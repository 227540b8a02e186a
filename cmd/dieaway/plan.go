package main

import (
	"fmt"
	"strings"

	"github.com/urfave/cli/v2"

	"dieaway/decay/plan"
	"dieaway/decay/quantity"
	"dieaway/report"
)

func planCommand() *cli.Command {
	return &cli.Command{
		Name:      "plan",
		Usage:     "what to set on the scope for a wanted uncertainty of Q",
		UsageText: "dieaway plan [flags]",
		Description: "Finds record length, sample rate, averages and vertical range, in steps that scopes\n" +
			"have, from what is expected of the ring, and tells what else would be cheaper or better.\n" +
			"Natural frequency and Q are those of the circuit by itself; with a bench file, what source\n" +
			"and probe will do to them is told too, and either may be left to its components.\n\n" +
			"Examples:\n" +
			"   dieaway plan --natural-frequency 125k --q 40 --amplitude 1V --bits 8 --noise 3mV\n" +
			"   dieaway plan --bench loop07.toml --amplitude 1V --noise 8mV --bits 8 --want 0.2% --memory 10k -o plan.html",
		Flags: append([]cli.Flag{
			&cli.StringFlag{Name: "natural-frequency", Usage: "the expected natural frequency in `HERTZ`"},
			&cli.StringFlag{Name: "q", Usage: "the expected quality factor, a `NUMBER`"},
			&cli.StringFlag{Name: "amplitude", Usage: "amplitude of the ring when the source lets go, in `VOLTS`"},
			&cli.StringFlag{Name: "noise", Usage: "standard deviation of a sample in `VOLTS`"},
			&cli.StringFlag{Name: "bits", Usage: "resolution of the converter in `BITS`"},
			&cli.StringFlag{Name: "full-scale", Usage: "range of the converter from end to end in `VOLTS` (default: what holds the ring)"},
			&cli.StringFlag{Name: "want", Usage: "wanted relative standard uncertainty of Q, a `SHARE`", Value: "0.1%"},
			&cli.StringFlag{Name: "memory", Usage: "samples that a record may have, a `NUMBER`", Value: "100k"},
			&cli.StringFlag{Name: "device", Usage: "the `NAME` of what is to be measured"},
			&cli.StringFlag{Name: "report", Aliases: []string{"o"}, Usage: "write the plan as a page to `FILE` (HTML)"},
			&cli.BoolFlag{Name: "json", Usage: "print one JSON object and nothing else", DisableDefaultText: true},
		}, without(evidenceFlags(), "archive", "explain", "device", "report", "json")...),
		Action:          planAction,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

func planAction(c *cli.Context) error {
	if c.Args().Present() {
		return usagef("plan takes no file, found %s: it looks ahead", c.Args().First())
	}
	w, err := parseWish(c)
	if err != nil {
		return err
	}
	j, err := parseJob(c)
	if err != nil {
		return err
	}
	p, err := plan.Make(w)
	if err != nil {
		return usagef("%w", err)
	}
	j.useBench(w.Bench)
	j.sources = make([]source, 1) // of nothing: it is a wish that is looked at
	return j.runAll(c.Context, "plans", func(source) measured {
		return measured{evidence: report.Plan{Plan: p, Device: j.device, Origin: j.origin}}
	})
}

func parseWish(c *cli.Context) (w plan.Wish, err error) {
	v := &values{c: c}
	v.take("natural-frequency", "Hz", &w.NaturalFrequency, above0)
	v.take("q", "", &w.Q, above0)
	v.take("amplitude", "V", &w.Amplitude, above0)
	v.take("noise", "V", &w.Noise, above0)
	v.whole("bits", &w.Bits, 1, 32)
	v.take("full-scale", "V", &w.FullScale, above0)
	v.take("want", "", &w.Want, above0)
	v.whole("memory", &w.Memory, 50, 10_000_000_000)
	if v.err != nil {
		return w, v.err
	}
	if err := checkWant(c, w.Want); err != nil {
		return w, err
	}
	if !c.IsSet("amplitude") {
		return w, usagef("plan needs the amplitude of the ring: give --amplitude, for example 1V")
	}
	if !c.IsSet("noise") && !c.IsSet("bits") {
		return w, usagef("plan needs what limits the uncertainty: give --noise, or --bits of the converter")
	}
	if !c.IsSet("bench") && (!c.IsSet("natural-frequency") || !c.IsSet("q")) {
		return w, usagef("plan needs what is expected: give --natural-frequency and --q, or --bench with all components")
	}
	w.Bench, err = parseBench(c)
	return w, err
}

// checkWant refuses a share that is none to plan for, and says what a bare number
// was taken for: 0.1 is not 0.1 %.
func checkWant(c *cli.Context, want float64) error {
	text := c.String("want")
	switch {
	case want >= 0.5:
		return unexpected("want", text, "a share below 50 % such as 0.1%")
	case c.IsSet("want") && !strings.ContainsAny(text, "%p") && !c.Bool("quiet"):
		say(c.App.ErrWriter, fmt.Sprintf("--want %s is taken as %s; for %[1]s %% write %[1]s%%", text, quantity.Percent(want)))
	}
	return nil
}
