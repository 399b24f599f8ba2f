package differences

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// strand is a piece of line in cells. Its points, ends included, are the
// consecutive values at, at+1, ..., at+n of a state.
type strand struct {
	piece    int
	at, n    int
	from, to int     // nodes
	h        float64 // m, cell length
	stiff    float64 // N/m, T/h
	mass     float64 // kg, of a cell
	loss     float64 // N s/m, of a cell
	d, a     float64 // coefficients of the kernel
	gain     float64 // m/N: displacement that a force on an inner point adds in a step
	implicit bool
	inner    int // node of the first inner point, of an implicit strand
}

// network is a mesh in cells for one step dt. A state is one flat array: the
// nodes first, then the points of every strand, whose ends repeat the nodes.
type network struct {
	m       *mesh.Mesh
	dt      float64
	nodes   int // the mesh's and the inner points of implicit strands
	size    int // values of a state
	strands []strand

	mass   []float64 // kg, of each node with its half cells
	loss   []float64 // N s/m, likewise, without links and brackets
	spring []float64 // N/m, to ground
	held   []bool    // fixed or moved as told
	line   []float64 // kg: the half cells' part of mass
	links  []mesh.Link
	mounts []mount
	ends   [][]mesh.Attachment // of each node of the mesh
	fourth bool                // for the scheme of order 4
}

// mount is a bracket with a dashpot at a node that is free to move. The give of
// the bracket at the half steps is s = (u+ + u)/2 - q with
//
//	loss (q+ - q-)/dt = spring (s+ + s-)/2,   force on the node -spring (s+ + s-)/2,
//
// which keeps the energy spring s^2/2 to account and leaves after elimination of
// q+ the force -soft ((u+ + 2u + u-)/4 - q-), soft = spring/(1+r), r = dt spring/(2 loss).
type mount struct {
	node         int
	spring, loss float64
	soft, r      float64
	q, last      float64 // m, at the last half step and the one before
}

// newNetwork assembles a mesh for a layout refined to a level.
func newNetwork(m *mesh.Mesh, l *Layout, level int) *network {
	w := &network{m: m, dt: l.Step / math.Exp2(float64(level)), nodes: len(m.Nodes), ends: m.Attached(), fourth: l.Order == 4}
	w.strands = make([]strand, len(m.Pieces))
	for i := range m.Pieces {
		w.strands[i] = w.newStrand(i, l.Cells[i]<<level, l.Implicit[i])
	}
	w.size = w.nodes
	for i := range w.strands {
		w.strands[i].at = w.size
		w.size += w.strands[i].n + 1
	}
	w.lump()
	return w
}

func (w *network) newStrand(i, cells int, implicit bool) strand {
	p := &w.m.Pieces[i]
	h := p.Length / float64(cells)
	s := strand{piece: i, n: cells, from: p.From, to: p.To, h: h, stiff: p.Tension / h, mass: p.MassPerLength * h, loss: p.Viscous * h, implicit: implicit}
	if implicit {
		s.inner = w.nodes
		w.nodes += cells - 1
		return s
	}
	nu2 := s.stiff * w.dt * w.dt / s.mass
	if nu2 > 1 {
		// The layout admits a shortfall of the travel time of 1e-9 of a cell;
		// the mass takes it up, so that the scheme is stable without margin.
		nu2 = 1
		s.mass = s.stiff * w.dt * w.dt
	}
	g := s.loss * w.dt / (2 * s.mass)
	s.d, s.a = (1-g)/(1+g), nu2/(1+g)
	s.gain = w.dt * w.dt / (s.mass * (1 + g))
	return s
}

// lump sums what acts at each node.
func (w *network) lump() {
	w.mass, w.loss, w.spring = make([]float64, w.nodes), make([]float64, w.nodes), make([]float64, w.nodes)
	w.line = make([]float64, w.nodes)
	w.held = make([]bool, w.nodes)
	for i := range w.strands {
		s := &w.strands[i]
		for k := 0; s.implicit && k < s.n; k++ {
			w.links = append(w.links, mesh.Link{A: s.point(k), B: s.point(k + 1), Spring: s.stiff})
		}
		share := 0.5
		if w.fourth {
			share = endWeights[0]
		}
		for _, end := range [2]int{s.from, s.to} {
			w.line[end] += s.mass * share
			w.loss[end] += s.loss * share
		}
		for k := 1; s.implicit && k < s.n; k++ {
			w.line[s.point(k)] += s.mass
			w.loss[s.point(k)] += s.loss
		}
	}
	copy(w.mass, w.line)
	for i := range w.m.Nodes {
		n := &w.m.Nodes[i]
		if n.Fixed || n.Motion != nil {
			w.held[i] = true
			continue
		}
		w.mass[i] += n.Mass
		w.loss[i] += n.Dashpot
		w.spring[i] += n.Spring
		for _, b := range n.Brackets {
			if b.K > 0 && b.C > 0 {
				r := w.dt * b.K / (2 * b.C)
				w.mounts = append(w.mounts, mount{node: i, spring: b.K, loss: b.C, soft: b.K / (1 + r), r: r, q: b.Start})
			}
		}
	}
	for _, l := range w.m.Links {
		if l.A != l.B && (l.Spring > 0 || l.Dashpot > 0) {
			w.links = append(w.links, l)
		}
	}
	w.weigh()
}

