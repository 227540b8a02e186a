package main

import (
	"context"
	"fmt"
	"io"
	"math"
	"strings"

	"github.com/urfave/cli/v2"

	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
	"dieaway/report"
	"dieaway/report/archive"
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
			"   dieaway components --added-resistance 0,10,33 --bench loop07.toml -o coil.html ring.csv ring-10.csv ring-33.csv",
		Flags: append([]cli.Flag{
			&cli.StringFlag{Name: "added-capacitance", Usage: "the capacitor of each capture, as `0,100p,220p`"},
			&cli.StringFlag{Name: "added-resistance", Usage: "the resistor of each capture, as `0,10,33`"},
		}, fitFlags()...),
		Action:          components,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

// A componentsJob is a job over all captures at once.
type componentsJob struct {
	*job
	circuit   *circuit.Bench // nil without one
	captures  []source
	added     []quantity.Quantity
	resistors bool
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
	k := &componentsJob{job: j}
	if k.added, k.resistors, err = parseAdded(c, len(files)); err != nil {
		return err
	}
	if k.circuit, err = parseBench(c); err != nil {
		return err
	}
	j.inputs = files
	j.useBench(k.circuit)
	j.bench = nil // it belongs to the circuit without the added parts
	for _, name := range files {
		k.captures = append(k.captures, j.source(name))
	}
	j.sources = k.captures[:1] // all of them make one result
	return j.runAll(c.Context, "captures", func(source) measured { return k.measure(c.Context) })
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
		switch text = strings.TrimSpace(text); {
		case q.Value < 0:
			return nil, false, unexpected(flag, text, "values that are not negative")
		case !resistors && q.Value >= circuit.CapacitanceMost:
			return nil, false, unexpected(flag, text, "values in F below 1, such as 100p")
		}
		values = append(values, q)
	}
	if len(values) != n {
		return nil, false, usagef("--%s: expected one value for each capture, 0 for the circuit as it is, found values %d, captures %d", flag, len(values), n)
	}
	if n < 2 {
		return nil, false, usagef("one capture does not tell coil and capacitance apart: give at least two, with different parts added")
	}
	return values, resistors, nil
}

// measure reads and analyses all captures and finds the components.
func (k *componentsJob) measure(ctx context.Context) measured {
	k.read.Progress = nil // of several files at once
	out := &report.Components{Added: k.added, Device: k.device, Origin: k.origin}
	m := measured{evidence: out}
	work := startAhead(ctx, k.captures, k.ringDown)
	var explain []func(io.Writer) error
	for i := range k.captures {
		r, ok := work.next(ctx, i)
		if !ok {
			m.err = errInterrupted
			return m
		}
		work.done()
		one := ofRingDown(r)
		for _, f := range one.files {
			f.kind = archive.KindOf(f.kind, i)
			m.files = append(m.files, f)
		}
		explain = append(explain, one.explain)
		out.RingDowns = append(out.RingDowns, r)
	}
	if m.err = out.Err(); m.err != nil {
		return m
	}
	m.explain = inTurn(explain...)
	k.find(out)
	m.verdict = verdictOf(out.Limits)
	return m
}

// find works out the components of captures that were read.
func (k *componentsJob) find(out *report.Components) {
	var without []string
	for i, r := range out.RingDowns {
		if r.Status() == decay.Refused {
			without = append(without, k.captures[i].name)
		}
	}
	if len(without) > 0 {
		out.Refusal = fmt.Errorf("every capture is needed, and there is no result of %s", strings.Join(without, ", "))
	} else {
		out.Result, out.Refusal = circuit.FindComponents(k.circuit, addedRows(out, k.resistors))
	}
	if k.circuit != nil {
		out.Limits = k.circuit.Limits.JudgeComponents(out.Result)
	}
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
