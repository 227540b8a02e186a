package main

import (
	"bytes"
	_ "embed"

	"github.com/urfave/cli/v2"

	"dieaway/capture"
)

//go:generate go run demo/generate.go -o demo/loop07.csv
//go:generate go run demo/generate_sweep.go -o demo/loop07-sweep.csv
//go:generate go run demo/generate_node.go -o demo

// loop07 is a simulated ring-down of a tag reader's loop antenna; demo/generate.go
// holds the circuit.
//
//go:embed demo/loop07.csv
var loop07 []byte

const (
	demoFile   = "loop07.csv"
	demoDevice = "loop 07"
	demoPage   = "dieaway-demo.html"
)

func demoCommand() *cli.Command {
	return &cli.Command{
		Name:      "demo",
		Usage:     "do the whole job on a built-in capture; writes " + demoPage,
		UsageText: "dieaway demo [flags]",
		Description: "Measures the simulated ring-down of " + demoDevice + ", a 125 kHz loop antenna, with the same\n" +
			"code as fit, prints the summary and writes the page into the current folder. It takes\n" +
			"the flags of fit that say what to do with a result.\n\n" +
			"Examples:\n" +
			"   dieaway demo\n" +
			"   dieaway demo -o first.html\n" +
			"   dieaway demo --device 'my first loop' --archive evidence",
		Flags:           evidenceFlags(),
		Action:          demo,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

func demo(c *cli.Context) error {
	if c.Args().Present() {
		return usagef("demo takes no file, found %s: `dieaway fit %[1]s` measures it", c.Args().First())
	}
	j, err := parseJob(c)
	if err != nil {
		return err
	}
	if j.page == "" {
		j.page = demoPage
	}
	b, err := parseBench(c)
	if err != nil {
		return err
	}
	j.useBench(b)
	if j.device == "" {
		j.device = demoDevice
	}
	j.builtIn = loop07
	j.sources = []source{{demoFile, func(opt capture.Options) (*capture.Capture, error) {
		return capture.Read(bytes.NewReader(loop07), demoFile, opt)
	}}}
	return j.run(c.Context)
}
