package resolve

import (
	"fmt"
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/dsl/unit"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// nodeProperties compiles what stands at a support or a joint.
func (r *resolver) nodeProperties(e *lineEntry, node *scenario.NodeOf[formula.Program], name syntax.Label, list []syntax.Property, support bool) {
	path := "line." + e.name + "." + name.Text
	r.path(path, name.Span)
	said := map[string]diag.Span{}
	n := nodeReader{r: r, line: e, node: node, path: path, support: support, said: said, name: name}
	e.nodes[len(r.tmpl.Model.Lines[e.index].Nodes)] = nodeWords{name, said}
	n.all(list)
	n.conflicts()
}

// all compiles a list of properties.
func (n *nodeReader) all(list []syntax.Property) {
	for i := range list {
		p := &list[i]
		word := p.Word.Text
		if before, ok := n.said[word]; ok && !contains(several, word) {
			n.r.errorAt(p.Word.Span, "said-twice", n.name.Text+" says "+word+" already", "", "", related(before, "first said here"))
			continue
		}
		if _, ok := n.said[word]; !ok {
			n.said[word] = p.Word.Span
		}
		n.property(p)
	}
}

// several are the properties of which more than one may stand at a place.
var several = []string{"tuned", "dashpot", "stop", "friction", "law", "impedance"}

// nodeReader compiles the properties of one node.
type nodeReader struct {
	r       *resolver
	line    *lineEntry
	node    *scenario.NodeOf[formula.Program]
	name    syntax.Label
	path    string
	support bool
	said    map[string]diag.Span
}

// property compiles one property.
func (n *nodeReader) property(p *syntax.Property) {
	r := n.r
	switch word := p.Word.Text; word {
	case "fixed", "pinned":
		n.node.Fixed = true
	case "clamped":
		n.node.Fixed, n.node.Clamped = true, true
	case "guided":
		n.node.Clamped = true
	case "rotary":
		n.node.Rotary = r.quantity(p.Value, unit.Rotary, notNegative, "rotary", n.path+".rotary")
	case "free", "turning":
	case "absorbing":
		n.node.Absorbing = true
	case "holds":
		n.node.Holds = true
	case "mass":
		n.node.Mass = r.quantity(p.Value, unit.Mass, notNegative, "mass", n.path+".mass")
	case "spring":
		n.node.Spring = r.quantity(p.Value, unit.Spring, notNegative, "spring", n.path+".spring")
		if p.Loss != nil {
			n.node.SpringLoss = r.quantity(p.Loss, unit.Share, notNegative, "a loss factor", "")
		}
	case "dashpot":
		n.dashpot(p)
	case "tuned":
		n.tuned(p)
	case "axial":
		n.node.AxialGive = r.quantity(p.Value, unit.Spring, positive, "axial", n.path+".axial")
	case "weighted":
		n.line.weighted = true
		r.tmpl.Model.Lines[n.line.index].Weighted = true
	default:
		n.further(p)
	}
}

// further compiles the properties that turn, or that are not linear.
func (n *nodeReader) further(p *syntax.Property) {
	r := n.r
	switch p.Word.Text {
	case "inertia":
		n.node.Inertia = r.quantity(p.Value, unit.Inertia, notNegative, "inertia", n.path+".inertia")
	case "hinge":
		n.node.Hinge = true
	case "stop":
		n.stop(p)
	case "friction":
		f := &scenario.FrictionOf[formula.Program]{Force: r.quantity(p.Value, unit.Force, notNegative, "friction", n.path+".friction")}
		if p.Through != nil {
			f.Bracket = true
			f.Through = r.quantity(p.Through, unit.Spring, positive, "the give of a bracket", "")
		}
		n.node.Laws = append(n.node.Laws, lawOf{Name: "friction", Friction: f})
	case "impedance":
		if b, ok := r.bench(p.Call); ok {
			n.node.Benches = append(n.node.Benches, b)
		}
	case "law":
		if l, ok := r.useLaw(p.Call, unit.Force, n.path); ok {
			n.node.Laws = append(n.node.Laws, *l)
		}
	case "slack":
		r.errorAt(p.Span, "misplaced", "only a tie can be slack", "", "")
	default:
		r.notYet(p.Span, p.Word.Text, "")
	}
}

// stop compiles a stop. One without a gap is refused: the line would rest on it,
// and its rest, from which everything is measured, would be another.
func (n *nodeReader) stop(p *syntax.Property) {
	r := n.r
	gap := r.want(p.Value, plain, unit.Length, "the gap of a stop")
	r.path(n.path+".stop", p.Value.Place())
	if gap = r.inRange(gap, p.Value, anything, "the gap of a stop"); !gap.bad && r.num(gap.prog) <= 0 {
		r.errorAt(p.Value.Place(), "rests-on-stop", "the line rests on this stop already", "its gap is not above zero", "")
		gap = badValue
	}
	spring := r.quantity(p.Stiffness, unit.Spring, positive, "the spring of a stop", "")
	if gap.bad {
		return
	}
	s := &scenario.StopOf[formula.Program]{Gap: gap.prog, Spring: spring}
	switch p.Side.Text {
	case "up":
		s.Up = true
	case "down":
		s.Down = true
	default:
		s.Up, s.Down = true, true
	}
	n.node.Laws = append(n.node.Laws, lawOf{Name: "stop", Stop: s})
}

func (n *nodeReader) dashpot(p *syntax.Property) {
	r := n.r
	d := scenario.DashpotOf[formula.Program]{C: r.quantity(p.Value, unit.Dashpot, notNegative, "dashpot", n.path+".dashpot")}
	if p.Through != nil {
		d.Bracket = true
		d.Through = r.quantity(p.Through, unit.Spring, positive, "the give of a bracket", n.path+".through")
	}
	n.node.Dashpots = append(n.node.Dashpots, d)
}

func (n *nodeReader) tuned(p *syntax.Property) {
	r := n.r
	t := scenario.TunedOf[formula.Program]{
		Mass:   r.quantity(p.Value, unit.Mass, positive, "the mass of a tuned damper", n.path+".tuned"),
		Spring: r.quantity(p.Stiffness, unit.Spring, positive, "the spring of a tuned damper", ""),
	}
	if p.Loss != nil {
		t.Loss = r.quantity(p.Loss, unit.Share, notNegative, "a loss factor", "")
		n.node.Tuned = append(n.node.Tuned, t)
		return
	}
	t.Dashpot = r.quantity(p.Dashpot, unit.Dashpot, notNegative, "the dashpot of a tuned damper", "")
	n.node.Tuned = append(n.node.Tuned, t)
}

// conflicts refuses kinds that exclude one another.
func (n *nodeReader) conflicts() {
	r := n.r
	held := first(n.said, "fixed", "pinned", "clamped")
	loads := present(n.said, "spring", "dashpot", "mass", "tuned", "friction", "stop", "law", "impedance")
	alone := func(word string) {
		if at, ok := n.said[word]; ok && len(n.said) > 1 {
			for other := range n.said {
				if other != word && other != "axial" && other != "weighted" && other != "holds" && !contains(turnWords, other) {
					r.errorAt(at, "contradiction", word+" stands alone at a support", "other properties stand beside it", "")
					return
				}
			}
		}
	}
	alone("free")
	alone("absorbing")
	if kinds := present(n.said, "fixed", "pinned", "clamped"); len(kinds) > 1 {
		r.errorAt(n.said[kinds[1]], "contradiction", strings.Join(kinds, " and ")+" exclude one another", "", "")
	} else if held != "" && len(loads) > 0 {
		r.errorAt(n.said[loads[0]], "contradiction", fmt.Sprintf("what is %s does not move, so its %s does nothing", held, loads[0]), "", "")
	}
	n.turnConflicts()
	if n.support && n.node.Holds {
		r.errorAt(n.said["holds"], "misplaced", "holds stands at a joint; a support holds the line anyway", "", "")
	}
	if !n.support && n.node.Absorbing {
		r.errorAt(n.said["absorbing"], "misplaced", "absorbing is a kind of support", "", "")
	}
}

// first is the first of the words that was said.
func first(said map[string]diag.Span, words ...string) string {
	for _, w := range words {
		if _, ok := said[w]; ok {
			return w
		}
	}
	return ""
}

// present lists the words that were said, in the order of the text.
func present(said map[string]diag.Span, words ...string) []string {
	var out []string
	for _, w := range words {
		at, ok := said[w]
		if !ok {
			continue
		}
		i := len(out)
		for i > 0 && said[out[i-1]].Start > at.Start {
			i--
		}
		out = append(out[:i], append([]string{w}, out[i:]...)...)
	}
	return out
}
