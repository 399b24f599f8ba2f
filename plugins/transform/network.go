package transform

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
)

// point is an end of elements: a mesh node or a cut within a piece.
type point struct {
	node int // -1: a cut
	u    int // unknown, -1: held
}

// element is a uniform stretch between two points.
type element struct {
	piece      int
	x0, length float64 // m; x0 from the piece's start
	tension    float64
	ends       [2]int // points
	turn       [2]int // unknown of the slope at each end, -1: none or held
	stiff      bool
	given      *cells // start shape and velocity; nil: rest
	presses    []covering
	rolls      []rolling
	probes     []float64 // m from the element's start
}

// covering is a press that acts all over an element.
type covering struct {
	force  *series // uniform; nil: by place
	places *placed // force by place, as a sum of products
	shape  *cells  // their functions of place on the element
}

// rolling is a load that travels over an element.
type rolling struct {
	force, speed, arrives float64 // N, m/s, s
}

// acting is a force at a point.
type acting struct {
	unknown int
	force   *series
	step    float64 // N, a step at t = 0 of this height beside it
}

// border is an unknown that couples distant ones: the force of a link, or the
// extra tension of a sagging line.
type border struct {
	link int // -1: a sag
	line int
}

// network is the problem in points and elements.
type network struct {
	m        *mesh.Mesh
	points   []point
	elements []element
	nodeAt   []int   // point of each mesh node
	slope    [][]int // by mesh node: unknowns of its slopes, with springs and inertia on the first
	unknowns int
	width    int // of the band: largest distance of coupled unknowns
	borders  []border
	forces   []acting
	motions  map[int]*series // by mesh node
	varying  bool
	segments [][]int // elements of each piece, in order
	refs     references
}

// places inside a piece where the network is cut.
func cuts(m *mesh.Mesh, level int) ([][]float64, bool) {
	out := make([][]float64, len(m.Pieces))
	add := func(s mesh.Spot) {
		if s.Node < 0 {
			out[s.Piece] = append(out[s.Piece], s.At)
		}
	}
	for _, d := range m.Drawn {
		add(d.At)
	}
	for i := range m.Pushes {
		add(m.Pushes[i].At)
	}
	for i := range m.Presses {
		for _, p := range m.Presses[i].Parts {
			add(mesh.Spot{Node: -1, Piece: p.Piece, At: p.From})
			add(mesh.Spot{Node: -1, Piece: p.Piece, At: p.To})
		}
	}
	for _, r := range m.Rolls {
		for _, k := range m.Lines[r.Line].Pieces {
			if p := &m.Pieces[k]; r.From > p.X0 && r.From < p.X0+p.Length {
				add(mesh.Spot{Node: -1, Piece: k, At: r.From - p.X0})
			}
		}
	}
	varying := false
	for i := range m.Pieces {
		p := &m.Pieces[i]
		if p.TensionRise != 0 {
			varying = true
			steps := stepsCoarse
			if p.Bending > 0 {
				steps = stepsStiff
			}
			out[i] = append(out[i], equalTravel(p, min(steps<<level, stepsMost))...)
		}
		sort.Float64s(out[i])
		kept := []float64{0}
		for _, x := range out[i] {
			if x > kept[len(kept)-1]+1e-12*p.Length && x < p.Length*(1-1e-12) {
				kept = append(kept, x)
			}
		}
		out[i] = append(kept, p.Length)
	}
	return out, varying
}

// A piece of rising tension is taken in so many steps at level 0; bending smooths
// what the steps throw back.
const (
	stepsCoarse = 48
	stepsStiff  = 8
	stepsMost   = 1 << 12
)

// equalTravel cuts a piece into n parts of equal travel time: the square root of
// the tension is then a straight line over the parts.
func equalTravel(p *mesh.Piece, n int) []float64 {
	a, b := math.Sqrt(p.Tension), math.Sqrt(math.Max(p.Tension+p.TensionRise*p.Length, 0))
	var out []float64
	for j := 1; j < n; j++ {
		root := a + (b-a)*float64(j)/float64(n)
		out = append(out, (root*root-p.Tension)/p.TensionRise)
	}
	return out
}

