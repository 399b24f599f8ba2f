package resolve

import (
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// vibrates refuses a natural frequency or a damping ratio of a scenario that has
// none: what does not answer in proportion is not linearised.
func (r *resolver) vibrates(c *syntax.Call) bool {
	what := r.notLinear(true)
	if what == "" {
		return true
	}
	r.errorAt(c.Span, "not-linear", c.Name.Text+" is not defined with "+what, "it is refused, not linearised: the answer would hang on the amplitude", "")
	return false
}

// proportional refuses a steady answer of a scenario that does not answer in
// proportion; a damper known by its bench record does.
func (r *resolver) proportional(c *syntax.Call) bool {
	what := r.notLinear(false)
	if what == "" {
		return true
	}
	r.errorAt(c.Span, "not-linear", c.Name.Text+" is not defined with "+what, "it is refused, not linearised: the answer would hang on the amplitude", "")
	return false
}

// notLinear names the first thing of the model without natural vibrations, or "";
// dampers by their bench records are among them where benches says so.
func (r *resolver) notLinear(benches bool) string {
	for i := range r.tmpl.Model.Lines {
		line := &r.tmpl.Model.Lines[i]
		if line.Stretch {
			return "tension that grows with amplitude (" + line.Name + ")"
		}
		for k := range line.Nodes {
			if what := unsteady(&line.Nodes[k], benches); what != "" {
				return what + " (" + line.Name + "." + line.Nodes[k].Name + ")"
			}
		}
		for k := range line.Segments {
			s := &line.Segments[k]
			if s.Law != nil {
				return "a law along a segment (" + line.Name + "." + s.Name + ")"
			}
			for j := range s.Every {
				if what := unsteady(&s.Every[j].Joint, benches); what != "" {
					return what + " (" + line.Name + "." + s.Name + ")"
				}
			}
		}
	}
	for i := range r.tmpl.Model.Ties {
		if t := &r.tmpl.Model.Ties[i]; t.Slack {
			return "a tie that goes slack (" + t.Name + ")"
		}
	}
	return ""
}

func unsteady(n *scenario.NodeOf[formula.Program], benches bool) string {
	for _, l := range n.Laws {
		switch {
		case l.Friction != nil:
			return "friction"
		case l.Stop != nil:
			return "a stop"
		default:
			return "a law"
		}
	}
	if benches && len(n.Benches) > 0 {
		return "a damper known only by its bench record"
	}
	return ""
}
