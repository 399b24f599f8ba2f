package resolve

import (
	"strings"

	"github.com/tautspan/tautspan/dsl/diag"
	"github.com/tautspan/tautspan/dsl/syntax"
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// nodeWords are the properties that a support or a joint says.
type nodeWords struct {
	name syntax.Label
	said map[string]diag.Span
}

// turnWords say how a support turns, beside the kinds that say it themselves.
var turnWords = []string{"turning", "rotary", "guided"}

// kindWords say what a support is across the line.
var kindWords = []string{"fixed", "free", "absorbing", "pinned", "clamped", "spring", "dashpot", "mass"}

// turnConflicts refuses what exclude one another in turning, and a support that
// says nothing else.
func (n *nodeReader) turnConflicts() {
	r := n.r
	if at, ok := n.said["hinge"]; ok {
		if n.support {
			r.errorAt(at, "misplaced", "a hinge stands at a joint", "an end that turns freely is pinned, or turning", "pinned")
		}
		if other := present(n.said, "clamped", "guided", "rotary", "inertia"); len(other) > 0 {
			r.errorAt(n.said[other[0]], "contradiction", "hinge and "+other[0]+" exclude one another", "at a hinge the two sides turn each on their own, so that neither has this "+other[0], "")
		}
	}
	list := present(n.said, "pinned", "clamped", "turning", "rotary", "guided")
	if len(list) > 1 && !(list[0] == "pinned" && list[1] == "clamped" || list[0] == "clamped" && list[1] == "pinned") {
		r.errorAt(n.said[list[1]], "contradiction", strings.Join(list[:2], " and ")+" exclude one another", "each says how the line turns here", "")
	}
	if n.support && len(n.said) > 0 && first(n.said, kindWords...) == "" {
		word := present(n.said, "turning", "rotary", "guided", "axial", "weighted")
		if len(word) > 0 {
			r.errorAt(n.said[word[0]], "missing-property", "the support "+n.name.Text+" does not say what holds it across the line", word[0]+" alone leaves that open", "support "+n.name.Text+" fixed, "+word[0])
		}
	}
}

// turns judges how the nodes of a line turn, now that it is known where the
// line has bending.
func (r *resolver) turns(e *lineEntry, line *scenario.LineOf[formula.Program]) {
	for i := range line.Nodes {
		words, ok := e.nodes[i]
		if !ok {
			continue
		}
		node := &line.Nodes[i]
		before := i > 0 && mayBend(line.Segments[i-1].Bending)
		after := i < len(line.Segments) && mayBend(line.Segments[i].Bending)
		switch {
		case !before && !after:
			r.turnless(node, words)
		case node.Kind == scenario.Support:
			r.supportTurns(words)
		}
	}
}

// turnless takes away what acts on turning where nothing turns.
func (r *resolver) turnless(node *scenario.NodeOf[formula.Program], words nodeWords) {
	node.Clamped, node.Hinge, node.Rotary, node.Inertia = false, false, formula.Program{}, formula.Program{}
	r.turnsNothing(words)
}

func (n *nodeReader) turnless() { n.r.turnless(n.node, nodeWords{n.name, n.said}) }

// turnsNothing remarks on words about turning where nothing bends.
func (r *resolver) turnsNothing(words nodeWords) {
	const found = "no bending stiffness ends here, so nothing is held from turning"
	if at, ok := words.said["clamped"]; ok {
		r.warnAt(at, "no-effect", "clamped is the same as fixed here", found, "fixed")
	}
	for _, w := range present(words.said, append([]string{"hinge", "inertia"}, turnWords...)...) {
		r.warnAt(words.said[w], "no-effect", w+" has no effect here", found, "")
	}
}

// supportTurns wants a support of a line with bending to say how it turns. What
// is free across the line turns freely; fixed is not guessed at.
func (r *resolver) supportTurns(words nodeWords) {
	name := words.name.Text
	if at, ok := words.said["absorbing"]; ok {
		r.warnAt(at, "absorbs-partly", "the end takes in the waves of a string, and this line bends", "short waves run faster and come back in part", "")
		return
	}
	if first(words.said, "pinned", "clamped", "turning", "rotary", "guided", "free") != "" {
		return
	}
	if at, ok := words.said["fixed"]; ok {
		r.errorAt(at, "turning-unsaid", "the support of a line with bending says how it turns", "fixed leaves it open",
			"support "+name+" pinned (turns freely), support "+name+" clamped (does not turn), or support "+name+" fixed, rotary 100 kN*m/rad")
		return
	}
	r.warnAt(words.name.Span, "turning-assumed", "the support "+name+" does not say how it turns", "it is taken to turn freely", "turning")
}
