package capture

import (
	"crypto/sha256"
	"encoding/hex"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// shared are real measurements outside the project, read in place. What is
// wanted of them is read from them a second time, the simplest way: cut the
// line, convert with strconv, given by hand which column is what.
const shared = "../../shared/captures"

var sharedCaptures = []struct {
	file     string
	opt      Options
	skip     int    // lines before the samples
	sep      string // "": runs of blanks
	time     int    // column of the time, from 0; -1: date-time stamps
	values   []int  // columns of the channels
	scale    string // exponents of time and values
	interval float64
	uneven   bool
	channels string // name/unit of each
	findings string // codes
}{
	{file: "r01.csv", sep: ",", time: 3, values: []int{4}, interval: 200e-9, channels: "CH1/V"},
	{file: "r02.csv", sep: ",", time: 3, values: []int{4}, interval: 200e-9, channels: "CH2/V"},
	{file: "r03.csv", skip: 5, sep: ",", time: -1, values: []int{1, 2, 3}, interval: 2.5e-6, channels: "V_S/ V_C/ V_R/", findings: "coarse-time"},
	{file: "r04.txt", skip: 2, sep: "\t", values: []int{1, 3, 5}, interval: 2e-6, channels: "V_S/ V_C/ V_R/", findings: "coarse-time"},
	{file: "r05.txt", skip: 1, sep: "\t", values: []int{1, 3, 5}, interval: 2e-6, channels: "V_S/ V_C/ V_R/", findings: "coarse-time"},
	{file: "r06.txt", opt: Options{TimeUnit: "us"}, values: []int{2}, scale: "e-6 ", uneven: true, channels: "channel 1/", findings: "uneven-time ignored-columns"},
	{file: "r07.csv", skip: 10, sep: ",", time: 1, values: []int{2, 3}, scale: "e-6 e-3", interval: 10e-6, channels: "CH1/V CH2/V"},
	{file: "r08.csv", skip: 2, sep: ",", values: []int{1, 2}, interval: 1.48e-6, channels: "1/V 2/V"},
	{file: "r09.csv", skip: 2, sep: ",", values: []int{1, 2}, interval: 1e-9, channels: "1/V 2/V"},
}

func TestSharedCaptures(t *testing.T) {
	for _, w := range sharedCaptures {
		t.Run(w.file, func(t *testing.T) {
			name := filepath.Join(shared, w.file)
			b, err := os.ReadFile(name)
			if err != nil {
				t.Skip(err)
			}
			c, err := ReadFile(name, w.opt)
			if err != nil {
				t.Fatal(err)
			}
			if sum := sha256.Sum256(b); c.SHA256 != hex.EncodeToString(sum[:]) {
				t.Errorf("digest %s", c.SHA256)
			}
			var names, codes []string
			for _, ch := range c.Channels {
				names = append(names, ch.Name+"/"+ch.Unit)
			}
			for _, f := range c.Findings {
				codes = append(codes, string(f.Code))
			}
			if got := strings.Join(names, " "); got != w.channels {
				t.Fatalf("channels %s, want %s", got, w.channels)
			}
			if got := strings.Join(codes, " "); got != w.findings {
				t.Errorf("findings %v, want %s", c.Findings, w.findings)
			}
			timeScale, valueScale, _ := strings.Cut(w.scale, " ")
			lines := strings.Split(strings.TrimSpace(string(b)), "\n")[w.skip:]
			for k, ch := range c.Channels {
				a := ch.Axis
				if a != c.Channels[0].Axis || a.N != len(lines) || (a.Times != nil) != w.uneven || !w.uneven && a.Interval != w.interval {
					t.Fatalf("%s: %d samples every %v, uneven %v, want %d every %v", ch.Name, a.N, a.Interval, a.Times != nil, len(lines), w.interval)
				}
				for i, l := range lines {
					cells := strings.Fields(l)
					if w.sep != "" {
						cells = strings.Split(l, w.sep)
					}
					if v := number(strings.TrimSpace(cells[w.values[k]]) + valueScale); ch.Samples[i] != v {
						t.Fatalf("%s: sample %d is %v, want %v", ch.Name, i, ch.Samples[i], v)
					}
					if w.time < 0 {
						continue
					}
					if s := number(strings.TrimSpace(cells[w.time]) + timeScale); math.Abs(a.Time(i)-s) > 1e-9*a.Interval {
						t.Fatalf("%s: time of sample %d is %v, want %v", ch.Name, i, a.Time(i), s)
					}
				}
			}
		})
	}
}

// Without the flag the jittered counts are read in seconds, and that is said.
func TestSharedSecondsAssumed(t *testing.T) {
	c, err := ReadFile(filepath.Join(shared, "r06.txt"), Options{})
	if os.IsNotExist(err) {
		t.Skip(err)
	}
	if err != nil {
		t.Fatal(err)
	}
	if a := c.Channels[0].Axis; a.Start != 1.93 {
		t.Errorf("starts at %v s", a.Start)
	}
	for _, f := range c.Findings {
		if f.Code == CoarseTime && f.Severity == Note && strings.Contains(f.Message, "seconds are assumed") {
			return
		}
	}
	t.Errorf("no note about the unit of time in %v", c.Findings)
}