// weigh gives a node without line and mass the mass that makes its own frequency
// that of the step. Without inertia the averaged springs would leave its motion
// between steps undetermined. The added mass falls with the square of the step.
func (w *network) weigh() {
	for i := range w.mass {
		if w.held[i] || w.mass[i] > 0 {
			continue
		}
		k := w.spring[i]
		for _, l := range w.links {
			if l.A == i || l.B == i {
				k += l.Spring
			}
		}
		w.mass[i] = math.Max(k*w.dt*w.dt/4, 1e-300)
	}
}

// point is the node of point k of an implicit strand.
func (s *strand) point(k int) int {
	switch k {
	case 0:
		return s.from
	case s.n:
		return s.to
	}
	return s.inner + k - 1
}

// place is the state's index of point k of a strand, and whether that is a node.
func (s *strand) place(k int) (index int, node bool) {
	if k == 0 || k == s.n || s.implicit {
		return s.point(k), true
	}
	return s.at + k, false
}

// tell copies the nodes of a state to the ends of the strands.
func (w *network) tell(u []float64) {
	for i := range w.strands {
		s := &w.strands[i]
		u[s.at], u[s.at+s.n] = u[s.from], u[s.to]
		if s.implicit && s.n > 1 {
			copy(u[s.at+1:s.at+s.n], u[s.inner:s.inner+s.n-1])
		}
	}
}

// shape sets u to the displacement at t = 0.
func (w *network) shape(u []float64) {
	for i := range w.m.Nodes {
		u[i] = w.m.Nodes[i].Start
		if mo := w.m.Nodes[i].Motion; mo != nil {
			u[i] = mo.Displacement(0)
		}
	}
	for i := range w.strands {
		s := &w.strands[i]
		start := w.m.Pieces[s.piece].Start
		for k := 1; k < s.n; k++ {
			j, _ := s.place(k)
			u[j] = 0
			if start != nil {
				u[j] = start(s.h * float64(k))
			}
		}
	}
	w.tell(u)
}

// rates sets v to the velocity at t = 0: at each point the mean over the two
// cells around it, which is what d'Alembert's solution needs, and at a node the
// mean by mass of its own and those of the half cells.
func (w *network) rates(v []float64) {
	momentum := make([]float64, w.nodes)
	for i := range w.strands {
		s := &w.strands[i]
		p := &w.m.Pieces[s.piece]
		if p.StartRate == nil {
			continue
		}
		edges := edgesOf(p)
		cell := func(k int) float64 { return mean(p.StartRate, s.h*float64(k), s.h*float64(k+1), edges) }
		left := cell(0)
		momentum[s.from] += s.mass / 2 * left
		for k := 1; k < s.n; k++ {
			right := cell(k)
			j, _ := s.place(k)
			v[j] = (left + right) / 2
			if s.implicit {
				momentum[j] = v[j] * s.mass
			}
			left = right
		}
		momentum[s.to] += s.mass / 2 * left
	}
	for i := range momentum {
		if i < len(w.m.Nodes) {
			momentum[i] += w.m.Nodes[i].StartRate * (w.mass[i] - w.line[i])
		}
		v[i] = momentum[i] / w.mass[i]
		if w.held[i] {
			v[i] = 0
			if mo := w.m.Nodes[i].Motion; mo != nil {
				v[i] = mo.Velocity(0)
			}
		}
	}
	w.tell(v)
}

// edgesOf lists the places inside a piece where its data may jump or kink.
func edgesOf(p *mesh.Piece) []float64 {
	var at []float64
	for _, mark := range p.Marks {
		if mark.Kind != mesh.MarkWatch {
			at = append(at, mark.At)
		}
	}
	return at
}

// gauss3 is the three-point Gauss-Legendre rule on [0, 1], exact to degree 5
// (Abramowitz and Stegun, table 25.4).
var gauss3 = [3][2]float64{
	{0.1127016653792583, 5.0 / 18}, {0.5, 8.0 / 18}, {0.8872983346207417, 5.0 / 18},
}

// mean is the mean of f over [from, to], cut at the edges.
func mean(f func(float64) float64, from, to float64, edges []float64) float64 {
	sum, a := 0.0, from
	part := func(b float64) {
		for _, g := range gauss3 {
			sum += g[1] * (b - a) * f(a+g[0]*(b-a))
		}
		a = b
	}
	for _, e := range edges {
		if e > a && e < to {
			part(e)
		}
	}
	part(to)
	return sum / (to - from)
}
