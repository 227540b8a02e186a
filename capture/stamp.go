package capture

import (
	"bytes"
	"strconv"
	"strings"
	"time"
)

// A stamp is a date and clock time, or a clock time alone on day 0.
type stamp struct {
	second   int64   // whole seconds
	fraction float64 // of a second
	places   int32   // printed decimal places of the second
	period   int32   // seconds after which it comes again; 0: it has a date
}

// since returns the seconds from whole second zero to s.
func (s stamp) since(zero int64) float64 { return float64(s.second-zero) + s.fraction }

// parseStamp reads
//
//	[date ('T' | blanks)] [hours:]minutes:seconds[(. | , | :)fraction] [AM | PM] [zone]
//
// with a date of year-month-day, or of day/month/year, or of month/day/year
// unless dayFirst; the date's separator is one of "-/.", and the month may be a
// word. Without hours there must be a fraction, and behind a third colon it has
// three digits or six. A zone is Z, +hh:mm or its letters. In place of a date there may
// be a count of days, 0 days 12:00:00, and all of it may be without strokes.
func parseStamp(text []byte, dayFirst bool) (stamp, bool) {
	p := stampParser{b: text}
	before := p.accept('-') // days before
	first, ok := p.number()
	if !ok {
		if before {
			return stamp{}, false
		}
		return p.compact()
	}
	var day int64
	if p.i < len(text) && (text[p.i] == '-' || text[p.i] == '/' || text[p.i] == '.') {
		if day, ok = p.date(first, dayFirst); !ok || before {
			return stamp{}, false
		}
		if first, ok = p.number(); !ok {
			return stamp{}, false
		}
	} else if before || p.i < len(text) && text[p.i] == ' ' {
		if day = int64(first); before {
			day = -day
		}
		if first, ok = p.days(); !ok {
			return stamp{}, false
		}
	}
	s, ok := p.clock(first)
	if s.second += day * secondsOfDay; p.dated {
		s.period = 0
	}
	return s, ok && p.i == len(text)
}

const secondsOfDay = 86400

// days reads what stands between a count of days and a clock time, and the first
// number of this: 0 days 12:00:00.
func (p *stampParser) days() (int, bool) {
	rest, ok := bytes.CutPrefix(p.b[p.i:], []byte(" day"))
	if !ok {
		return 0, false
	}
	rest = bytes.TrimLeft(bytes.TrimPrefix(rest, []byte("s")), " ,+")
	p.i, p.dated = len(p.b)-len(rest), true
	return p.number()
}

// compact reads 20310304T115930.5Z, of which the T may be a blank or a stroke.
func (p *stampParser) compact() (s stamp, ok bool) {
	n := digitsAt(p.b, 0)
	if n != 8 || len(p.b) < 10 || strings.IndexByte("Tt _-", p.b[8]) < 0 {
		return s, false
	}
	date, _ := strconv.Atoi(string(p.b[:8]))
	p.i = 9 + digitsAt(p.b, 9)
	if p.i == 9 || p.i > 15 {
		return s, false
	}
	clock, _ := strconv.Atoi(string(p.b[9:p.i]))
	year, month, day := date/10000, date/100%100, date%100
	hour, minute, second := clock/10000, clock/100%100, clock%100
	if year < 1900 || month < 1 || month > 12 || day < 1 || day > 31 || hour > 24 || minute > 59 || second > 60 {
		return s, false
	}
	s.second = time.Date(year, time.Month(month), day, hour, minute, second, 0, time.UTC).Unix()
	if p.i < len(p.b) && (p.b[p.i] == '.' || p.b[p.i] == ',') {
		s.fraction, s.places = p.fractionOf()
	}
	return s, p.zone(&s) && p.i == len(p.b)
}

type stampParser struct {
	b     []byte
	i     int
	dated bool
}

// number reads one to four digits.
func (p *stampParser) number() (int, bool) {
	n, first := 0, p.i
	for p.i < len(p.b) && p.b[p.i]-'0' <= 9 && p.i-first < 5 {
		n = n*10 + int(p.b[p.i]-'0')
		p.i++
	}
	return n, p.i > first && p.i-first < 5
}

func (p *stampParser) accept(c byte) bool {
	if p.i < len(p.b) && p.b[p.i] == c {
		p.i++
		return true
	}
	return false
}

