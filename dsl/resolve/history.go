package resolve

import (
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// historyNames are the functions that stand only in a history.
var historyNames = []string{"half_sine", "sine", "sweep_sine", "step", "ramp", "table", "delay"}

func isHistory(name string) bool {
	for _, n := range historyNames {
		if n == name {
			return true
		}
	}
	return false
}

// breakList collects the times at which a history or a derivative may jump.
type breakList struct {
	at []formula.Program
}

// addBreak notes a break at a time of the history's own clock.
func (sc *scope) addBreak(local formula.Program) {
	if sc.breaks != nil && len(sc.breaks.at) < maxBreaks {
		sc.breaks.at = append(sc.breaks.at, formula.Add(local, sc.shift))
	}
}

// maxBreaks bounds the list; a record with more rows is smooth between any two
// that a solver could hit, and keeps only its ends.
const maxBreaks = 20_000

// maxTableBreaks is the most rows of one table that count as breaks each.
const maxTableBreaks = 5_000

// history compiles the expression behind `with`.
func (r *resolver) history(e syntax.Expr, alongX bool) (scenario.HistoryOf[formula.Program], value) {
	t := formula.Arg(formula.ArgT)
	sc := &scope{what: "a history", x: alongX, time: &t, shift: formula.Const(0), breaks: &breakList{}}
	sc.addBreak(formula.Const(0))
	v := r.compile(e, sc)
	if v.bad {
		return scenario.HistoryOf[formula.Program]{}, v
	}
	return scenario.HistoryOf[formula.Program]{Value: v.prog, Breaks: distinct(sc.breaks.at)}, v
}

// distinct drops breaks that are the same constant.
func distinct(list []formula.Program) []formula.Program {
	seen := map[float64]bool{}
	out := list[:0]
	for _, p := range list {
		if x, ok := p.IsConst(); ok {
			if seen[x] {
				continue
			}
			seen[x] = true
		}
		out = append(out, p)
	}
	return out
}

// historyCall compiles one of the named histories.
func (r *resolver) historyCall(c *syntax.Call, sc *scope) value {
	switch c.Name.Text {
	case "table":
		return r.tableHistory(c, sc)
	case "delay":
		return r.delay(c, sc)
	}
	shape := historyShapes[c.Name.Text]
	// The values of a named history are numbers, not histories themselves.
	inner := &scope{what: "a value of " + c.Name.Text}
	args, ok := r.arguments(c, inner, shape.least, len(shape.kinds))
	if !ok {
		return badValue
	}
	operands := []formula.Program{*sc.time}
	for i, a := range args {
		e := c.Args[i].Value
		if i > 0 {
			a = r.check(a, e, shape.kinds[i], "the "+shape.words[i]+" of "+c.Name.Text)
		}
		a = r.inRange(a, e, shape.bounds[i], "the "+shape.words[i]+" of "+c.Name.Text)
		if a.bad {
			return badValue
		}
		operands = append(operands, a.prog)
	}
	for len(operands) <= len(shape.kinds) {
		operands = append(operands, formula.Const(0))
	}
	if c.Name.Text == "ramp" && r.num(operands[3]) <= r.num(operands[2]) {
		r.errorAt(c.Args[2].Span, "empty-range", "a ramp ends after it begins", "", "")
		return badValue
	}
	for _, i := range shape.breaks {
		sc.addBreak(operands[i])
	}
	return value{prog: formula.Apply(shape.op, operands...), dim: args[0].dim, angle: args[0].angle}
}

// historyShape says what a named history takes: operands after the time, the
// first of which may be of any dimension.
type historyShape struct {
	op     formula.Op
	least  int
	words  []string
	kinds  []unit.Kind
	bounds []bounds
	breaks []int // operands (the time is operand 0) at which it breaks
}

var historyShapes = map[string]historyShape{
	"half_sine": {formula.OpHalfSine, 2, []string{"peak", "duration"}, []unit.Kind{{}, unit.Time}, []bounds{anything, positive}, []int{2}},
	"sine": {formula.OpSine, 2, []string{"amplitude", "frequency", "phase"}, []unit.Kind{{}, unit.Frequency, unit.Angle},
		[]bounds{anything, positive, anything}, nil},
	"sweep_sine": {formula.OpSweepSine, 4, []string{"amplitude", "first frequency", "last frequency", "duration"},
		[]unit.Kind{{}, unit.Frequency, unit.Frequency, unit.Time}, []bounds{anything, notNegative, notNegative, positive}, []int{4}},
	"step": {formula.OpStep, 2, []string{"value", "time"}, []unit.Kind{{}, unit.Time}, []bounds{anything, notNegative}, []int{2}},
	"ramp": {formula.OpRamp, 3, []string{"value", "start", "end"}, []unit.Kind{{}, unit.Time, unit.Time}, []bounds{anything, notNegative, positive}, []int{2, 3}},
}

// delay compiles delay(h, time): h on a clock that is behind, and 0 until that
// clock starts.
func (r *resolver) delay(c *syntax.Call, sc *scope) value {
	if len(c.Args) != 2 || !r.plainArgs(c) {
		r.errorAt(c.Span, "wrong-arguments", "delay takes a history and a time", "", "delay(h, 2 s)")
		return badValue
	}
	d := r.want(c.Args[1].Value, &scope{what: "a delay"}, unit.Time, "a delay")
	d = r.inRange(d, c.Args[1].Value, notNegative, "a delay")
	if d.bad {
		return badValue
	}
	clock := formula.Sub(*sc.time, d.prog)
	late := *sc
	late.time, late.shift = &clock, formula.Add(sc.shift, d.prog)
	late.addBreak(formula.Const(0))
	h := r.compile(c.Args[0].Value, &late)
	if h.bad {
		return h
	}
	h.prog = formula.Apply(formula.OpSelect, formula.Apply(formula.OpLess, clock, formula.Const(0)), formula.Const(0), h.prog)
	h.bare, h.percent = false, false
	return h
}

// breakAtComparison notes the time at which a comparison of the clock with a
// number that does not change turns.
func (r *resolver) breakAtComparison(sc *scope, a, b formula.Program) {
	if sc.time == nil {
		return
	}
	for _, pair := range [...][2]formula.Program{{a, b}, {b, a}} {
		clock, other := pair[0], pair[1]
		if clock.String() == sc.time.String() && !other.UsesArg(formula.ArgT) && !other.UsesArg(formula.ArgX) {
			sc.addBreak(other)
			return
		}
	}
}
