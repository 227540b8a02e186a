package capture

import "strings"

// A unit beside a name.

// splitUnit parts a name as printed in a header into name and unit:
// "CH1 (mV)", "Time[us]", "U / V", "time_us", "t in ms", "in s", "(us) time".
func splitUnit(text string) (name string, u unit, ok bool) {
	text = strings.Trim(strings.TrimSpace(text), "'‘’“”„«»")
	for _, part := range []func(string) (string, string){lastBrackets, firstBrackets} {
		if name, inside := part(text); inside != "" {
			if u, ok = unitBeside(name, inside); ok {
				return name, u, true
			}
		}
	}
	if rest, found := strings.CutPrefix(text, "in "); found {
		if u, ok = unitBeside("time", rest); ok {
			return "", u, true
		}
	}
	for _, sep := range []string{" / ", " in ", "/", ", ", " - ", ": ", "_", ".", "-", " "} {
		i := strings.LastIndex(text, sep)
		if i <= 0 || strings.ContainsAny(text[i:], ")]}>") && !strings.ContainsAny(text[i:], "([{<") { // within brackets
			continue
		}
		name := strings.TrimSpace(text[:i])
		beside := unitBeside
		if !strings.Contains(" / in ", sep) || sep == " " { // CH1: 10 us is no name
			beside = plainUnitBeside
		}
		if u, ok = beside(name, text[i+len(sep):]); ok && (len(sep) > 1 || sep == "/" || believable(name, u)) {
			return name, u, true
		}
	}
	return text, unit{}, false
}

// believable reports a unit that is one though but a blank or a stroke parts it from
// the name: V_C and TimeV_S are names, time_us, CH1 mV and time s are name and unit.
func believable(name string, u unit) bool {
	last := name[strings.LastIndexByte(name, ' ')+1:]
	return (u.exp != 0 || u.base == "s" && exactTimeName(name)) && (last == "" || last[0]-'0' > 9)
}

// plainUnitBeside reads a unit that stands beside a name; beside one for time it may
// be longer than a second.
func plainUnitBeside(name, text string) (unit, bool) {
	u, ok := parseUnit(text)
	if !ok && (timeName(name) || meanings[fold(name)] == meansInterval) {
		return parseTimeUnit(text)
	}
	return u, ok
}

// unitBeside is plainUnitBeside for so many of a unit as well.
func unitBeside(name, text string) (unit, bool) {
	if u, ok := plainUnitBeside(name, text); ok {
		return u, true
	}
	u, factor, ok := scaledUnit(text)
	if timeName(name) {
		return u, ok && u.base == "s"
	}
	// CH1 (10 V) may tell the range: the factor must be one for sure.
	return u, ok && factor && u.many == 0 && (u.base == "V" || u.base == "A")
}

// scaledUnit reads so many of a unit: x10 mV, 10^-6 s, 1e-6 s, 100 ns. The number is
// a factor and nothing else where it is marked as one or has an exponent.
func scaledUnit(text string) (u unit, factor, ok bool) {
	text = strings.TrimSpace(text)
	bare := strings.TrimLeft(text, "x×* ")
	n, end := scanCell([]byte(bare), '.')
	if end <= 0 || n.mant == 0 || n.sign != 0 {
		return u, false, false
	}
	factor = len(bare) < len(text) || strings.ContainsAny(bare[:end], "eE")
	rest := bare[end:]
	if power, found := strings.CutPrefix(rest, "^"); found && bare[:end] == "10" {
		p, after := scanCell([]byte(power), '.')
		if after <= 0 || p.exp != 0 || p.mant > 30 {
			return u, false, false
		}
		n, factor, rest = decimal{mant: 1, exp: int(p.integer())}, true, power[after:]
	}
	if u, ok = parseUnit(rest); !ok {
		return u, false, false
	}
	for n.mant%10 == 0 {
		n.mant, n.exp = n.mant/10, n.exp+1
	}
	if u.exp += n.exp; n.mant != 1 {
		u.many = float64(n.mant)
	}
	return u, factor, true
}

// brackets are put around units.
var brackets = []string{"()", "[]", "<>", "{}"}

// lastBrackets parts a text that ends in brackets.
func lastBrackets(text string) (name, inside string) {
	for _, pair := range brackets {
		if open := strings.LastIndexByte(text, pair[0]); open >= 0 && strings.HasSuffix(text, pair[1:]) {
			return strings.TrimRight(text[:open], " _"), strings.TrimSpace(text[open+1 : len(text)-1])
		}
	}
	return text, ""
}

// firstBrackets parts a text that begins with brackets.
func firstBrackets(text string) (name, inside string) {
	for _, pair := range brackets {
		if end := strings.IndexByte(text, pair[1]); end > 0 && text[0] == pair[0] {
			return strings.TrimLeft(text[end+1:], " _"), strings.TrimSpace(text[1:end])
		}
	}
	return text, ""
}