// newNetwork cuts the pieces and numbers the unknowns in walking order.
func newNetwork(m *mesh.Mesh, level int) *network {
	n := &network{m: m, nodeAt: make([]int, len(m.Nodes)), slope: make([][]int, len(m.Nodes)), segments: make([][]int, len(m.Pieces)), motions: map[int]*series{}, refs: newReferences(m)}
	at, varying := cuts(m, level)
	n.varying = varying
	for i := range n.nodeAt {
		n.nodeAt[i] = -1
	}
	for li := range m.Lines {
		for _, k := range m.Lines[li].Pieces {
			n.addPiece(k, at[k])
		}
	}
	for i := range m.Nodes { // hung masses
		if n.nodeAt[i] < 0 {
			n.addPoint(i)
		}
	}
	for i, l := range m.Links {
		if l.Spring > 0 || l.Dashpot > 0 {
			n.borders = append(n.borders, border{link: i})
		}
	}
	for i := range m.Lines {
		if m.Lines[i].Sag != nil {
			n.borders = append(n.borders, border{link: -1, line: i})
		}
	}
	for e := range n.elements {
		el := &n.elements[e]
		list := []int{n.points[el.ends[0]].u, n.points[el.ends[1]].u, el.turn[0], el.turn[1]}
		for _, a := range list {
			for _, b := range list {
				if a >= 0 && b >= 0 {
					n.width = max(n.width, a-b)
				}
			}
		}
	}
	return n
}

// addPoint makes a point; a node that is held has no unknown.
func (n *network) addPoint(node int) int {
	p := point{node: node, u: -1}
	if node < 0 || !n.m.Nodes[node].Fixed {
		p.u = n.unknowns
		n.unknowns++
	}
	n.points = append(n.points, p)
	if node >= 0 {
		n.nodeAt[node] = len(n.points) - 1
	}
	return len(n.points) - 1
}

// newSlope is an unknown slope.
func (n *network) newSlope() int {
	n.unknowns++
	return n.unknowns - 1
}

// nodeSlope is the unknown slope of a piece's end at a mesh node: shared by the
// pieces that meet there, but for a hinge; -1 where the node does not turn.
func (n *network) nodeSlope(node int) int {
	nd := &n.m.Nodes[node]
	switch {
	case nd.Clamped:
		return -1
	case len(n.slope[node]) == 0 || nd.Hinge:
		n.slope[node] = append(n.slope[node], n.newSlope())
	}
	return n.slope[node][len(n.slope[node])-1]
}

func (n *network) addPiece(k int, at []float64) {
	p := &n.m.Pieces[k]
	from := n.nodeAt[p.From]
	if from < 0 {
		from = n.addPoint(p.From)
	}
	stiff := p.Bending > 0
	turn := -1
	if stiff {
		turn = n.nodeSlope(p.From)
	}
	for i := 1; i < len(at); i++ {
		e := element{piece: k, x0: at[i-1], length: at[i] - at[i-1], tension: p.Tension, stiff: stiff, ends: [2]int{from, 0}, turn: [2]int{turn, -1}}
		if p.TensionRise != 0 {
			a, b := math.Sqrt(p.Tension+p.TensionRise*at[i-1]), math.Sqrt(math.Max(p.Tension+p.TensionRise*at[i], 0))
			e.tension = (a + b) * (a + b) / 4
		}
		if i == len(at)-1 {
			if e.ends[1] = n.nodeAt[p.To]; e.ends[1] < 0 {
				e.ends[1] = n.addPoint(p.To)
			}
			if stiff {
				e.turn[1] = n.nodeSlope(p.To)
			}
		} else {
			e.ends[1] = n.addPoint(-1)
			if stiff {
				e.turn[1] = n.newSlope()
			}
		}
		n.segments[k] = append(n.segments[k], len(n.elements))
		n.elements = append(n.elements, e)
		from, turn = e.ends[1], e.turn[1]
	}
}

