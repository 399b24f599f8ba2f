package resolve

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// maxSegments is the most segments of one scenario.
const maxSegments = 20_000

// shortest is the share of the longest segment below which one is remarked on.
const shortest = 1e-6

// lineEntry is one line with what is needed to check it after all its parts
// are known.
type lineEntry struct {
	stmt     *syntax.Line
	name     string
	index    int
	bad      bool
	sideways bool
	sag      diag.Span         // of `sag included`, zero where it is not said
	stretch  diag.Span         // of `stretch included`
	sags     bool              // the sag term counts for what is read in the vertical plane
	weighted bool              // an end keeps the tension constant
	incline  *formula.Program  // nil for a level line
	nodes    map[int]nodeWords // what each support and joint says, by node
	tension  *formula.Program  // of the whole line
	at       *syntax.Spot      // of `tension T at PLACE`
	tensAt   diag.Span
	parts    []part // by segment
	own      map[string]element
	supports int
}

// part is what is known of a segment besides the template.
type part struct {
	stmt   *syntax.Segment
	stock  *stockEntry
	sound  bool // length, mass and tension are known
	tensAt diag.Span
}

// element is a named place: a line (node and segment -1), a node or a segment.
type element struct {
	kind    string // support, joint, segment
	line    int
	node    int // -1 for a segment
	segment int // -1 for a node
	span    diag.Span
}

// resolveLines compiles every line.
func (r *resolver) resolveLines() {
	segments := 0
	for i, e := range r.lineOrder {
		e.index = i
		e.own = map[string]element{}
		e.nodes = map[int]nodeWords{}
		r.tmpl.Model.Lines = append(r.tmpl.Model.Lines, scenario.LineOf[formula.Program]{Name: e.name})
		r.path("line."+e.name, e.stmt.Name.Span)
		r.lineProperties(e)
		r.walk(e)
		segments += len(e.parts)
		if segments > maxSegments {
			r.errorAt(e.stmt.Name.Span, "too-many", fmt.Sprintf("a scenario has at most %d segments", maxSegments), fmt.Sprintf("up to here there are %d", segments), "")
			e.bad = true
			r.partsUnsure = true
			return
		}
	}
	for _, e := range r.lineOrder {
		r.lineTension(e)
		r.lineChecks(e)
	}
}

// lineProperties compiles what holds for the whole line.
func (r *resolver) lineProperties(e *lineEntry) {
	e.bad = e.stmt.Incomplete
	said := map[string]diag.Span{}
	for _, item := range e.stmt.Items {
		p, ok := item.(*syntax.LineProperty)
		if !ok {
			continue
		}
		word := p.Word.Text
		if before, ok := said[word]; ok {
			r.errorAt(p.Word.Span, "said-twice", "this line says its "+word+" already", "", "", related(before, "first said here"))
			continue
		}
		said[word] = p.Span
		switch word {
		case "tension":
			v := r.inRange(r.want(p.Value, plain, unit.Force, "tension"), p.Value, positive, "tension")
			r.path("line."+e.name+".tension", p.Value.Place())
			e.tensAt, e.at = p.Value.Place(), p.Spot
			e.tension = &v.prog
			line := &r.tmpl.Model.Lines[e.index]
			line.TensionSaid, line.SaidTension = !v.bad, v.prog
			e.bad = e.bad || v.bad
		case "incline":
			r.lineIncline(e, p)
		case "sag":
			e.sag = p.Span
		case "stretch":
			e.stretch = p.Span
		case "plane":
			e.sideways = p.Choice.Text == "sideways"
			r.tmpl.Model.Lines[e.index].Sideways = e.sideways
		case "at":
			v := r.want(p.Value, plain, unit.Temperature, "a temperature")
			if !v.bad {
				v = r.inRange(v, p.Value, positive, "a temperature above absolute zero")
			}
			line := &r.tmpl.Model.Lines[e.index]
			line.Warm, line.Temperature = !v.bad, v.prog
			r.path("line."+e.name+".at", p.Value.Place())
		}
	}
}

