package main

import (
	"github.com/urfave/cli/v2"
)

func fitCommand() *cli.Command {
	return &cli.Command{
		Name:      "fit",
		Usage:     "measure ring-downs: frequency, time constant and Q with their uncertainty",
		UsageText: "dieaway fit [flags] CAPTURE...",
		Description: "Reads each capture (\"-\" is standard input), finds the free decay in it, fits it and\n" +
			"prints what it found. Flags may stand before or after the files. Times are given with\n" +
			"their unit, for example --from -2us --to 0.2ms.",
		Flags:           fitFlags(),
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
	files := c.Args().Slice()
	if err := checkFiles("capture", files, j); err != nil {
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
	return j.run(c.Context)
}

// checkFiles refuses what no analysis can make good; thing is what the files hold.
func checkFiles(thing string, files []string, j *job) error {
	if len(files) == 0 {
		return usagef("no %s given: name at least one file, or - for standard input", thing)
	}
	if j.page != "" && len(files) > 1 {
		return usagef("--report takes one %s, and there are %d: run it once for each page", thing, len(files))
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
