package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"github.com/urfave/cli/v2"

	"dieaway/report"
)

// Exit codes: scripts depend on them. With several files the highest wins.
const (
	exitDone = iota
	exitFailed
	exitUsage
	exitUnreadable
	exitRefused
	exitOutside
	exitWarning
)

// exitCodes says what each code means, in their order.
var exitCodes = []string{
	exitDone:       "done",
	exitFailed:     "a file could not be opened or written, or the program was interrupted",
	exitUsage:      "the command line or the bench file is wrong",
	exitUnreadable: "a file is no capture or sweep that can be read",
	exitRefused:    "refused: no decay or resonance that can be measured; a plan that cannot be met",
	exitOutside:    "outside the limits, or ring-down and sweep disagree",
	exitWarning:    "with --strict: there is a warning",
}

// An exitError ends the program with a code. A nil Err means that all there is
// to say has been said.
type exitError struct {
	Code int
	Err  error
}

func (e *exitError) Error() string {
	if e.Err == nil {
		return fmt.Sprintf("exit code %d", e.Code)
	}
	return e.Err.Error()
}

func (e *exitError) Unwrap() error { return e.Err }

// usagef returns the error of a wrong command line.
func usagef(format string, args ...any) error {
	return &exitError{Code: exitUsage, Err: fmt.Errorf(format, args...)}
}

// arguments is the key of the program's metadata for what it was called with.
const arguments = "arguments"

// run is the whole program: args[0] is its name. It returns the exit code.
func run(ctx context.Context, args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	out := &standardOutput{Writer: stdout}
	app := newApp(stdin, out, stderr)
	app.Metadata = map[string]any{arguments: args[1:]}
	ordered, err := flagsFirst(args, app.Commands)
	if err == nil {
		err = app.RunContext(ctx, ordered)
	}
	if err == nil {
		err = out.err
	}
	return conclude(stderr, err)
}

// conclude says what went wrong, if anything did, and returns the exit code.
func conclude(stderr io.Writer, err error) int {
	if err == nil {
		return exitDone
	}
	code := exitFailed
	var exit *exitError
	var library cli.ExitCoder // unknown help topics have a code of their own
	switch {
	case errors.As(err, &exit):
		code, err = exit.Code, exit.Err
	case errors.As(err, &library):
		code, err = exitUsage, lowerCase(err)
	}
	if err != nil {
		say(stderr, err)
	}
	return code
}

// say prints one message to people, on one line: not a result. Names of files in
// it may hold anything.
func say(stderr io.Writer, message any) {
	fmt.Fprintln(stderr, "dieaway:", report.Clean(fmt.Sprint(message), 0))
}

func newApp(stdin io.Reader, stdout, stderr io.Writer) *cli.App {
	cli.VersionFlag = &cli.BoolFlag{Name: "version", Usage: "print the version and the revision it was built from", DisableDefaultText: true}
	cli.SuggestDidYouMeanTemplate = "%s"
	cli.VersionPrinter = func(c *cli.Context) { fmt.Fprintln(c.App.Writer, "dieaway", c.App.Version) }
	app := &cli.App{
		Name:      "dieaway",
		HelpName:  "dieaway",
		Usage:     "frequency, time constant and Q of a resonant circuit from the way its ringing dies away",
		UsageText: "dieaway COMMAND [flags] [FILE...]",
		Description: "Flags may stand before or after the files; a file named - is standard input. Results go to\n" +
			"standard output, messages to standard error. `dieaway man` tells the exit codes.",
		Version:        version(),
		Reader:         stdin,
		Writer:         stdout,
		ErrWriter:      stderr,
		Commands:       []*cli.Command{fitCommand(), sweepCommand(), crosscheckCommand(), componentsCommand(), planCommand(), simulateCommand(), watchCommand(), archiveCommand(), demoCommand(), completionCommand(), manCommand()},
		Action:         noCommand,
		OnUsageError:   usageError,
		ExitErrHandler: func(*cli.Context, error) {}, // run reports
	}
	app.Setup()
	help := app.Command("help") // the library's, which speaks otherwise
	help.Usage, help.UsageText = "list the commands, or print the help of one", "dieaway help [COMMAND]"
	help.Description = "Examples:\n   dieaway help\n   dieaway help fit"
	return app
}

// noCommand runs when the first argument is no command.
func noCommand(c *cli.Context) error {
	name := c.Args().First()
	if name == "" {
		c.App.Writer = c.App.ErrWriter // the help is not the result of anything
		_ = cli.ShowAppHelp(c)
		return &exitError{Code: exitUsage}
	}
	if _, err := os.Stat(name); err == nil {
		return usagef("the command comes first, found the file %s: `dieaway fit %[1]s` measures it", name)
	}
	return usagef("unknown command %s%s; `dieaway help` lists all", name, nearest(name, cli.SuggestCommand(c.App.Commands, name)))
}

// found names the arguments of a command for a message.
func found(c *cli.Context) string {
	if !c.Args().Present() {
		return "nothing"
	}
	return strconv.Quote(strings.Join(c.Args().Slice(), " "))
}

// usageError replaces the library's, which prints the whole help to standard output.
func usageError(_ *cli.Context, err error, _ bool) error {
	return &exitError{Code: exitUsage, Err: lowerCase(err)}
}

// lowerCase makes a message of the library begin like all others.
func lowerCase(err error) error {
	text := err.Error()
	first, size := utf8.DecodeRuneInString(text)
	return errors.New(string(unicode.ToLower(first)) + text[size:])
}
