package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/decay/circuit"
	"dieaway/report"
)

// A job is what one command line asks for: the same for fit and demo.
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
	json     bool
	quiet    bool
	strict   bool
	explain  bool
	origin   report.Origin
	style    report.Style

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

// run measures all sources in their order. One that fails does not stop the
// rest; the highest exit code wins.
func (j *job) run(ctx context.Context) error {
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
	work := startAhead(ctx, j.sources, j.ringDown)
	for i := range j.sources {
		r, ok := work.next(ctx, i)
		if !ok {
			return errors.New("interrupted")
		}
		bar.clear()
		code, err := j.deliver(r, page, i)
		if err != nil {
			return err
		}
		work.done()
		bar.at(int64(i+1), int64(len(j.sources)), "captures", false)
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
		r.Err = err
		return r
	}
	scaleVoltages(c, j.probe)
	r.Capture = c
	if j.channel == "" {
		r.Channel, r.Result = decay.AnalyzeCapture(c, j.analysis)
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
func (j *job) deliver(r *report.RingDown, page *output, i int) (int, error) {
	if r.Err != nil {
		say(j.stderr, r.Err)
	}
	if page != nil && r.Err == nil {
		if err := j.file(r, page); err != nil {
			return exitFailed, err
		}
	}
	out := bufio.NewWriter(j.stdout)
	if err := j.print(out, r, i); err != nil {
		return exitFailed, err
	}
	return j.exitCode(r), out.Flush()
}

// file writes the page of evidence.
func (j *job) file(r *report.RingDown, page *output) error {
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
func (j *job) print(out io.Writer, r *report.RingDown, i int) error {
	if j.json {
		return r.WriteJSON(out)
	}
	if r.Err != nil || j.quiet && !j.explain {
		return nil
	}
	if i > 0 {
		fmt.Fprintln(out)
	}
	if j.explain {
		if err := r.Capture.Explain(out); err != nil {
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
func (j *job) exitCode(r *report.RingDown) int {
	var exit *exitError
	var unreadable *capture.Error
	switch {
	case errors.As(r.Err, &exit):
		return exit.Code
	case errors.As(r.Err, &unreadable):
		return exitUnreadable
	case r.Err != nil:
		return exitFailed
	case r.Status() == decay.Refused:
		return exitRefused
	case j.strict && r.Status() == decay.Doubtful:
		return exitWarning
	case r.Limits != nil && r.Limits.Verdict == circuit.Fail:
		return exitOutside
	case j.strict && r.Limits != nil && r.Limits.Verdict == circuit.Undecided:
		return exitWarning
	}
	return exitDone
}
