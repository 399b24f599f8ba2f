package resolve

import (
	"math"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// resolveExcite compiles one excitation.
func (r *resolver) resolveExcite(e *syntax.Excite) {
	name, path := e.Name.Text, "excite."+e.Name.Text
	r.path(path, e.Name.Span)
	switch a := e.Action.(type) {
	case *syntax.Pluck:
		r.pluck(a, name, path)
	case *syntax.Start:
		r.start(a, name, path)
	case *syntax.Push:
		at, ok := r.place(a.Spot, "a push")
		h, hok := r.force(a.With, unit.Force, "push", false)
		r.path(path+".at", a.Spot.Span)
		r.path(path+".with", a.With.Place())
		if ok && hok {
			r.warnHeld(at, a.Spot.Span, "push")
			r.tmpl.Model.Pushes = append(r.tmpl.Model.Pushes, scenario.PushOf[formula.Program]{Name: name, At: at, Force: h})
		}
	case *syntax.Press:
		along, ok := r.span(a.Along, "press", false)
		h, hok := r.force(a.With, unit.ForcePerLength, "press", true)
		r.path(path+".with", a.With.Place())
		if ok && hok {
			r.tmpl.Model.Presses = append(r.tmpl.Model.Presses, scenario.PressOf[formula.Program]{Name: name, Along: along, Force: h})
		}
	case *syntax.Move:
		r.move(a, name, path)
	case *syntax.Roll:
		r.roll(a, name, path)
	case *syntax.Load:
		r.pluginLoad(a, name, path)
	}
}

// force compiles the history of a force or a force per length.
func (r *resolver) force(e syntax.Expr, k unit.Kind, subject string, alongX bool) (scenario.HistoryOf[formula.Program], bool) {
	h, v := r.history(e, alongX)
	v = r.check(v, e, k, subject)
	return h, !v.bad && r.startsFinite(h, e)
}

// startsFinite checks the value at t = 0 and x = 0.
func (r *resolver) startsFinite(h scenario.HistoryOf[formula.Program], e syntax.Expr) bool {
	v := h.Value.Eval(r.values, []float64{0, 0})
	if v-v == 0 {
		return true
	}
	r.errorAt(e.Place(), "not-finite", "this history has no finite value at its start", "", "")
	return false
}

// warnHeld remarks on a force on something that is held in place.
func (r *resolver) warnHeld(at placeOf, span diag.Span, what string) {
	if at.Node >= 0 && r.tmpl.Model.Lines[at.Line].Nodes[at.Node].Fixed {
		r.warnAt(span, "no-effect", "a "+what+" on what is held in place does nothing", "this place is fixed", "")
	}
}

func (r *resolver) pluck(a *syntax.Pluck, name, path string) {
	at, ok := r.place(a.Spot, "a pluck")
	r.path(path+".at", a.Spot.Span)
	p := scenario.PluckOf[formula.Program]{Name: name, At: at}
	if a.By != nil {
		v := r.inRange(r.want(a.By, plain, unit.Length, "pluck by"), a.By, anything, "pluck by")
		r.path(path+".by", a.By.Place())
		p.ByLength, p.Length, ok = true, v.prog, ok && !v.bad
	} else {
		v := r.inRange(r.want(a.With, plain, unit.Force, "pluck with"), a.With, anything, "pluck with")
		if a.With != nil {
			r.path(path+".with", a.With.Place())
		}
		p.Force, ok = v.prog, ok && !v.bad
	}
	if a.Until != nil {
		v := r.inRange(r.want(a.Until, plain, unit.Time, "until"), a.Until, notNegative, "until")
		r.path(path+".until", a.Until.Place())
		p.Until, ok = v.prog, ok && !v.bad
	}
	if !ok {
		return
	}
	if at.Node >= 0 && r.tmpl.Model.Lines[at.Line].Nodes[at.Node].Fixed {
		if p.ByLength {
			r.errorAt(a.Spot.Span, "wrong-place", "a pluck by a length wants a place that can move", "this place is fixed", "")
			return
		}
		r.warnHeld(at, a.Spot.Span, "pluck")
	}
	r.tmpl.Model.Plucks = append(r.tmpl.Model.Plucks, p)
}

func (r *resolver) start(a *syntax.Start, name, path string) {
	along, ok := r.span(a.Along, "start", false)
	k, velocity := unit.Length, false
	if a.Quantity.Text == "velocity" {
		k, velocity = unit.Speed, true
	}
	sc := &scope{what: "a shape along x", x: true}
	v := r.check(r.compile(a.Shape, sc), a.Shape, k, "start "+a.Quantity.Text)
	r.path(path+".with", a.Shape.Place())
	if v.bad || !ok || !r.finiteAlong(a.Shape, v.prog, along) {
		return
	}
	if !velocity {
		r.torn(a.Shape, v.prog, along)
	}
	r.tmpl.Model.Starts = append(r.tmpl.Model.Starts, scenario.StartOf[formula.Program]{Name: name, Along: along, Velocity: velocity, Shape: v.prog})
}

// finiteAlong checks a shape at some places of its stretch.
func (r *resolver) finiteAlong(e syntax.Expr, shape formula.Program, along scenario.SpanOf) bool {
	length := 0.0
	for i, s := range r.tmpl.Model.Lines[along.Line].Segments {
		if along.Segment < 0 || along.Segment == i {
			length += r.num(s.Length)
		}
	}
	const places = 16
	for i := range places + 1 {
		x := length * float64(i) / places
		if v := shape.Eval(r.values, []float64{0, x}); v-v != 0 {
			r.errorAt(e.Place(), "not-finite", "this shape has no finite value everywhere along "+r.tmpl.Model.Lines[along.Line].Name,
				"at x = "+unit.Format(x, unit.Length.Dim, unit.SI, 4)+" it comes to "+unit.Digits(v, 4), "")
			return false
		}
	}
	return true
}

// tornShare is the share of its largest value that a start shape may have where
// it must vanish. Chosen: a tail of a bell that nobody would see in a figure.
const tornShare = 1e-3

// torn remarks on a start displacement that does not vanish at a support that
// is held, or where its stretch ends within the line.
func (r *resolver) torn(e syntax.Expr, shape formula.Program, along scenario.SpanOf) {
	line := &r.tmpl.Model.Lines[along.Line]
	at := func(x float64) float64 { return math.Abs(shape.Eval(r.values, []float64{0, x})) }
	first, last := 0, len(line.Segments)
	if along.Segment >= 0 {
		first, last = along.Segment, along.Segment+1
	}
	length := 0.0
	for _, s := range line.Segments[first:last] {
		length += r.num(s.Length)
	}
	largest := 0.0
	const places = 200
	for i := range places + 1 {
		largest = math.Max(largest, at(length*float64(i)/places))
	}
	x := 0.0
	for n := first; n <= last && n < len(line.Nodes); n++ {
		if at(x) > tornShare*largest {
			edge := (n == first || n == last) && n > 0 && n < len(line.Nodes)-1
			switch {
			case line.Nodes[n].Fixed:
				r.warnAt(e.Place(), "start-jumps", "this shape is not zero at "+line.Nodes[n].Name+", which is held", "the line would be torn there", "")
				return
			case edge:
				r.warnAt(e.Place(), "start-jumps", "this shape is not zero where its stretch ends within the line", "the line would be torn there", "start displacement along "+line.Name)
				return
			}
		}
		if n < last {
			x += r.num(line.Segments[n].Length)
		}
	}
}

func (r *resolver) move(a *syntax.Move, name, path string) {
	at, ok := r.place(a.Support, "move")
	if ok && at.Node < 0 {
		r.errorAt(a.Support.Span, "wrong-place", "move wants a support", "this is a place in a segment", "")
		ok = false
	}
	if ok && !r.tmpl.Model.Lines[at.Line].Nodes[at.Node].Fixed {
		r.errorAt(a.Support.Span, "wrong-place", "move wants a support that is fixed", clip(a.Support)+" is free to move by itself", "")
		ok = false
	}
	h, v := r.history(a.With, false)
	r.path(path+".with", a.With.Place())
	if v.bad {
		return
	}
	var kind scenario.MotionKind
	switch v.dim {
	case unit.Length.Dim:
		kind = scenario.MotionDisplacement
	case unit.Speed.Dim:
		kind = scenario.MotionVelocity
	case unit.Acceleration.Dim:
		kind = scenario.MotionAcceleration
	default:
		r.errorAt(a.With.Place(), "wants-motion", "move wants a displacement, a velocity or an acceleration", "this is "+describe(v), "")
		return
	}
	if ok && r.startsFinite(h, a.With) {
		r.tmpl.Model.Moves = append(r.tmpl.Model.Moves, scenario.MoveOf[formula.Program]{Name: name, Line: at.Line, Node: at.Node, Kind: kind, Motion: h})
	}
}

func (r *resolver) roll(a *syntax.Roll, name, path string) {
	along, ok := r.span(a.Along, "roll", true)
	speed := r.inRange(r.want(a.Speed, plain, unit.Speed, "the speed of roll"), a.Speed, positive, "the speed of roll")
	load := r.inRange(r.want(a.Load, plain, unit.Force, "the load of roll"), a.Load, anything, "the load of roll")
	r.path(path+".speed", a.Speed.Place())
	r.path(path+".load", a.Load.Place())
	out := scenario.RollOf[formula.Program]{Name: name, Line: along.Line, Speed: speed.prog, Force: load.prog, From: placeOf{Line: along.Line, Node: 0, Segment: -1}}
	ok = ok && !speed.bad && !load.bad
	for _, x := range []struct {
		e    syntax.Expr
		k    unit.Kind
		b    bounds
		into *formula.Program
	}{{a.Mass, unit.Mass, positive, &out.Mass}, {a.Spring, unit.Spring, positive, &out.Spring}, {a.Dashpot, unit.Dashpot, notNegative, &out.Dashpot}} {
		if x.e == nil {
			continue
		}
		v := r.inRange(r.want(x.e, plain, x.k, "the "+x.k.Word+" of roll"), x.e, x.b, "the "+x.k.Word+" of roll")
		r.path(path+"."+x.k.Word, x.e.Place())
		*x.into, ok = v.prog, ok && !v.bad
	}
	switch {
	case a.Mass != nil && a.Spring == nil:
		r.errorAt(a.Mass.Place(), "missing-property", "a mass that rolls rides on a spring", "this one has none", "mass "+clip(a.Mass)+" spring 100 kN/m")
		ok = false
	case a.Mass == nil && (a.Spring != nil || a.Dashpot != nil):
		r.errorAt(a.Load.Place(), "missing-property", "a spring or a dashpot of a rolling load carries a mass", "the load has none", "mass 20 kg")
		ok = false
	}
	if a.From != nil {
		from, fok := r.place(a.From, "from")
		if fok && ok && from.Line != along.Line {
			r.errorAt(a.From.Span, "wrong-place", "a load starts on the line along which it rolls", "", "")
			fok = false
		}
		out.From, ok = from, ok && fok
		r.path(path+".from", a.From.Span)
	}
	if a.Starting != nil {
		v := r.inRange(r.want(a.Starting, plain, unit.Time, "starting"), a.Starting, notNegative, "starting")
		out.Starting, ok = v.prog, ok && !v.bad
		r.path(path+".starting", a.Starting.Place())
	}
	if ok {
		r.tmpl.Model.Rolls = append(r.tmpl.Model.Rolls, out)
	}
}
