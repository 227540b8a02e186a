package main

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"
)

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"dieaway": main})
}

// TestScripts runs the scripts of testdata/script, one behaviour each.
func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir:                 "testdata/script",
		RequireExplicitExec: true,
		RequireUniqueNames:  true,
		Setup: func(env *testscript.Env) error {
			folder, err := filepath.Abs("demo")
			env.Setenv("DEMO", folder)
			return err
		},
		Cmds: map[string]func(*testscript.TestScript, bool, []string){
			"exits":  exits,
			"record": record,
			"swept":  swept,
			"link":   link,
		},
	})
}

// exits runs a program and checks its exit code: exits 3 dieaway fit ring.csv.
func exits(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: exits CODE COMMAND [ARGUMENTS]")
	}
	want, err := strconv.Atoi(args[0])
	ts.Check(err)
	err = ts.Exec(args[1], args[2:]...)
	got := 0
	var exit *exec.ExitError
	if errors.As(err, &exit) {
		got = exit.ExitCode()
	} else {
		ts.Check(err)
	}
	if got != want {
		ts.Fatalf("exit code %d, want %d", got, want)
	}
}

// link makes a hard link: link OLD NEW.
func link(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 2 {
		ts.Fatalf("usage: link OLD NEW")
	}
	ts.Check(os.Link(ts.MkAbs(args[0]), ts.MkAbs(args[1])))
}

// record writes a capture of one channel: record KIND FILE.
func record(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 2 {
		ts.Fatalf("usage: record KIND FILE")
	}
	value, ok := records[args[0]]
	if !ok {
		ts.Fatalf("no record of the kind %s", args[0])
	}
	random := rand.New(rand.NewPCG(1, 1))
	var text strings.Builder
	text.WriteString("time,loop\ns,V\n")
	for i := range 1500 {
		const interval = 2e-7 // s
		t := float64(i-100) * interval
		fmt.Fprintf(&text, "%.7e,%.5f\n", t, value(t)+0.003*random.NormFloat64())
	}
	ts.Check(os.WriteFile(ts.MkAbs(args[1]), []byte(text.String()), 0o666))
}

// records are voltages against time in s, of the demo's kind: the source of a
// loop antenna is switched off at zero, and it rings at 125 kHz. With a time
// constant of 50 us its Q is pi 125e3 50e-6 = 19.6.
var records = map[string]func(t float64) float64{
	"ring":  func(t float64) float64 { return ring(t, 50e-6) },
	"short": func(t float64) float64 { return ring(t, 1e-3) }, // a quarter of its time constant
	"noise": func(float64) float64 { return 0 },
	// The antenna with capacitors added across its own.
	"plain": antenna(0),
	"100p":  antenna(100e-12),
	"220p":  antenna(220e-12),
}

// antenna rings as 1.62 mH, 30 ohm and 1.0 nF do with a capacitor added.
func antenna(added float64) func(t float64) float64 {
	const l, r, c = 1.62e-3, 30, 1e-9
	tau := 2 * l / r
	f := math.Sqrt(1/(l*(c+added))-1/(tau*tau)) / (2 * math.Pi)
	return func(t float64) float64 { return ringAt(t, f, tau) }
}

func ring(t, tau float64) float64 { return ringAt(t, 125e3, tau) }

func ringAt(t, frequency, tau float64) float64 {
	if t < 0 {
		return 1
	}
	return math.Exp(-t/tau) * math.Cos(2*math.Pi*frequency*t)
}
