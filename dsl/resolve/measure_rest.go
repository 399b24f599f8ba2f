package resolve

import (
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

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