// walk compiles the elements in walking order.
func (r *resolver) walk(e *lineEntry) {
	line := &r.tmpl.Model.Lines[e.index]
	for _, item := range e.stmt.Items {
		switch s := item.(type) {
		case *syntax.Support:
			r.addSupport(e, line, s)
		case *syntax.Joint:
			r.addJoint(e, line, s)
		case *syntax.Segment:
			r.addSegment(e, line, s)
		}
	}
	if e.stmt.Incomplete {
		return
	}
	switch {
	case len(line.Segments) == 0:
		r.errorAt(e.stmt.Name.Span, "line-ends", "the line "+e.name+" has no segment", "", "")
		e.bad = true
	case len(line.Nodes) != len(line.Segments)+1 || line.Nodes[len(line.Nodes)-1].Kind != scenario.Support:
		at := e.stmt.Name.Span
		if n := len(e.stmt.Items); n > 0 {
			at = firstWord(e.stmt.Items[n-1].Place())
		}
		r.errorAt(at, "line-ends", "a line ends with a support", "nothing stands behind this", "support b fixed")
		e.bad = true
	}
}

// addElement gives a name within a line.
func (r *resolver) addElement(e *lineEntry, name syntax.Label, el element) bool {
	if name.Index != nil {
		r.notYet(name.Span, "a name made from a row outside the block that goes through the rows", "inside it hanger[ROW.mark] makes hanger_H1 of a row with the mark H1; write that")
		return false
	}
	el.line, el.span = e.index, name.Span
	if before, ok := e.own[name.Text]; ok {
		r.errorAt(name.Span, "duplicate-name", fmt.Sprintf("%s is the name of %s of this line already", name.Text, article(before.kind)), "", "", related(before.span, "first said here"))
		return false
	}
	if before, ok := r.lines[name.Text]; ok {
		r.errorAt(name.Span, "duplicate-name", name.Text+" is the name of a line already", "", "", related(before.stmt.Name.Span, "first said here"))
		return false
	}
	if name.Text == "mean" {
		r.errorAt(name.Span, "reserved-name", "mean cannot name a part of a line", "it is the mean tension", "")
		return false
	}
	e.own[name.Text] = el
	r.elements[name.Text] = append(r.elements[name.Text], el)
	return true
}

// addSupport adds a support, which stands at an end.
func (r *resolver) addSupport(e *lineEntry, line *scenario.LineOf[formula.Program], s *syntax.Support) {
	switch {
	case len(line.Nodes) == 0:
	case len(line.Nodes) > len(line.Segments):
		r.errorAt(firstWord(s.Span), "line-order", "between two supports stands a segment", "", "")
		e.bad = true
		return
	case e.supports > 1:
		r.errorAt(firstWord(s.Span), "line-order", "a line ends with its second support", "an inner support is a joint", "joint "+s.Name.Text+" fixed")
		e.bad = true
		return
	}
	e.supports++
	if e.supports > 2 {
		e.bad = true
		return
	}
	node := scenario.NodeOf[formula.Program]{Name: s.Name.Text, Kind: scenario.Support}
	r.addElement(e, s.Name, element{kind: "support", node: len(line.Nodes), segment: -1})
	r.nodeProperties(e, &node, s.Name, s.Properties, true)
	line.Nodes = append(line.Nodes, node)
}

// addJoint adds a joint, which stands between two segments.
func (r *resolver) addJoint(e *lineEntry, line *scenario.LineOf[formula.Program], s *syntax.Joint) {
	switch {
	case len(line.Nodes) == 0:
		r.errorAt(firstWord(s.Span), "line-ends", "a line begins with a support", "this is a joint", "")
		e.bad = true
		line.Nodes = append(line.Nodes, scenario.NodeOf[formula.Program]{Kind: scenario.Support})
		r.addElement(e, s.Name, element{kind: "joint", node: 0, segment: -1})
		return
	case e.supports > 1:
		r.errorAt(firstWord(s.Span), "line-order", "a line ends with its second support", "this stands behind it", "")
		e.bad = true
		return
	case len(line.Nodes) > len(line.Segments):
		r.errorAt(firstWord(s.Span), "line-order", "between two joints stands a segment", "say everything of one place at one joint", "")
		e.bad = true
		return
	}
	node := scenario.NodeOf[formula.Program]{Name: s.Name.Text, Kind: scenario.Joint}
	r.addElement(e, s.Name, element{kind: "joint", node: len(line.Nodes), segment: -1})
	r.nodeProperties(e, &node, s.Name, s.Properties, false)
	line.Nodes = append(line.Nodes, node)
}

