package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"time"

	"github.com/urfave/cli/v2"

	"dieaway/capture/watch"
	"dieaway/decay/circuit"
)

// journalName is the file in a watched folder that remembers what was done.
const journalName = ".dieaway-watch"

func watchCommand() *cli.Command {
	return &cli.Command{
		Name:      "watch",
		Usage:     "measure and archive every capture that appears in a folder",
		UsageText: "dieaway watch [flags] DIR",
		Description: "Measures each capture in the folder once it has stopped growing, prints one line for it and\n" +
			"files it with --archive, until it is interrupted. The device's name is that of the folder, or\n" +
			"comes from the file's name. The hidden file " + journalName + " in the folder remembers what was done:\n" +
			"started again, it goes on from there. A file that is replaced is measured again. To be\n" +
			"interrupted is the normal end: the exit code is the highest of the captures since the start.\n\n" +
			"Examples:\n" +
			"   dieaway watch --bench loop07.toml --bell incoming\n" +
			"   dieaway watch --archive evidence --device-from '(?P<device>[^_]+)_' incoming\n" +
			"   dieaway watch --poll 5s --json /mnt/scope",
		Flags: append(without(fitFlags(), "report", "explain", "strict"),
			&cli.StringFlag{Name: "device-from", Usage: "take the device from the file's name by this `PATTERN` (a regular expression) with a group device"},
			&cli.BoolFlag{Name: "bell", Usage: "ring the terminal's bell when a capture is outside the limits", DisableDefaultText: true},
			&cli.StringFlag{Name: "poll", Usage: "look every so often, a `TIME`, without messages of the file system: for network folders"},
			&cli.StringFlag{Name: "settle", Usage: "how long a file must not have changed, a `TIME`", Value: "0.5s"},
		),
		Action:          watchAction,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

// A watcher measures what appears in a folder.
type watcher struct {
	*job
	folder  *watch.Folder
	journal *watch.Journal // nil where the folder cannot be written
	pattern *regexp.Regexp // nil: the folder's name is the device
	bell    bool
	codes   map[string]int // what the last measurement of each file means, by its name
}

func watchAction(c *cli.Context) error {
	w, err := parseWatch(c)
	if err != nil {
		return err
	}
	w.openJournal()
	if w.journal != nil {
		defer w.journal.Close()
	}
	if !w.quiet && !w.json {
		say(w.stderr, "watching "+w.folder.Dir+"; interrupt to stop")
	}
	if err := w.folder.Run(c.Context, w.handle); err != nil {
		return err
	}
	return w.ended()
}

// ended is what all captures together mean for the caller: the highest code wins.
func (w *watcher) ended() error {
	worst := exitDone
	for _, code := range w.codes {
		worst = max(worst, code)
	}
	if worst != exitDone {
		return &exitError{Code: worst}
	}
	return nil
}

func parseWatch(c *cli.Context) (*watcher, error) {
	dir := c.Args().First()
	if c.Args().Len() != 1 || dir == "" {
		return nil, usagef("expected `dieaway watch DIR`, found %s", found(c))
	}
	switch info, err := os.Stat(dir); {
	case errors.Is(err, fs.ErrNotExist):
		return nil, fmt.Errorf("the folder %s does not exist", dir)
	case err != nil:
		return nil, err
	case !info.IsDir():
		return nil, usagef("%s is a file: `dieaway fit %[1]s` measures it", dir)
	}
	j, err := parseJob(c)
	if err != nil {
		return nil, err
	}
	w := &watcher{job: j, folder: &watch.Folder{Dir: dir, Accept: mayBeCapture}, bell: c.Bool("bell"), codes: map[string]int{}}
	w.folder.Say = func(message string) { say(j.stderr, message) }
	if w.pattern, err = parsePattern(c); err != nil {
		return nil, err
	}
	if w.folder.Poll, err = parsePause(c, "poll"); err != nil {
		return nil, err
	}
	if w.folder.Settle, err = parsePause(c, "settle"); err != nil {
		return nil, err
	}
	b, err := parseBench(c)
	if err != nil {
		return nil, err
	}
	named := j.device
	j.useBench(b)
	j.device = named // one bench serves many devices
	return w, w.archiveApart(dir)
}

// archiveApart refuses an archive in the watched folder itself, whose pages would
// stand among the captures.
func (w *watcher) archiveApart(dir string) error {
	if w.archive == "" {
		return nil
	}
	a, errA := filepath.Abs(w.archive)
	b, errB := filepath.Abs(dir)
	if errA == nil && errB == nil && a == b {
		return usagef("--archive %s is the watched folder: give another", w.archive)
	}
	return nil
}

func parsePattern(c *cli.Context) (*regexp.Regexp, error) {
	text := c.String("device-from")
	if !c.IsSet("device-from") {
		return nil, nil
	}
	p, err := regexp.Compile(text)
	switch {
	case err != nil:
		return nil, usagef("--device-from: %w", err)
	case p.SubexpIndex("device") < 0:
		return nil, unexpected("device-from", text, "a pattern with a group device such as '(?P<device>[^_]+)_'")
	case c.IsSet("device"):
		return nil, usagef("--device and --device-from both name the device: take one of them")
	}
	return p, nil
}

// parsePause reads a time from 10 ms to a day; 0 where the flag has no value.
func parsePause(c *cli.Context, name string) (time.Duration, error) {
	if c.String(name) == "" {
		return 0, nil
	}
	x := 0.0
	v := &values{c: c}
	if !c.IsSet(name) {
		x, v.err = v.quantity(name, c.String(name), "s")
	}
	v.take(name, "s", &x, above0)
	if v.err == nil && !(x >= 0.01 && x <= 86400) {
		v.err = unexpected(name, c.String(name), "a time from 10 ms to a day")
	}
	return time.Duration(x * float64(time.Second)), v.err
}

func (w *watcher) openJournal() {
	j, err := watch.OpenJournal(filepath.Join(w.folder.Dir, journalName), w.folder)
	if err != nil {
		say(w.stderr, fmt.Errorf("what was done will be forgotten at the end: %w", err))
		return
	}
	w.journal = j
}

// device names what the file was taken of.
func (w *watcher) deviceOf(file string) string {
	if w.pattern != nil {
		if m := w.pattern.FindStringSubmatch(file); m != nil && m[w.pattern.SubexpIndex("device")] != "" {
			return m[w.pattern.SubexpIndex("device")]
		}
	}
	if w.device != "" {
		return w.device
	}
	if dir, err := filepath.Abs(w.folder.Dir); err == nil {
		return filepath.Base(dir)
	}
	return w.folder.Dir
}

// handle measures files that have come to rest, on all cores, and delivers them in
// their order.
func (w *watcher) handle(ctx context.Context, files []watch.File) error {
	jobs, sources := make([]job, len(files)), make([]source, len(files))
	at := map[string]*job{}
	for i, f := range files {
		jobs[i] = *w.job
		jobs[i].device, jobs[i].origin.Made = w.deviceOf(f.Name), time.Now()
		sources[i] = w.source(filepath.Join(w.folder.Dir, f.Name))
		at[sources[i].name] = &jobs[i]
	}
	work := startAhead(ctx, sources, func(s source) measured {
		r := at[s.name].ringDown(s)
		m := ofRingDown(r)
		m.row = r.Row(false)
		return m
	})
	for i := range files {
		m, ok := work.next(ctx, i)
		if !ok {
			return nil // interrupted; what was delivered is in the journal
		}
		if err := w.hand(m, &jobs[i], files[i]); err != nil {
			return err
		}
		work.done()
	}
	return nil
}

// hand files and prints one result.
func (w *watcher) hand(m measured, j *job, f watch.File) error {
	if w.changed(f) {
		return nil // it comes again when it has come to rest
	}
	kept := true
	w.codes[f.Name] = w.exitCode(m)
	if m.err != nil {
		say(w.stderr, m.err)
	} else if w.archive != "" {
		quiet := *j
		quiet.quiet = true // the line on standard output is enough
		if err := quiet.keep(m); err != nil {
			say(w.stderr, err)
			kept = false
			w.codes[f.Name] = max(w.codes[f.Name], exitFailed)
		}
	}
	if err := w.show(m); err != nil {
		return err
	}
	if w.bell && m.verdict == circuit.Fail {
		fmt.Fprint(w.stderr, "\a")
	}
	if w.journal == nil || !kept {
		return nil
	}
	if err := w.journal.Add(f); err != nil {
		say(w.stderr, fmt.Errorf("what was done will be forgotten at the end: %w", err))
		w.journal = nil
	}
	return nil
}

// changed reports whether a file is no longer the one that was handed on.
func (w *watcher) changed(f watch.File) bool {
	info, err := os.Stat(filepath.Join(w.folder.Dir, f.Name))
	if err != nil {
		return os.IsNotExist(err)
	}
	return info.Size() != f.Size || info.ModTime().UnixNano() != f.Time
}

// show prints the line of one capture.
func (w *watcher) show(m measured) error {
	out := bufio.NewWriter(w.stdout)
	var err error
	switch {
	case w.json:
		err = m.WriteJSON(out)
	case !w.quiet:
		err = m.row.WriteSummary(out, w.style)
	}
	if err != nil {
		return err
	}
	return out.Flush()
}
