package unit

import (
	"fmt"
	"strings"
	"unicode/utf8"
)

// Unit is a unit word read: what one of it is in SI.
type Unit struct {
	Text    string
	Dim     Dim
	Angle   int8 // power of rad or deg in it
	Percent bool // "%" alone
	Scale   bool // degC or degF alone: a point of a temperature scale, with an offset
	// TimesT is set for a product that ends in tonnes, such as N*t, which may
	// have been meant as a product with the time t.
	TimesT   bool
	num, den float64
	offset   float64 // K
}

// SI is the SI value of v of the unit; degC and degF are points of their scale.
func (u Unit) SI(v float64) float64 {
	if u.Scale {
		return v*u.num/u.den + u.offset
	}
	return v * u.num / u.den
}

// Difference is the SI value of a difference of v of the unit: without the
// offset of a temperature scale.
func (u Unit) Difference(v float64) float64 { return v * u.num / u.den }

// From is the inverse of SI.
func (u Unit) From(si float64) float64 { return (si - u.offset) * u.den / u.num }

// Factor is the SI value of a difference of one unit.
func (u Unit) Factor() float64 { return u.num / u.den }

// Error says why a text is no unit. The faulty part is Text[Start:End]; Hint is
// the whole unit as it was probably meant, or "".
type Error struct {
	Text       string
	Start, End int
	What       string
	Hint       string
}

// Error is the reason in one line.
func (e *Error) Error() string { return e.What }

// None is the unit of a pure number.
func None() Unit { return Unit{num: 1, den: 1} }

// maxLength bounds a unit's text, maxExponent the power after ^.
const (
	maxLength   = 200
	maxExponent = maxPower
)

// Parse reads a unit word such as kN*m^2, N·s/m², W/(m^2*K), 1/K, % or degC.
// The error is always an *Error.
func Parse(text string) (Unit, error) {
	if len(text) > maxLength {
		return Unit{}, &Error{Text: text, End: len(text), What: "this is too long for a unit"}
	}
	p := &parser{text: text}
	u, err := p.unit()
	if err != nil {
		return Unit{}, err
	}
	u.Text = text
	return u, nil
}

// parser reads a unit from left to right.
type parser struct {
	text  string
	at    int
	parts int // units read
	last  string
	times bool // the last unit was joined by a product sign above the stroke
	under bool // behind the stroke
	fixes []fix
	bad   *Error
}

// fix is a replacement that makes a faulty unit right.
type fix struct {
	start, end int
	with       string
}

func (p *parser) fail(start, end int, format string, args ...any) *Error {
	return &Error{Text: p.text, Start: start, End: end, What: fmt.Sprintf(format, args...)}
}

func (p *parser) unit() (Unit, error) {
	out := None()
	if p.text == "" {
		return out, p.fail(0, 0, "a unit is missing here")
	}
	if strings.HasPrefix(p.text, "1/") {
		p.at = 1
	} else if err := p.product(&out, 1); err != nil {
		return out, err
	}
	if p.at < len(p.text) && p.text[p.at] == '/' {
		p.at++
		p.under = true
		if err := p.below(&out); err != nil {
			return out, err
		}
	}
	if p.at < len(p.text) {
		return out, p.rest()
	}
	if p.bad != nil {
		p.bad.Hint = p.mended()
		return out, p.bad
	}
	return p.finish(out)
}

// finish sets what only a unit of one part may have.
func (p *parser) finish(out Unit) (Unit, error) {
	if p.parts == 1 && !p.under && p.last == p.text {
		a, _ := find(p.text)
		out.Percent, out.Scale, out.offset = a.percent, a.scale, a.offset
	}
	out.TimesT = p.times && !p.under && p.last == "t"
	if !(out.num > 0 && out.den > 0 && out.num/out.den > 0 && out.num/out.den < 1e300) {
		return out, p.fail(0, len(p.text), "this unit is too large or too small to compute with")
	}
	return out, nil
}

// rest says what is wrong where the unit should have ended.
func (p *parser) rest() *Error {
	_, n := utf8.DecodeRuneInString(p.text[p.at:])
	if p.text[p.at] == '/' {
		e := p.fail(p.at, p.at+1, "a unit has at most one stroke; put what stands below it in brackets")
		if parts := strings.Split(p.text, "/"); !strings.ContainsAny(p.text, "()") && len(parts) <= 6 {
			hint := parts[0] + "/(" + strings.Join(parts[1:], "*") + ")"
			if _, err := Parse(hint); err == nil {
				e.Hint = hint
			}
		}
		return e
	}
	return p.fail(p.at, p.at+n, "%q does not belong in a unit", p.text[p.at:p.at+n])
}

