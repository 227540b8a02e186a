package report

import (
	"math"
	"strings"
	"unicode"
	"unicode/utf8"

	"dieaway/capture"
)

// nameLength is where a name from a file is cut in text for people.
const nameLength = 60

// unitLength is where a unit from a file is cut.
const unitLength = 12

// labelWidth is the width of the labels of a summary.
const labelWidth = 17

// Terminal colours.
const (
	red    = "\x1b[31m"
	green  = "\x1b[32m"
	yellow = "\x1b[33m"
	plain  = "\x1b[0m"
)

var severityColor = map[capture.Severity]string{capture.Fault: red, capture.Warning: yellow, capture.Note: ""}

func (s *summary) paint(text, color string) string {
	if !s.style.Color || color == "" {
		return text
	}
	return color + text + plain
}

// label pads the name of a line of the summary.
func label(name string) string {
	if len(name) > labelWidth-3 {
		name += " "
	}
	return "  " + pad(name, labelWidth-2)
}

func isLabel(head string) bool { return visible(head) == labelWidth && strings.HasPrefix(head, "  ") }

// clean makes a text from outside safe to show: control characters, which could
// drive a terminal, and marks that turn the direction of writing become U+FFFD.
// A text of more than most runes is cut; 0 cuts nothing.
func clean(s string, most int) string {
	s = strings.Map(func(c rune) rune {
		if unicode.IsControl(c) || unicode.Is(unicode.Bidi_Control, c) || c == '\u2028' || c == '\u2029' {
			return utf8.RuneError
		}
		return c
	}, strings.ToValidUTF8(s, string(utf8.RuneError)))
	if r := []rune(s); most > 0 && len(r) > most {
		return string(r[:most-1]) + "…"
	}
	return s
}

// wrap breaks text at spaces to lines of width columns. The first line begins at
// column first, the others are indented. A longer word keeps a line of its own.
func wrap(text string, first, indent, width int) string {
	var b strings.Builder
	column, empty := first, true
	for _, word := range strings.Fields(text) {
		n := utf8.RuneCountInString(word)
		switch {
		case empty:
		case column+1+n > width:
			b.WriteString("\n" + strings.Repeat(" ", indent))
			column = indent
		default:
			b.WriteByte(' ')
			column++
		}
		b.WriteString(word)
		column, empty = column+n, false
	}
	return b.String()
}

// visible returns the columns that s takes, colours left out.
func visible(s string) int {
	for _, c := range []string{red, green, yellow, plain} {
		s = strings.ReplaceAll(s, c, "")
	}
	return utf8.RuneCountInString(s)
}

// pad fills s with spaces to n columns; fmt would count bytes of a µ twice.
func pad(s string, n int) string {
	return s + strings.Repeat(" ", max(0, n-utf8.RuneCountInString(s)))
}

// upperFirst begins s with a capital letter.
func upperFirst(s string) string {
	c, n := utf8.DecodeRuneInString(s)
	return string(unicode.ToUpper(c)) + s[n:]
}

func trimRight(s string) string { return strings.TrimRight(s, " ") }

// span returns the smallest and the largest sample that is a number.
func span(x []float64) (lo, hi float64, ok bool) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for _, v := range x {
		if v < lo {
			lo = v
		}
		if v > hi {
			hi = v
		}
	}
	return lo, hi, lo <= hi
}

// subscripts writes the symbols of a text as a page can show them.
var subscripts = strings.NewReplacer("f_0", "f₀", "E_n", "Eₙ")

// onPage returns facts with their symbols as a page can show them.
func onPage(facts []fact) (out []fact) {
	for _, f := range facts {
		out = append(out, fact{f.Name, subscripts.Replace(f.Value)})
	}
	return out
}

// fileName is the name of a file for people, cut to most runes.
func fileName(name string, most int) string {
	if name == "-" {
		return "standard input"
	}
	return clean(name, most)
}

// Clean makes a text from outside safe to print on a terminal and cuts it to most
// runes; 0 cuts nothing.
func Clean(s string, most int) string { return clean(s, most) }
