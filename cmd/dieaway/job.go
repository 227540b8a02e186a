package main

import (
	"bufio"
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/report"
)

// A job is what one command line asks for: the same for all commands that measure.
type job struct {
	sources  []source
	read     capture.Options
	analysis decay.Options
	channel  string  // name or number, "" for the one that rings
	probe    float64 // factor on voltages
	device   string
	bench    *circuit.Bench // nil without one
	inputs   []string       // files that must not be overwritten
	page     string         // name of the page of evidence, "" for none
	archive  string         // folder to file results in, "" for none
	piped    *bytes.Buffer  // what came from standard input, for the archive
	builtIn  []byte         // what is measured in place of a file, likewise
	json     bool
	quiet    bool
	strict   bool
	explain  bool
	origin   report.Origin
	style    report.Style
	many     *many // nil for one capture
	printed  bool  // there is a summary above

	stdin          io.Reader
	stdout, stderr io.Writer
}

// A source is one capture to read.
type source struct {
	name string
	open func(capture.Options) (*capture.Capture, error)
}

// source returns the source that a command line names.
func (j *job) source(name string) source {
	if name == "-" {
		return source{name, func(opt capture.Options) (*capture.Capture, error) {
			return capture.Read(j.stdin, "-", opt)
		}}
	}
	return source{name, func(opt capture.Options) (*capture.Capture, error) {
		return capture.ReadFile(name, opt)
	}}
}

// A measured is one result with its files, and what is needed to deliver it: the
// same for ring-downs, sweeps, cross-checks and components.
type measured struct {
	evidence
	err     error // why there is no result
	explain func(io.Writer) error
	verdict circuit.Verdict // on limits or agreement, "" without
	files   []measuredFile  // for the archive
	row     *report.SetRow  // of several captures, nil for one
}

// The evidence is a result as package report shows it.
type evidence interface {
	WriteJSON(io.Writer) error
	WriteSummary(io.Writer, report.Style) error
	WritePage(io.Writer) error
	Status() decay.Status
}

// ofRingDown is a ring-down to deliver.
func ofRingDown(r *report.RingDown) measured {
	m := measured{evidence: r, err: r.Err, verdict: verdictOf(r.Limits), files: fileOf(r.Capture)}
	if r.Capture != nil {
		m.explain = r.Capture.Explain
	}
	return m
}

// inTurn explains several files, one after the other.
func inTurn(all ...func(io.Writer) error) func(io.Writer) error {
	return func(out io.Writer) error {
		for i, explain := range all {
			if i > 0 {
				fmt.Fprintln(out)
			}
			if err := explain(out); err != nil {
				return err
			}
		}
		return nil
	}
}

func verdictOf(j *circuit.Judgement) circuit.Verdict {
	if j == nil {
		return ""
	}
	return j.Verdict
}

// run measures the free decay in all sources.
func (j *job) run(ctx context.Context) error {
	return j.runAll(ctx, "captures", func(s source) measured { return ofRingDown(j.ringDown(s)) })
}

// runAll measures all sources, which are things, in their order. One that fails
// does not stop the rest; the highest exit code wins.
func (j *job) runAll(ctx context.Context, things string, measure func(source) measured) error {
	if err := j.readyArchive(); err != nil {
		return err
	}
	var page *output
	if j.page != "" {
		var err error
		if page, err = createOutput(j.page, j.inputs); err != nil {
			return err
		}
		defer page.discard()
	}
	tuneGarbage(j.inputs)
	bar := newProgress(j.stderr, j.quiet || j.json)
	if len(j.sources) == 1 {
		j.read.Progress = func(done, total int64) { bar.at(done, total, "reading", true) }
	}
	worst := exitDone
	work := startAhead(ctx, j.sources, measure)
	for i := range j.sources {
		r, ok := work.next(ctx, i)
		if !ok {
			return errInterrupted
		}
		bar.clear()
		code, err := j.deliver(r, page, i)
		if err != nil {
			return err
		}
		work.done()
		bar.at(int64(i+1), int64(len(j.sources)), things, false)
		worst = max(worst, code)
	}
	bar.clear()
	if worst != exitDone {
		return &exitError{Code: worst}
	}
	return nil
}

