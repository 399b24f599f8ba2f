package syntax

import (
	"strings"
	"unicode/utf8"
)

// unitShape returns the length of the unit at the start of s, 0 for none. Only
// the shape is judged:
//
//	unit    = [ "1/" ] product [ "/" ( factor | "(" product ")" ) ]
//	product = factor { ( "*" | "·" ) factor }
//	factor  = ( word | "%" | "°" [ word ] ) [ "^" [ "-" ] digits | superscripts ]
//
// A unit is one word without blanks: what goes on in the manner of a unit
// behind its end (`W/m^2*K`, `m/s/s`) is taken in, and advice then says how it
// should read.
func unitShape(s string) (n int, advice string) {
	numerator, rest := "", s
	if strings.HasPrefix(s, "1/") {
		numerator, rest = "1", s[1:]
		if below, ok := denominator(rest); ok {
			return rejoin(s, numerator, 1+below)
		}
		return 0, ""
	}
	n = product(s)
	if n == 0 {
		return 0, ""
	}
	numerator = s[:n]
	if below, ok := denominator(s[n:]); ok {
		return rejoin(s, numerator, n+below)
	}
	return n, ""
}

// denominator measures "/" with a factor or a bracketed product behind it.
func denominator(s string) (int, bool) {
	if !strings.HasPrefix(s, "/") {
		return 0, false
	}
	if strings.HasPrefix(s, "/(") {
		n := product(s[2:])
		if n > 0 && strings.HasPrefix(s[2+n:], ")") {
			return n + 3, true
		}
		return 0, false
	}
	n := factor(s[1:])
	return n + 1, n > 0
}

// rejoin takes in what follows a denominator in the manner of a unit.
func rejoin(s, numerator string, n int) (int, string) {
	start := n
	parts := []string{strings.Trim(s[len(numerator)+1:n], "()")}
	for n < len(s) {
		times := timesLength(s[n:])
		if s[n] == '/' {
			times = 1
		}
		m := 0
		if times > 0 {
			m = factor(s[n+times:])
		}
		if m == 0 {
			break
		}
		parts = append(parts, s[n+times:n+times+m])
		n += times + m
	}
	if n == start {
		return n, ""
	}
	return n, numerator + "/(" + strings.Join(parts, "*") + ")"
}

// product measures factors joined by "*" or "·".
func product(s string) int {
	n := factor(s)
	for n > 0 {
		times := timesLength(s[n:])
		if times == 0 {
			break
		}
		m := factor(s[n+times:])
		if m == 0 {
			break
		}
		n += times + m
	}
	return n
}

// timesLength is the length of the multiplication sign at the start of s.
func timesLength(s string) int {
	for _, sign := range []string{"*", "·", "⋅"} {
		if strings.HasPrefix(s, sign) {
			return len(sign)
		}
	}
	return 0
}

// factor measures one unit word with its power.
func factor(s string) int {
	n := 0
	switch {
	case strings.HasPrefix(s, "%"):
		n = 1
	case strings.HasPrefix(s, "°"):
		n = len("°") + wordLength(s[len("°"):])
	default:
		n = wordLength(s)
	}
	if n == 0 {
		return 0
	}
	return n + power(s[n:])
}

// power measures "^2", "^-1" or a run of superscripts. A broken power such as
// "^2.5" is taken in whole, so that it can be refused as a unit's power.
func power(s string) int {
	if strings.HasPrefix(s, "^") {
		n := 1
		if strings.HasPrefix(s[n:], "-") {
			n++
		}
		d := digits(s[n:])
		if d == 0 {
			return 0
		}
		n += d
		if strings.HasPrefix(s[n:], ".") {
			if d := digits(s[n+1:]); d > 0 {
				n += 1 + d
			}
		}
		return n
	}
	n := 0
	for n < len(s) {
		r, size := utf8.DecodeRuneInString(s[n:])
		if !strings.ContainsRune("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", r) {
			break
		}
		n += size
	}
	return n
}
