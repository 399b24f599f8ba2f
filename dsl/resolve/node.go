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
	for i := range list {
		p := &list[i]
		word := p.Word.Text
		if before, ok := said[word]; ok && word != "tuned" && word != "dashpot" {
			r.errorAt(p.Word.Span, "said-twice", name.Text+" says "+word+" already", "", "", related(before, "first said here"))
			continue
		}
		if _, ok := said[word]; !ok {
			said[word] = p.Word.Span
		}
		n.property(p)
	}
	n.conflicts()
}

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
			r.want(p.Loss, plain, unit.Share, "a loss factor")
			r.notYet(p.Loss.Place(), "a spring with a loss factor", "")
		}
	case "dashpot":
		n.dashpot(p)
	case "tuned":
		n.tuned(p)
	case "axial":
		n.node.AxialGive = r.quantity(p.Value, unit.Spring, positive, "axial", n.path+".axial")
		if !n.line.sag.IsZero() && !n.line.sideways {
			r.notYet(p.Span, "sag with an end that gives along the line", "")
		}
	case "weighted":
		n.line.weighted = true
		r.tmpl.Model.Lines[n.line.index].Weighted = true
	default:
		n.refused(p)
	}
}

// refused checks the dimension of what this version cannot do, and says so.
func (n *nodeReader) refused(p *syntax.Property) {
	r := n.r
	switch p.Word.Text {
	case "inertia":
		r.want(p.Value, plain, unit.Inertia, "inertia")
		r.notYet(p.Span, "an inertia against turning", "")
	case "hinge":
		r.notYet(p.Span, "a hinge within a line", "")
	case "stop":
		r.want(p.Value, plain, unit.Length, "the gap of a stop")
		r.want(p.Stiffness, plain, unit.Spring, "the spring of a stop")
		r.notYet(p.Span, "a stop", "")
	case "friction":
		r.want(p.Value, plain, unit.Force, "friction")
		if p.Through != nil {
			r.want(p.Through, plain, unit.Spring, "the give of a bracket")
		}
		r.notYet(p.Span, "friction", "")
	case "impedance":
		r.notYet(p.Span, "a damper by its bench record", "")
	case "law":
		r.notYet(p.Span, "a joint by a law", "")
	case "slack":
		r.errorAt(p.Span, "misplaced", "only a tie can be slack", "", "")
	default:
		r.notYet(p.Span, p.Word.Text, "")
	}
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
		r.want(p.Loss, plain, unit.Share, "a loss factor")
		r.notYet(p.Loss.Place(), "a tuned damper with a loss factor", "write its dashpot in N*s/m")
		return
	}
	t.Dashpot = r.quantity(p.Dashpot, unit.Dashpot, notNegative, "the dashpot of a tuned damper", "")
	n.node.Tuned = append(n.node.Tuned, t)
}

// conflicts refuses kinds that exclude one another.
func (n *nodeReader) conflicts() {
	r := n.r
	held := first(n.said, "fixed", "pinned", "clamped")
	loads := present(n.said, "spring", "dashpot", "mass", "tuned")
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
