package main

import (
	"embed"
	"strings"
	"text/template"

	"github.com/urfave/cli/v2"
)

//go:embed completion/*.tmpl
var completionFiles embed.FS

var shells = []string{"bash", "zsh", "fish"}

func completionCommand() *cli.Command {
	return &cli.Command{
		Name:      "completion",
		Usage:     "print the script that completes commands and flags in a shell",
		UsageText: "dieaway completion bash|zsh|fish",
		Description: "Examples:\n" +
			"   source <(dieaway completion bash)                        for this shell\n" +
			"   dieaway completion zsh > ~/.zfunc/_dieaway               with ~/.zfunc in fpath\n" +
			"   dieaway completion fish > ~/.config/fish/completions/dieaway.fish",
		Action:          completion,
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
}

// choices are the words that an argument or the value of a flag may be.
var choices = map[string][]string{
	"simulate": {"ringdown", "sweep"}, "archive": {"list", "verify", "rebuild"}, "completion": shells,
	"--model": models, "--time-unit": timeUnits, "--across": parts, "--frequency-unit": frequencyUnits,
}

// A completed is a command as the scripts need it.
type completed struct {
	Name, Usage string
	Words       []string // of its first argument
	Flags       []completedFlag
}

type completedFlag struct {
	Name, Short, Usage string
	Value              bool
	Words              []string // of its value
}

func completion(c *cli.Context) error {
	shell := c.Args().First()
	if c.Args().Len() != 1 || choiceOf(shells, shell) == "" {
		return usagef("expected `dieaway completion` with one of %s, found %s", strings.Join(shells, ", "), found(c))
	}
	t, err := template.New("").Funcs(template.FuncMap{"join": strings.Join, "quote": quoteWords}).ParseFS(completionFiles, "completion/"+shell+".tmpl")
	if err != nil {
		return err
	}
	return t.ExecuteTemplate(c.App.Writer, shell+".tmpl", completedCommands(c.App.Commands))
}

func choiceOf(all []string, word string) string {
	for _, w := range all {
		if w == word {
			return w
		}
	}
	return ""
}

// completedCommands lists commands and flags as the program has them.
func completedCommands(commands []*cli.Command) (out []completed) {
	for _, c := range commands {
		if c.Hidden {
			continue
		}
		k := completed{Name: c.Name, Usage: c.Usage, Words: choices[c.Name]}
		for _, f := range append([]cli.Flag{cli.HelpFlag}, c.Flags...) {
			k.Flags = append(k.Flags, completedFlagOf(f))
		}
		out = append(out, k)
	}
	for i := range out {
		if out[i].Name == "help" {
			for _, k := range out {
				out[i].Words = append(out[i].Words, k.Name)
			}
		}
	}
	return out
}

func completedFlagOf(f cli.Flag) completedFlag {
	out := completedFlag{Name: f.Names()[0], Words: choices["--"+f.Names()[0]]}
	if len(f.Names()) > 1 {
		out.Short = f.Names()[1]
	}
	if d, ok := f.(cli.DocGenerationFlag); ok {
		out.Usage, out.Value = strings.ReplaceAll(d.GetUsage(), "`", ""), d.TakesValue()
	}
	return out
}

// quoteWords writes a text in single quotes for a shell.
func quoteWords(s string) string {
	return "'" + strings.ReplaceAll(s, "'", `'\''`) + "'"
}
