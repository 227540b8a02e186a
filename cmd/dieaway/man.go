package main

import (
	"regexp"
	"strings"
	"text/template"

	"github.com/urfave/cli/v2"
)

func manCommand() *cli.Command {
	return &cli.Command{
		Name:            "man",
		Usage:           "print the manual page",
		UsageText:       "dieaway man",
		Description:     "Examples:\n   dieaway man | man -l -\n   dieaway man > /usr/local/share/man/man1/dieaway.1",
		Action:          man,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

func man(c *cli.Context) error {
	if c.Args().Present() {
		return usagef("man takes no argument, found %s", c.Args().First())
	}
	t, err := template.New("").Funcs(template.FuncMap{"roff": roff}).ParseFS(completionFiles, "completion/man.tmpl")
	if err != nil {
		return err
	}
	return t.ExecuteTemplate(c.App.Writer, "man.tmpl", manualOf(c.App))
}

// A manual is what the manual page is filled from.
type manual struct {
	Usage, Description string
	Commands           []manualCommand
	ExitCodes          []manualCode
}

type manualCommand struct {
	Name, Usage, UsageText, Description, Examples string
	Flags                                         []manualFlag
}

type manualFlag struct{ Heading, Usage string }

type manualCode struct {
	Code  int
	Means string
}

// manualOf lists commands and flags as the program has them.
func manualOf(app *cli.App) manual {
	m := manual{Usage: app.Usage}
	m.Description, _, _ = strings.Cut(app.Description, " `dieaway man`")
	for _, c := range app.Commands {
		k := manualCommand{Name: c.Name, Usage: c.Usage, UsageText: c.UsageText}
		var text string
		text, k.Examples, _ = strings.Cut(c.Description, "Examples:\n")
		k.Description = strings.TrimSpace(text)
		for _, f := range c.Flags {
			if f != cli.HelpFlag {
				k.Flags = append(k.Flags, manualFlagOf(f))
			}
		}
		m.Commands = append(m.Commands, k)
	}
	for code, means := range exitCodes {
		m.ExitCodes = append(m.ExitCodes, manualCode{code, means})
	}
	return m
}

// placeholder is the word that stands for the value in the usage of a flag.
var placeholder = regexp.MustCompile("`([^`]*)`")

func manualFlagOf(f cli.Flag) manualFlag {
	out := manualFlag{}
	for i, name := range f.Names() {
		out.Heading += map[bool]string{true: ", -", false: "--"}[i > 0] + name
	}
	if d, ok := f.(cli.DocGenerationFlag); ok {
		out.Usage = strings.ReplaceAll(d.GetUsage(), "`", "")
		if word := placeholder.FindStringSubmatch(d.GetUsage()); word != nil {
			out.Heading += " " + word[1]
		}
		if d.TakesValue() && d.GetDefaultText() != "" {
			out.Usage += " (default: " + d.GetDefaultText() + ")"
		}
	}
	return out
}

// roff writes a text so that the formatter takes nothing in it for a request.
func roff(s string) string {
	s = strings.NewReplacer(`\`, `\e`, "-", `\-`).Replace(s)
	lines := strings.Split(s, "\n")
	for i, line := range lines {
		if strings.HasPrefix(line, ".") || strings.HasPrefix(line, "'") {
			lines[i] = `\&` + line
		}
	}
	return strings.Join(lines, "\n")
}
