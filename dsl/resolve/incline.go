package resolve

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// lineIncline takes the incline of a line. A level one, written as a plain 0,
// is none; one that a let moves is inclined whatever its value.
func (r *resolver) lineIncline(e *lineEntry, p *syntax.LineProperty) {
	v := r.inRange(r.want(p.Value, plain, unit.Angle, "incline"), p.Value, anything, "incline")
	r.path("line."+e.name+".incline", p.Value.Place())
	if v.bad {
		e.bad = true
		return
	}
	// Chosen: rounding of 90 deg given in other units is let pass.
	if x := r.num(v.prog); math.Abs(x) > math.Pi/2*(1+1e-12) {
		r.errorAt(p.Value.Place(), "out-of-range", "an incline lies between -90 deg and 90 deg", r.shown(x, v.dim, p.Value), "")
		e.bad = true
		return
	}
	if x, constant := v.prog.IsConst(); constant && x == 0 {
		return
	}
	r.tmpl.Model.Lines[e.index].Incline = v.prog
	e.incline = &v.prog
}

// tensionPlace is where the tension of a line is said.
type tensionPlace struct {
	mean bool
	at   placeOf
}

// lineTensionPlace resolves `tension T at PLACE`.
func (r *resolver) lineTensionPlace(e *lineEntry) (tensionPlace, bool) {
	if name, ok := e.at.Name.Plain(); ok && e.at.Offset == nil {
		if name == "mean" {
			return tensionPlace{mean: true}, true
		}
		if el, own := e.own[name]; own && (el.node >= 0 || e.incline == nil) {
			return tensionPlace{at: placeOf{Line: el.line, Node: el.node, Segment: el.segment}}, true
		}
		if name == e.name && e.incline == nil {
			return tensionPlace{mean: true}, true
		}
	}
	p, ok := r.place(e.ownSpot(), "tension")
	if ok && p.Line != e.index {
		r.errorAt(e.at.Span, "wrong-place", "the tension of a line is said at a place of that line", "", "")
		return tensionPlace{}, false
	}
	return tensionPlace{at: p}, ok
}

// ownSpot is the place of the line's tension, with a part of its own line told
// apart from those of others of the same name.
func (e *lineEntry) ownSpot() *syntax.Spot {
	name, ok := e.at.Name.Plain()
	if _, own := e.own[name]; !ok || !own {
		return e.at
	}
	spot, full := *e.at, *e.at.Name
	full.Parts = append([]syntax.Label{{At: full.At, Text: e.name}}, full.Parts...)
	spot.Name = &full
	return &spot
}

// lineTension checks the place of a line's tension and, where the line is
// inclined, works out the tension of every segment from it.
func (r *resolver) lineTension(e *lineEntry) {
	var at tensionPlace
	ok := true
	if e.at != nil {
		at, ok = r.lineTensionPlace(e)
	}
	if e.incline == nil {
		return
	}
	line := &r.tmpl.Model.Lines[e.index]
	switch {
	case !ok:
		e.bad = true
	case e.bad || len(line.Nodes) != len(line.Segments)+1:
	case e.at == nil:
		r.errorAt(e.tensAt, "tension-place", "the tension of an inclined line varies along it, so that it is said where", "no place is said",
			fmt.Sprintf("tension %s at %s", clip(e.tensAtExpr()), line.Nodes[0].Name))
		e.bad = true
	default:
		r.weigh(e, line, at)
	}
}

// tensAtExpr is the tension of the line as written.
func (e *lineEntry) tensAtExpr() syntax.Expr {
	for _, item := range e.stmt.Items {
		if p, ok := item.(*syntax.LineProperty); ok && p.Word.Text == "tension" {
			return p.Value
		}
	}
	return nil
}

// maxWeighed bounds the instructions that the tensions of all inclined lines may
// take together: each reads the masses of everything before it. Chosen: about
// 100 MB while they are put together, 1000 joints with a let each.
const maxWeighed = 4_000_000

// weigh gives every segment of an inclined line its tension,
//
//	dT/dx = m g sin(incline), and + M g sin(incline) over a joint of mass M,
//
// with x in walking order, so that the tension grows uphill: equilibrium along
// the chord of a line whose sag is small. The tension at a joint is that behind
// it. Masses hung from a joint weigh on it; those of ties, sensors and supports
// are not counted. Source: equilibrium along the line.
func (r *resolver) weigh(e *lineEntry, line *scenario.LineOf[formula.Program], at tensionPlace) {
	n := len(line.Segments)
	above := make([]formula.Program, n) // kg, mass between the line's start and each segment's
	sum := formula.Const(0)
	for i := range line.Segments {
		s := &line.Segments[i]
		if i > 0 {
			sum = formula.Add(sum, hung(&line.Nodes[i]))
		}
		above[i] = sum
		sum = formula.Add(sum, formula.Mul(s.MassPerLength, s.Length))
		if !r.mayWeigh(e, 3*len(sum.Code)+len(e.tension.Code)) {
			return
		}
	}
	reference := sum
	switch {
	case at.mean:
		mean, ok := r.meanAbove(e, line)
		if !ok {
			return
		}
		reference = mean
	case at.at.Node < 0:
		reference = formula.Add(above[at.at.Segment], formula.Mul(line.Segments[at.at.Segment].MassPerLength, at.at.Offset))
	case at.at.Node < n:
		reference = above[at.at.Node]
	}
	if !r.mayWeigh(e, n*len(reference.Code)) {
		return
	}
	pull := formula.Mul(formula.Const(unit.StandardGravity), formula.Apply(formula.OpSin, *e.incline)) // m/s^2 along the line
	for i := range line.Segments {
		s := &line.Segments[i]
		s.Tension = formula.Add(*e.tension, formula.Mul(pull, formula.Sub(above[i], reference)))
		s.TensionRise = formula.Mul(pull, s.MassPerLength)
	}
	r.pulls(e, line)
}

