package resolve

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
)

// scope says what an expression may read besides lets and constants.
type scope struct {
	what     string           // what the expression is, for messages: "a history"
	x        bool             // the place x may stand
	time     *formula.Program // the time operand, nil where no time may stand
	shift    formula.Program  // of the time operand against the time of the run
	breaks   *breakList
	measures *asked           // nil where no measure may stand
	locals   map[string]value // further names, which go before all others
	shared   *syntax.Unit     // of the list that the expression stands in
}

// plain is the scope of an ordinary value.
var plain = &scope{what: "a plain value"}

// Limits of one expression. The parser caps brackets; these cap long chains,
// whose compiled form is copied once for every operation.
const (
	maxDepth  = 600
	maxArgs   = 100
	maxInstrs = 20_000
	maxStack  = formula.MaxDepth - 16 // leaves room for what a property makes of an expression
)

// compile checks an expression for dimension and compiles it. A faulty one has
// been reported when it returns, and comes back bad.
func (r *resolver) compile(e syntax.Expr, sc *scope) value {
	if e == nil {
		return badValue
	}
	if r.depth >= maxDepth {
		if r.depth == maxDepth {
			r.errorAt(e.Place(), "too-long", "this expression is too long to compute with", "", "give parts of it names with let")
		}
		return badValue
	}
	r.depth++
	v := r.compileAny(e, sc)
	r.depth--
	if !v.bad && (v.prog.Depth() > maxStack || len(v.prog.Code) > maxInstrs) {
		r.errorAt(e.Place(), "too-long", "this expression is too long to compute with", "", "give parts of it names with let")
		return badValue
	}
	return v
}

func (r *resolver) compileAny(e syntax.Expr, sc *scope) value {
	switch e := e.(type) {
	case *syntax.Number:
		return r.number(e, sc.shared)
	case *syntax.Group:
		v := r.compile(e.X, sc)
		v.bare = false
		return v
	case *syntax.Unary:
		return r.unary(e, sc)
	case *syntax.Binary:
		return r.binary(e, sc)
	case *syntax.Name:
		return r.name(e, sc)
	case *syntax.Call:
		return r.call(e, sc)
	case *syntax.Compare:
		r.errorAt(e.Span, "misplaced", "a comparison stands only as the first part of if(A < B, THEN, ELSE)", "", "")
	case *syntax.Range:
		r.errorAt(e.Span, "misplaced", "a range stands only where a measure asks for modes", "", "")
	case *syntax.String:
		r.errorAt(e.Span, "misplaced", "a text cannot be computed with", "", "")
	case *syntax.Spot:
		r.errorAt(e.Span, "misplaced", "a place cannot be computed with", "", "")
	default:
		r.errorAt(e.Place(), "misplaced", "this cannot be computed with", "", "")
	}
	return badValue
}

func (r *resolver) unary(e *syntax.Unary, sc *scope) value {
	v := r.compile(e.X, sc)
	if v.bad || e.Op == "+" {
		return v
	}
	if v.point {
		// -5 degC is five below zero on the scale, not minus 278.15 K.
		if n, ok := syntax.Ungroup(e.X).(*syntax.Number); ok && n.Unit != nil {
			if u, err := unit.Parse(n.Unit.Text); err == nil {
				v.prog = formula.Const(u.SI(-n.Value))
				return v
			}
		}
		return r.scaleFault(e, "negated")
	}
	v.prog = formula.Apply(formula.OpNeg, v.prog)
	return v
}

func (r *resolver) scaleFault(at syntax.Node, how string) value {
	r.errorAt(at.Place(), "temperature-scale", "a temperature on the Celsius or Fahrenheit scale cannot be "+how, "", "write differences in K")
	return badValue
}

