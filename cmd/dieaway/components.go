package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"math"
	"strings"

	"github.com/urfave/cli/v2"

	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
	"dieaway/report"
)

func componentsCommand() *cli.Command {
	return &cli.Command{
		Name:      "components",
		Usage:     "find coil, capacitance and series resistance from ring-downs with known parts added",
		UsageText: "dieaway components [flags] CAPTURE...",
		Description: "Each capture is a ring-down of the same circuit with another known capacitor across its\n" +
			"own, or another known resistor in its loop: give the values in the order of the captures,\n" +
			"with 0 for the circuit as it is. A tolerance makes the result honest: \"0,100p +- 1 %\".\n\n" +
			"Examples:\n" +
			"   dieaway components --added-capacitance '0, 220p +- 1 %, 470p +- 1 %' node.csv node-220p.csv node-470p.csv\n" +
			"   dieaway components --added-resistance 0,10,33 --bench loop07.toml ring.csv ring-10.csv ring-33.csv",
		Flags: append([]cli.Flag{
			&cli.StringFlag{Name: "added-capacitance", Usage: "the capacitor of each capture, as `0,100p,220p`"},
			&cli.StringFlag{Name: "added-resistance", Usage: "the resistor of each capture, as `0,10,33`"},
		}, without(fitFlags(), "report", "archive", "explain")...),
		Action:          components,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

// without returns flags but for those named.
func without(flags []cli.Flag, names ...string) (out []cli.Flag) {
	for _, f := range flags {
		keep := true
		for _, n := range names {
			keep = keep && f.Names()[0] != n
		}
		if keep {
			out = append(out, f)
		}
	}
	return out
}

func components(c *cli.Context) error {
	j, err := parseJob(c)
	if err != nil {
		return err
	}
	files := c.Args().Slice()
	if err := checkFiles("capture", files); err != nil {
		return err
	}
	added, resistors, err := parseAdded(c, len(files))
	if err != nil {
		return err
	}
	bench, err := parseBench(c)
	if err != nil {
		return err
	}
	j.useBench(bench)
	j.bench = nil // it belongs to the circuit without the added parts
	for _, name := range files {
		j.sources = append(j.sources, j.source(name))
	}
	out := &report.Components{Added: added, Device: j.device}
	code, err := j.measureAll(c.Context, out)
	if err != nil {
		return err
	}
	if out.Err == nil {
		out.Result, out.Err = circuit.FindComponents(bench, addedRows(out, resistors))
		if out.Err != nil {
			say(j.stderr, out.Err)
			code = exitRefused
		}
	}
	return j.deliverComponents(out, code)
}

// parseAdded reads the values of the added parts, one for each of n captures.
func parseAdded(c *cli.Context, n int) (values []quantity.Quantity, resistors bool, err error) {
	flag, unit := "added-capacitance", "F"
	if resistors = c.IsSet("added-resistance"); resistors {
		flag, unit = "added-resistance", "ohm"
	}
	if resistors == c.IsSet("added-capacitance") {
		return nil, false, usagef("give either --added-capacitance or --added-resistance: one value for each capture")
	}
	for _, text := range strings.Split(c.String(flag), ",") {
		q, err := quantity.Parse(text, unit)
		if err != nil {
			return nil, false, usagef("--%s: %w", flag, err)
		}
		if q.Value < 0 {
			return nil, false, usagef("--%s %s: expected values that are not negative", flag, strings.TrimSpace(text))
		}
		values = append(values, q)
	}
	if len(values) != n {
		return nil, false, usagef("--%s has %d values for %d captures: give one for each, 0 for the circuit as it is", flag, len(values), n)
	}
	if n < 2 {
		return nil, false, usagef("one capture does not tell coil and capacitance apart: give at least two, with different parts added")
	}
	return values, resistors, nil
}

// measureAll reads and analyses all captures; the error is that of an interrupt,
// the code that of the worst capture, and what is missing is in the result's Err.
func (j *job) measureAll(ctx context.Context, out *report.Components) (code int, err error) {
	work := startAhead(ctx, j.sources, j.ringDown)
	var bad []string
	for i, s := range j.sources {
		r, ok := work.next(ctx, i)
		if !ok {
			return exitFailed, errors.New("interrupted")
		}
		work.done()
		if r.Err != nil {
			say(j.stderr, r.Err)
		}
		if r.Err != nil || r.Status() == decay.Refused {
			bad = append(bad, s.name)
			code = max(code, j.exitCode(ofRingDown(r)))
		}
		out.RingDowns = append(out.RingDowns, r)
	}
	if len(bad) > 0 {
		out.Err = fmt.Errorf("no components: every capture is needed, and there is no result of %s", strings.Join(bad, ", "))
		say(j.stderr, out.Err)
	}
	return code, nil
}

func addedRows(c *report.Components, resistors bool) (rows []circuit.Added) {
	none := quantity.New(math.NaN(), math.NaN(), "")
	for i, r := range c.RingDowns {
		row := circuit.Added{Capacitance: c.Added[i], Resistance: none, Result: r.Result.Quantities}
		if resistors {
			row.Capacitance, row.Resistance = none, c.Added[i]
		}
		rows = append(rows, row)
	}
	return rows
}

func (j *job) deliverComponents(c *report.Components, code int) error {
	out := bufio.NewWriter(j.stdout)
	var err error
	switch {
	case j.json:
		err = c.WriteJSON(out)
	case !j.quiet && c.Result != nil:
		err = c.WriteSummary(out, j.style)
	}
	if err = errors.Join(err, out.Flush()); err != nil {
		return err
	}
	if j.strict && c.Status() == decay.Doubtful {
		code = max(code, exitWarning)
	}
	if code != exitDone {
		return &exitError{Code: code}
	}
	return nil
}
