package capture

import (
	"fmt"
	"strconv"
	"strings"
	"testing"
)

func TestChannelsOfDifferentLength(t *testing.T) {
	for _, sep := range []string{",", ";", "\t"} {
		for _, n := range []int{60, 3000, 30000} {
			for short := range 2 {
				for _, trimmed := range []bool{false, true} {
					t.Run(fmt.Sprintf("%q, %d rows, channel %d, trimmed %v", sep, n, short+1, trimmed), func(t *testing.T) {
						text := differentLengths(sep, n, short, trimmed)
						c, err := Read(strings.NewReader(text), "loop 07.csv", Options{})
						if err != nil {
							t.Fatal(err)
						}
						if len(c.Channels) != 2 || len(c.Findings) > 0 {
							t.Fatalf("%d channels, findings %v", len(c.Channels), c.Findings)
						}
						for k, ch := range c.Channels {
							n, a := n, ch.Axis
							if k == short {
								n /= 3
							}
							if a.N != n || len(ch.Samples) != n || a.Times != nil || a.Start != 0 || a.Interval != []float64{4e-6, 2e-6}[k] || ch.Unit != "V" {
								t.Fatalf("%s in %s: %d samples on %+v, want %d", ch.Name, ch.Unit, len(ch.Samples), a, n)
							}
							for i, v := range ch.Samples {
								if v != number(ring(k+1, i%1000)) {
									t.Fatalf("sample %d of %s is %v", i, ch.Name, v)
								}
							}
						}
					})
				}
			}
		}
	}
}

// differentLengths is a text of two channels with their own times, of which one
// ends at a third of the rows.
func differentLengths(sep string, n, short int, trimmed bool) string {
	header := strings.ReplaceAll("time A (us),A (V),,time B (us),B (V)\n", ",", sep)
	return header + lines(n, func(i int) string {
		pair := [2]string{at(i, 4, 1) + sep + ring(1, i%1000), at(i, 2, 1) + sep + ring(2, i%1000)}
		if i >= n/3 {
			pair[short] = sep
		}
		row := pair[0] + sep + sep + pair[1]
		if trimmed {
			row = strings.TrimRight(row, sep)
		}
		return row
	})
}

func TestChannelsOnTheirOwnAxes(t *testing.T) {
	text := "time A (us),A (V),time B (us),B (V)\n" + lines(rows, func(i int) string {
		return at(i, 4, 1) + "," + ring(1, i) + "," + strconv.FormatFloat(float64(i)*2-8, 'f', 1, 64) + "," + ring(2, i)
	})
	c, err := Read(strings.NewReader(text), "loop 07.csv", Options{})
	if err != nil {
		t.Fatal(err)
	}
	a, b := c.Channels[0].Axis, c.Channels[1].Axis
	if a.Start != 0 || a.Interval != 4e-6 || b.Start != -8e-6 || b.Interval != 2e-6 {
		t.Errorf("axes %+v and %+v", a, b)
	}
}
