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
		r.warnAt(a.Span, "no-effect", "the amplitude has no effect here", "nothing at this joint depends on it", "")
	}
	if !ok {
		return badValue
	}
	return sc.measures.ask(m, unit.Dim{}, 0)
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

// sagMeasure compiles sag(PLACE) and sag(LINE).
func (r *resolver) sagMeasure(c *syntax.Call, sc *scope) value {
	if !r.count(c, "sag(LINE)", 1) {
		return badValue
	}
	spot, ok := spotOf(c.Args[0])
	if !ok {
		r.errorAt(c.Args[0].Span, "wrong-place", "sag wants a line or a place of it", "", "")
		return badValue
	}
	m := blank(scenario.Sag, c)
	if spot.Offset == nil {
		el, ok := r.find(spot.Name, "sag")
		if !ok {
			return badValue
		}
		if el.kind == lineKind {
			m.Line = el.line
			return sc.measures.ask(m, unit.Length.Dim, 0)
		}
	}
	p, ok := r.place(spot, "sag")
	if !ok {
		return badValue
	}
	m.HasPlace, m.Place, m.Line = true, p, p.Line
	return sc.measures.ask(m, unit.Length.Dim, 0)
}

// takeUpMeasure compiles take_up(LINE, T).
func (r *resolver) takeUpMeasure(c *syntax.Call, sc *scope) value {
	if !r.count(c, "take_up(LINE, 10 kN)", 2) || !r.plainArg(c.Args[1]) {
		return badValue
	}
	m := blank(scenario.TakeUp, c)
	ok := r.lineArg(c.Args[0], &m)
	v := r.inRange(r.want(c.Args[1].Value, plain, unit.Force, "the tension to reach"), c.Args[1].Value, positive, "the tension to reach")
	if !ok || v.bad || !r.elastic(c, m.Line, "take_up") {
		return badValue
	}
	if r.lineOrder[m.Line].weighted {
		r.errorAt(c.Span, "contradiction", "a weighted end keeps the tension of this line as it is", "no travel of an anchor changes it", "")
		return badValue
	}
	m.Args = append(m.Args, v.prog)
	return sc.measures.ask(m, unit.Length.Dim, 0)
}

// elastic wants the axial stiffness of every segment of a line.
func (r *resolver) elastic(at syntax.Node, line int, subject string) bool {
	e := r.lineOrder[line]
	for i := range r.tmpl.Model.Lines[line].Segments {
		s := &r.tmpl.Model.Lines[line].Segments[i]
		if p := e.parts[i]; p.sound && p.stock != nil && len(s.Axial.Code) == 0 {
			r.errorAt(at.Place(), "missing-property", subject+" wants the axial stiffness of every segment", "that of "+s.Name+" is not known: "+s.Stock+" does not say it", "axial 100 MN")
			return false
		}
	}
	return true
}

// warmth reads the temperature of tension(PLACE, TEMPERATURE).
func (r *resolver) warmth(c *syntax.Call, m *measureOf) bool {
	if !r.plainArg(c.Args[1]) {
		return false
	}
	v := r.want(c.Args[1].Value, plain, unit.Temperature, "a temperature")
	if !v.bad {
		v = r.inRange(v, c.Args[1].Value, positive, "a temperature above absolute zero")
	}
	m.Kind, m.Args = scenario.WarmTension, []formula.Program{v.prog}
	return !v.bad
}

// askTension enters a tension; one at another temperature wants to know what the
// line does with it.
func (r *resolver) askTension(c *syntax.Call, m measureOf, sc *scope) value {
	if m.Kind != scenario.WarmTension {
		return sc.measures.ask(m, unit.Force.Dim, 0)
	}
	e, line := r.lineOrder[m.Line], &r.tmpl.Model.Lines[m.Line]
	if !line.Warm && !e.bad {
		r.errorAt(c.Span, "missing-property", "tension at another temperature wants to know at which one the line has its own", "the line "+line.Name+" does not say it", "at 20 degC")
		return badValue
	}
	if !e.weighted {
		if !r.elastic(c, m.Line, "tension at another temperature") {
			return badValue
		}
		for i, p := range e.parts {
			if p.sound && p.stock != nil && !p.stock.grows && !p.stock.bad {
				r.errorAt(c.Span, "missing-property", "tension at another temperature wants the expansion of every segment", "that of "+line.Segments[i].Name+" is not known: "+line.Segments[i].Stock+" does not say it", "expansion 11.5e-6 1/K")
				return badValue
			}
		}
	}
	return sc.measures.ask(m, unit.Force.Dim, 0)
}

// scrutonMeasure compiles scruton([LINE,] n, DENSITY).
func (r *resolver) scrutonMeasure(c *syntax.Call, sc *scope) value {
	if !r.count(c, "scruton(1, 1.225 kg/m^3)", 2, 3) {
		return badValue
	}
	m := blank(scenario.Scruton, c)
	rest := c.Args
	if len(rest) == 3 {
		if !r.lineArg(rest[0], &m) {
			return badValue
		}
		rest = rest[1:]
	} else if len(r.lineOrder) == 1 {
		m.Line = 0
	} else {
		r.errorAt(c.Span, "wrong-place", "a Scruton number is that of one line", "here are several", "scruton(LINE, 1, 1.225 kg/m^3)")
		return badValue
	}
	if !r.modes(rest[0], &m, sc) || !r.plainArg(rest[1]) {
		return badValue
	}
	if m.Below {
		r.errorAt(rest[0].Span, "wrong-arguments", "a Scruton number is that of a mode or of a range of them", "", "1..4")
		return badValue
	}
	v := r.inRange(r.want(rest[1].Value, plain, unit.Density, "the density of the air"), rest[1].Value, positive, "the density of the air")
	if v.bad {
		return badValue
	}
	for i, p := range r.lineOrder[m.Line].parts {
		if s := &r.tmpl.Model.Lines[m.Line].Segments[i]; p.sound && len(s.Diameter.Code) == 0 {
			r.errorAt(c.Span, "missing-property", "a Scruton number wants the diameter of every segment", "that of "+s.Name+" is not known: "+s.Stock+" does not say it", "diameter 200 mm")
			return badValue
		}
	}
	m.Args = append(m.Args, v.prog)
	return sc.measures.ask(m, unit.Dim{}, 0)
}
