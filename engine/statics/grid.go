package statics

import (
	"fmt"
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/scenario"
)

// grid is the static network: places of every line with the elements between
// them. Unknowns are the displacement of every place and, where a beam meets
// it, its slope.
type grid struct {
	net      *scenario.Network
	x        [][]float64 // m, places of each line, increasing
	u, slope [][]int     // unknown of each place; slope -1: none
	elements [][]element // of each line, in walking order
	held     []bool      // of each unknown
	stiff    *skyline
	sags     []sag
	loosened map[int]bool // ties that hang slack
}

func newGrid(net *scenario.Network, loosened map[int]bool) (*grid, error) {
	g := &grid{net: net, loosened: loosened}
	if err := g.places(); err != nil {
		return nil, err
	}
	g.number()
	g.assemble()
	for i := range net.Lines {
		if net.Lines[i].Sag {
			g.sags = append(g.sags, g.sagOf(i))
		}
	}
	return g, nil
}

// tapers tells whether a segment is a beam of rising tension.
func tapers(s *scenario.Segment) bool { return s.Bending > 0 && s.TensionRise != 0 }

// places cuts the lines, beams of rising tension so that k L of a part is at most
// mostXi.
func (g *grid) places() error {
	net := g.net
	g.x = make([][]float64, len(net.Lines))
	for i := range net.Lines {
		x := 0.0
		g.x[i] = append(g.x[i], 0)
		for k := range net.Lines[i].Segments {
			s := &net.Lines[i].Segments[k]
			if tapers(s) {
				xi := s.Length * math.Sqrt(math.Max(s.Tension, EndTension(s))/s.Bending)
				if xi > mostXi*mostParts {
					return &scenario.PathError{Path: "line." + net.Lines[i].Name + "." + s.Name + ".bending", What: fmt.Sprintf("is so small that its static shape cannot be told from that of a string (xi is %.3g); leave it out", xi)}
				}
				parts := int(math.Ceil(xi / mostXi))
				for p := 1; p < parts; p++ {
					g.x[i] = append(g.x[i], x+s.Length*float64(p)/float64(parts))
				}
			}
			x += s.Length
			g.x[i] = append(g.x[i], x)
		}
	}
	for i := range net.Lines {
		for _, at := range g.rows(i) {
			g.x[i] = append(g.x[i], at.x)
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
	for i := range net.Watches {
		if w := &net.Watches[i]; !w.Along && w.Mass > 0 && net.Lines[w.At.Line].Sag {
			add(w.At) // its weight hangs in the sag
		}
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
	}
	return nil
}

// mostXi keeps the power series of a part short and its digits whole; mostParts
// bounds the work. Both chosen.
const (
	mostXi    = 2.0
	mostParts = 20_000
)

// number makes the elements and numbers the unknowns.
func (g *grid) number() {
	n := 0
	for i := range g.net.Lines {
		segments := g.net.Lines[i].Segments
		var list []element
		seg, start, end := 0, 0.0, segments[0].Length
		for k := 1; k < len(g.x[i]); k++ {
			from, to := g.x[i][k-1], g.x[i][k]
			for (from+to)/2 > end && seg+1 < len(segments) {
				seg++
				start, end = end, end+segments[seg].Length
			}
			s := &segments[seg]
			e := element{x0: from, length: to - from, bending: s.Bending, rise: s.TensionRise, tension: math.Max(0, s.Tension+s.TensionRise*(from-start))}
			if e.beam() && e.rise != 0 {
				t := e.termsAt(e.length)
				e.whole = &t
			}
			list = append(list, e)
		}
		u, slope := make([]int, len(g.x[i])), make([]int, len(g.x[i]))
		before := make([]int, len(g.x[i])) // slope of what ends at a place: its own at a hinge
		hinged := g.hinges(i)
		for k := range g.x[i] {
			u[k], slope[k], before[k] = n, -1, -1
			n++
			if k > 0 && list[k-1].beam() || k < len(list) && list[k].beam() {
				slope[k], before[k] = n, n
				n++
			}
			if hinged[g.x[i][k]] && k > 0 && list[k-1].beam() && k < len(list) && list[k].beam() {
				before[k] = n
				n++
			}
		}
		for k := range list {
			list[k].at = [4]int{u[k], slope[k], u[k+1], before[k+1]}
		}
		g.elements = append(g.elements, list)
		g.u, g.slope = append(g.u, u), append(g.slope, slope)
	}
	g.held = make([]bool, n)
}

// place is the index of a place on its line.
func (g *grid) place(p scenario.Place) int { return sort.SearchFloat64s(g.x[p.Line], g.net.Travel(p)) }

// index is the unknown displacement of a place.
func (g *grid) index(p scenario.Place) int { return g.u[p.Line][g.place(p)] }

func (g *grid) assemble() {
	reach := make([]int, len(g.held)) // lowest column of each row
	for i := range reach {
		reach[i] = i
	}
	for i := range g.elements {
		for _, e := range g.elements[i] {
			low := e.at[0]
			for _, row := range e.at {
				if row >= 0 {
					reach[row] = min(reach[row], low)
				}
			}
		}
	}
	for _, tie := range g.net.Ties {
		i, j := g.index(tie.From), g.index(tie.To)
		reach[max(i, j)] = min(reach[max(i, j)], min(i, j))
	}
	g.stiff = newSkyline(reach)
	for i := range g.elements {
		for k := range g.elements[i] {
			g.addElement(&g.elements[i][k])
		}
	}
	g.fittings()
	for i, tie := range g.net.Ties {
		if tie.Spring > 0 && !(tie.Slack && g.loosened[i]) {
			g.stiff.spring(g.index(tie.From), g.index(tie.To), tie.Spring)
		}
	}
	for row, held := range g.held {
		if held {
			g.stiff.hold(row)
		}
	}
}

func (g *grid) addElement(e *element) {
	u0, t0, u1, t1 := e.at[0], e.at[1], e.at[2], e.at[3]
	if !e.beam() {
		g.stiff.spring(u0, u1, e.pull())
		return
	}
	k := e.stiffness()
	g.stiff.spring(u0, u1, k.uu)
	for i, t := range []int{t0, t1} {
		g.stiff.add(t, t, k.tt[i])
		g.stiff.add(u0, t, k.ut[i])
		g.stiff.add(u1, t, -k.ut[i])
	}
	g.stiff.add(t0, t1, k.tf)
}

// pull is the force between the ends of a string for a travel of 1 m, N/m. A
// string whose tension comes down to none at an end transmits nothing to it;
// there its free end hangs in line with the rest, which any number stands for.
func (e *element) pull() float64 {
	if c := e.climb(e.length); c > 0 && !math.IsInf(c, 0) {
		return 1 / c
	}
	return (e.tension + e.rise*e.length/2) / e.length
}

func (g *grid) fittings() {
	for i := range g.net.Lines {
		for k := range g.net.Lines[i].Nodes {
			node := &g.net.Lines[i].Nodes[k]
			at := g.place(scenario.Place{Line: i, Node: k})
			g.fit(i, at, node)
		}
		for _, at := range g.rows(i) {
			g.fit(i, sort.SearchFloat64s(g.x[i], at.x), at.row.Joint)
		}
	}
	for _, mv := range g.net.Moves {
		g.held[g.index(scenario.Place{Line: mv.Line, Node: mv.Node})] = true
	}
}

// fit adds what holds a place.
func (g *grid) fit(line, at int, node *scenario.Node) {
	row, turn := g.u[line][at], g.slope[line][at]
	g.held[row] = g.held[row] || node.Fixed
	g.stiff.add(row, row, node.Spring)
	if turn >= 0 {
		g.held[turn] = g.held[turn] || node.Clamped
		g.stiff.add(turn, turn, node.Rotary)
	}
}

// rowAt is a joint of a row with its place, m along its line.
type rowAt struct {
	x   float64
	row scenario.Row
}

// rows are the joints that `every` makes along a line.
func (g *grid) rows(line int) []rowAt {
	var out []rowAt
	start := 0.0
	for k := range g.net.Lines[line].Segments {
		s := &g.net.Lines[line].Segments[k]
		for _, row := range scenario.Rows(s) {
			out = append(out, rowAt{start + row.At, row})
		}
		start += s.Length
	}
	return out
}

// hinges are the places of a line at which its parts turn on their own.
func (g *grid) hinges(line int) map[float64]bool {
	out := map[float64]bool{}
	for k := range g.net.Lines[line].Nodes {
		if g.net.Lines[line].Nodes[k].Hinge {
			out[g.net.Travel(scenario.Place{Line: line, Node: k})] = true
		}
	}
	for _, at := range g.rows(line) {
		if at.row.Joint.Hinge {
			out[at.x] = true
		}
	}
	return out
}

// solve replaces b by the displacements and slopes under the forces and moments b.
func (g *grid) solve(b []float64) {
	for row, held := range g.held {
		if held {
			b[row] = 0
		}
	}
	g.stiff.solve(b)
}
