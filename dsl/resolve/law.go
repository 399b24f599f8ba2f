package resolve

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

type lawOf = scenario.LawOf[formula.Program]

// lawEntry is one law written in the text.
type lawEntry struct {
	stmt  *syntax.Law
	bad   bool
	takes []lawTake
	force unit.Dim // a force, or a force per length
}

// lawTake is one parameter of a law.
type lawTake struct {
	name string
	unit unit.Unit
	text string // of the unit
}

// lawLocals are the names that a law's formulas may read.
func lawLocals() map[string]value {
	return map[string]value{
		"t": {prog: formula.Arg(formula.ArgT), dim: unit.Time.Dim},
		"u": {prog: formula.Arg(formula.ArgU), dim: unit.Length.Dim},
		"v": {prog: formula.Arg(formula.ArgV), dim: unit.Speed.Dim},
	}
}

// resolveLaw checks a law by itself: names, and the dimension of everything, with
// the parameters' units as they are told.
func (r *resolver) resolveLaw(e *lawEntry) {
	s := e.stmt
	e.bad = s.Incomplete
	said := map[string]diag.Span{}
	give := func(name syntax.Label) {
		if why, ok := reserved[name.Text]; ok {
			r.errorAt(name.Span, "reserved-name", name.Text+" cannot be named anew", "it is "+why, "")
			e.bad = true
		} else if before, ok := said[name.Text]; ok {
			r.errorAt(name.Span, "duplicate-name", name.Text+" is a name of this law already", "", "", related(before, "first said here"))
			e.bad = true
		}
		said[name.Text] = name.Span
	}
	params := map[string]value{}
	for i := range s.Takes {
		t := &s.Takes[i]
		give(t.Name)
		take := lawTake{name: t.Name.Text, unit: unit.None(), text: "1"}
		if t.Unit != nil {
			u, ok := r.unit(t.Unit, "")
			if !ok {
				e.bad = true
				continue
			}
			take.unit, take.text = u, t.Unit.Text
		}
		e.takes = append(e.takes, take)
		// Stands for any value: no argument of that number is ever read.
		params[take.name] = value{prog: formula.Arg(scenario.StateArg + len(s.States) + i), dim: take.unit.Dim, angle: take.unit.Angle}
	}
	for i := range s.States {
		give(s.States[i].Name)
	}
	switch {
	case e.bad:
		return
	case len(s.Forces) == 0:
		r.errorAt(s.Name.Span, "missing-property", "the law "+s.Name.Text+" gives no force", "", "force = -c * v")
		e.bad = true
		return
	case len(s.Forces) > 1:
		r.errorAt(s.Forces[1].Span, "said-twice", "a law gives one force", "", "", related(s.Forces[0].Span, "first said here"))
		e.bad = true
		return
	}
	w := r.lawFormulas(s, params)
	if w == nil {
		e.bad = true
		return
	}
	switch w.dim {
	case unit.Force.Dim, unit.ForcePerLength.Dim:
		e.force = w.dim
	default:
		r.errorAt(s.Forces[0].Value.Place(), "wants-force", "a law gives a force, or along a segment a force per length", "this is "+unit.Dim.Name(w.dim), "")
		e.bad = true
	}
}

// written is a law's formulas with the dimension of its force.
type written struct {
	law scenario.WrittenOf[formula.Program]
	dim unit.Dim
}

// lawFormulas compiles a law's formulas with the given values of its parameters;
// nil where something is wrong, which has been said.
func (r *resolver) lawFormulas(s *syntax.Law, params map[string]value) *written {
	out := &written{}
	ok := true
	start := &scope{what: "the start of a state", locals: params}
	inside := &scope{what: "a law", locals: lawLocals()}
	for name, v := range params {
		inside.locals[name] = v
	}
	for i := range s.States {
		z := &s.States[i]
		v := r.compile(z.Initial, start)
		v.bare, v.percent = false, false
		if v.bad {
			ok = false
		}
		out.law.Starts = append(out.law.Starts, v.prog)
		inside.locals[z.Name.Text] = value{prog: formula.Arg(scenario.StateArg + i), dim: v.dim, angle: v.angle, bad: v.bad}
	}
	for i := range s.States {
		z := &s.States[i]
		of := inside.locals[z.Name.Text]
		v := r.compile(z.Rate, inside)
		d, dok := of.dim.Div(unit.Time.Dim)
		if !of.bad && dok {
			v = r.check(v, z.Rate, same(d), "the rate of "+z.Name.Text)
		}
		ok = ok && !v.bad
		out.law.Rates = append(out.law.Rates, v.prog)
	}
	f := r.compile(s.Forces[0].Value, inside)
	if !ok || f.bad {
		return nil
	}
	out.law.Force, out.dim = f.prog, f.dim
	return out
}