// ringDown reads and analyses one source; what is wrong with it is in its Err.
func (j *job) ringDown(s source) *report.RingDown {
	r := &report.RingDown{File: s.name, Device: j.device, Origin: j.origin}
	c, err := s.open(j.read)
	if err != nil {
		r.Err = takenForCapture(err, s.name)
		return r
	}
	scaleVoltages(c, j.probe)
	r.Capture = c
	if j.channel == "" {
		r.Channel, r.Result = decay.AnalyzeCapture(c, j.analysis)
		r.Chosen = true
	} else {
		if r.Channel, err = c.Channel(j.channel); err != nil {
			r.Err = &exitError{Code: exitUsage, Err: err}
			return r
		}
		r.Result = decay.Analyze(r.Channel, j.analysis)
	}
	if b := j.bench; b != nil {
		if r.Result.Quantities != nil {
			r.Circuit = circuit.Analyze(b, r.Result.Quantities)
		}
		r.Limits = b.Limits.Judge(r.Result.Quantities, r.Circuit)
	}
	return r
}

// scaleVoltages makes good a probe factor that was set wrongly in the scope. It
// moves no frequency, time or Q: only amplitude, offset and noise.
func scaleVoltages(c *capture.Capture, factor float64) {
	if factor == 1 {
		return
	}
	for _, ch := range c.Channels {
		if ch.Unit != "V" {
			continue
		}
		for i := range ch.Samples {
			ch.Samples[i] *= factor
		}
	}
}

// deliver files and prints what was found in source number i, and returns its exit code.
func (j *job) deliver(r measured, page *output, i int) (int, error) {
	if r.err != nil {
		say(j.stderr, r.err)
	}
	code := j.exitCode(r)
	filed := func(err error) {
		if err != nil { // the result is good all the same
			say(j.stderr, err)
			code = max(code, exitFailed)
		}
	}
	if page != nil && r.err == nil {
		filed(j.file(r, page))
	}
	if j.archive != "" && r.err == nil {
		filed(j.keep(r))
	}
	out := bufio.NewWriter(j.stdout)
	if err := j.print(out, r, i); err != nil {
		return exitFailed, err
	}
	return code, out.Flush()
}

// file writes the page of evidence.
func (j *job) file(r measured, page *output) error {
	out := bufio.NewWriter(page)
	if err := r.WritePage(out); err != nil {
		return err
	}
	if err := out.Flush(); err != nil {
		return err
	}
	if err := page.commit(); err != nil {
		return err
	}
	if !j.quiet {
		say(j.stderr, "wrote "+j.page)
	}
	return nil
}

// print writes the result to out.
func (j *job) print(out io.Writer, r measured, i int) error {
	if j.many != nil {
		return j.many.print(out, r, i)
	}
	if j.json {
		return r.WriteJSON(out)
	}
	if r.err != nil || j.quiet && !j.explain {
		return nil
	}
	if j.printed {
		fmt.Fprintln(out)
	}
	j.printed = true
	if j.explain {
		if err := r.explain(out); err != nil {
			return err
		}
	}
	if j.quiet {
		return nil
	}
	if j.explain {
		fmt.Fprintln(out)
	}
	return r.WriteSummary(out, j.style)
}

// exitCode returns what the result of one source means for the caller.
func (j *job) exitCode(r measured) int {
	var exit *exitError
	var unreadable *capture.Error
	switch {
	case errors.As(r.err, &exit):
		return exit.Code
	case errors.As(r.err, &unreadable):
		return exitUnreadable
	case r.err != nil:
		return exitFailed
	case r.Status() == decay.Refused:
		return exitRefused
	case j.strict && r.Status() == decay.Doubtful:
		return exitWarning
	case r.verdict == circuit.Fail:
		return exitOutside
	case j.strict && r.verdict == circuit.Undecided:
		return exitWarning
	}
	return exitDone
}
