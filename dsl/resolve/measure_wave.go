package resolve

import (
	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// plainArg tells whether an argument is a value by itself.
func (r *resolver) plainArg(a syntax.Arg) bool {
	if a.Key == nil && a.Mark == nil && a.Unit == nil {
		return true
	}
	r.errorAt(a.Span, "wrong-arguments", "here stands a value", "", "")
	return false
}

// frequencyArg reads the frequency of a steady wave.
func (r *resolver) frequencyArg(a syntax.Arg, m *measureOf) bool {
	if !r.plainArg(a) {
		return false
	}
	v := r.inRange(r.want(a.Value, plain, unit.Frequency, "the frequency of a wave"), a.Value, positive, "the frequency of a wave")
	m.Args = append(m.Args, v.prog)
	return !v.bad
}

// shareMeasure compiles reflected(JOINT, F [, from before|after] [, AMPLITUDE])
// and its like.
func (r *resolver) shareMeasure(c *syntax.Call, sc *scope, kind scenario.MeasureKind) value {
	form := c.Name.Text + "(JOINT, 5 Hz)"
	if !r.count(c, form, 2, 3, 4) {
		return badValue
	}
	m := blank(kind, c)
	ok := r.nodeArg(c.Args[0], &m, "joint", c.Name.Text)
	ok = r.frequencyArg(c.Args[1], &m) && ok
	sided, sized := false, false
	for _, a := range c.Args[2:] {
		if a.Mark != nil && a.Mark.Text == "from" && !sided {
			sided = true
			n, _ := syntax.Ungroup(a.Value).(*syntax.Name)
			word, _ := n.Plain()
			if word != "before" && word != "after" {
				r.errorAt(a.Span, "wrong-arguments", "a wave comes from before or from after a joint, in walking order", "", "from before")
				ok = false
			}
			m.After = word == "after"
			continue
		}
		if sized || !r.plainArg(a) {
			ok = false
			continue
		}
		sized = true
		v := r.inRange(r.want(a.Value, plain, unit.Length, "the amplitude of a wave"), a.Value, positive, "the amplitude of a wave")
		ok = ok && !v.bad
		if ok && !r.lawful(&m) {
			r.warnAt(a.Span, "no-effect", "the amplitude has no effect here", "nothing at this joint depends on it", "")
			continue
		}
		m.Args = append(m.Args, v.prog)
	}
	if !ok {
		return badValue
	}
	if what := r.lopsided(&m); what != "" {
		r.errorAt(c.Span, "not-linear", c.Name.Text+" is not defined with "+what, "the first harmonic of what it does to a steady wave is not known", "")
		return badValue
	}
	if r.lawful(&m) && !sized {
		r.errorAt(c.Span, "wrong-arguments", "what this joint does to a wave depends on its amplitude", "friction, a stop or a law stands there", c.Name.Text+"("+clip(c.Args[0].Value)+", 5 Hz, 10 mm)")
		return badValue
	}
	return sc.measures.ask(m, unit.Dim{}, 0)
}

// lawful tells whether something at the joint of a measure answers differently to
// large and small motion.
func (r *resolver) lawful(m *measureOf) bool {
	return len(r.tmpl.Model.Lines[m.Line].Nodes[m.Place.Node].Laws) > 0
}

// lopsided names what stands at the joint of a measure and has no first harmonic
// by amplitude alone, or "".
func (r *resolver) lopsided(m *measureOf) string {
	for _, l := range r.tmpl.Model.Lines[m.Line].Nodes[m.Place.Node].Laws {
		switch {
		case l.Stop != nil && !(l.Stop.Up && l.Stop.Down):
			return "a stop on one side"
		case l.Written != nil && len(l.Written.Rates) > 0:
			return "a law with states of its own"
		case l.Written != nil && l.Written.Force.UsesArg(formula.ArgT):
			return "a law that reads the time"
		}
	}
	return ""
}

// nodeArg resolves an argument that names a joint or a support.
func (r *resolver) nodeArg(a syntax.Arg, m *measureOf, want, subject string) bool {
	spot, ok := spotOf(a)
	if !ok {
		r.errorAt(a.Span, "wrong-place", subject+" wants a "+want, "", "")
		return false
	}
	el, ok := r.find(spot.Name, subject)
	if !ok {
		return false
	}
	if el.kind != want || spot.Offset != nil {
		hint := ""
		if el.kind == "support" && spot.Offset == nil {
			hint = "taken(" + clip(spot.Name) + ", 5 Hz)"
		}
		r.errorAt(a.Span, "wrong-place", subject+" wants a "+want, clip(spot.Name)+" is "+article(el.kind), hint)
		return false
	}
	m.HasPlace, m.Line = true, el.line
	m.Place = placeOf{Line: el.line, Node: el.node, Segment: -1}
	return true
}

// takenMeasure compiles taken(SUPPORT, F).
func (r *resolver) takenMeasure(c *syntax.Call, sc *scope) value {
	if !r.count(c, "taken(SUPPORT, 5 Hz)", 2) {
		return badValue
	}
	if !r.proportional(c) {
		return badValue
	}
	m := blank(scenario.Taken, c)
	ok := r.nodeArg(c.Args[0], &m, "support", "taken")
	if !r.frequencyArg(c.Args[1], &m) || !ok {
		return badValue
	}
	return sc.measures.ask(m, unit.Dim{}, 0)
}

// responseMeasure compiles response(WATCH.QUANTITY, EXCITE, F).
func (r *resolver) responseMeasure(c *syntax.Call, sc *scope) value {
	if !r.count(c, "response(WATCH.QUANTITY, EXCITE, 5 Hz)", 3) || !r.plainArg(c.Args[0]) || !r.plainArg(c.Args[1]) {
		return badValue
	}
	if !r.proportional(c) {
		return badValue
	}
	m := blank(scenario.SteadyResponse, c)
	ok := r.watchQuantity(c.Args[0].Value, &m)
	if ok && m.Quantity == scenario.Tension {
		r.errorAt(c.Args[0].Span, "wrong-arguments", "to first order small motion does not change the tension of a line", "", "")
		ok = false
	}
	drive, found := r.driveNamed(c.Args[1].Value)
	if !r.frequencyArg(c.Args[2], &m) || !ok || !found {
		return badValue
	}
	u, err := unit.Parse(m.Quantity.Unit())
	if err != nil {
		panic("resolve: the unit of a quantity does not read: " + m.Quantity.Unit())
	}
	d, fits := u.Dim.Div(drive.dim)
	if !fits {
		return r.powerFault(c)
	}
	m.Excite = drive.name
	return sc.measures.ask(m, d, u.Angle)
}

// drive is an excitation that can go on at one frequency, and what its unit is one of.
type drive struct {
	name string
	dim  unit.Dim
}

// driveNamed resolves the name of an excitation that drives steadily.
func (r *resolver) driveNamed(e syntax.Expr) (drive, bool) {
	n, ok := syntax.Ungroup(e).(*syntax.Name)
	text, plainName := n.Plain()
	if !ok || !plainName {
		r.errorAt(e.Place(), "unknown-name", "here stands the name of an excitation", "", "")
		return drive{}, false
	}
	m := &r.tmpl.Model
	for _, p := range m.Pushes {
		if p.Name == text {
			return drive{text, unit.Force.Dim}, true
		}
	}
	for _, p := range m.Presses {
		if p.Name == text {
			per, _ := unit.Force.Dim.Div(unit.Length.Dim)
			return drive{text, per}, true
		}
	}
	for _, mv := range m.Moves {
		if mv.Name == text {
			return drive{text, [...]unit.Dim{unit.Length.Dim, unit.Speed.Dim, unit.Acceleration.Dim}[mv.Kind]}, true
		}
	}
	s, isTop := r.top[text]
	switch {
	case r.broken[text]:
	case isTop && s.kind == "excite":
		r.errorAt(e.Place(), "wrong-arguments", text+" drives no steady vibration of one frequency", "a push, a press or a moved support does", "", related(s.span, "said here"))
	case isTop:
		r.errorAt(e.Place(), "unknown-name", text+" is "+article(s.kind)+", not an excitation", "", "", related(s.span, "said here"))
	default:
		var names []string
		for _, p := range m.Pushes {
			names = append(names, p.Name)
		}
		for _, p := range m.Presses {
			names = append(names, p.Name)
		}
		for _, mv := range m.Moves {
			names = append(names, mv.Name)
		}
		r.errorAt(e.Place(), "unknown-name", "no excitation is called "+text, "", diag.Nearest(text, names))
	}
	return drive{}, false
}