// below reads one unit or a bracket behind the stroke.
func (p *parser) below(out *Unit) *Error {
	if p.at < len(p.text) && p.text[p.at] == '(' {
		open := p.at
		p.at++
		if err := p.product(out, -1); err != nil {
			return err
		}
		if p.at >= len(p.text) || p.text[p.at] != ')' {
			return p.fail(open, len(p.text), "a bracket is not closed in this unit")
		}
		p.at++
		return nil
	}
	if err := p.factor(out, -1); err != nil {
		return err
	}
	if w := p.sign(); w > 0 {
		e := p.fail(p.at, p.at+w, "behind the stroke stands one unit; put several in brackets")
		stroke := strings.IndexByte(p.text, '/')
		hint := p.text[:stroke+1] + "(" + p.text[stroke+1:] + ")"
		if _, err := Parse(hint); err == nil {
			e.Hint = hint
		}
		return e
	}
	return nil
}

// product reads units joined by * or a raised dot.
func (p *parser) product(out *Unit, sign int) *Error {
	for {
		if err := p.factor(out, sign); err != nil {
			return err
		}
		w := p.sign()
		if w == 0 {
			return nil
		}
		p.at += w
		p.times = true
	}
}

// sign is the width of a product sign at the current place, 0 if there is none.
func (p *parser) sign() int {
	for _, s := range []string{"*", "·", "⋅"} {
		if strings.HasPrefix(p.text[p.at:], s) {
			return len(s)
		}
	}
	return 0
}

// factor reads one unit with its power.
func (p *parser) factor(out *Unit, sign int) *Error {
	start := p.at
	for p.at < len(p.text) {
		r, n := utf8.DecodeRuneInString(p.text[p.at:])
		if strings.ContainsRune("*·⋅/^()", r) || power(r) != 0 {
			break
		}
		p.at += n
	}
	word := p.text[start:p.at]
	if word == "" {
		end := min(p.at+1, len(p.text))
		return p.fail(start, max(end, start), "a unit is missing here")
	}
	a, ok := find(word)
	if !ok {
		a = p.unknown(word, start)
	}
	end := p.at
	exponent, err := p.exponent()
	if err != nil {
		return err
	}
	p.parts++
	p.last = word
	if end != p.at {
		p.last = ""
	}
	return p.take(out, a, exponent*sign, start)
}

// take multiplies the unit by a raised atom.
func (p *parser) take(out *Unit, a atom, exponent, start int) *Error {
	d, ok := a.dim.Pow(exponent, 1)
	if ok {
		d, ok = out.Dim.Mul(d)
	}
	if !ok {
		return p.fail(start, p.at, "the powers of this unit are too high")
	}
	out.Dim = d
	num, den := a.num, a.den
	if exponent < 0 {
		num, den, exponent = den, num, -exponent
		if a.angle {
			out.Angle -= int8(exponent)
		}
	} else if a.angle {
		out.Angle += int8(exponent)
	}
	for range exponent {
		out.num *= num
		out.den *= den
	}
	return nil
}

// power is the value of a superscript digit plus one, -1 for the superscript
// minus, 0 for anything else.
func power(r rune) int {
	switch r {
	case '⁰':
		return 1
	case '¹':
		return 2
	case '²':
		return 3
	case '³':
		return 4
	case '⁻':
		return -1
	}
	if r >= '⁴' && r <= '⁹' {
		return int(r-'⁴') + 5
	}
	return 0
}

// exponent reads ^2, ^-1 or superscripts; 1 where none stands.
func (p *parser) exponent() (int, *Error) {
	start := p.at
	sign, value, digits := 1, 0, 0
	add := func(d int) {
		digits++
		if value <= maxExponent {
			value = 10*value + d
		}
	}
	if p.at < len(p.text) && p.text[p.at] == '^' {
		p.at++
		if p.at < len(p.text) && p.text[p.at] == '-' {
			sign = -1
			p.at++
		}
		for p.at < len(p.text) && p.text[p.at] >= '0' && p.text[p.at] <= '9' {
			add(int(p.text[p.at] - '0'))
			p.at++
		}
	} else {
		for p.at < len(p.text) {
			r, n := utf8.DecodeRuneInString(p.text[p.at:])
			d := power(r)
			if d == 0 || d < 0 && (digits > 0 || sign < 0) {
				break
			}
			p.at += n
			if d < 0 {
				sign = -1
				continue
			}
			add(d - 1)
		}
		if p.at == start {
			return 1, nil
		}
	}
	if digits == 0 || value == 0 || value > maxExponent {
		return 0, p.fail(start, max(p.at, start+1), "a unit is raised to a whole number from 1 to %d, or its negative", maxExponent)
	}
	return sign * value, nil
}
