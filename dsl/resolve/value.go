package resolve

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
)

// value is a compiled expression with what is known of it.
type value struct {
	prog    formula.Program
	dim     unit.Dim
	angle   int8 // power of an angle in it
	percent bool // written in %
	point   bool // a point of a temperature scale
	bare    bool // a number written without a unit
	bad     bool // said already
}

var badValue = value{bad: true}

func pure(v float64) value { return value{prog: formula.Const(v)} }

// unitRead is a unit text read once.
type unitRead struct {
	unit unit.Unit
	err  *unit.Error
}

// unit reads a unit; the number before it helps with the hint.
func (r *resolver) unit(u *syntax.Unit, number string) (unit.Unit, bool) {
	if u.Text == "1" {
		return unit.None(), true
	}
	read, ok := r.units[u.Text]
	if !ok {
		parsed, err := unit.Parse(u.Text)
		read.unit = parsed
		errors.As(err, &read.err)
		r.units[u.Text] = read
	}
	if read.err == nil {
		return read.unit, true
	}
	span := u.Span
	if len(span.Text()) == len(u.Text) {
		span.Start, span.End = u.Span.Start+read.err.Start, u.Span.Start+read.err.End
	}
	hint := r.fitting(read.err.Hint)
	if hint != "" && number != "" {
		hint = number + " " + hint
	}
	r.errorAt(span, "unknown-unit", read.err.What, "", hint)
	return unit.Unit{}, false
}

// pounds are the units that people mean when they mix up mass and weight.
var pounds = [...][2]string{{"lb", "lbf"}, {"lbf", "lb"}, {"kgf", "kg"}}

// fitting is a hint for a unit, with mass and weight exchanged where only that
// fits what is wanted.
func (r *resolver) fitting(hint string) string {
	u, err := unit.Parse(hint)
	if err != nil || r.wanted == nil || u.Dim == *r.wanted {
		return hint
	}
	for _, swap := range pounds {
		text := swapUnit(hint, swap[0], swap[1])
		if u, err := unit.Parse(text); err == nil && u.Dim == *r.wanted {
			return text
		}
	}
	return hint
}

// number compiles a number as written; shared is the unit of its list, or nil.
func (r *resolver) number(n *syntax.Number, shared *syntax.Unit) value {
	if math.IsInf(n.Value, 0) || math.IsNaN(n.Value) {
		r.errorAt(n.Span, "not-finite", "this number is too large to compute with", "", "")
		return badValue
	}
	u := n.Unit
	if u == nil {
		u = shared
	}
	if u == nil {
		v := pure(n.Value)
		v.bare = true
		return v
	}
	un, ok := r.unit(u, n.Text)
	if !ok {
		return badValue
	}
	if un.TimesT {
		r.warnAt(u.Span, "tonnes-or-time", fmt.Sprintf("%s is a product with tonnes", u.Text), "the time t is multiplied with blanks", fmt.Sprintf("%s %s * t", n.Text, strings.TrimRight(strings.TrimSuffix(u.Text, "t"), "*·⋅")))
	}
	return value{prog: formula.Const(un.SI(n.Value)), dim: un.Dim, angle: un.Angle, percent: un.Percent, point: un.Scale}
}

// want compiles an expression that must be of a kind; subject is what wants it.
func (r *resolver) want(e syntax.Expr, sc *scope, k unit.Kind, subject string) value {
	if isNumber(e) {
		r.wanted = &k.Dim
	}
	v := r.compile(e, sc)
	r.wanted = nil
	return r.check(v, e, k, subject)
}

// sameAsOther is the word of a kind that is whatever another value is.
const sameAsOther = "same"

// same is the kind of another value.
func same(d unit.Dim) unit.Kind {
	return unit.Kind{Word: sameAsOther, Name: d.Name(), Dim: d, SI: d.SI()}
}

// check holds a compiled value against a kind.
func (r *resolver) check(v value, e syntax.Expr, k unit.Kind, subject string) value {
	if v.bad {
		return v
	}
	code := "wants-" + k.Word
	if k.Word == sameAsOther {
		code = "unit-mismatch"
	}
	needsUnit := !k.Dim.IsNumber() || k == unit.Angle
	switch {
	case v.bare && needsUnit:
		r.errorAt(e.Place(), "missing-unit", subject+" wants "+k.Name, "this number has no unit", bareHint(e, k))
		return badValue
	case v.dim != k.Dim:
		r.errorAt(e.Place(), code, subject+" wants "+k.Name, "this is "+describe(v), r.meant(v, e, k))
		return badValue
	case k == unit.Frequency && v.angle != 0:
		hint := ""
		if x, ok := v.prog.IsConst(); ok {
			hint = unit.Format(x/(2*math.Pi), k.Dim, unit.SI, 4)
		}
		r.errorAt(e.Place(), code, subject+" wants a frequency in cycles", "this is an angle per time", hint)
		return badValue
	case k == unit.Time && v.angle != 0 || k == unit.Number && v.angle != 0 && isNumber(e):
		r.errorAt(e.Place(), code, subject+" wants "+k.Name, "this is "+describe(v), "")
		return badValue
	case v.percent && k == unit.Angle:
		r.errorAt(e.Place(), code, subject+" wants "+k.Name, "this is a share", "")
		return badValue
	}
	return v
}

