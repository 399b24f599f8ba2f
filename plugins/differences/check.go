package differences

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// refuses lists what keeps a mesh from being solved: numbers that no line has.
// mostNodes: ten thousand splices took minutes where a thousand take seconds.
const mostNodes = 3000

func refuses(m *mesh.Mesh) []string {
	if beyond := m.Unknown(0); len(beyond) > 0 {
		return beyond
	}
	if len(m.Nodes) > mostNodes {
		return []string{fmt.Sprintf("takes %d nodes at most, since every one costs in every step; there are %d: leave out splices that change nothing", mostNodes, len(m.Nodes))}
	}
	var out []string
	say := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }
	if !(m.Timing.Every > 0) || math.IsInf(m.Timing.Every, 0) || m.Timing.Rows < 1 {
		say("the output grid has no positive step or no rows")
	}
	nodes := len(m.Nodes)
	for i := range m.Pieces {
		p := &m.Pieces[i]
		if p.From < 0 || p.From >= nodes || p.To < 0 || p.To >= nodes {
			say("piece %d ends at a node that does not exist", i)
			continue
		}
		if !positive(p.Length) || !positive(p.MassPerLength) || !positive(p.Tension) || !positive(p.TravelTime()) {
			say("the line after %s has no positive length, mass or tension", m.Nodes[p.From].Name)
		}
		if !(p.Viscous >= 0) || math.IsInf(p.Viscous, 0) {
			say("the line after %s has a viscous loss that is negative or not finite", m.Nodes[p.From].Name)
		}
	}
	for i := range m.Nodes {
		n := &m.Nodes[i]
		bad := !notNegative(n.Mass, n.Spring, n.Dashpot)
		for _, b := range n.Brackets {
			bad = bad || !notNegative(b.K, b.C)
		}
		if bad {
			say("%s has a mass, spring or dashpot that is negative or not finite", n.Name)
		}
	}
	for _, l := range m.Links {
		if l.A < 0 || l.A >= nodes || l.B < 0 || l.B >= nodes {
			say("%s ends at a node that does not exist", l.Name)
		} else if !notNegative(l.Spring, l.Dashpot) {
			say("%s has a spring or dashpot that is negative or not finite", l.Name)
		}
	}
	return append(out, refusesActions(m)...)
}

// refusesActions looks at loads and channels, whose places must exist.
func refusesActions(m *mesh.Mesh) []string {
	var out []string
	placed := func(s mesh.Spot) bool {
		if s.Node >= 0 {
			return s.Node < len(m.Nodes)
		}
		return s.Piece >= 0 && s.Piece < len(m.Pieces) && s.At >= 0 && s.At <= m.Pieces[s.Piece].Length*(1+1e-9)
	}
	for _, p := range m.Pushes {
		if !placed(p.At) {
			out = append(out, p.Name+" acts at a place that does not exist")
		}
	}
	for _, p := range m.Presses {
		for _, part := range p.Parts {
			if part.Piece < 0 || part.Piece >= len(m.Pieces) {
				out = append(out, p.Name+" acts along a piece that does not exist")
			}
		}
	}
	for _, r := range m.Rolls {
		if r.Line < 0 || r.Line >= len(m.Lines) {
			out = append(out, r.Name+" rolls along a line that does not exist")
		}
	}
	for _, l := range m.Lines {
		for _, k := range l.Pieces {
			if k < 0 || k >= len(m.Pieces) {
				out = append(out, l.Name+" has a piece that does not exist")
			}
		}
	}
	for i := range m.Channels {
		for _, s := range m.Channels[i].Spots {
			if !placed(s) {
				out = append(out, m.Channels[i].Name()+" is read at a place that does not exist")
				break
			}
		}
	}
	return out
}

func positive(v float64) bool { return v > 0 && !math.IsInf(v, 0) }

func notNegative(values ...float64) bool {
	for _, v := range values {
		if !(v >= 0) || math.IsInf(v, 0) {
			return false
		}
	}
	return true
}
