package main

import (
	"errors"
	"flag"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

const root = "../.." // of the repository

var update = flag.Bool("update", false, "write what the commands print into README.md")

// TestReadme runs every command of README.md, in the order it shows them, and
// compares what is printed with what README.md says is.
func TestReadme(t *testing.T) {
	shown := readText(t, "README.md")
	folder := exampleFolder(t)
	n := 0
	printed := refresh(shown, func(command string, silent bool) string {
		n++
		return runExample(t, folder, command, silent)
	})
	if n < 8 {
		t.Errorf("found %d commands in README.md, expected the worked use", n)
	}
	if *update {
		write(t, filepath.Join(root, "README.md"), printed)
	} else if diff := cmp.Diff(strings.Split(shown, "\n"), strings.Split(printed, "\n")); diff != "" {
		t.Errorf("README.md shows something else than is printed; go test ./cmd/dieaway -run Readme -update mends it (-shown +printed):\n%s", diff)
	}
}

// exampleFolder returns an empty folder with the repository's cmd in it.
func exampleFolder(t *testing.T) string {
	folder := t.TempDir()
	source, err := filepath.Abs(filepath.Join(root, "cmd"))
	if err != nil {
		t.Fatal(err)
	}
	if err := os.Symlink(source, filepath.Join(folder, "cmd")); err != nil {
		t.Fatal(err)
	}
	return folder
}

// refresh runs the commands of a Markdown text and returns it with their output:
// in blocks marked as console the lines that begin with "$ ", each followed by
// what it prints; in blocks marked as sh every line, silently.
func refresh(text string, run func(command string, silent bool) string) string {
	var out strings.Builder
	block := "" // what the block is marked as, "" outside of blocks
	for line := range strings.Lines(text) {
		mark, fence := strings.CutPrefix(line, "```")
		command, shown := strings.CutPrefix(line, "$ ")
		switch {
		case fence:
			block = strings.TrimSpace(mark)
			out.WriteString(line)
		case block == "sh":
			out.WriteString(line)
			command, _, _ = strings.Cut(line, " #")
			run(strings.TrimSpace(command), true)
		case block == "console" && shown:
			out.WriteString(line + run(strings.TrimSpace(command), false))
		case block == "console": // what it printed before
		default:
			out.WriteString(line)
		}
	}
	return out.String()
}

// runExample returns what a command prints. Commands of the console may fail:
// what they print shows it.
func runExample(t *testing.T, folder, command string, silent bool) string {
	if strings.HasPrefix(command, "go test") {
		return "" // this test is part of that command
	}
	// The program of this test instead of one that go run would build again.
	cmd := exec.Command("sh", "-c", strings.ReplaceAll(command, "go run ./cmd/dieaway", "dieaway"))
	cmd.Dir = folder
	if strings.HasPrefix(command, "go install") { // needs the module, and shall not change the machine
		cmd.Dir = root
		cmd.Env = append(cmd.Environ(), "GOBIN="+filepath.Join(folder, "bin"))
	}
	printed, err := cmd.CombinedOutput()
	var failed *exec.ExitError
	if err != nil && (silent || !errors.As(err, &failed)) {
		t.Errorf("%s: %v\n%s", command, err, printed)
	}
	return string(printed)
}

// TestReadmeExplainsFindings wants a row of README.md's table for every code that
// the packages give.
func TestReadmeExplainsFindings(t *testing.T) {
	readme := readText(t, "README.md")
	code := regexp.MustCompile(`(?m)^\t(\w+) +Code = "([a-z-]+)"`)
	codes := code.FindAllStringSubmatch(readText(t, "capture/finding.go"), -1)
	if len(codes) < 20 {
		t.Fatalf("found %d codes in capture/finding.go", len(codes))
	}
	sources := packageText(t, "capture") + packageText(t, "decay")
	for _, c := range codes {
		used := regexp.MustCompile(`\b` + c[1] + `,`).MatchString(sources) // as an argument or a field
		if used && !strings.Contains(readme, "\n| `"+c[2]+"` |") {
			t.Errorf("README.md does not explain the finding %s", c[2])
		}
	}
}

// packageText returns the sources of a package without its tests.
func packageText(t *testing.T, folder string) string {
	names, err := filepath.Glob(filepath.Join(root, folder, "*.go"))
	if err != nil {
		t.Fatal(err)
	}
	var text strings.Builder
	for _, name := range names {
		if !strings.HasSuffix(name, "_test.go") {
			text.WriteString(readText(t, filepath.Join(folder, filepath.Base(name))))
		}
	}
	return text.String()
}

func readText(t *testing.T, name string) string {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(root, name))
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}