// useLaw is a law with its parameters, at a joint (a force) or along a segment (a
// force per length).
func (r *resolver) useLaw(c *syntax.Call, k unit.Kind, path string) (*lawOf, bool) {
	r.path(path+".law", c.Span)
	name := c.Name.Text
	var e *lawEntry
	var p *Plugin
	if c.Name.Quoted {
		var ok bool
		if p, ok = r.plugin(c.Name.Span, name, "law"); !ok {
			return nil, false
		}
		if p.Body == "" {
			return r.followedLaw(p, c, path)
		}
		e = r.pluginLaw(p, c)
	} else if e = r.laws[name]; e == nil {
		r.unknownLaw(c, name)
		return nil, false
	}
	if e.bad {
		return nil, false
	}
	if e.force != k.Dim {
		found, hint := name+" gives a force", "a law along a segment gives a force per length"
		if e.force != unit.Force.Dim {
			found, hint = name+" gives a force per length", "stands behind `loss law` along a segment"
		}
		r.errorAt(c.Span, "unit-mismatch", "here stands a law that gives "+k.Name, found, hint)
		return nil, false
	}
	var params map[string]value
	var ok bool
	if p != nil {
		params, ok = r.pluginParameters(p, c, path)
	} else {
		params, ok = r.lawParameters(e, c, path)
	}
	if !ok {
		return nil, false
	}
	w := r.lawFormulas(e.stmt, params)
	if w == nil {
		return nil, false
	}
	args := []float64{0, 0, 0, 0}
	for _, p := range w.law.Starts {
		args = append(args, r.num(p))
	}
	for _, p := range append([]formula.Program{w.law.Force}, w.law.Rates...) {
		if v := p.Eval(r.values, args); math.IsNaN(v) || math.IsInf(v, 0) {
			r.errorAt(c.Span, "not-finite", name+" has no finite value at rest", "with u = 0, v = 0 and the states at their start", "")
			return nil, false
		}
	}
	if v := w.law.Force.Eval(r.values, args); v != 0 {
		r.warnAt(c.Span, "law-at-rest", name+" pushes a line at rest", "with u = 0 and v = 0 it gives "+unit.Format(v, e.force, unit.SI, 3), "")
	}
	return &lawOf{Name: name, Written: &w.law}, true
}

func (r *resolver) unknownLaw(c *syntax.Call, name string) {
	switch s, ok := r.top[name]; {
	case r.broken[name]:
	case ok:
		r.errorAt(c.Name.Span, "unknown-name", fmt.Sprintf("%s is %s, not a law", name, article(s.kind)), "", "", related(s.span, "said here"))
	default:
		r.errorAt(c.Name.Span, "unknown-name", "no law is called "+name, "", nearest(r, name, r.laws))
	}
}

// lawParameters are the values of a law's parameters by name.
func (r *resolver) lawParameters(e *lawEntry, c *syntax.Call, path string) (map[string]value, bool) {
	ok := true
	said := map[string]*syntax.Arg{}
	for i := range c.Args {
		a := &c.Args[i]
		switch {
		case a.Key == nil:
			r.errorAt(a.Span, "wrong-arguments", "a law takes its parameters by name", "", e.example())
			return nil, false
		case said[a.Key.Text] != nil:
			r.errorAt(a.Span, "said-twice", a.Key.Text+" is said already", "", "", related(said[a.Key.Text].Span, "said here"))
			ok = false
		default:
			said[a.Key.Text] = a
		}
	}
	out := map[string]value{}
	var names []string
	for _, t := range e.takes {
		names = append(names, t.name)
		a := said[t.name]
		delete(said, t.name)
		if a == nil {
			r.errorAt(c.Span, "missing-parameter", fmt.Sprintf("%s wants %s, %s", e.stmt.Name.Text, t.name, t.unit.Dim.Name()), "", e.example())
			ok = false
			continue
		}
		kind := unit.Kind{Word: sameAsOther, Name: t.unit.Dim.Name(), Dim: t.unit.Dim, SI: t.unit.Dim.SI()}
		v := r.inRange(r.want(a.Value, plain, kind, t.name), a.Value, anything, t.name)
		r.path(path+"."+t.name, a.Value.Place())
		ok = ok && !v.bad
		v.bare, v.percent = false, false
		out[t.name] = v
	}
	for i := range c.Args { // in the order of the text
		if key := c.Args[i].Key; said[key.Text] != nil {
			r.errorAt(key.Span, "unknown-parameter", fmt.Sprintf("%s takes no %s", e.stmt.Name.Text, key.Text), "it takes "+strings.Join(names, ", "), diag.Nearest(key.Text, names))
			ok = false
		}
	}
	return out, ok
}

// example shows how the law's parameters are said.
func (e *lawEntry) example() string {
	var list []string
	for _, t := range e.takes {
		text := t.name + " = …"
		if t.text != "1" {
			text += " " + t.text
		}
		list = append(list, text)
	}
	return e.stmt.Name.Text + "(" + strings.Join(list, ", ") + ")"
}
