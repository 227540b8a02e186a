package main

import (
	"os"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
	"github.com/xrash/smetrics"
)

// flagsFirst reorders the arguments of a command so that flags may stand before
// or after the files: the library reads them only before. What follows "--" is
// files, and so is a lone "-". Arguments that begin with a flag of the program
// itself, or with no known command, stay as they are.
func flagsFirst(args []string, commands []*cli.Command) ([]string, error) {
	if len(args) < 2 {
		return args, nil
	}
	command := find(commands, args[1])
	if command == nil {
		return args, unknownGlobal(args[1])
	}
	var flags, files []string
	rest := args[2:]
	for len(rest) > 0 {
		arg := rest[0]
		switch {
		case arg == "--":
			files = append(files, rest[1:]...)
			rest = nil
		case arg == "-" || !strings.HasPrefix(arg, "-"):
			files = append(files, arg)
			rest = rest[1:]
		default:
			n, err := flagLength(command, rest)
			if err != nil {
				return nil, err
			}
			flags = append(flags, rest[:n]...)
			rest = rest[n:]
		}
	}
	if slices.ContainsFunc(flags, asksForHelp) {
		// The library would take a file for the name of a topic.
		return append(args[:2:2], "--help"), nil
	}
	return append(append(append(args[:2:2], flags...), "--"), files...), nil
}

func asksForHelp(arg string) bool {
	name := strings.TrimLeft(arg, "-")
	return name != arg && slices.Contains(cli.HelpFlag.Names(), name)
}

// flagLength returns how many of args, which begin with a flag, belong to it.
// A value may begin with a minus sign, as in --from -2us.
func flagLength(command *cli.Command, args []string) (int, error) {
	name, _, joined := strings.Cut(strings.TrimLeft(args[0], "-"), "=")
	flag := findFlag(command, name)
	if flag == nil {
		return 0, unknownFlag(command, args[0])
	}
	if takesNoValue(flag) || joined {
		return 1, nil
	}
	if len(args) == 1 {
		return 0, usagef("%s needs a value", args[0])
	}
	if next := strings.TrimLeft(args[1], "-"); next != args[1] && findFlag(command, next) != nil {
		return 0, usagef("%s needs a value, and %s is a flag; write %s=%s if it is meant", args[0], args[1], args[0], args[1])
	}
	return 2, nil
}

func find(commands []*cli.Command, name string) *cli.Command {
	for _, c := range commands {
		if c.HasName(name) {
			return c
		}
	}
	return nil
}

// findFlag returns the flag of the command by its name without dashes, or nil.
func findFlag(command *cli.Command, name string) cli.Flag {
	for _, flag := range append([]cli.Flag{cli.HelpFlag}, command.Flags...) {
		for _, n := range flag.Names() {
			if n == name {
				return flag
			}
		}
	}
	return nil
}

func takesNoValue(flag cli.Flag) bool {
	doc, ok := flag.(cli.DocGenerationFlag)
	return ok && !doc.TakesValue()
}

func unknownFlag(command *cli.Command, arg string) error {
	if _, err := os.Stat(arg); err == nil {
		return usagef("%s is no flag: write ./%[1]s for the file of that name", arg)
	}
	name, _, _ := strings.Cut(strings.TrimLeft(arg, "-"), "=")
	return usagef("unknown flag %s%s; `dieaway %s --help` lists all", arg, nearest(name, cli.SuggestFlag(command.Flags, name, false)), command.Name)
}

// alike is the least likeness (Jaro and Winkler) of a word and what it may be a slip of.
const alike = 0.78

// nearest returns the part of a message that says what an unknown word may have
// been meant for; "" where the library's candidate is not like it.
func nearest(word, candidate string) string {
	if smetrics.JaroWinkler(strings.ToLower(word), strings.TrimLeft(candidate, "-"), 0.7, 4) < alike {
		return ""
	}
	return "; the nearest is " + candidate
}

// onlyFlagsOf refuses flags that are for another action of the command, as their
// usage says: they would be ignored.
func onlyFlagsOf(c *cli.Context, action string) error {
	for _, f := range c.Command.Flags {
		of, _, only := strings.Cut(f.(cli.DocGenerationFlag).GetUsage(), ": ")
		actions := strings.Split(of, ", ")
		if name := f.Names()[0]; only && c.IsSet(name) && slices.Contains(choices[c.Command.Name], actions[0]) && !slices.Contains(actions, action) {
			return usagef("--%s is for `dieaway %s %s`", name, c.Command.Name, strings.Join(actions, "` or `dieaway "+c.Command.Name+" "))
		}
	}
	return nil
}

// unknownGlobal refuses a flag in the place of the command, but for the few
// that the program itself has.
func unknownGlobal(arg string) error {
	switch arg {
	case "-h", "--help", "-help", "--version", "-version", "--", "-":
		return nil
	}
	if strings.HasPrefix(arg, "-") {
		return usagef("the command comes first, then its flags: found %s in its place; `dieaway help` lists the commands", arg)
	}
	return nil
}
