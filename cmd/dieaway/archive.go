package main

import (
	"bytes"
	"fmt"
	"io"
	"os"

	"github.com/urfave/cli/v2"

	"dieaway/capture"
	"dieaway/report"
	"dieaway/report/archive"
)

func archiveCommand() *cli.Command {
	return &cli.Command{
		Name:      "archive",
		Usage:     "list or verify what was filed with --archive, or make its index pages anew",
		UsageText: "dieaway archive list|verify|rebuild [flags] DIR",
		Description: "list prints every entry, verify recomputes every checksum and names what is altered,\n" +
			"missing or half-written (exit code 1), and rebuild makes all index pages from the entries.\n\n" +
			"Examples:\n" +
			"   dieaway archive list evidence --device 'loop 07'\n" +
			"   dieaway archive verify evidence\n" +
			"   dieaway archive rebuild evidence",
		Flags: []cli.Flag{
			&cli.BoolFlag{Name: "json", Usage: "list: print one JSON object per entry", DisableDefaultText: true},
			&cli.BoolFlag{Name: "csv", Usage: "list: print a table of comma-separated values", DisableDefaultText: true},
			&cli.StringFlag{Name: "device", Usage: "list: only the entries of the device of this `NAME`"},
			&cli.BoolFlag{Name: "quiet", Usage: "verify, rebuild: say nothing when all is well", DisableDefaultText: true},
		},
		Action:          archiveAction,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

func archiveAction(c *cli.Context) error {
	actions := map[string]func(*cli.Context, string) error{"list": listArchive, "verify": verifyArchive, "rebuild": rebuildArchive}
	action, dir := actions[c.Args().First()], c.Args().Get(1)
	switch {
	case action == nil || c.Args().Len() != 2 || dir == "":
		return usagef("expected `dieaway archive list DIR`, `verify DIR` or `rebuild DIR`, found %s", found(c))
	case c.Bool("json") && c.Bool("csv"):
		return usagef("--json and --csv are two forms of one list: take one of them")
	}
	v := &values{c: c}
	v.filled("device")
	return firstOf(
		func() error { return onlyFlagsOf(c, c.Args().First()) },
		func() error { return v.err },
		func() error {
			_, err := interruptible(c.Context, func() (struct{}, error) { return struct{}{}, action(c, dir) })
			return err
		},
	)
}

func listArchive(c *cli.Context, dir string) error {
	all, err := archive.List(dir)
	if err != nil {
		return err
	}
	if c.IsSet("device") {
		all = ofDevice(all, c.String("device"))
		if len(all) == 0 {
			return fmt.Errorf("the archive %s has no entry of the device %q", dir, c.String("device"))
		}
	}
	write := archive.WriteTable
	switch {
	case c.Bool("json"):
		write = archive.WriteJSON
	case c.Bool("csv"):
		write = archive.WriteCSV
	}
	return write(c.App.Writer, all)
}

func ofDevice(all []*archive.Record, device string) (some []*archive.Record) {
	for _, r := range all {
		if r.Folder == archive.FolderOf(device) {
			some = append(some, r)
		}
	}
	return some
}

func verifyArchive(c *cli.Context, dir string) error {
	v, err := archive.Verify(dir)
	if err != nil {
		return err
	}
	for _, p := range v.Problems {
		fmt.Fprintf(c.App.Writer, "%s: %s (%s)\n", p.What, report.Clean(p.Path, 0), report.Clean(p.Why, 0))
	}
	if n := len(v.Problems); n > 0 {
		return fmt.Errorf("the archive %s is not whole: problems %d, entries %d", dir, n, v.Entries)
	}
	if !c.Bool("quiet") {
		fmt.Fprintf(c.App.Writer, "all whole: devices %d, entries %d, files %d\n", v.Devices, v.Entries, v.Files)
	}
	return nil
}

func rebuildArchive(c *cli.Context, dir string) error {
	devices, entries, err := archive.Rebuild(dir)
	if err == nil && !c.Bool("quiet") {
		fmt.Fprintf(c.App.Writer, "index pages made: devices %d, entries %d\n", devices, entries)
	}
	return err
}

// archiveFlag is the flag of every command whose results can be filed.
func archiveFlag() cli.Flag {
	return &cli.StringFlag{Name: "archive", Usage: "file page, result and capture of the device in the archive `DIR`"}
}

// readyArchive makes sure that results can be filed, and keeps what comes from
// standard input, which cannot be read again.
func (j *job) readyArchive() error {
	if j.archive == "" {
		return nil
	}
	if j.device == "" {
		return usagef("--archive needs the name of the device: give --device NAME, or a bench file that names it")
	}
	j.piped = new(bytes.Buffer)
	j.stdin = io.TeeReader(j.stdin, j.piped)
	return nil
}

// keep files what was found in the archive.
func (j *job) keep(m measured) error {
	e := &archive.Entry{Made: j.origin.Made, Result: m.WriteJSON, Report: m.WritePage}
	for _, f := range m.files {
		e.Sources = append(e.Sources, archive.Source{Kind: f.kind, Name: f.name, SHA256: f.sha256, Open: j.again(f.name)})
	}
	folder, err := archive.Add(j.archive, j.device, e)
	switch {
	case err != nil && len(j.sources) != 1: // which of several
		return fmt.Errorf("%s: %w", m.files[0].name, err)
	case err == nil && !j.quiet && !j.json:
		say(j.stderr, "filed "+folder)
	}
	return err
}

// again opens a file that was measured once more.
func (j *job) again(name string) func() (io.ReadCloser, error) {
	if j.builtIn != nil {
		return func() (io.ReadCloser, error) { return io.NopCloser(bytes.NewReader(j.builtIn)), nil }
	}
	if name != "-" {
		return func() (io.ReadCloser, error) { return os.Open(name) }
	}
	return func() (io.ReadCloser, error) {
		if _, err := io.Copy(io.Discard, j.stdin); err != nil { // what the reader left
			return nil, err
		}
		return io.NopCloser(bytes.NewReader(j.piped.Bytes())), nil
	}
}

// A measuredFile is a file that a result was taken from.
type measuredFile struct{ kind, name, sha256 string }

// fileOf names the file of a capture that was read, none of one that was not.
func fileOf(c *capture.Capture) []measuredFile {
	if c == nil {
		return nil
	}
	return []measuredFile{{"capture", c.File, c.SHA256}}
}