// addSegment adds a segment, with a bare splice before it where two follow one another.
func (r *resolver) addSegment(e *lineEntry, line *scenario.LineOf[formula.Program], s *syntax.Segment) {
	switch {
	case len(line.Nodes) == 0:
		r.errorAt(firstWord(s.Span), "line-ends", "a line begins with a support", "this is a segment", "support a fixed")
		e.bad = true
		line.Nodes = append(line.Nodes, scenario.NodeOf[formula.Program]{Kind: scenario.Support})
		e.supports++
	case e.supports > 1:
		r.errorAt(firstWord(s.Span), "line-order", "a line ends with its second support", "this stands behind it; an inner support is a joint", "joint NAME fixed")
		e.bad = true
		return
	case len(line.Nodes) == len(line.Segments):
		line.Nodes = append(line.Nodes, scenario.NodeOf[formula.Program]{Kind: scenario.Splice})
	}
	r.addElement(e, s.Name, element{kind: "segment", node: -1, segment: len(line.Segments)})
	path := "line." + e.name + "." + s.Name.Text
	r.path(path, s.Name.Span)
	out := scenario.SegmentOf[formula.Program]{Name: s.Name.Text}
	p := part{stmt: s, sound: true}
	length := r.inRange(r.want(s.Length, plain, unit.Length, "the length of a segment"), s.Length, positive, "the length of a segment")
	r.path(path+".length", s.Length.Place())
	out.Length = length.prog
	p.sound = !length.bad
	p.stock = r.segmentStock(s)
	if p.stock != nil {
		out.Stock = p.stock.stmt.Name.Text
		out.MassPerLength, out.Axial, out.Strength, out.Bending = p.stock.mass, p.stock.axial, p.stock.strength, p.stock.bending
		out.Diameter, out.Expansion = p.stock.diameter, p.stock.expansion
		p.stock.loss.take(&out)
		r.path(path+".mass", p.stock.massAt)
		r.path(path+".axial", p.stock.axialAt)
		r.path(path+".strength", p.stock.strongAt)
		r.path(path+".bending", p.stock.bendAt)
	}
	p.sound = p.sound && p.stock != nil && !p.stock.bad
	r.segmentTension(e, s, &out, &p, path)
	if len(s.Losses) > 0 {
		unsure := p.stock == nil || p.stock.bad
		loss := r.losses(s.Losses, out.MassPerLength, unsure, path)
		r.internalWantsBending(loss, out.Bending, unsure)
		loss.take(&out)
		r.path(path+".loss", s.Losses[0].Span)
	} else if p.stock != nil {
		r.path(path+".loss", p.stock.loss.at)
	}
	for _, every := range s.Every {
		r.every(e, every, &out, p.sound, path)
	}
	line.Segments = append(line.Segments, out)
	e.parts = append(e.parts, p)
	e.bad = e.bad || !p.sound
}

// segmentStock looks up what a segment is made of.
func (r *resolver) segmentStock(s *syntax.Segment) *stockEntry {
	name, ok := s.Stock.Plain()
	if !ok {
		r.errorAt(s.Stock.Span, "unknown-name", "a stock has a plain name", "", "")
		return nil
	}
	if e, ok := r.stocks[name]; ok {
		return e
	}
	if r.broken[name] {
		return nil
	}
	if e := r.builtinStock(name, s.Stock.Span); e != nil {
		return e
	}
	if other, ok := r.top[name]; ok {
		r.errorAt(s.Stock.Span, "unknown-name", fmt.Sprintf("%s is %s, not a stock", name, article(other.kind)), "", "", related(other.span, "said here"))
		return nil
	}
	hint := nearest(r, name, r.stocks)
	if hint == "" && len(name) > 3 {
		hint = nearest(r, name, builtinNames())
	}
	r.errorAt(s.Stock.Span, "unknown-name", "no stock is called "+name, "", hint)
	return nil
}

