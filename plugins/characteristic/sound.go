package characteristic

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

// sound checks that a mesh can be worked with at all: finite numbers, indices
// that exist. A mesh made from a scenario passes; a foreign one may not.
func sound(m *mesh.Mesh) error {
	fault := func(format string, args ...any) error {
		return &solver.FaultError{Solver: name, What: fmt.Sprintf(format, args...)}
	}
	node := func(i int) bool { return i >= 0 && i < len(m.Nodes) }
	piece := func(i int) bool { return i >= 0 && i < len(m.Pieces) }
	if !(m.Timing.Every > 0) || m.Timing.Rows < 1 || !usual(m.Timing.End()) {
		return fault("the time grid has no extent")
	}
	if !usual(m.Band) || m.Band < 0 {
		return fault("the band is no frequency")
	}
	for i := range m.Pieces {
		p := &m.Pieces[i]
		switch {
		case !node(p.From) || !node(p.To) || p.From == p.To:
			return fault("piece %d lacks a node", i)
		case !positive(p.Length) || !positive(p.Tension) || !positive(p.MassPerLength) || !positive(p.TravelTime()) || !positive(p.Impedance()):
			return fault("piece %d needs a length, a tension and a mass above 0", i)
		case !atLeast0(p.Viscous) || !usual(p.X0):
			return fault("piece %d has a loss or place that is no number", i)
		}
		for _, k := range p.Marks {
			if !usual(k.At) {
				return fault("piece %d has a mark nowhere", i)
			}
		}
	}
	for i := range m.Nodes {
		n := &m.Nodes[i]
		if !atLeast0(n.Mass) || !atLeast0(n.Spring) || !atLeast0(n.Dashpot) || !usual(n.Start) || !usual(n.StartRate) {
			return fault("node %s has a property that is no number or below 0", n.Name)
		}
		for _, b := range n.Brackets {
			if math.IsNaN(b.K) || b.K < 0 || !atLeast0(b.C) || !usual(b.Start) {
				return fault("node %s has a bracket that is no number or below 0", n.Name)
			}
		}
		for k := range n.Laws {
			if !soundLaw(&n.Laws[k]) {
				return fault("node %s has a law without numbers", n.Name)
			}
		}
		if n.Motion != nil && (n.Motion.Displacement == nil || anyNaN(n.Motion.Breaks)) {
			return fault("node %s is to move but is not told how", n.Name)
		}
	}
	for i := range m.Links {
		l := &m.Links[i]
		if !node(l.A) || !node(l.B) || !atLeast0(l.Spring) || !atLeast0(l.Dashpot) {
			return fault("link %s lacks a node or a property", l.Name)
		}
	}
	spot := func(s mesh.Spot) bool {
		return node(s.Node) || s.Node < 0 && piece(s.Piece) && usual(s.At) && s.At >= 0 && s.At <= m.Pieces[s.Piece].Length
	}
	for i := range m.Pushes {
		if p := &m.Pushes[i]; !spot(p.At) || anyNaN(p.Force.Breaks) {
			return fault("push %s acts nowhere", p.Name)
		}
	}
	for i := range m.Presses {
		p := &m.Presses[i]
		for _, part := range p.Parts {
			if !piece(part.Piece) || !usual(part.From) || !usual(part.To) || !usual(part.Origin) || anyNaN(p.Force.Breaks) {
				return fault("press %s acts nowhere", p.Name)
			}
		}
	}
	for i := range m.Rolls {
		r := &m.Rolls[i]
		if r.Line < 0 || r.Line >= len(m.Lines) || !usual(r.Speed) || !usual(r.Force) || !usual(r.From) || !usual(r.Starting) {
			return fault("roll %s runs nowhere", r.Name)
		}
	}
	for i := range m.Lines {
		for _, k := range m.Lines[i].Pieces {
			if !piece(k) {
				return fault("line %s lacks a piece", m.Lines[i].Name)
			}
		}
		if err := soundSag(m, i); err != nil {
			return err
		}
	}
	for i := range m.Channels {
		for _, s := range m.Channels[i].Spots {
			if !spot(s) {
				return fault("watch %s looks nowhere", m.Channels[i].Watch)
			}
		}
	}
	return nil
}

func soundLaw(l *mesh.Law) bool {
	switch {
	case l.Friction != nil:
		return atLeast0(l.Friction.Force) && atLeast0(l.Friction.Through)
	case l.Stop != nil:
		return atLeast0(l.Stop.Gap) && atLeast0(l.Stop.Spring)
	case l.Written != nil:
		return len(l.Written.Starts) == len(l.Written.Rates) && !anyNaN(l.Written.Starts)
	}
	return false
}

func soundSag(m *mesh.Mesh, line int) error {
	sag := m.Lines[line].Sag
	if sag == nil {
		return nil
	}
	good := atLeast0(sag.Stiffness) && len(sag.Pieces) == len(m.Lines[line].Pieces)
	for _, w := range sag.Pieces {
		good = good && usual(w)
	}
	for n, w := range sag.Nodes {
		good = good && n >= 0 && n < len(m.Nodes) && usual(w)
	}
	if !good {
		return &solver.FaultError{Solver: name, What: fmt.Sprintf("the sag of line %s is no number or fits no piece", m.Lines[line].Name)}
	}
	return nil
}

func usual(v float64) bool    { return !math.IsNaN(v) && !math.IsInf(v, 0) }
func positive(v float64) bool { return usual(v) && v > 0 }
func atLeast0(v float64) bool { return usual(v) && v >= 0 }

func anyNaN(v []float64) bool {
	for _, x := range v {
		if math.IsNaN(x) {
			return true
		}
	}
	return false
}
