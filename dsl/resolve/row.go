package resolve

import (
	"fmt"
	"strconv"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// every compiles `every SPACING [from FIRST] PROPERTY, …` of a segment: a row of
// like joints, the first one spacing from the segment's start unless it says where.
func (r *resolver) every(e *lineEntry, s *syntax.Every, out *scenario.SegmentOf[formula.Program], sound bool, path string) {
	path += ".every"
	r.path(path, s.Span)
	spacing := r.inRange(r.want(s.Spacing, plain, unit.Length, "the spacing of every"), s.Spacing, positive, "the spacing of every")
	first := spacing
	if s.First != nil {
		first = r.inRange(r.want(s.First, plain, unit.Length, "the first place of every"), s.First, positive, "the first place of every")
	}
	row := scenario.EveryOf[formula.Program]{Spacing: spacing.prog, First: first.prog, Joint: scenario.NodeOf[formula.Program]{Name: "every", Kind: scenario.Joint}}
	n := nodeReader{r: r, line: e, node: &row.Joint, path: path, said: map[string]diag.Span{}, name: syntax.Label{At: s.At, Text: "every"}}
	n.all(s.Properties)
	n.conflicts()
	if at, ok := n.said["holds"]; ok {
		r.errorAt(at, "misplaced", "joints of a row do not hold a change of tension", "along a segment the tension is one", "write a joint that holds between two segments")
		return
	}
	if words := present(n.said, "mass", "tuned"); len(words) > 0 && e.incline != nil {
		r.notYet(n.said[words[0]], "the weight of a row of joints along an inclined line", "write each as a joint")
		return
	}
	if !mayBend(out.Bending) {
		n.turnless()
	}
	if spacing.bad || first.bad || !sound {
		return
	}
	count := scenario.EveryCount(r.num(out.Length), r.num(first.prog), r.num(spacing.prog))
	if r.joints+count > scenario.MostEvery {
		r.errorAt(s.Spacing.Place(), "too-many", fmt.Sprintf("the rows of a scenario make at most %d joints", scenario.MostEvery), "", "make the spacing wider")
		return
	}
	if count == 0 {
		r.warnAt(s.Span, "no-effect", "no joint of this row stands inside the segment", "the first would stand at "+unit.Format(r.num(first.prog), unit.Length.Dim, unit.SI, 4), "")
	}
	r.joints += count
	out.Every = append(out.Every, row)
}

// rowPlace resolves a joint that `every` made: SEGMENT.3 or LINE.SEGMENT.3. It
// reports false where the name is no such one.
func (r *resolver) rowPlace(s *syntax.Spot, subject string) (out placeOf, ok, mine bool) {
	parts := s.Name.Parts
	last := len(parts) - 1
	if last < 1 || last > 2 || parts[last].Index != nil || parts[last].Quoted {
		return out, false, false
	}
	number, err := strconv.Atoi(parts[last].Text)
	if err != nil {
		return out, false, false
	}
	short := *s.Name
	short.Parts = parts[:last]
	el, found := r.find(&short, subject)
	if !found {
		return out, false, true
	}
	if el.kind != "segment" {
		r.errorAt(s.Name.Span, "unknown-name", "only a segment has joints by number", r.tmpl.Model.Lines[el.line].Name+" "+parts[last-1].Text+" is "+article(el.kind), "")
		return out, false, true
	}
	if s.Offset != nil {
		r.errorAt(s.Offset.Place(), "wrong-place", "only a segment has a distance into it", clip(s.Name)+" is a joint", clip(s.Name))
		return out, false, true
	}
	seg := &r.tmpl.Model.Lines[el.line].Segments[el.segment]
	left := number
	for i := range seg.Every {
		e := &seg.Every[i]
		n := scenario.EveryCount(r.num(seg.Length), r.num(e.First), r.num(e.Spacing))
		if left >= 1 && left <= n {
			at := formula.Add(e.First, formula.Mul(formula.Const(float64(left-1)), e.Spacing))
			return placeOf{Line: el.line, Node: -1, Segment: el.segment, Offset: at}, true, true
		}
		left -= n
	}
	total := number - left
	found2 := fmt.Sprintf("its joints go from %s.1 to %s.%d", seg.Name, seg.Name, total)
	if total == 0 {
		found2 = "it has no `every`"
	}
	r.errorAt(parts[last].Span, "unknown-name", fmt.Sprintf("the segment %s has no joint number %d", seg.Name, number), found2, "")
	return out, false, true
}