func (r *resolver) binary(e *syntax.Binary, sc *scope) value {
	a, b := r.compile(e.X, sc), r.compile(e.Y, sc)
	if a.bad || b.bad {
		return badValue
	}
	switch e.Op.Text {
	case "+", "-":
		return r.sum(e, a, b)
	case "*", "/":
		return r.product(e, a, b)
	case "^":
		return r.raise(e, a, b)
	}
	r.errorAt(e.Op.Span, "misplaced", "there is no operation "+e.Op.Text, "", "")
	return badValue
}

func (r *resolver) sum(e *syntax.Binary, a, b value) value {
	if !r.alike(e, e.X, e.Y, a, b, map[string]string{"+": "added", "-": "subtracted"}[e.Op.Text]) {
		return badValue
	}
	out := value{dim: a.dim, angle: a.angle, percent: a.percent && b.percent, point: a.point}
	if a.angle == 0 {
		out.angle = b.angle
	}
	op := formula.OpAdd
	switch {
	case e.Op.Text == "+" && a.point && b.point, e.Op.Text == "-" && b.point && !a.point:
		return r.scaleFault(e, "combined like this")
	case e.Op.Text == "-":
		op = formula.OpSub
		out.point = a.point && !b.point
	case b.point:
		out.point = true
	}
	out.prog = formula.Apply(op, a.prog, b.prog)
	return out
}

// alike refuses two values of different dimension.
func (r *resolver) alike(at, x, y syntax.Node, a, b value, how string) bool {
	if a.dim == b.dim {
		return true
	}
	r.errorAt(at.Place(), "unit-mismatch", fmt.Sprintf("%s and %s cannot be %s", describe(a), describe(b), how),
		fmt.Sprintf("%s is in %s, %s in %s", clip(x), a.dim.SI(), clip(y), b.dim.SI()), "")
	return false
}

// flat is the text of a node on one line.
func flat(n syntax.Node) string { return strings.Join(strings.Fields(n.Place().Text()), " ") }

// clip is the text of a node, short enough for a message.
func clip(n syntax.Node) string {
	s := flat(n)
	if r := []rune(s); len(r) > 40 {
		return string(r[:39]) + "…"
	}
	return s
}

func (r *resolver) product(e *syntax.Binary, a, b value) value {
	if a.point || b.point {
		return r.scaleFault(e, "multiplied or divided")
	}
	if e.Op.Text == "/" {
		d, ok := a.dim.Div(b.dim)
		if !ok {
			return r.powerFault(e)
		}
		if v, isConst := b.prog.IsConst(); isConst && v == 0 {
			r.errorAt(e.Y.Place(), "not-finite", "division by zero", "", "")
			return badValue
		}
		return value{prog: formula.Div(a.prog, b.prog), dim: d, angle: a.angle - b.angle, percent: a.percent && b.dim.IsNumber() && b.angle == 0 && !b.percent}
	}
	d, ok := a.dim.Mul(b.dim)
	if !ok {
		return r.powerFault(e)
	}
	// Twice 5 % is a share still.
	percent := d.IsNumber() && a.angle == 0 && b.angle == 0 && a.percent != b.percent
	return value{prog: formula.Mul(a.prog, b.prog), dim: d, angle: a.angle + b.angle, percent: percent}
}

func (r *resolver) powerFault(e syntax.Node) value {
	r.errorAt(e.Place(), "unit-mismatch", "the powers of this dimension are too high", "", "")
	return badValue
}