// pointOf is the point of a spot that is a node or a cut.
func (n *network) pointOf(s mesh.Spot) int {
	if s.Node >= 0 {
		return n.nodeAt[s.Node]
	}
	for _, e := range n.segments[s.Piece] {
		el := &n.elements[e]
		if math.Abs(el.x0-s.At) <= 1e-9*n.m.Pieces[s.Piece].Length {
			return el.ends[0]
		}
	}
	last := n.segments[s.Piece][len(n.segments[s.Piece])-1]
	return n.elements[last].ends[1]
}

// elementAt is the element that holds a place of a piece: the one after it where
// it is a cut.
func (n *network) elementAt(piece int, at float64) int {
	list := n.segments[piece]
	for i := len(list) - 1; i > 0; i-- {
		if el := &n.elements[list[i]]; at >= el.x0-1e-12*n.m.Pieces[piece].Length {
			return list[i]
		}
	}
	return list[0]
}

// loads turns what acts into transforms.
func (n *network) loads(g *grid) {
	m := n.m
	for _, d := range m.Drawn {
		if u := n.points[n.pointOf(d.At)].u; u >= 0 {
			n.forces = append(n.forces, acting{unknown: u, step: -d.Force})
		}
	}
	for i := range m.Pushes {
		p := &m.Pushes[i]
		if u := n.points[n.pointOf(p.At)].u; u >= 0 {
			n.forces = append(n.forces, acting{unknown: u, force: g.transform(func(t float64) float64 { return p.Force.At(t, 0) }, p.Force.Breaks)})
		}
	}
	for i := range m.Nodes {
		if mo := m.Nodes[i].Motion; mo != nil {
			n.motions[i] = g.transform(mo.Displacement, mo.Breaks)
		}
	}
	for i := range m.Presses {
		n.press(g, &m.Presses[i])
	}
	for _, r := range m.Rolls {
		for _, k := range m.Lines[r.Line].Pieces {
			for _, e := range n.segments[k] {
				el := &n.elements[e]
				if x := m.Pieces[k].X0 + el.x0; x >= r.From-1e-9*el.length {
					el.rolls = append(el.rolls, rolling{force: r.Force, speed: r.Speed, arrives: r.Starting + (x-r.From)/r.Speed})
				}
			}
		}
	}
	for e := range n.elements {
		el := &n.elements[e]
		p := &m.Pieces[el.piece]
		if p.Given != nil || p.StartRate != nil {
			el.given = newCells(el.length, firstCells(el, p.Length), shifted(p.Given, el.x0), shifted(p.StartRate, el.x0))
		}
	}
}

func shifted(f func(float64) float64, x0 float64) func(float64) float64 {
	if f == nil {
		return nil
	}
	return func(s float64) float64 { return f(x0 + s) }
}

func (n *network) press(g *grid, p *mesh.Press) {
	byPlace := p.Force.Value.UsesArg(argX)
	var uniform *series
	if !byPlace {
		uniform = g.transform(func(t float64) float64 { return p.Force.At(t, 0) }, p.Force.Breaks)
	}
	for _, part := range p.Parts {
		var places *placed
		if byPlace {
			places = g.place(&p.Force, part.Origin+part.From, part.To-part.From)
		}
		for _, e := range n.segments[part.Piece] {
			el := &n.elements[e]
			slack := 1e-9 * n.m.Pieces[part.Piece].Length
			if el.x0 < part.From-slack || el.x0+el.length > part.To+slack {
				continue
			}
			c := covering{force: uniform, places: places}
			if byPlace {
				c.shape = newCells(el.length, firstCells(el, part.To-part.From), places.from(el.x0-part.From)...)
			}
			el.presses = append(el.presses, c)
		}
	}
}

// firstCells is how many cells an element has at least: sixteen a stretch.
func firstCells(e *element, length float64) int {
	return max(1, int(math.Ceil(16*e.length/length)))
}
