package main

import (
	"github.com/urfave/cli/v2"
)

func fitCommand() *cli.Command {
	return &cli.Command{
		Name:      "fit",
		Usage:     "measure ring-downs: frequency, time constant and Q with their uncertainty",
		UsageText: "dieaway fit [flags] CAPTURE...",
		Description: "Reads each capture (\"-\" is standard input, and of a folder all that may be captures),\n" +
			"finds the free decay in it, fits it and prints what it found: one capture in detail, several\n" +
			"as a table with statistics. Flags may stand before or after the files. Times are given with\n" +
			"their unit, for example --from -2us --to 0.2ms.\n\n" +
			"Examples:\n" +
			"   dieaway fit ring.csv -o ring.html\n" +
			"   dieaway fit ring.csv --bench loop07.toml --archive evidence\n" +
			"   dieaway fit coils/ --bench loop07.toml --csv > coils.csv\n" +
			"   zcat ring.csv.gz | dieaway fit - --json",
		Flags: append([]cli.Flag{
			&cli.BoolFlag{Name: "csv", Usage: "print a table of comma-separated values, one row per file", DisableDefaultText: true},
		}, fitFlags()...),
		Action:          fit,
		OnUsageError:    usageError, // not inherited from the program
		HideHelpCommand: true,       // a capture may be named "help"
	}
}

func fit(c *cli.Context) error {
	j, err := parseJob(c)
	if err != nil {
		return err
	}
	files, err := expand(c.Args().Slice())
	if err != nil {
		return err
	}
	if err := checkFiles("capture", files); err != nil {
		return err
	}
	j.inputs = files
	b, err := parseBench(c)
	if err != nil {
		return err
	}
	j.useBench(b)
	for _, name := range files {
		j.sources = append(j.sources, j.source(name))
	}
	switch {
	case c.Bool("csv") && (j.json || j.explain):
		return usagef("--csv prints nothing but its table: take it without --json and --explain")
	case c.Bool("csv") || len(files) > 1 && !j.explain:
		return j.runMany(c.Context, c.Bool("csv"))
	}
	if err := checkOnePage("capture", files, j); err != nil {
		return err
	}
	return j.run(c.Context)
}

// checkOnePage refuses one page for several files.
func checkOnePage(thing string, files []string, j *job) error {
	if j.page != "" && len(files) > 1 {
		return usagef("--report takes one %s, and there are %d: run it once for each page", thing, len(files))
	}
	return nil
}

// checkFiles refuses what no analysis can make good; thing is what the files hold.
func checkFiles(thing string, files []string) error {
	if len(files) == 0 {
		return usagef("no %s given: name at least one file, or - for standard input", thing)
	}
	streams := 0
	for _, name := range files {
		if name == "" {
			return usagef("the name of a %s is empty", thing)
		}
		if name == "-" {
			streams++
		}
	}
	if streams > 1 {
		return usagef("standard input can be read only once: found - %d times", streams)
	}
	return nil
}
