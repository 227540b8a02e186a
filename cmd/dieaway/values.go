package main

import (
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
	"strings"

	"github.com/urfave/cli/v2"

	"dieaway/decay/circuit"
	"dieaway/decay/quantity"
)

// Values reads flags that are quantities or words; it keeps the first error.
type values struct {
	c   *cli.Context
	err error
}

// unexpected returns the error of a flag whose value is not what it may be.
func unexpected(name, found, expected string) error {
	return usagef("--%s: expected %s, found %q", name, expected, found)
}

// A domain is what a value may be.
type domain string

const (
	anything domain = ""
	atLeast0 domain = "a value that is not negative"
	above0   domain = "a value above zero"
)

// take reads the flag, when it is set, as a value in unit.
func (v *values) take(name, unit string, to *float64, within domain) {
	if v.err != nil || !v.c.IsSet(name) {
		return
	}
	x, err := v.quantity(name, v.c.String(name), unit)
	switch {
	case err != nil:
		v.err = err
	case within == above0 && !(x > 0), within == atLeast0 && !(x >= 0):
		v.err = unexpected(name, v.c.String(name), string(within))
	default:
		*to = x
	}
}

func (v *values) quantity(name, text, unit string) (float64, error) {
	q, err := quantity.Parse(text, unit)
	if err != nil {
		return 0, usagef("--%s: %w", name, err)
	}
	if !math.IsNaN(q.U) {
		return 0, unexpected(name, text, "a value without an uncertainty")
	}
	return q.Value, nil
}

// time returns the time of a flag in seconds, nil when it is not given.
func (v *values) time(name string) *float64 {
	x := math.NaN()
	v.take(name, "s", &x, anything)
	if math.IsNaN(x) {
		return nil
	}
	return &x
}

// word reads the flag, when it is set, as one of words.
func (v *values) word(name string, words []string, to *string) {
	switch text := v.c.String(name); {
	case v.err != nil || !v.c.IsSet(name):
	case !slices.Contains(words, text):
		v.err = unexpected(name, text, "one of "+strings.Join(words, ", "))
	default:
		*to = text
	}
}

// filled refuses flags that are set to nothing.
func (v *values) filled(names ...string) {
	for _, name := range names {
		if v.err == nil && v.c.IsSet(name) && v.c.String(name) == "" {
			v.err = usagef("--%s is empty", name)
		}
	}
}

// whole reads a whole number from lo to hi.
func (v *values) whole(name string, to *int, lo, hi int) {
	x := float64(*to)
	v.take(name, "", &x, anything)
	if v.err == nil && v.c.IsSet(name) && !(x >= float64(lo) && x <= float64(hi) && x == math.Trunc(x)) {
		v.err = unexpected(name, v.c.String(name), "a whole number from "+strconv.Itoa(lo)+" to "+strconv.Itoa(hi))
	}
	*to = int(x)
}

// pretrigger returns the time before the trigger, or NaN and the share of the record.
func (v *values) pretrigger(share *float64) float64 {
	const name = "pretrigger"
	before := math.NaN()
	if !strings.HasSuffix(strings.TrimSpace(v.c.String(name)), "%") {
		v.take(name, "s", &before, atLeast0)
		return before
	}
	v.take(name, "", share, atLeast0)
	switch {
	case v.err != nil:
	case *share >= 1:
		v.err = usagef("--pretrigger %s leaves nothing of the decay", v.c.String(name))
	case !v.c.IsSet("record"):
		v.err = usagef("--pretrigger %s is a share of the record: give --record too, or a time", v.c.String(name))
	}
	return before
}

func (v *values) secondMode() *circuit.SecondMode {
	const name = "second-mode"
	if v.err != nil || !v.c.IsSet(name) {
		return nil
	}
	m := &circuit.SecondMode{}
	words := strings.Split(v.c.String(name), ",")
	if len(words) != 3 {
		v.err = unexpected(name, v.c.String(name), "frequency, Q and strength such as 190k,33,0.3")
		return nil
	}
	for i, to := range []*float64{&m.Frequency, &m.Q, &m.Strength} {
		x, err := v.quantity(name, words[i], []string{"Hz", "", ""}[i])
		if err == nil && !(x > 0) {
			err = unexpected(name, v.c.String(name), "values above zero")
		}
		if err != nil {
			v.err = err
			return nil
		}
		*to = x
	}
	return m
}

func (v *values) random() *rand.Rand {
	seed := 1
	v.whole("seed", &seed, 0, 1<<53)
	return rand.New(rand.NewPCG(uint64(seed), 1))
}
