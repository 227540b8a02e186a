package capture

import (
	"math"
	"strings"
	"unicode"
	"unicode/utf8"
)

// A unit is a base unit without prefix and the power of ten of its prefix.
type unit struct {
	base string // "s", "V", "A", "Hz", "Sa/s", "counts", …
	exp  int
	many float64 // how many of the base unit it is besides: 60 for a minute; 0 stands for 1
	// level is how a voltage was read, as a part of its peak: 2 of Vpp; 0: nothing says it.
	level float64
}

// times is the number of base units that the unit is.
func (u unit) times() float64 {
	if u.many > 0 {
		return u.many * math.Pow10(u.exp)
	}
	return math.Pow10(u.exp)
}

// longTimes are the units of time of more than a second. Beside a name for anything
// but time they mean something else: CH1 min, H.
var longTimes = map[string]unit{
	"min": minute, "mins": minute, "minute": minute, "minutes": minute,
	"h": hour, "hr": hour, "hrs": hour, "hour": hour, "hours": hour, "d": day, "day": day, "days": day,
}

var minute, hour, day = unit{base: "s", many: 60}, unit{base: "s", many: 3600}, unit{base: "s", many: secondsOfDay}

// parseTimeUnit reads a unit where one of time is meant.
func parseTimeUnit(text string) (unit, bool) {
	if u, ok := longTimes[strings.ToLower(strings.TrimSpace(strings.Trim(strings.TrimSpace(text), "()[]<>{}")))]; ok {
		return u, true
	}
	u, ok := parseUnit(text)
	return u, ok && u.base == "s"
}

// prefixes; µ is the only one that a change of encoding can spoil.
var prefixes = []struct {
	text string
	exp  int
}{
	{"p", -12}, {"n", -9}, {"u", -6}, {"µ", -6}, {"μ", -6}, {"Âµ", -6}, {"?", -6}, {"\ufffd", -6}, {"m", -3}, {"U", -6}, {"N", -9}, {"k", 3}, {"K", 3}, {"M", 6}, {"G", 9},
	{"pico", -12}, {"nano", -9}, {"micro", -6}, {"milli", -3}, {"kilo", 3}, {"mega", 6}, {"giga", 9},
	{"мк", -6}, {"м", -3}, {"н", -9}, {"к", 3}, {"М", 6}, {"毫", -3}, {"微", -6}, {"纳", -9},
}

// baseUnits gives the SI symbol of what files write.
var baseUnits = map[string]string{
	"s": "s", "sec": "s", "secs": "s", "second": "s", "seconds": "s",
	"v": "V", "volt": "V", "volts": "V", "vdc": "V", "vac": "V", "a": "A", "amp": "A", "amps": "A", "ampere": "A", "amperes": "A",
	"hz": "Hz", "hertz": "Hz", "sa/s": "Sa/s", "s/s": "Sa/s", "sps": "Sa/s", "samples/s": "Sa/s", "pts/s": "Sa/s",
	"samples/second": "Sa/s", "samples/sec": "Sa/s", "samples per second": "Sa/s", "sample/s": "Sa/s", "s/sec": "Sa/s", "sa/sec": "Sa/s",
	"points/s": "Sa/s", "points/second": "Sa/s", "1/s": "Sa/s", "w": "W", "watt": "W", "watts": "W",
	"rad": "rad", "radian": "rad", "radians": "rad", "deg": "deg", "degree": "deg", "degrees": "deg",
	"rad/s": "rad/s", "rad/sec": "rad/s", "radian/s": "rad/s", "radians/s": "rad/s", "radians per second": "rad/s",
	"siemens": "S", "с": "s", "в": "V", "а": "A", "гц": "Hz", "秒": "s", "伏": "V", "安": "A", "ohm": "ohm", "ohms": "ohm", "ω": "ohm",
}

// plainUnits take no prefix.
var plainUnits = map[string]string{
	"count": "counts", "counts": "counts", "code": "counts", "codes": "counts", "lsb": "counts", "adc": "counts",
	"raw": "counts", "digits": "counts", "adc counts": "counts", "adc codes": "counts", "div": "div", "%": "%",
	"°": "deg", "grad": "deg", "gon": "gon", "cycle": "cycles", "cycles": "cycles", "turn": "cycles", "turns": "cycles", "rev": "cycles",
	"db": "dB", "decibel": "dB", "decibels": "dB", "dbm": "dBm", "dbv": "dBV", "dbmv": "dBmV", "dbuv": "dBuV", "dbµv": "dBuV", "dbu": "dBu",
	"dbc": "dBc", "dbfs": "dBFS", "dbr": "dBr", "percent": "%", "usec": "", "c": "",
}

