package capture

import (
	"fmt"
	"math"
	"strings"
)

// Codes of a converter become volts or amperes where the preamble says what a code
// is worth, and only there: a line that says volts per count, or its like; an
// increment or multiplier of the vertical axis with a unit; or volts and counts per
// division. Of offsets only the code of zero is plain enough to be taken off.

// A codeScale is what a code is worth.
type codeScale struct {
	unit string  // "V" or "A", "" where nothing says it
	size float64 // of one code, in unit
	zero float64 // the code that stands for 0
	why  string  // the lines of the preamble in words
	told unit    // the unit that the file gives for the samples
}

// codeWords name one step of a converter.
var codeWords = map[string]bool{"count": true, "counts": true, "code": true, "codes": true, "lsb": true, "bit": true, "level": true, "digit": true, "step": true}

// per parts "volts per ADC count" or "mV/div" into the unit and "code" or "div".
func per(text string) (u unit, what string, ok bool) {
	left, right, found := strings.Cut(strings.ToLower(text), " per ")
	if found {
		left = text[:len(left)]
	} else if left, right, found = strings.Cut(text, "/"); !found {
		return u, "", false
	}
	over, under := strings.Fields(left), strings.Fields(strings.ToLower(right))
	if len(over) == 0 || len(under) == 0 {
		return u, "", false
	}
	switch last := strings.Trim(under[len(under)-1], ")]:"); {
	case codeWords[last]:
		what = "code"
	case last == "div" || last == "division":
		what = "div"
	default:
		return u, "", false
	}
	u, ok = parseUnit(over[len(over)-1])
	return u, what, ok
}

// perKey reads a key that gives what a code or a division is worth by its words or
// by its unit: volts per count, scale (mV/LSB), counts per division.
func perKey(key string) (entry, bool) {
	if key = strings.TrimSpace(key); key == "" || strings.IndexByte("0123456789+-.", key[0]) >= 0 {
		return entry{}, false
	}
	u, what, ok := per(key)
	if _, inside := lastBrackets(key); !ok && inside != "" {
		u, what, ok = per(inside)
	}
	volts := u.base == "V" || u.base == "A"
	switch {
	case !ok:
	case volts && what == "code":
		return entry{means: meansScale, unit: u}, true
	case volts && what == "div":
		return entry{means: meansDivision, unit: u}, true
	case u.base == "counts" && what == "div":
		return entry{means: meansDivisionCodes}, true
	}
	return entry{}, false
}

// codes returns what the preamble says of the worth of codes in a column, if it says
// anything; told is the unit that the file gives for the samples.
func (p *preamble) codes(col int, told unit) (codeScale, bool) {
	s := codeScale{told: told}
	size := p.worth(meansScale, col, s.told)
	s.why = fmt.Sprintf("line %d", size.line)
	if volts, n := p.worth(meansDivision, col, unit{}), p.number(meansDivisionCodes, col, "counts", unit{}); !size.ok && volts.ok && n.value > 0 {
		size = volts
		size.value /= n.value
		s.why = fmt.Sprintf("lines %d and %d", volts.line, n.line)
	}
	if !size.ok {
		_, _, named := p.text(meansScale, col)
		return s, named
	}
	s.unit, s.size = size.base, size.value
	s.why = fmt.Sprintf("codes of a converter, %.6g %s each (%s)", s.size, s.unit, s.why)
	if z := p.number(meansZeroCode, col, "counts", unit{}); z.ok && z.value == math.Trunc(z.value) {
		s.zero = z.value
		s.why += fmt.Sprintf(", counted from %.0f (line %d)", s.zero, z.line)
	} else {
		s.why += ", counted from 0, as the preamble gives no code of zero"
	}
	return s, true
}

// worth is the value of an entry in volts or amperes, not ok where it has another
// unit or none; told is the unit of a value without one.
func (p *preamble) worth(m meaning, col int, told unit) declared {
	for _, base := range []string{"V", "A"} {
		if d := p.number(m, col, base, told); d.ok && d.base == base && d.value > 0 {
			return d
		}
	}
	return declared{}
}

// scaleCodes makes volts or amperes of the samples of a column, where they are codes
// all through and the preamble gives their worth.
func (c *column) scaleCodes(ch *Channel) {
	codes := c.whole && (ch.Unit == "" || ch.Unit == "counts") && wholeNumbers(ch.Samples)
	s := c.codes
	switch {
	case !codes && s != nil: // the unit is that of the numbers as they are
		ch.Unit = s.told.base
		c.Unit = unitName(s.told)
		if scale := s.told.times(); scale != 1 {
			for i := range ch.Samples {
				ch.Samples[i] *= scale
			}
		}
	case !codes:
	case s == nil || s.unit == "":
		ch.Unit = "counts"
		c.Why += "; whole numbers, taken for codes of a converter, of which nothing says how many volts they are"
	default:
		ch.Unit = s.unit
		for i, v := range ch.Samples {
			ch.Samples[i] = (v - s.zero) * s.size
		}
		c.Why += "; " + s.why
	}
}