// date reads the rest of a date behind its first number, and the blanks or T
// after it; it returns the day counted from 1970.
func (p *stampParser) date(first int, dayFirst bool) (int64, bool) {
	sep := p.b[p.i]
	p.i++
	second, ok := p.number()
	word := false
	if !ok {
		second, word = p.month()
	}
	if !ok && !word || !p.accept(sep) {
		return 0, false
	}
	third, ok := p.number()
	if !ok {
		return 0, false
	}
	blanks := p.i
	for p.accept(' ') {
	}
	if p.i == blanks && !p.accept('T') && !p.accept('t') {
		return 0, false
	}
	year, month, day := third, first, second
	if first > 31 {
		year, month, day = first, second, third
	} else if dayFirst || word || first > 12 {
		month, day = second, first
	}
	if month > 12 {
		month, day = day, month
	}
	if month < 1 || month > 12 || day < 1 || day > 31 {
		return 0, false
	}
	if year < 100 {
		year += 2000
	}
	p.dated = true
	return time.Date(year, time.Month(month), day, 0, 0, 0, 0, time.UTC).Unix() / secondsOfDay, true
}

// month reads the name of a month, in English or German, by its first letters.
func (p *stampParser) month() (int, bool) {
	from := p.i
	for p.i < len(p.b) && (p.b[p.i]|0x20 >= 'a' && p.b[p.i]|0x20 <= 'z' || p.b[p.i] >= 0x80) {
		p.i++
	}
	if p.i-from < 3 {
		return 0, false
	}
	for n, names := range []string{"jan", "feb", "mar mär mrz", "apr", "may mai", "jun", "jul", "aug", "sep", "oct okt", "nov", "dec dez"} {
		for _, name := range strings.Fields(names) {
			if strings.HasPrefix(strings.ToLower(toUTF8(p.b[from:p.i])), name) {
				return n + 1, true
			}
		}
	}
	return 0, false
}

// clock reads the rest of a clock time behind its first number.
func (p *stampParser) clock(hours int) (s stamp, ok bool) {
	if !p.accept(':') {
		return s, false
	}
	minutes, ok := p.number()
	if !ok || minutes > 60 {
		return s, false
	}
	seconds := minutes
	s.period = secondsOfDay
	if p.accept(':') {
		if seconds, ok = p.number(); !ok || seconds > 60 {
			return s, false
		}
	} else {
		hours, minutes = 0, hours
		s.period = 3600
	}
	switch left := len(p.b) - p.i; {
	case left > 0 && (p.b[p.i] == '.' || p.b[p.i] == ','), (left == 4 || left == 7) && p.b[p.i] == ':':
		s.fraction, s.places = p.fractionOf()
	case s.period == 3600:
		return s, false
	}
	for p.accept(' ') {
	}
	if p.i+2 <= len(p.b) && p.b[p.i+1]|0x20 == 'm' {
		switch p.b[p.i] | 0x20 {
		case 'a':
			hours %= 12
		case 'p':
			hours = hours%12 + 12
		}
		p.i += 2
	}
	s.second = int64(hours*3600 + minutes*60 + seconds)
	return s, hours < 25 && p.zone(&s)
}

// fractionOf reads .056435 as a fraction and its number of places.
func (p *stampParser) fractionOf() (float64, int32) {
	p.i++
	first, m := p.i, uint64(0)
	for p.i < len(p.b) && p.b[p.i]-'0' <= 9 {
		if p.i-first < 18 {
			m = m*10 + uint64(p.b[p.i]-'0')
		}
		p.i++
	}
	places := min(p.i-first, 18)
	return decimal{mant: m}.float(-places, nil, '.'), int32(places)
}

// zone reads Z or +hh:mm and takes it off s.
func (p *stampParser) zone(s *stamp) bool {
	if p.i == len(p.b) {
		return true
	}
	if letters := len(p.b) - p.i; letters < 6 && len(bytes.Trim(p.b[p.i:], "ABCDEFGHIJKLMNOPQRSTUVWXYZz")) == 0 {
		p.i = len(p.b) // a zone that all stamps share changes nothing
		return true
	}
	sign := int64(1)
	if p.accept('-') {
		sign = -1
	} else if !p.accept('+') {
		return false
	}
	h, ok := p.number()
	if !ok {
		return false
	}
	m := 0
	if p.accept(':') {
		if m, ok = p.number(); !ok {
			return false
		}
	} else if h >= 100 {
		h, m = h/100, h%100
	}
	s.second -= sign * int64(h*3600+m*60)
	return true
}