// parseUnit reads a unit as files write it: V, mV, (mV), [µs], Volt, uS, MSa/s.
func parseUnit(text string) (unit, bool) {
	text = strings.TrimSpace(strings.Trim(strings.TrimSpace(text), "()[]<>{}"))
	if text == "" || len(text) > 20 {
		return unit{}, false
	}
	lower := strings.ToLower(text)
	if base := plainUnits[lower]; base != "" {
		return unit{base: base}, true
	}
	if base := baseUnits[lower]; base != "" {
		return unit{base: base}, true
	}
	for _, p := range prefixes {
		rest, ok := strings.CutPrefix(text, p.text)
		if !ok && len(p.text) > 3 { // Milliseconds
			rest, ok = strings.CutPrefix(lower, p.text)
		}
		if !ok {
			continue
		}
		if base := baseUnits[strings.ToLower(rest)]; base != "" && (utf8.RuneCountInString(p.text) < 4 || len(rest) > 2) {
			// No clock counts in megaseconds, no probe in megavolts: milli in capitals.
			if p.text == "M" && (base == "s" || base == "V" || base == "A") && strings.ToUpper(text) == text {
				return unit{base: base, exp: -3}, true
			}
			return unit{base: base, exp: p.exp}, true
		}
	}
	if over, under, found := strings.Cut(text, "/"); found {
		return ratioUnit(over, under)
	}
	return levelUnit(text)
}

// ratioUnit is the unit of a voltage over a voltage or a current over a current: mV/V.
func ratioUnit(over, under string) (unit, bool) {
	a, ok := parseUnit(over)
	b, too := parseUnit(under)
	if !ok || !too || a.base != b.base || a.base != "V" && a.base != "A" {
		return unit{}, false
	}
	return unit{base: "1", exp: a.exp - b.exp}, true
}

// levels are words for how a voltage was read, as parts of the peak.
var levels = map[string]float64{"pp": 2, "p-p": 2, "vpp": 2, "pkpk": 2, "pk-pk": 2, "peaktopeak": 2, "p2p": 2, "rms": 1 / math.Sqrt2, "vrms": 1 / math.Sqrt2,
	"eff": 1 / math.Sqrt2, "peak": 1, "pk": 1, "vpk": 1, "vp": 1}

// levelUnit reads a unit of voltage or current that says how it was read: mVpp, V rms.
func levelUnit(text string) (unit, bool) {
	if strings.IndexByte("pksfPKSF", text[len(text)-1]) < 0 { // the last letters of the words
		return unit{}, false
	}
	for word, level := range levels {
		if n := len(text) - len(word); n > 0 && word[0] != 'v' && strings.EqualFold(text[n:], word) {
			if u, ok := parseUnit(strings.TrimRight(text[:n], " _-")); ok && (u.base == "V" || u.base == "A") && u.level == 0 {
				u.level = level
				return u, true
			}
		}
	}
	return unit{}, false
}

// parsePrefix reads a prefix without a unit, as circuit simulators print it: 4.7u.
func parsePrefix(text string) (unit, bool) {
	for _, p := range prefixes {
		if text == p.text && p.exp < 4 {
			return unit{exp: p.exp}, true
		}
	}
	return unit{}, false
}

// timeName reports a name that says time.
func timeName(name string) bool {
	w := fold(name)
	return exactTimeName(name) || strings.HasPrefix(w, "time") || strings.HasSuffix(w, "time")
}

// exactTimeName reports a name that says time and nothing else.
func exactTimeName(name string) bool {
	switch fold(name) {
	case "time", "times", "t", "x", "xaxis", "xvalue", "xvalues", "sec", "s", "zeit", "temps", "tiempo", "timebase", "timestamp", "clock", "second", "seconds", "elapsed", "время", "时间", "時間":
		return true
	}
	return false
}

// weakTimeName reports a name that says time only when the values rise too.
func weakTimeName(name string) bool {
	switch fold(name) {
	case "t", "x", "s", "xvalue", "xvalues":
		return true
	}
	return false
}

// fold keeps letters and digits, in lower case, so that "Sample Interval",
// "sample_interval:" and "SampleInterval" compare equal.
func fold(text string) string {
	return strings.Map(func(r rune) rune {
		if unicode.IsLetter(r) || unicode.IsDigit(r) {
			return unicode.ToLower(r)
		}
		return -1
	}, text)
}