// hung is the mass that a joint carries, kg: its own and what is tuned to it.
func hung(n *scenario.NodeOf[formula.Program]) formula.Program {
	m := n.Mass
	for _, t := range n.Tuned {
		m = formula.Add(m, t.Mass)
	}
	return m
}

// meanAbove is the mass between the line's start and a place, averaged over the
// places of the line, kg. Every mass counts with the share of the line behind it.
func (r *resolver) meanAbove(e *lineEntry, line *scenario.LineOf[formula.Program]) (formula.Program, bool) {
	length := formula.Const(0)
	for i := range line.Segments {
		length = formula.Add(length, line.Segments[i].Length)
	}
	moment, left := formula.Const(0), length // kg m; m of line behind the place
	for i := range line.Segments {
		s := &line.Segments[i]
		if i > 0 {
			moment = formula.Add(moment, formula.Mul(hung(&line.Nodes[i]), left))
		}
		own := formula.Mul(s.MassPerLength, s.Length)
		moment = formula.Add(moment, formula.Mul(own, formula.Sub(left, formula.Mul(formula.Const(0.5), s.Length))))
		left = formula.Sub(left, s.Length)
		if !r.mayWeigh(e, len(moment.Code)+len(left.Code)) {
			return moment, false
		}
	}
	return formula.Div(moment, length), true
}

// mayWeigh counts instructions of the tensions of inclined lines and refuses the
// line where there are too many.
func (r *resolver) mayWeigh(e *lineEntry, instructions int) bool {
	if r.weighed += instructions; r.weighed <= maxWeighed {
		return true
	}
	r.tooHeavy(e)
	return false
}

// tooHeavy refuses an inclined line whose tensions have too many parts.
func (r *resolver) tooHeavy(e *lineEntry) {
	r.errorAt(e.stmt.Name.Span, "too-long", "the tensions along this inclined line have too many parts to compute with", "", "use fewer lets for its masses and lengths")
	e.bad = true
}

// pulls refuses an inclined line that would push somewhere. It may come down to
// no tension at an end, within the binder's slack.
func (r *resolver) pulls(e *lineEntry, line *scenario.LineOf[formula.Program]) {
	for i := range line.Segments {
		s := &line.Segments[i]
		low, high := r.segmentEnds(s)
		if low < -1e-9*math.Max(math.Abs(low), math.Abs(high)) || math.IsNaN(low) {
			r.errorAt(e.tensAt, "not-positive", "the weight of this inclined line leaves no tension in "+s.Name,
				"it comes down to "+unit.Format(low, unit.Force.Dim, unit.SI, 4), "")
			e.bad = true
			return
		}
	}
}

// segmentEnds are the lower and the higher tension of a segment, N.
func (r *resolver) segmentEnds(s *scenario.SegmentOf[formula.Program]) (low, high float64) {
	start := r.num(s.Tension)
	end := start + r.num(s.TensionRise)*r.num(s.Length)
	return math.Min(start, end), math.Max(start, end)
}

// lineSag gives a line its sag term where it is asked for and can be had.
func (r *resolver) lineSag(e *lineEntry, line *scenario.LineOf[formula.Program]) {
	if e.sag.IsZero() {
		return
	}
	if e.sideways {
		e.sags = sagsElsewhere(line, r) && !e.weighted
		return
	}
	for i := range line.Segments {
		s := &line.Segments[i]
		if r.num(s.Axial) <= 0 {
			r.errorAt(e.sag, "missing-property", "sag wants the axial stiffness of every segment", "that of "+s.Name+" is not known: "+s.Stock+" does not say it", "axial 100 MN")
			return
		}
		if line.Nodes[i].Holds && i > 0 {
			r.errorAt(e.sag, "contradiction", "the sag of a line that a joint holds is not that of one line", "the joint "+line.Nodes[i].Name+" keeps the extra tension of one side from the other", "write the parts as lines of their own")
			return
		}
	}
	if e.weighted {
		r.warnAt(e.sag, "no-effect", "sag has no effect on this line", "a weighted end keeps its tension as it is", "")
		return
	}
	line.Sag, e.sags = true, true
}

// lineStretch lets the tension of a line grow with its amplitude where that is
// asked for and can be had.
func (r *resolver) lineStretch(e *lineEntry, line *scenario.LineOf[formula.Program]) {
	if e.stretch.IsZero() {
		return
	}
	for i := range line.Segments {
		s := &line.Segments[i]
		if r.num(s.Axial) <= 0 {
			r.errorAt(e.stretch, "missing-property", "stretch wants the axial stiffness of every segment", "that of "+s.Name+" is not known: "+s.Stock+" does not say it", "axial 100 MN")
			return
		}
		if line.Nodes[i].Holds && i > 0 {
			r.errorAt(e.stretch, "contradiction", "the tension of a line that a joint holds does not grow along the whole of it", "the joint "+line.Nodes[i].Name+" holds", "write the parts as lines of their own")
			return
		}
	}
	if e.weighted {
		r.warnAt(e.stretch, "no-effect", "stretch has no effect on this line", "a weighted end keeps its tension as it is", "")
		return
	}
	line.Stretch = true
}

// sagsElsewhere tells whether a line that is looked at sideways can have the sag
// term for what is read in its vertical plane.
func sagsElsewhere(line *scenario.LineOf[formula.Program], r *resolver) bool {
	for i := range line.Segments {
		if r.num(line.Segments[i].Axial) <= 0 || i > 0 && line.Nodes[i].Holds {
			return false
		}
	}
	return true
}
