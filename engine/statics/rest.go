package statics

import (
	"fmt"
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/scenario"
)

// Rest is the static state that plucks hold at t = 0.
type Rest struct {
	Plucks []Pluck
	grid   *grid
	shape  shape
}

// Pluck is one pluck with the force and the travel that belong together.
type Pluck struct {
	Name  string
	Force float64 // N, on the line
	Drawn float64 // m, displacement of the plucked place by this pluck alone
}

// Displacement is the static displacement at x metres along line number i, m.
func (r *Rest) Displacement(i int, x float64) float64 {
	if r.grid == nil {
		return 0
	}
	list := r.grid.elements[i]
	k := sort.Search(len(list), func(k int) bool { return list[k].x0 > x })
	e := &list[max(k-1, 0)]
	return e.displacement(r.ends(i, e), math.Min(math.Max(x-e.x0, 0), e.length))
}

// ends are the values at the ends of an element.
func (r *Rest) ends(line int, e *element) ends {
	value := func(row int) float64 {
		if row < 0 {
			return 0
		}
		return r.shape.moved[row]
	}
	return ends{value(e.at[0]), value(e.at[1]), value(e.at[2]), value(e.at[3]), r.shape.press[line] * e.weight}
}

// ExtraTension is what the plucks add to the tension of a line with sag, N; 0 of
// others.
func (r *Rest) ExtraTension(line int) float64 {
	if r.grid == nil {
		return 0
	}
	return -r.shape.press[line]
}

// Flat tells whether nothing is drawn aside.
func (r *Rest) Flat() bool { return len(r.Plucks) == 0 }

// Hold computes the static state of all plucks of a network: the exact shape
// between places that are held, sprung, tied or plucked,
//
//	(EI u'')'' - (T u')' + w h = 0,    h the extra tension of sag,
//
// straight on a string under one tension, logarithmic where tension rises, with
// exponentials of k = sqrt(T/EI) on a beam, a power series on a beam whose
// tension rises.
//
// Hung masses hang along, dashpots carry nothing at rest, moved supports count
// as held. A pluck by length is scaled by the compliance of its place, alone. A
// network on which a plucked part is held by nothing is refused with a
// *scenario.PathError.
//
// A tie that pulls and never pushes carries where the shape leaves its upper end
// above its lower one. A stop is not drawn against: that is refused. Friction and
// written laws carry nothing while the line is drawn aside.
func Hold(net *scenario.Network) (*Rest, error) {
	if len(net.Plucks) == 0 {
		return &Rest{}, nil
	}
	loosened := map[int]bool{}
	for range 2*len(net.Ties) + 2 { // chosen: each tie changes its mind once or twice
		rest, err := hold(net, loosened)
		if err != nil {
			return nil, err
		}
		if rest.settled(net, loosened) {
			return rest, rest.clear(net)
		}
	}
	return nil, &scenario.PathError{Path: "excite." + net.Plucks[0].Name, What: "finds no static shape: the slack ties pull and let go in turn"}
}

// settled looks at the slack ties: one that pulls must be stretched, and one that
// hangs must not be. It changes those that are wrong, and tells whether none was.
func (r *Rest) settled(net *scenario.Network, loosened map[int]bool) bool {
	right := true
	for i := range net.Ties {
		t := &net.Ties[i]
		if !t.Slack {
			continue
		}
		stretched := r.at(net, t.From) > r.at(net, t.To)
		if stretched == loosened[i] {
			loosened[i], right = !stretched, false
		}
	}
	return right
}

func (r *Rest) at(net *scenario.Network, p scenario.Place) float64 {
	return r.Displacement(p.Line, net.Travel(p))
}

// clear refuses a shape that lies on a stop.
func (r *Rest) clear(net *scenario.Network) error {
	for i := range net.Lines {
		line := &net.Lines[i]
		for k := range line.Nodes {
			if s := against(&line.Nodes[k], r.at(net, scenario.Place{Line: i, Node: k})); s != nil {
				return onStop("line."+line.Name+"."+line.Nodes[k].Name, s)
			}
		}
		for _, at := range r.grid.rows(i) {
			if s := against(at.row.Joint, r.Displacement(i, at.x)); s != nil {
				return onStop("line."+line.Name, s)
			}
		}
	}
	return nil
}

func against(n *scenario.Node, u float64) *scenario.StopOf[float64] {
	for _, l := range n.Laws {
		if s := l.Stop; s != nil && (s.Up && u > s.Gap || s.Down && u < -s.Gap) {
			return s
		}
	}
	return nil
}

func onStop(path string, s *scenario.StopOf[float64]) error {
	return &scenario.PathError{Path: path + ".stop", What: fmt.Sprintf("is reached by the pluck: the line would lie on it at %g m before it is let go, which is no shape of the line alone; draw it aside less", s.Gap)}
}

// hold is the static state with some ties loosened.
func hold(net *scenario.Network, loosened map[int]bool) (*Rest, error) {
	g, err := newGrid(net, loosened)
	if err != nil {
		return nil, err
	}
	if !g.stiff.factor() {
		return nil, &scenario.PathError{Path: "excite." + net.Plucks[0].Name, What: "nothing holds the line sideways, so it has no static shape to be drawn into; hold a support or give it a spring"}
	}
	rest := &Rest{grid: g, shape: shape{moved: make([]float64, len(g.held)), press: make([]float64, len(net.Lines))}}
	for _, p := range net.Plucks {
		at := g.index(p.At)
		if g.held[at] {
			return nil, &scenario.PathError{Path: "excite." + p.Name + ".at", What: "the place is held, so it cannot be drawn aside"}
		}
		if g.loose(p.At) {
			return nil, &scenario.PathError{Path: "excite." + p.Name + ".at", What: "the line has no tension there, so no force can draw it aside"}
		}
		unit := make([]float64, len(g.held))
		unit[at] = 1
		one := g.under(unit)
		force := p.Force
		if p.ByLength {
			force = p.Length / one.moved[at]
		}
		if math.IsNaN(force) || math.IsInf(force, 0) {
			return nil, &scenario.PathError{Path: "excite." + p.Name, What: fmt.Sprintf("has no finite holding force (%g)", force)}
		}
		rest.Plucks = append(rest.Plucks, Pluck{Name: p.Name, Force: force, Drawn: force * one.moved[at]})
		for i := range one.moved {
			rest.shape.moved[i] += force * one.moved[i]
		}
		for i := range one.press {
			rest.shape.press[i] += force * one.press[i]
		}
	}
	return rest, nil
}

// loose tells of a place at the end of a string at which there is no tension.
func (g *grid) loose(p scenario.Place) bool {
	segments := g.net.Lines[p.Line].Segments
	switch {
	case p.Node == 0:
		return segments[0].Bending == 0 && segments[0].Tension == 0
	case p.Node == len(segments):
		last := &segments[p.Node-1]
		return last.Bending == 0 && EndTension(last) == 0
	}
	return false
}
