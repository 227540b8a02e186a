package main

import (
	"bytes"
	"os/exec"
	"strings"
	"testing"
)

// printed runs the program and returns its standard output.
func printed(t *testing.T, args ...string) string {
	t.Helper()
	var stdout, stderr bytes.Buffer
	if code := run(t.Context(), append([]string{"dieaway"}, args...), strings.NewReader(""), &stdout, &stderr); code != exitDone {
		t.Fatalf("%v: exit code %d, %s", args, code, &stderr)
	}
	return stdout.String()
}

// TestBashCompletes asks the shell itself.
func TestBashCompletes(t *testing.T) {
	bash, err := exec.LookPath("bash")
	if err != nil {
		t.Skip("no bash")
	}
	script := printed(t, "completion", "bash")
	for _, w := range []struct{ typed, want string }{
		{"dieaway cr", "crosscheck"}, {"dieaway fit --mo", "--model"}, {"dieaway fit --model two", "two-mode"},
		{"dieaway simulate s", "sweep"}, {"dieaway archive re", "rebuild"}, {"dieaway completion z", "zsh"}, {"dieaway help cr", "crosscheck"},
		{"dieaway plan --natural", "--natural-frequency"}, {"dieaway fit completion_tes", "completion_test.go"},
	} {
		words := strings.Fields(w.typed)
		ask := script + "\nCOMP_WORDS=(" + w.typed + ")\nCOMP_CWORD=$(( ${#COMP_WORDS[@]} - 1 ))\n_dieaway\necho \"${COMPREPLY[@]}\"\n"
		out, err := exec.Command(bash, "-c", ask).CombinedOutput()
		if err != nil || strings.TrimSpace(string(out)) != w.want {
			t.Errorf("%q completes %q to %q (%v), want %q", w.typed, words[len(words)-1], out, err, w.want)
		}
	}
}

// TestCompletionsParse lets each shell that is there read its script.
func TestCompletionsParse(t *testing.T) {
	for _, shell := range shells {
		path, err := exec.LookPath(shell)
		if err != nil {
			continue
		}
		cmd := exec.Command(path, "-n")
		cmd.Stdin = strings.NewReader(printed(t, "completion", shell))
		if out, err := cmd.CombinedOutput(); err != nil {
			t.Errorf("%s: %v\n%s", shell, err, out)
		}
	}
}

// TestEverythingIsCompleted: all commands and flags are in every script and in the
// manual page, and every command shows an example in its help.
func TestEverythingIsCompleted(t *testing.T) {
	app := newApp(strings.NewReader(""), &bytes.Buffer{}, &bytes.Buffer{})
	manual := strings.ReplaceAll(printed(t, "man"), `\-`, "-")
	scripts := map[string]string{}
	for _, shell := range shells {
		scripts[shell] = printed(t, "completion", shell)
	}
	for _, c := range app.Commands {
		if _, examples, ok := strings.Cut(c.Description, "Examples:\n"); !ok || !strings.Contains(examples, "dieaway "+c.Name) {
			t.Errorf("the help of %s shows no example", c.Name)
		}
		if !strings.Contains(manual, c.Name) || !strings.Contains(manual, c.Usage) {
			t.Errorf("%s is not in the manual page", c.Name)
		}
		for _, f := range c.Flags {
			name := f.Names()[0]
			if !strings.Contains(manual, "--"+name) {
				t.Errorf("--%s of %s is not in the manual page", name, c.Name)
			}
			for _, shell := range shells {
				want := "--" + name
				if shell == "fish" {
					want = "-l " + name
				}
				if !strings.Contains(scripts[shell], want) {
					t.Errorf("--%s of %s is not completed in %s", name, c.Name, shell)
				}
			}
		}
	}
}