func (r *resolver) raise(e *syntax.Binary, a, b value) value {
	switch {
	case !b.dim.IsNumber():
		r.errorAt(e.Y.Place(), "wants-number", "an exponent is a pure number", "this is "+describe(b), "")
		return badValue
	case a.point:
		return r.scaleFault(e, "raised to a power")
	}
	out := value{prog: formula.Apply(formula.OpPow, a.prog, b.prog)}
	if a.dim.IsNumber() {
		return out
	}
	x, isConst := b.prog.IsConst()
	if !isConst {
		r.errorAt(e.Y.Place(), "unit-mismatch", "a quantity with a unit is raised to a number that is written out", "this exponent is computed from lets", "")
		return badValue
	}
	for den := 1; den <= 6; den++ {
		num := math.Round(x * float64(den))
		if math.Abs(num) > 100 || math.Abs(x*float64(den)-num) > 1e-12 {
			continue
		}
		if d, ok := a.dim.Pow(int(num), den); ok {
			out.dim = d
			return out
		}
	}
	r.errorAt(e.Place(), "unit-mismatch", fmt.Sprintf("%s to the power %s has no dimension in whole powers", describe(a), unit.Digits(x, 6)), "", "")
	return badValue
}

// name compiles a name that stands for a value.
func (r *resolver) name(e *syntax.Name, sc *scope) value {
	text, ok := e.Plain()
	if !ok {
		return r.dotted(e, sc)
	}
	if v, ok := sc.locals[text]; ok {
		return v
	}
	switch text {
	case "pi":
		return pure(math.Pi)
	case "g0":
		return value{prog: formula.Const(unit.StandardGravity), dim: unit.Acceleration.Dim}
	case "t":
		if sc.time != nil {
			return value{prog: *sc.time, dim: unit.Time.Dim}
		}
		r.errorAt(e.Span, "no-such-argument", "t is the time, which has a value only in a history", "this is "+sc.what, "")
		return badValue
	case "x":
		if sc.x {
			return value{prog: formula.Arg(formula.ArgX), dim: unit.Length.Dim}
		}
		r.errorAt(e.Span, "no-such-argument", "x is the place, which has a value only along a stretch", "this is "+sc.what, "")
		return badValue
	case "u", "v":
		r.errorAt(e.Span, "no-such-argument", text+" has a value only in a law", "this is "+sc.what, "")
		return badValue
	case "energy_left":
		if sc.measures != nil {
			return r.energyLeft(e, sc)
		}
	}
	if let, ok := r.lets[text]; ok {
		return r.readLet(let)
	}
	r.unknownName(e, text, sc)
	return badValue
}

func (r *resolver) unknownName(e *syntax.Name, text string, sc *scope) {
	if r.broken[text] {
		return
	}
	if s, ok := r.top[text]; ok {
		r.errorAt(e.Span, "not-a-value", fmt.Sprintf("%s is %s, not a value", text, article(s.kind)), "", "", related(s.span, "said here"))
		return
	}
	if kind, ok := r.parts[text]; ok {
		r.errorAt(e.Span, "not-a-value", fmt.Sprintf("%s is %s of a line, not a value", text, article(kind)), "", "")
		return
	}
	if isMeasure(text) || isFunction(text) || isHistory(text) {
		r.errorAt(e.Span, "not-a-value", text+" wants brackets", "", text+"(...)")
		return
	}
	r.errorAt(e.Span, "unknown-name", "nothing is called "+text, "", nearest(r, text, r.lets))
}

// dotted refuses a dotted name where a value should stand.
func (r *resolver) dotted(e *syntax.Name, sc *scope) value {
	for _, p := range e.Parts {
		if p.Index != nil {
			r.notYet(e.Span, "a name made from a row outside the block that goes through the rows", "inside it hanger[ROW.mark] makes hanger_H1 of a row with the mark H1; write that")
			return badValue
		}
	}
	first := e.Parts[0].Text
	if _, ok := r.watches[first]; ok {
		hint := ""
		if sc.measures != nil {
			hint = "peak(" + clip(e) + ")"
		}
		r.errorAt(e.Span, "not-a-value", clip(e)+" is a record over time, not one value", "", hint)
		return badValue
	}
	if !r.broken[first] {
		r.errorAt(e.Span, "unknown-name", "nothing is called "+clip(e), "", "")
	}
	return badValue
}

func article(kind string) string {
	if strings.ContainsRune("aeio", rune(kind[0])) {
		return "an " + kind
	}
	return "a " + kind
}
