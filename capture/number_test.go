package capture

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
)

// Every way to the float64 agrees with strconv bit for bit: mantissas of every
// length at every power of ten, and numbers half-way between two float64.
func TestNumberAgainstStrconv(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 125))
	check := func(s string) {
		t.Helper()
		want, _ := strconv.ParseFloat(s, 64)
		d, ok := parseDecimal([]byte(s), '.')
		if got := d.float(0, []byte(s), '.'); !ok || math.Float64bits(got) != math.Float64bits(want) {
			t.Fatalf("%s: %v, %v, strconv %v", s, got, ok, want)
		}
	}
	for digits := 1; digits <= 25; digits++ {
		for range 4000 {
			s := strconv.Itoa(1 + r.IntN(9))
			for range digits - 1 {
				s += strconv.Itoa(r.IntN(10))
			}
			if r.IntN(2) == 0 {
				s = "-" + s
			}
			check(fmt.Sprintf("%se%d", s, r.IntN(80)-50))
			cut := len(s) - r.IntN(digits)
			check(s[:cut] + "." + s[cut:])
		}
	}
	for range 20000 {
		// Half-way: 2^53 + odd, and its neighbours, over and under a power of ten.
		m := uint64(1)<<53 + r.Uint64N(1<<53)
		m = m<<1 | 1
		for _, n := range []uint64{m - 1, m, m + 1} {
			check(strconv.FormatUint(n, 10))
			check(strconv.FormatUint(n, 10) + "e-" + strconv.Itoa(r.IntN(30)))
			check(strconv.FormatUint(n, 10) + "e" + strconv.Itoa(r.IntN(30)))
		}
		v := math.Float64frombits(r.Uint64())
		if !math.IsNaN(v) && !math.IsInf(v, 0) {
			check(strconv.FormatFloat(v, 'g', -1, 64))
			check(strconv.FormatFloat(v, 'e', 18, 64))
		}
	}
}
