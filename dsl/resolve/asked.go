package resolve

import (
	"fmt"
	"strings"

	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/scenario"
)

// resolveAsked compiles what is asked of the scenario.
func (r *resolver) resolveAsked() {
	for _, s := range r.statements {
		switch s := s.(type) {
		case *syntax.Require:
			r.require(s)
		case *syntax.Collect:
			for _, e := range s.Values {
				r.collect(e)
			}
		}
	}
	r.resolveSweep()
	r.resolveSurvey()
}

// writtenUnit is the unit of the first of the limits that is a plain quantity:
// people are shown the value in the unit that they asked in.
func writtenUnit(limits ...syntax.Expr) string {
	for _, l := range limits {
		if n, ok := l.(*syntax.Number); ok && n.Unit != nil {
			return n.Unit.Text
		}
	}
	return ""
}

// measured is the scope of an expression over measures.
func measured(a *asked, what string) *scope { return &scope{what: what, measures: a} }

func (r *resolver) require(q *syntax.Require) {
	a := &asked{}
	sc := measured(a, "a requirement")
	v := r.compile(q.Value, sc)
	out := scenario.Require{}
	switch q.Test.Text {
	case "<":
		out.Relation = scenario.Less
	case "<=":
		out.Relation = scenario.LessEq
	case ">":
		out.Relation = scenario.Greater
	case ">=":
		out.Relation = scenario.GreaterEq
	case "within":
		out.Relation = scenario.Within
	case "outside":
		out.Relation = scenario.Outside
	}
	out.Shown = writtenUnit(q.Limit, q.High, q.Low)
	ok := !v.bad
	end := q.Value.Place()
	if q.Limit != nil {
		limit, lok := r.limitOf(q.Limit, sc, v)
		out.Limit, ok = limit.prog, ok && lok
		end = q.Limit.Place()
	} else {
		ok = r.limits(q, sc, v, &out) && ok
		if q.High != nil {
			end = q.High.Place()
		}
	}
	if !ok {
		return
	}
	out.Source = strings.Join(strings.Fields(q.Value.Place().To(end).Text()), " ")
	out.Unit, out.Value, out.Measures = siText(v, a), v.prog, a.list
	if q.Text != nil {
		out.Text = q.Text.Text
	}
	if q.Clause != nil {
		out.Clause = q.Clause.Text
	}
	r.path(fmt.Sprintf("require.%d", len(r.tmpl.Requires)), q.Value.Place().To(end))
	r.tmpl.Requires = append(r.tmpl.Requires, out)
}

// limits compiles the two ends of within and outside.
func (r *resolver) limits(q *syntax.Require, sc *scope, v value, out *scenario.Require) bool {
	if q.Low == nil || q.High == nil {
		return false
	}
	both := *sc
	both.shared = syntax.SharedUnit(q.Low, q.High)
	low, lok := r.limitOf(q.Low, &both, v)
	high, hok := r.limitOf(q.High, &both, v)
	if !lok || !hok {
		return false
	}
	if !low.prog.UsesArg(0) && !high.prog.UsesArg(0) && len(sc.measures.list) <= 1 && !(r.num(low.prog) < r.num(high.prog)) {
		r.errorAt(q.Low.Place().To(q.High.Place()), "empty-range", "a range runs from its lower to its higher end", "", "")
		return false
	}
	out.Limit, out.Upper = low.prog, high.prog
	return true
}

// limitOf compiles a limit and holds it against the value's dimension.
func (r *resolver) limitOf(e syntax.Expr, sc *scope, v value) (value, bool) {
	l := r.compile(e, sc)
	if l.bad || v.bad {
		return l, false
	}
	k := same(v.dim)
	for _, named := range []unit.Kind{unit.Force, unit.Length, unit.Time, unit.Frequency, unit.Speed, unit.Acceleration, unit.Mass, unit.Energy, unit.MassPerLength} {
		if named.Dim == v.dim {
			k = named
		}
	}
	if v.dim.IsNumber() {
		k = unit.Number
		if v.angle != 0 {
			k = unit.Angle
		}
	}
	l = r.check(l, e, k, "this limit")
	return l, !l.bad
}

// siText is the SI unit of a value; a moment or an energy is named by what was asked.
func siText(v value, a *asked) string {
	switch {
	case v.dim.IsNumber() && v.angle == 1:
		return "rad"
	case v.dim == unit.Moment.Dim:
		for _, m := range a.list {
			if m.Watch >= 0 && m.Quantity == scenario.Moment {
				return unit.Moment.SI
			}
		}
	}
	return v.dim.SI()
}

// collect compiles one value asked for, one entry for each number of a range in it.
func (r *resolver) collect(e syntax.Expr) {
	total := 1
	for pick := 0; pick < total; pick++ {
		a := &asked{expand: true, pick: pick}
		v := r.compile(e, measured(a, "a collected value"))
		if v.bad {
			return
		}
		n, ok := r.rangeCount(a)
		if !ok {
			return
		}
		total = n
		r.tmpl.Collects = append(r.tmpl.Collects, scenario.Collect{Source: pickedText(e, a), Unit: siText(v, a), Value: v.prog, Measures: a.list})
	}
}

// rangeCount is how many numbers the ranges of an expression have, 1 without any.
func (r *resolver) rangeCount(a *asked) (int, bool) {
	count := 1
	for i, g := range a.ranges {
		n := g.to - g.from + 1
		if i > 0 && n != count {
			r.errorAt(g.span, "unit-mismatch", "two ranges in one value have as many numbers each", fmt.Sprintf("this one has %d, the first %d", n, count), "")
			return 0, false
		}
		count = n
	}
	return count, true
}

// pickedText is the text of an expression with each range replaced by the
// number that was picked.
func pickedText(e syntax.Expr, a *asked) string {
	span := e.Place()
	text := span.Text()
	for i := len(a.ranges) - 1; i >= 0; i-- {
		g := a.ranges[i]
		from, to := g.span.Start-span.Start, g.span.End-span.Start
		if from < 0 || to > len(text) || from > to {
			continue
		}
		text = text[:from] + fmt.Sprint(g.from+a.pick) + text[to:]
	}
	return strings.Join(strings.Fields(text), " ")
}
