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
	lines  []profile
}

// Pluck is one pluck with the force and the travel that belong together.
type Pluck struct {
	Name  string
	Force float64 // N, on the line
	Drawn float64 // m, displacement of the plucked place by this pluck alone
}

// profile is a broken straight line along one line.
type profile struct {
	x, u []float64 // m; x increasing
}

// Displacement is the static displacement at x metres along line number i, m.
func (r *Rest) Displacement(i int, x float64) float64 {
	p := &r.lines[i]
	n := len(p.x)
	k := sort.SearchFloat64s(p.x, x)
	switch {
	case n == 0:
		return 0
	case k == 0:
		return p.u[0]
	case k == n:
		return p.u[n-1]
	}
	w := (x - p.x[k-1]) / (p.x[k] - p.x[k-1])
	return p.u[k-1] + w*(p.u[k]-p.u[k-1])
}

// Flat tells whether nothing is drawn aside.
func (r *Rest) Flat() bool { return len(r.Plucks) == 0 }

// Hold computes the static state of all plucks of a network. The line between
// two places that are held, sprung, tied or plucked is straight; the nodes obey
//
//	sum of T (u_j - u_i)/L over the pieces + sum of K_tie (u_j - u_i) - K u_i + F_i = 0.
//
// Hung masses hang along, dashpots carry nothing at rest, moved supports count
// as held. A pluck by length is scaled by the compliance of its place, alone. A
// network on which a plucked part is held by nothing is refused with a
// *scenario.PathError.
func Hold(net *scenario.Network) (*Rest, error) {
	rest := &Rest{lines: make([]profile, len(net.Lines))}
	if len(net.Plucks) == 0 {
		return rest, nil
	}
	if at := curved(net); at != "" {
		return nil, &scenario.PathError{Path: "excite." + net.Plucks[0].Name, What: "the static shape of a line with bending stiffness, sag or varying tension (" + at + ") cannot be computed by this version yet; start it by a push"}
	}
	g := newGrid(net)
	if !g.factor() {
		return nil, &scenario.PathError{Path: "excite." + net.Plucks[0].Name, What: "nothing holds the line sideways, so it has no static shape to be drawn into; hold a support or give it a spring"}
	}
	total := make([]float64, g.n)
	for _, p := range net.Plucks {
		at := g.index(net, p.At)
		if g.held[at] {
			return nil, &scenario.PathError{Path: "excite." + p.Name + ".at", What: "the place is held, so it cannot be drawn aside"}
		}
		unit := make([]float64, g.n)
		unit[at] = 1
		g.solve(unit)
		force := p.Force
		if p.ByLength {
			force = p.Length / unit[at]
		}
		if math.IsNaN(force) || math.IsInf(force, 0) {
			return nil, &scenario.PathError{Path: "excite." + p.Name, What: fmt.Sprintf("has no finite holding force (%g)", force)}
		}
		rest.Plucks = append(rest.Plucks, Pluck{Name: p.Name, Force: force, Drawn: force * unit[at]})
		for i := range total {
			total[i] += force * unit[i]
		}
	}
	for i := range net.Lines {
		first := g.first[i]
		rest.lines[i] = profile{x: g.x[i], u: total[first : first+len(g.x[i])]}
	}
	return rest, nil
}

// curved names a line whose static shape is not made of straight parts, or "".
func curved(net *scenario.Network) string {
	for i := range net.Lines {
		for _, s := range net.Lines[i].Segments {
			if s.Bending > 0 || s.TensionRise != 0 || net.Lines[i].Sag {
				return net.Lines[i].Name
			}
		}
	}
	return ""
}

// grid is the static network: every node, pluck place and tie end of every
// line, line by line.
type grid struct {
	n     int
	first []int       // of each line
	x     [][]float64 // m, places of each line, increasing
	held  []bool
	a     *skyline
}

func newGrid(net *scenario.Network) *grid {
	g := &grid{first: make([]int, len(net.Lines)), x: make([][]float64, len(net.Lines))}
	for i := range net.Lines {
		x := 0.0
		g.x[i] = append(g.x[i], 0)
		for _, s := range net.Lines[i].Segments {
			x += s.Length
			g.x[i] = append(g.x[i], x)
		}
	}
	add := func(p scenario.Place) {
		if p.Node < 0 {
			g.x[p.Line] = append(g.x[p.Line], net.Travel(p))
		}
	}
	for _, p := range net.Plucks {
		add(p.At)
	}
	for _, tie := range net.Ties {
		add(tie.From)
		add(tie.To)
	}
	for i := range g.x {
		sort.Float64s(g.x[i])
		kept := g.x[i][:1]
		for _, x := range g.x[i][1:] {
			if x > kept[len(kept)-1] {
				kept = append(kept, x)
			}
		}
		g.x[i] = kept
		g.first[i] = g.n
		g.n += len(kept)
	}
	g.held = make([]bool, g.n)
	g.assemble(net)
	return g
}

func (g *grid) assemble(net *scenario.Network) {
	reach := make([]int, g.n) // lowest column of each row
	for i := range reach {
		reach[i] = i
	}
	for i, x := range g.x {
		for k := 1; k < len(x); k++ {
			reach[g.first[i]+k] = g.first[i] + k - 1
		}
	}
	type pair struct {
		i, j int
		k    float64
	}
	var ties []pair
	for _, tie := range net.Ties {
		if tie.Spring > 0 {
			i, j := g.index(net, tie.From), g.index(net, tie.To)
			ties = append(ties, pair{i, j, tie.Spring})
			reach[max(i, j)] = min(reach[max(i, j)], min(i, j))
		}
	}
	g.a = newSkyline(reach)
	for i := range net.Lines {
		line := &net.Lines[i]
		seg, end := 0, line.Segments[0].Length
		for k := 1; k < len(g.x[i]); k++ {
			mid := (g.x[i][k] + g.x[i][k-1]) / 2
			for mid > end && seg+1 < len(line.Segments) {
				seg++
				end += line.Segments[seg].Length
			}
			row := g.first[i] + k
			g.a.spring(row-1, row, line.Segments[seg].Tension/(g.x[i][k]-g.x[i][k-1]))
		}
		for k := range line.Nodes {
			node := &line.Nodes[k]
			row := g.index(net, scenario.Place{Line: i, Node: k})
			g.held[row] = g.held[row] || node.Fixed
			g.a.add(row, row, node.Spring)
		}
	}
	for _, mv := range net.Moves {
		g.held[g.index(net, scenario.Place{Line: mv.Line, Node: mv.Node})] = true
	}
	for _, t := range ties {
		g.a.spring(t.i, t.j, t.k)
	}
	for row, held := range g.held {
		if held {
			g.a.hold(row)
		}
	}
}

// index is the row of a place.
func (g *grid) index(net *scenario.Network, p scenario.Place) int {
	return g.first[p.Line] + sort.SearchFloat64s(g.x[p.Line], net.Travel(p))
}

func (g *grid) factor() bool { return g.a.factor() }

func (g *grid) solve(b []float64) {
	for row, held := range g.held {
		if held {
			b[row] = 0
		}
	}
	g.a.solve(b)
}
