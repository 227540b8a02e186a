package main

import (
	"errors"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/urfave/cli/v2"
)

func TestFlagsFirst(t *testing.T) {
	tests := []struct {
		name     string
		in, want []string
	}{
		{"flag behind the file", []string{"fit", "a.csv", "--json"}, []string{"fit", "--json", "--", "a.csv"}},
		{"flags on both sides", []string{"fit", "--json", "a.csv", "-o", "p.html"}, []string{"fit", "--json", "-o", "p.html", "--", "a.csv"}},
		{"negative value", []string{"fit", "a.csv", "--from", "-2us"}, []string{"fit", "--from", "-2us", "--", "a.csv"}},
		{"joined value", []string{"fit", "a.csv", "--from=-2us"}, []string{"fit", "--from=-2us", "--", "a.csv"}},
		{"one dash", []string{"fit", "a.csv", "-from", "2us"}, []string{"fit", "-from", "2us", "--", "a.csv"}},
		{"standard input", []string{"fit", "-", "--json"}, []string{"fit", "--json", "--", "-"}},
		{"after two dashes", []string{"fit", "--json", "--", "-o", "--json"}, []string{"fit", "--json", "--", "-o", "--json"}},
		{"help behind a file, which is no topic", []string{"fit", "a.csv", "-h"}, []string{"fit", "--help"}},
		{"value that is a dash", []string{"fit", "-o", "-", "a.csv"}, []string{"fit", "-o", "-", "--", "a.csv"}},
		{"no command", []string{"a.csv", "b.csv"}, []string{"a.csv", "b.csv"}},
		{"version", []string{"--version"}, []string{"--version"}},
		{"nothing", nil, nil},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			got, err := flagsFirst(append([]string{"dieaway"}, test.in...), []*cli.Command{fitCommand()})
			if err != nil {
				t.Fatal(err)
			}
			if diff := cmp.Diff(append([]string{"dieaway"}, test.want...), got); diff != "" {
				t.Errorf("arguments (-want +got):\n%s", diff)
			}
		})
	}
}

func TestFlagsFirstRefuses(t *testing.T) {
	tests := []struct {
		in   []string
		want string
	}{
		{[]string{"fit", "a.csv", "--frm", "2us"}, "unknown flag --frm; the nearest is --from; `dieaway fit --help` lists all"},
		{[]string{"fit", "a.csv", "--from"}, "--from needs a value"},
		{[]string{"fit", "--from", "--json", "a.csv"}, "--from needs a value, and --json is a flag; write --from=--json if it is meant"},
		{[]string{"--json", "fit", "a.csv"}, "the command comes first, then its flags: found --json in its place; `dieaway help` lists the commands"},
	}
	for _, test := range tests {
		_, err := flagsFirst(append([]string{"dieaway"}, test.in...), []*cli.Command{fitCommand()})
		var exit *exitError
		if !errors.As(err, &exit) || exit.Code != exitUsage || exit.Error() != test.want {
			t.Errorf("flagsFirst(%q) = %v, want %q with exit code 2", test.in, err, test.want)
		}
	}
}