// segmentTension takes the segment's own tension, or the line's.
func (r *resolver) segmentTension(e *lineEntry, s *syntax.Segment, out *scenario.SegmentOf[formula.Program], p *part, path string) {
	switch {
	case s.Tension != nil && e.incline != nil:
		r.errorAt(s.Tension.Place(), "contradiction", "the tension of an inclined line is said once, at one place of it", "along the line it follows from the weight", "")
		p.sound = false
	case s.Tension != nil:
		v := r.inRange(r.want(s.Tension, plain, unit.Force, "tension"), s.Tension, positive, "tension")
		out.Tension = v.prog
		p.tensAt = s.Tension.Place()
		p.sound = p.sound && !v.bad
	case e.tension != nil:
		out.Tension = *e.tension
		p.tensAt = e.tensAt
		p.sound = p.sound && !e.bad
	default:
		if !e.stmt.Incomplete {
			r.errorAt(s.Name.Span, "missing-property", "the segment "+s.Name.Text+" has no tension", "neither it nor its line says one", "tension 10 kN")
		}
		p.sound = false
	}
	r.path(path+".tension", p.tensAt)
}

// lineChecks judges a line as a whole.
func (r *resolver) lineChecks(e *lineEntry) {
	line := &r.tmpl.Model.Lines[e.index]
	if e.bad || len(line.Nodes) != len(line.Segments)+1 {
		return
	}
	longest := 0.0
	for i := range line.Segments {
		longest = math.Max(longest, r.num(line.Segments[i].Length))
	}
	for i := range line.Segments {
		if r.num(line.Segments[i].Length) < shortest*longest {
			r.warnAt(e.parts[i].stmt.Length.Place(), "short-segment", "this segment is shorter than a millionth of the longest", "the answers will hang on rounding", "")
		}
		if i > 0 {
			r.tensionChange(e, line, i)
		}
	}
	r.turns(e, line)
	r.lineSag(e, line)
	r.lineStretch(e, line)
	r.unlikelyLine(e, line)
}

// tensionChange wants a joint that holds wherever the tension changes.
func (r *resolver) tensionChange(e *lineEntry, line *scenario.LineOf[formula.Program], i int) {
	a, b := r.num(line.Segments[i-1].Tension), r.num(line.Segments[i].Tension)
	// Chosen: a change that rounding alone can make is none.
	changes := math.Abs(a-b) > 1e-12*math.Max(a, b)
	node := &line.Nodes[i]
	switch {
	case e.incline != nil:
		if node.Holds {
			r.warnAt(e.own[node.Name].span, "no-effect", "the joint "+node.Name+" holds nothing", "the tension of an inclined line changes by weight alone", "")
		}
	case changes && !node.Holds:
		where := "a bare splice"
		if node.Kind == scenario.Joint {
			where = "the joint " + node.Name
		}
		r.errorAt(e.parts[i].tensAt, "tension-change", "the tension changes at "+where+", which does not hold",
			fmt.Sprintf("%s before it, %s after it", unit.Format(a, unit.Force.Dim, unit.SI, 4), unit.Format(b, unit.Force.Dim, unit.SI, 4)), "joint NAME holds")
	case !changes && node.Holds && equalPrograms(line.Segments[i-1].Tension, line.Segments[i].Tension):
		r.warnAt(e.own[node.Name].span, "no-effect", "the joint "+node.Name+" holds nothing", "the tension is the same on both sides", "")
	}
}

func equalPrograms(a, b formula.Program) bool { return a.String() == b.String() }