// describe names what a value is.
func describe(v value) string {
	switch {
	case v.dim.IsNumber() && v.percent:
		return "a share"
	case v.dim.IsNumber() && v.angle != 0:
		return "an angle"
	case v.dim == unit.Frequency.Dim && v.angle != 0:
		return "an angle per time"
	}
	return v.dim.Name()
}

func isNumber(e syntax.Expr) bool {
	_, ok := literal(e)
	return ok
}

// literal is the number in an expression that is one, with its sign.
func literal(e syntax.Expr) (*syntax.Number, bool) {
	e = syntax.Ungroup(e)
	if u, ok := e.(*syntax.Unary); ok {
		e = syntax.Ungroup(u.X)
	}
	n, ok := e.(*syntax.Number)
	return n, ok
}

// bareHint is the number with the unit that was probably left out.
func bareHint(e syntax.Expr, k unit.Kind) string {
	suggest := k.SI
	switch k {
	case unit.Angle:
		suggest = "deg"
	case unit.Temperature:
		suggest = "degC"
	}
	return strings.TrimSpace(syntax.Ungroup(e).Place().Text()) + " " + suggest
}

// meant guesses what was meant by a quantity of the wrong dimension.
func (r *resolver) meant(v value, e syntax.Expr, k unit.Kind) string {
	n, ok := literal(e)
	if !ok || n.Unit == nil {
		return ""
	}
	for _, swap := range pounds {
		if text := swapUnit(n.Unit.Text, swap[0], swap[1]); text != n.Unit.Text {
			if u, err := unit.Parse(text); err == nil && u.Dim == k.Dim {
				return n.Text + " " + text
			}
		}
	}
	x, isConst := v.prog.IsConst()
	if !isConst {
		return ""
	}
	if d, ok := v.dim.Mul(unit.Acceleration.Dim); ok && d == k.Dim {
		return unit.Format(x*unit.StandardGravity, k.Dim, unit.SI, 3)
	}
	if d, ok := v.dim.Div(unit.Acceleration.Dim); ok && d == k.Dim {
		return unit.Format(x/unit.StandardGravity, k.Dim, unit.SI, 3)
	}
	return ""
}

// swapUnit replaces one whole word in a unit.
func swapUnit(text, from, to string) string {
	var b strings.Builder
	word := ""
	flush := func() {
		if word == from {
			word = to
		}
		b.WriteString(word)
		word = ""
	}
	for _, c := range text {
		if c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' {
			word += string(c)
			continue
		}
		flush()
		b.WriteRune(c)
	}
	flush()
	return b.String()
}

// bounds say what range a value must keep.
type bounds int

const (
	anything bounds = iota
	positive
	notNegative
)

// inRange checks the nominal value; a faulty one becomes bad.
func (r *resolver) inRange(v value, at syntax.Node, b bounds, subject string) value {
	if v.bad {
		return v
	}
	x := r.num(v.prog)
	switch {
	case math.IsNaN(x) || math.IsInf(x, 0):
		r.errorAt(at.Place(), "not-finite", subject+" has no finite value", "this comes to "+unit.Digits(x, 4), "")
	case b == positive && x <= 0:
		r.errorAt(at.Place(), "not-positive", subject+" must be greater than zero", r.shown(x, v.dim, at), "")
	case b == notNegative && x < 0:
		r.errorAt(at.Place(), "negative", subject+" must not be negative", r.shown(x, v.dim, at), "")
	default:
		return v
	}
	return badValue
}

// shown says what an expression comes to, where that is not plain to see.
func (r *resolver) shown(x float64, d unit.Dim, at syntax.Node) string {
	if e, ok := at.(syntax.Expr); ok && isNumber(e) {
		return ""
	}
	return "this comes to " + unit.Format(x, d, unit.SI, 4)
}

// quantity compiles a value of a kind in a range and records its path.
func (r *resolver) quantity(e syntax.Expr, k unit.Kind, b bounds, subject, path string) formula.Program {
	v := r.inRange(r.want(e, plain, k, subject), e, b, subject)
	if path != "" {
		r.path(path, e.Place())
	}
	if v.bad {
		return formula.Program{}
	}
	return v.prog
}

// related is a list of one further place.
func related(span diag.Span, message string) diag.Related {
	return diag.Related{Span: span, Message: message}
}
