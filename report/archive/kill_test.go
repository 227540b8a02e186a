package archive

import (
	"bufio"
	"flag"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"strconv"
	"testing"
	"time"
)

var kills = flag.Int("kills", 20, "how many writers to end at a random instant")

// writerFolder is the variable that makes a process of this test a writer.
const writerFolder = "DIEAWAY_TEST_ARCHIVE"

func TestMain(m *testing.M) {
	flag.Parse()
	if dir := os.Getenv(writerFolder); dir != "" {
		writeUntilKilled(dir, os.Getenv(writerFolder+"_FIRST"))
	}
	os.Exit(m.Run())
}

// writeUntilKilled files one entry after the other and says so of each.
func writeUntilKilled(dir, first string) {
	n, err := strconv.Atoi(first)
	for i := n; err == nil; i++ {
		var folder string
		if folder, err = Add(dir, "loop", entryOf("loop", i)); err == nil {
			fmt.Println(folder)
		}
	}
	fmt.Fprintln(os.Stderr, err)
	os.Exit(1)
}

// TestKill ends writers (SIGKILL) at random instants. No entry that was reported is
// lost, none is half there, and the next entry brings the pages up to date. More of
// them: go test ./report/archive -run Kill -kills 200.
func TestKill(t *testing.T) {
	dir := t.TempDir()
	random := rand.New(rand.NewPCG(9, uint64(*kills)))
	var reported []string
	for k := range *kills {
		writer := exec.Command(os.Args[0])
		writer.Env = append(os.Environ(), writerFolder+"="+dir, fmt.Sprintf("%s_FIRST=%d", writerFolder, 1000*k))
		out, err := writer.StdoutPipe()
		if err != nil {
			t.Fatal(err)
		}
		if err := writer.Start(); err != nil {
			t.Fatal(err)
		}
		time.AfterFunc(time.Duration(20+random.IntN(100))*time.Millisecond, func() { writer.Process.Kill() })
		for lines := bufio.NewScanner(out); lines.Scan(); {
			reported = append(reported, lines.Text())
		}
		_ = writer.Wait() // killed
	}
	mustAdd(t, dir, "loop", 1000**kills) // clears away and brings up to date
	v, err := Verify(dir)
	if err != nil || len(v.Problems) > 0 {
		t.Fatalf("%+v, %v", v, err)
	}
	for _, folder := range reported {
		if _, err := os.Stat(folder); err != nil {
			t.Errorf("lost: %v", err)
		}
	}
	if v.Entries <= len(reported) || v.Entries > len(reported)+1+*kills {
		t.Errorf("%d entries, %d were reported before %d kills", v.Entries, len(reported), *kills)
	}
	mustShow(t, dir, map[string]int{"loop": v.Entries})
	t.Logf("%d entries survived %d kills", v.Entries, *kills)
}
