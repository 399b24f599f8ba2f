package resolve

import (
	"fmt"
	"math"
	"strings"

	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

type placeOf = scenario.PlaceOf[formula.Program]

// element kinds that find may return besides those of a line's parts.
const lineKind = "line"

// find looks up a name that must be a line or a part of one.
func (r *resolver) find(n *syntax.Name, subject string) (element, bool) {
	for _, p := range n.Parts {
		if p.Index != nil || p.Quoted {
			r.notYet(n.Span, "a name made from a row outside the block that goes through the rows", "inside it hanger[ROW.mark] makes hanger_H1 of a row with the mark H1; write that")
			return element{}, false
		}
	}
	text := n.Parts[0].Text
	switch len(n.Parts) {
	case 1:
		if l, ok := r.lines[text]; ok {
			return element{kind: lineKind, line: l.index, node: -1, segment: -1, span: l.stmt.Name.Span}, true
		}
		els := r.elements[text]
		if len(els) == 1 {
			return els[0], true
		}
		if len(els) > 1 {
			r.ambiguous(n, els)
			return element{}, false
		}
	case 2:
		l, ok := r.lines[text]
		if ok {
			if el, ok := l.own[n.Parts[1].Text]; ok {
				return el, true
			}
			if !l.stmt.Incomplete {
				hint := nearest(r, n.Parts[1].Text, l.own)
				if hint != "" {
					hint = text + "." + hint
				}
				r.errorAt(n.Parts[1].Span, "unknown-name", fmt.Sprintf("the line %s has no part called %s", text, n.Parts[1].Text), "", hint)
			}
			return element{}, false
		}
	}
	r.unknownPlace(n, text, subject)
	return element{}, false
}

func (r *resolver) ambiguous(n *syntax.Name, els []element) {
	var names []string
	for i, el := range els {
		if i == 4 {
			names = append(names, "…")
			break
		}
		names = append(names, r.tmpl.Model.Lines[el.line].Name+"."+n.Parts[0].Text)
	}
	r.errorAt(n.Span, "ambiguous-name", "several lines have a part called "+n.Parts[0].Text, "say which line", strings.Join(names, " or "))
}

func (r *resolver) unknownPlace(n *syntax.Name, text, subject string) {
	if r.broken[text] || r.partsUnsure {
		return
	}
	if s, ok := r.top[text]; ok && len(n.Parts) == 1 {
		r.errorAt(n.Span, "unknown-name", fmt.Sprintf("%s wants a part of a line, and %s is %s", subject, text, article(s.kind)), "", "", related(s.span, "said here"))
		return
	}
	hint := nearest(r, text, r.elements)
	if hint == "" {
		hint = nearest(r, text, r.lines)
	}
	r.errorAt(n.Span, "unknown-name", "no part of a line is called "+clip(n), "", hint)
}

// place resolves a point of a line.
func (r *resolver) place(s *syntax.Spot, subject string) (placeOf, bool) {
	if out, ok, mine := r.rowPlace(s, subject); mine {
		return out, ok
	}
	el, ok := r.find(s.Name, subject)
	if !ok {
		return placeOf{}, false
	}
	out := placeOf{Line: el.line, Node: el.node, Segment: el.segment}
	if s.Offset == nil {
		if el.node >= 0 {
			return out, true
		}
		what := article(el.kind)
		hint := clip(s.Name) + " 50 %"
		if el.kind == lineKind {
			hint = ""
		}
		r.errorAt(s.Span, "wrong-place", subject+" wants a point", "this is "+what+", which is a stretch", hint)
		return out, false
	}
	if el.kind != "segment" {
		r.errorAt(s.Offset.Place(), "wrong-place", "only a segment has a distance into it", clip(s.Name)+" is "+article(el.kind), clip(s.Name))
		return out, false
	}
	return r.offset(s, el, out)
}

// offset compiles the distance into a segment.
func (r *resolver) offset(s *syntax.Spot, el element, out placeOf) (placeOf, bool) {
	v := r.compile(s.Offset, plain)
	if v.bad {
		return out, false
	}
	seg := &r.tmpl.Model.Lines[el.line].Segments[el.segment]
	switch {
	case v.dim == unit.Length.Dim:
		out.Offset = v.prog
	case v.dim.IsNumber() && v.angle == 0 && !v.bare:
		out.Offset = formula.Mul(v.prog, seg.Length)
	case v.bare:
		r.errorAt(s.Offset.Place(), "missing-unit", "a place in a segment is a length or a percentage", "this number has no unit", clip(s.Offset)+" m")
		return out, false
	default:
		r.errorAt(s.Offset.Place(), "wants-length", "a place in a segment is a length or a percentage", "this is "+describe(v), "")
		return out, false
	}
	p := r.lineOrder[el.line].parts[el.segment]
	if !p.sound {
		return out, true
	}
	x, length := r.num(out.Offset), r.num(seg.Length)
	// The same slack as the binder's: rounding must not refuse the end of a segment.
	slack := 1e-9 * length
	if !(x >= -slack && x <= length+slack) || math.IsInf(x, 0) {
		r.errorAt(s.Offset.Place(), "place-outside", unit.Format(x, unit.Length.Dim, unit.SI, 6)+" lies outside the segment "+clip(s.Name),
			fmt.Sprintf("%s is %s long", clip(s.Name), unit.Format(length, unit.Length.Dim, unit.SI, 6)), "")
		return out, false
	}
	return out, true
}

// span resolves a stretch: a line or a segment.
func (r *resolver) span(s *syntax.Spot, subject string, lineOnly bool) (scenario.SpanOf, bool) {
	el, ok := r.find(s.Name, subject)
	if !ok {
		return scenario.SpanOf{}, false
	}
	out := scenario.SpanOf{Line: el.line, Segment: el.segment}
	switch {
	case s.Offset != nil:
		r.errorAt(s.Offset.Place(), "wrong-place", subject+" wants a whole line or segment", "this is a point of it", clip(s.Name))
	case el.kind == lineKind:
		return out, true
	case lineOnly:
		r.errorAt(s.Span, "wrong-place", subject+" wants a line", clip(s.Name)+" is "+article(el.kind), r.tmpl.Model.Lines[el.line].Name)
	case el.kind != "segment":
		r.errorAt(s.Span, "wrong-place", subject+" wants a line or a segment", clip(s.Name)+" is "+article(el.kind), "")
	default:
		return out, true
	}
	return out, false
}
