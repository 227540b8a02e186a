package quantity

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// A term is one number as it was written. The powers of ten are kept apart until
// the end, so that "47n" is the same float64 as 47e-9.
type term struct {
	number string // sign, digits, point
	exp    int    // the exponent written
	paren  string // digits of the uncertainty in parentheses, "" without
	suffix string // prefix and unit as written
	power  int    // the power of ten that the suffix stands for
}

func (t term) value() float64 { return decimal(t.number, t.exp+t.power) }

// uncertainty returns what the parenthesis says, NaN without one. With a point
// it stands in full, without one it counts in the last digit of the number.
func (t term) uncertainty() float64 {
	if t.paren == "" {
		return math.NaN()
	}
	places := 0
	if _, decimals, _ := strings.Cut(t.number, "."); !strings.Contains(t.paren, ".") {
		places = len(decimals)
	}
	return decimal(t.paren, t.exp+t.power-places)
}

func decimal(digits string, exp int) float64 {
	x, _ := strconv.ParseFloat(digits+"e"+strconv.Itoa(exp), 64) // Inf when out of range, which the caller refuses
	return x
}

// scanTerm reads a number, with or without an uncertainty in parentheses, and
// what stands behind it. Its error continues a sentence: "found X<error>".
func scanTerm(s, unit string) (term, error) {
	s = strings.Replace(strings.TrimSpace(s), "−", "-", 1)
	if s == "" {
		return term{}, errors.New(", which is empty")
	}
	number, rest := cutNumber(s)
	if t, ok := scanCode(number, rest); ok {
		return t.finishCode(unit)
	}
	t := term{number: number}
	if strings.Trim(number, "+-.") == "" {
		return t, errors.New(", which does not begin with a number")
	}
	rest, err := t.scanParenthesis(rest)
	if err != nil {
		return t, err
	}
	if t.exp, rest, err = cutExponent(rest); err != nil {
		return t, err
	}
	if strings.HasPrefix(rest, ",") {
		return t, errors.New(": the decimal mark is a point here")
	}
	t.suffix = strings.TrimSpace(rest)
	t.power, err = powerOf(t.suffix, unit)
	return t, err
}

// scanParenthesis reads the uncertainty in parentheses, if there is one.
func (t *term) scanParenthesis(s string) (rest string, err error) {
	if !strings.HasPrefix(s, "(") {
		return s, nil
	}
	inside, rest, closed := strings.Cut(s[1:], ")")
	digits, more := cutNumber(inside)
	if !closed || more != "" || strings.Trim(digits, ".") == "" || strings.ContainsAny(digits, "+-") {
		return "", errors.New(", whose parenthesis holds no uncertainty")
	}
	t.paren = digits
	return rest, nil
}

// scanCode recognises a prefix or R in the place of the point (IEC 60062): the
// number goes on with a digit behind it.
func scanCode(number, rest string) (term, bool) {
	if strings.Contains(number, ".") {
		return term{}, false
	}
	for _, mark := range append([]prefix{{"R", 0}}, readable...) {
		after, found := strings.CutPrefix(rest, mark.symbol)
		digits, tail := cutDigits(after)
		if found && digits != "" && (mark.symbol == "R" || strings.Trim(number, "+-") != "") {
			return term{number: number + "." + digits, suffix: strings.TrimSpace(tail), power: mark.power}, true
		}
	}
	return term{}, false
}

// finishCode checks what stands behind such a number; R stands for ohms.
func (t term) finishCode(unit string) (term, error) {
	if t.power == 0 && unit != "ohm" {
		return t, errors.New(", which is in ohm")
	}
	power, err := powerOf(t.suffix, unit)
	if err == nil && power != 0 {
		err = fmt.Errorf(", which has two prefixes")
	}
	return t, err
}

// cutNumber splits off a sign, digits and a point.
func cutNumber(s string) (number, rest string) {
	i := 0
	if i < len(s) && (s[i] == '+' || s[i] == '-') {
		i++
	}
	for point := false; i < len(s); i++ {
		if s[i] == '.' && !point {
			point = true
		} else if s[i] < '0' || s[i] > '9' {
			break
		}
	}
	return s[:i], s[i:]
}

func cutDigits(s string) (digits, rest string) {
	rest = strings.TrimLeft(s, "0123456789")
	return s[:len(s)-len(rest)], rest
}

// cutExponent splits off "e-3"; an e without digits behind it is no exponent.
func cutExponent(s string) (exp int, rest string, err error) {
	if s == "" || s[0] != 'e' && s[0] != 'E' {
		return 0, s, nil
	}
	i := 1
	if i < len(s) && (s[i] == '+' || s[i] == '-') {
		i++
	}
	digits, rest := cutDigits(s[i:])
	if digits == "" {
		return 0, s, nil
	}
	exp, err = strconv.Atoi(s[1:i] + digits)
	if err != nil || exp < -999 || exp > 999 {
		return 0, "", errors.New(", which is out of range")
	}
	return exp, rest, nil
}
