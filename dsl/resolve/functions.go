package resolve

import (
	"fmt"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
)

// pureFunctions take a pure number (an angle counts as one) and give one.
var pureFunctions = map[string]formula.Op{
	"sin": formula.OpSin, "cos": formula.OpCos, "tan": formula.OpTan, "exp": formula.OpExp, "log": formula.OpLog,
}

// functionNames are the functions that stand in any expression.
var functionNames = []string{"sqrt", "abs", "min", "max", "sin", "cos", "tan", "exp", "log", "if"}

func isFunction(name string) bool {
	for _, n := range functionNames {
		if n == name {
			return true
		}
	}
	return false
}

// call compiles a function, a history or a measure.
func (r *resolver) call(c *syntax.Call, sc *scope) value {
	name := c.Name.Text
	switch {
	case c.Name.Quoted:
		r.errorAt(c.Span, "misplaced", "something from a plugin cannot be computed with", "", "")
		return badValue
	case len(c.Args) > maxArgs:
		r.errorAt(c.Name.Span, "too-long", fmt.Sprintf("%s takes at most %d values", name, maxArgs), "", "")
		return badValue
	case isFunction(name):
		return r.function(c, sc)
	case isHistory(name):
		if sc.time == nil {
			r.errorAt(c.Name.Span, "misplaced", name+" is a history and stands behind `with`", "this is "+sc.what, "")
			return badValue
		}
		return r.historyCall(c, sc)
	case isMeasure(name):
		if sc.measures == nil {
			r.errorAt(c.Name.Span, "misplaced", name+" is a measure and stands in require, collect, best or meet", "this is "+sc.what, "")
			return badValue
		}
		return r.measure(c, sc)
	}
	if !r.broken[name] {
		names := append([]string{}, functionNames...)
		if sc.time != nil {
			names = append(names, historyNames...)
		}
		if sc.measures != nil {
			names = append(names, measureNames()...)
		}
		r.errorAt(c.Name.Span, "unknown-name", "no function is called "+name, "", diag.Nearest(name, names))
	}
	return badValue
}

// arguments compiles plain arguments; ok is false where the number of them or
// one of them is wrong.
func (r *resolver) arguments(c *syntax.Call, sc *scope, atLeast, atMost int) ([]value, bool) {
	if len(c.Args) < atLeast || len(c.Args) > atMost {
		wants := fmt.Sprint(atLeast)
		if atMost > atLeast {
			wants = fmt.Sprintf("%d or more", atLeast)
		}
		noun := "values"
		if wants == "1" {
			noun = "value"
		}
		r.errorAt(c.Span, "wrong-arguments", fmt.Sprintf("%s takes %s %s", c.Name.Text, wants, noun), fmt.Sprintf("here stand %d", len(c.Args)), "")
		return nil, false
	}
	ok := r.plainArgs(c)
	out := make([]value, 0, len(c.Args))
	inner := *sc
	inner.shared = nil
	for _, a := range c.Args {
		v := r.compile(a.Value, &inner)
		ok = ok && !v.bad
		out = append(out, v)
	}
	return out, ok
}

// plainArgs refuses names, marks and units at arguments that take none.
func (r *resolver) plainArgs(c *syntax.Call) bool {
	for _, a := range c.Args {
		if a.Key != nil || a.Mark != nil || a.Unit != nil {
			r.errorAt(a.Span, "wrong-arguments", c.Name.Text+" takes plain values", "", "")
			return false
		}
	}
	return true
}

