package main

import (
	"io"
	"os"
	"strings"
	"time"

	"github.com/urfave/cli/v2"
	"golang.org/x/term"

	"dieaway/report"
)

// A standardOutput remembers why it could not be written: the library prints help
// and version without looking.
type standardOutput struct {
	io.Writer
	err error // the first
}

func (o *standardOutput) Write(p []byte) (int, error) {
	n, err := o.Writer.Write(p)
	if o.err == nil {
		o.err = err
	}
	return n, err
}

// styleOf returns how a summary is to look on stdout: plain, or in the width and
// with the colours of a terminal, unless NO_COLOR is set to anything.
func styleOf(stdout io.Writer) report.Style {
	if out, ok := stdout.(*standardOutput); ok {
		stdout = out.Writer
	}
	file, ok := stdout.(*os.File)
	if !ok || !term.IsTerminal(int(file.Fd())) {
		return report.Style{}
	}
	style := report.Style{Color: os.Getenv("NO_COLOR") == "" && os.Getenv("TERM") != "dumb"}
	if width, _, err := term.GetSize(int(file.Fd())); err == nil {
		style.Width = max(40, min(width, 100)) // longer lines are hard to read
	}
	return style
}

// originOf tells how the results of the program are made.
func originOf(app *cli.App) report.Origin {
	words := []string{app.Name}
	for _, arg := range app.Metadata[arguments].([]string) {
		words = append(words, shellQuote(arg))
	}
	return report.Origin{Version: app.Version, CommandLine: strings.Join(words, " "), Made: time.Now()}
}

// shellQuote writes an argument as a shell would take it.
func shellQuote(arg string) string {
	const plain = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789_-+=:,./@%"
	if arg != "" && strings.Trim(arg, plain) == "" {
		return arg
	}
	return "'" + strings.ReplaceAll(arg, "'", `'\''`) + "'"
}
