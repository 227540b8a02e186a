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
// expected of them stands in the README beside them or is plain to see in the
// first and last lines of the files.
const shared = "../../shared/captures"

var sharedCaptures = []struct {
	file            string
	opt             Options
	n               int
	start, interval float64
	uneven          bool
	channels        string // name/unit of each
	last            []float64
	findings        string // codes
}{
	{file: "r01.csv", n: 2500, start: -28e-6, interval: 200e-9, channels: "CH1/V", last: []float64{10.6}, findings: "ignored-columns"},
	{file: "r02.csv", n: 2500, start: -28e-6, interval: 200e-9, channels: "CH2/V", last: []float64{0}, findings: "ignored-columns"},
	{file: "r03.csv", n: 800, interval: 2.5e-6, channels: "V_S/ V_C/ V_R/", last: []float64{5.565042e-4, -1.831104e-5, 7.377737e-5}, findings: "coarse-time"},
	{file: "r04.txt", n: 493, start: 14e-6, interval: 2e-6, channels: "V_S/ V_C/ V_R/", last: []float64{0.000349874, -0.00158268, 0.0232185}, findings: "coarse-time"},
	{file: "r05.txt", n: 500, interval: 2e-6, channels: "V_S/ V_C/ V_R/", last: []float64{2.78e-5, -0.00158268, -0.000616404}, findings: "coarse-time"},
	{file: "r06.txt", opt: Options{TimeUnit: "us"}, n: 1024, start: 1.93e-6, interval: (27040.62e-6 - 1.93e-6) / 1023, uneven: true,
		channels: "channel 1/", last: []float64{665}, findings: "uneven-time ignored-columns"},
	{file: "r07.csv", n: 760, interval: 10e-6, channels: "CH1/V CH2/V", last: []float64{-3.04, 0.08}, findings: "ignored-columns"},
	{file: "r08.csv", n: 100, start: -14.948e-6, interval: 1.48e-6, channels: "1/V 2/V", last: []float64{-493.593760e-3, -249.453131e-3}},
	{file: "r09.csv", n: 2000, start: -1e-6, interval: 1e-9, channels: "1/V 2/V", last: []float64{-201.00502e-6, -201.00502e-6}},
}

func TestSharedCaptures(t *testing.T) {
	for _, want := range sharedCaptures {
		t.Run(want.file, func(t *testing.T) {
			name := filepath.Join(shared, want.file)
			b, err := os.ReadFile(name)
			if err != nil {
				t.Skip(err)
			}
			c, err := ReadFile(name, want.opt)
			if err != nil {
				t.Fatal(err)
			}
			if sum := sha256.Sum256(b); c.SHA256 != hex.EncodeToString(sum[:]) {
				t.Errorf("digest %s", c.SHA256)
			}
			var names, codes []string
			for i, ch := range c.Channels {
				names = append(names, ch.Name+"/"+ch.Unit)
				a := ch.Axis
				if a.N != want.n || len(ch.Samples) != want.n {
					t.Errorf("%s: %d samples, axis of %d, want %d", ch.Name, len(ch.Samples), a.N, want.n)
				}
				if a.Start != want.start || math.Abs(a.Interval-want.interval) > 1e-15*want.interval || (a.Times != nil) != want.uneven {
					t.Errorf("%s: axis %v %v uneven %v, want %v %v %v", ch.Name, a.Start, a.Interval, a.Times != nil, want.start, want.interval, want.uneven)
				}
				if got := ch.Samples[len(ch.Samples)-1]; got != want.last[i] {
					t.Errorf("%s: last sample %v, want %v", ch.Name, got, want.last[i])
				}
				if a != c.Channels[0].Axis {
					t.Errorf("%s does not share the time axis", ch.Name)
				}
			}
			if got := strings.Join(names, " "); got != want.channels {
				t.Errorf("channels %s, want %s", got, want.channels)
			}
			for _, f := range c.Findings {
				codes = append(codes, string(f.Code))
			}
			if got := strings.Join(codes, " "); got != want.findings {
				t.Errorf("findings %v, want %s", c.Findings, want.findings)
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