func (r *resolver) function(c *syntax.Call, sc *scope) value {
	switch name := c.Name.Text; name {
	case "sqrt":
		return r.root(c, sc)
	case "abs":
		args, ok := r.arguments(c, sc, 1, 1)
		if !ok {
			return badValue
		}
		if args[0].point {
			return r.scaleFault(c, "taken by magnitude")
		}
		v := args[0]
		v.bare = false
		v.prog = formula.Apply(formula.OpAbs, v.prog)
		return v
	case "min", "max":
		return r.extreme(c, sc)
	case "if":
		return r.choice(c, sc)
	default:
		args, ok := r.arguments(c, sc, 1, 1)
		if !ok {
			return badValue
		}
		if !args[0].dim.IsNumber() {
			k := unit.Number
			if name == "sin" || name == "cos" || name == "tan" {
				k = unit.Angle
			}
			r.errorAt(c.Args[0].Span, "wants-"+k.Word, name+" wants "+k.Name, "this is "+describe(args[0]), "")
			return badValue
		}
		return value{prog: formula.Apply(pureFunctions[name], args[0].prog)}
	}
}

func (r *resolver) root(c *syntax.Call, sc *scope) value {
	args, ok := r.arguments(c, sc, 1, 1)
	if !ok {
		return badValue
	}
	if args[0].point {
		return r.scaleFault(c, "rooted")
	}
	d, ok := args[0].dim.Pow(1, 2)
	if !ok {
		r.errorAt(c.Args[0].Span, "unit-mismatch", "the root of "+describe(args[0])+" has no dimension in whole powers", "", "")
		return badValue
	}
	return value{prog: formula.Apply(formula.OpSqrt, args[0].prog), dim: d}
}

func (r *resolver) extreme(c *syntax.Call, sc *scope) value {
	args, ok := r.arguments(c, sc, 2, maxArgs)
	if !ok {
		return badValue
	}
	op := formula.OpMin
	if c.Name.Text == "max" {
		op = formula.OpMax
	}
	out := args[0]
	for i, a := range args[1:] {
		if !r.alike(c, c.Args[0].Value, c.Args[i+1].Value, args[0], a, "compared") {
			return badValue
		}
		if a.point != args[0].point {
			return r.scaleFault(c, "compared with a difference")
		}
		out.prog = formula.Apply(op, out.prog, a.prog)
		out.percent = out.percent && a.percent
	}
	out.bare = false
	return out
}

// choice compiles if(A < B, THEN, ELSE).
func (r *resolver) choice(c *syntax.Call, sc *scope) value {
	if len(c.Args) != 3 || !r.plainArgs(c) {
		r.errorAt(c.Span, "wrong-arguments", "if takes a comparison and two values", fmt.Sprintf("here stand %d", len(c.Args)), "if(A < B, THEN, ELSE)")
		return badValue
	}
	cmp, ok := syntax.Ungroup(c.Args[0].Value).(*syntax.Compare)
	if !ok {
		r.errorAt(c.Args[0].Span, "wrong-arguments", "if begins with a comparison", "", "if(A < B, THEN, ELSE)")
		return badValue
	}
	inner := *sc
	inner.shared = nil
	a, b := r.compile(cmp.X, &inner), r.compile(cmp.Y, &inner)
	yes, no := r.compile(c.Args[1].Value, &inner), r.compile(c.Args[2].Value, &inner)
	if a.bad || b.bad || yes.bad || no.bad {
		return badValue
	}
	if !r.alike(cmp, cmp.X, cmp.Y, a, b, "compared") || !r.alike(c, c.Args[1].Value, c.Args[2].Value, yes, no, "the two answers of one if") {
		return badValue
	}
	if yes.point != no.point || a.point != b.point {
		return r.scaleFault(c, "compared with a difference")
	}
	left, right, op := a.prog, b.prog, formula.OpLess
	switch cmp.Op.Text {
	case "<=":
		op = formula.OpLessEq
	case ">":
		left, right = right, left
	case ">=":
		left, right, op = right, left, formula.OpLessEq
	}
	r.breakAtComparison(sc, a.prog, b.prog)
	return value{
		prog: formula.Apply(formula.OpSelect, formula.Apply(op, left, right), yes.prog, no.prog),
		dim:  yes.dim, angle: yes.angle, point: yes.point, percent: yes.percent && no.percent,
	}
}
