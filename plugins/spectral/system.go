package spectral

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
)

// Ends of elements that carry no unknown.
const endFixed = -1 // -2-i: moved as told, number i

// element is one Gauss-Lobatto-Legendre element in place.
type element struct {
	ref     *reference
	piece   int
	s0, h   float64 // m, from the piece's start
	tension float64 // N
	mass    float64 // m h/2, kg: mass of point i is mass*ref.w[i]
	rate    float64 // c/m, 1/s: viscous loss over mass
	first   int     // its first inner coordinate
	end     [2]int  // index among the end points, or endFixed, or -2-i
	// Of an element of a frame: its body, and all its outer coordinates, values and
	// slopes, numbered like end.
	body *body
	out  []int
}

// entry is one off- or on-diagonal term between end points.
type entry struct {
	col  int
	k, c float64
	m    float64 // kg; of frames, off the diagonal
}

// bracket is a spring and dashpot in series at an end point.
type bracket struct {
	end   int     // end point
	other int     // the one at its far end; -1: ground
	k     float64 // N/m
	c     float64 // N s/m
	start float64 // m
}

// system is the network in arrow form. Coordinates are ordered inner
// coordinates first (unit mass), then end points (in m).
type system struct {
	m        *mesh.Mesh
	elements []element
	byPiece  [][]int // elements of each piece in order
	inner    int
	ends     int
	omega2   []float64 // [inner] 1/s^2
	kappa    []float64 // [inner] pull on the element's first end; on the other, with its sign
	mass     []float64 // [ends] kg
	rows     [][]entry // [ends] stiffness and loss between end points
	brackets []bracket
	lowest   float64   // rad/s, about the lowest frequency
	frame    bool      // elements are bodies, not ideal strings
	turns    []int     // of each mesh node: its slope among the end points, or endFixed
	sags     []sagging // lines whose sag couples all that moves on them
	nodeEnd  []int     // of each mesh node: end point, endFixed or -2-i
	moved    []int     // mesh nodes moved as told
	movedM   []float64
	movedPF  [][]entry // [moved] terms to free end points
	movedPP  [][]entry // [moved] terms among moved nodes
	top      float64   // rad/s, highest frequency of note for the time step
	above    bool      // some frequencies lie above top
	watched  map[int]int
	// watched numbers the mesh nodes whose line force is recorded: their own
	// share of distributed loads rides along at coordinate size()+number.
}

// halves are the element's symmetric and antisymmetric inner coordinates, with the
// sign of the pull on the second end.
func (e *element) halves() [2]struct {
	lo, hi int
	sign   float64
} {
	mid, end := e.first+e.ref.even, e.first+e.ref.p-1
	return [2]struct {
		lo, hi int
		sign   float64
	}{{e.first, mid, 1}, {mid, end, -1}}
}

func (s *system) size() int { return s.inner + s.ends }

// newSystem assembles the network on a layout. It reports false when a
// reference element cannot be diagonalised.
func newSystem(m *mesh.Mesh, lay *layout) (*system, bool) {
	s := &system{m: m, nodeEnd: make([]int, len(m.Nodes)), byPiece: make([][]int, len(m.Pieces))}
	for i := range m.Nodes {
		switch nd := &m.Nodes[i]; {
		case nd.Motion != nil:
			s.nodeEnd[i] = -2 - len(s.moved)
			s.moved = append(s.moved, i)
		case nd.Fixed:
			s.nodeEnd[i] = endFixed
		default:
			s.nodeEnd[i] = s.ends
			s.ends++
		}
	}
	s.frame = framing(m)
	s.turnable()
	if !s.place(lay) {
		return nil, false
	}
	s.mass, s.rows = make([]float64, s.ends), make([][]entry, s.ends)
	s.movedM = make([]float64, len(s.moved))
	s.movedPF, s.movedPP = make([][]entry, len(s.moved)), make([][]entry, len(s.moved))
	s.omega2 = make([]float64, s.inner)
	s.kappa = make([]float64, s.inner)
	for e := range s.elements {
		if s.frame {
			s.assembleBody(&s.elements[e])
		} else {
			s.assemble(&s.elements[e])
		}
	}
	s.attach()
	if s.frame {
		s.hang()
		s.highestFramed(lay)
	} else {
		s.highest()
	}
	s.watchNodes()
	return s, true
}

// place cuts the pieces into elements.
func (s *system) place(lay *layout) bool {
	refs := map[int]*reference{}
	st := stock{beams: map[int]*beam{}, bodies: map[material]*body{}}
	for i := range s.m.Pieces {
		p := &s.m.Pieces[i]
		at, last, from := borders(p), 0.0, s.nodeEnd[p.From]
		turn := s.turnAt(i, false)
		for k, sr := range lay.pieces[i] {
			ref := refs[sr.degree]
			if ref == nil {
				var ok bool
				if ref, ok = newReference(sr.degree); !ok {
					return false
				}
				refs[sr.degree] = ref
			}
			to := sr.end(p, at)
			for n := 0; n < sr.elements; n++ {
				h := (to - last) / float64(sr.elements)
				e := element{ref: ref, piece: i, s0: last + h*float64(n), h: h, tension: p.Tension,
					mass: p.MassPerLength * h / 2, rate: p.Viscous / p.MassPerLength, first: s.inner}
				e.end[0] = from
				final := k == len(lay.pieces[i])-1 && n == sr.elements-1
				if final {
					e.end[1] = s.nodeEnd[p.To]
				} else {
					e.end[1] = s.ends
					s.ends++
				}
				from = e.end[1]
				if s.frame {
					var ok bool
					if turn, ok = s.dress(&e, st, turn, final); !ok {
						return false
					}
					s.inner += e.body.ni
				} else {
					s.inner += sr.degree - 1
				}
				s.byPiece[i] = append(s.byPiece[i], len(s.elements))
				s.elements = append(s.elements, e)
			}
			last = to
		}
	}
	return true
}

// end is where a stretch ends, m from its piece's start.
func (sr stretch) end(p *mesh.Piece, borders []float64) float64 {
	switch {
	case sr.mark >= 0:
		return borders[sr.mark]
	case sr.share > 0:
		return sr.share * p.Length
	}
	return p.Length
}

// assemble adds one element: inner oscillators, their pull on the ends, and the
// ends' own mass, loss and stiffness.
func (s *system) assemble(e *element) {
	r := e.ref
	stiff := 2 * e.tension / e.h
	root := math.Sqrt(e.mass)
	for k := 0; k < r.p-1; k++ {
		s.omega2[e.first+k] = stiff * r.mu[k] / e.mass
		s.kappa[e.first+k] = stiff * r.kappa[k] / root
	}
	at := [2]int{0, r.p}
	for a := 0; a < 2; a++ {
		ma := e.mass * r.w[at[a]]
		s.addMass(e.end[a], ma)
		s.couple(e.end[a], e.end[a], stiff*r.k[at[a]][at[a]], ma*e.rate)
		s.couple(e.end[a], e.end[1-a], stiff*r.k[at[a]][at[1-a]], 0)
	}
}

func (s *system) addMass(end int, m float64) {
	if end >= 0 {
		s.mass[end] += m
	} else if end < endFixed {
		s.movedM[-2-end] += m
	}
}

// couple adds a term of the row of end point a for the displacement (k) and
// velocity (c) of end point b. Rows of fixed points are dropped.
func (s *system) couple(a, b int, k, c float64) {
	add := func(row *[]entry, col int) {
		for i := range *row {
			if (*row)[i].col == col {
				(*row)[i].k += k
				(*row)[i].c += c
				return
			}
		}
		*row = append(*row, entry{col: col, k: k, c: c})
	}
	switch {
	case a >= 0 && b >= 0:
		add(&s.rows[a], b)
	case a < endFixed && b >= 0:
		add(&s.movedPF[-2-a], b)
	case a < endFixed && b < endFixed:
		add(&s.movedPP[-2-a], -2-b)
	}
}

// attach adds what hangs at the nodes, and the links.
func (s *system) attach() {
	for i := range s.m.Nodes {
		nd, end := &s.m.Nodes[i], s.nodeEnd[i]
		s.addMass(end, nd.Mass)
		s.couple(end, end, nd.Spring, nd.Dashpot)
		if end < 0 {
			continue
		}
		for _, b := range nd.Brackets {
			if b.K > 0 && b.C > 0 {
				s.brackets = append(s.brackets, bracket{end: end, other: -1, k: b.K, c: b.C, start: b.Start})
			}
		}
	}
	for _, l := range s.m.Links {
		a, b := s.nodeEnd[l.A], s.nodeEnd[l.B]
		if l.A == l.B || l.Slack {
			continue
		}
		dashpot := l.Dashpot
		if l.Through > 0 {
			s.tieBracket(&l)
			dashpot = 0
		}
		s.couple(a, a, l.Spring, dashpot)
		s.couple(b, b, l.Spring, dashpot)
		s.couple(a, b, -l.Spring, -dashpot)
		s.couple(b, a, -l.Spring, -dashpot)
	}
	for i := range s.rows {
		sort.Slice(s.rows[i], func(a, b int) bool { return s.rows[i][a].col < s.rows[i][b].col })
	}
}

// tieBracket adds a tie's dashpot behind a bracket, relaxed at the start.
func (s *system) tieBracket(l *mesh.Link) {
	a, b := l.A, l.B
	if s.nodeEnd[a] < 0 {
		a, b = b, a
	}
	if s.nodeEnd[a] < 0 || l.Dashpot == 0 {
		return
	}
	k := bracket{end: s.nodeEnd[a], other: max(-1, s.nodeEnd[b]), k: l.Through, c: l.Dashpot, start: s.m.Nodes[a].Start}
	if k.other >= 0 {
		k.start -= s.m.Nodes[b].Start
	}
	s.brackets = append(s.brackets, k)
}

// across is the difference between a bracket's ends; in is where the end points start.
func (k *bracket) across(x []float64, in int) float64 {
	if k.other < 0 {
		return x[in+k.end]
	}
	return x[in+k.end] - x[in+k.other]
}

// highest estimates the highest frequency that the time step must follow. A few
// elements far shorter than the rest, or a stiff spring at a light point, are not
// followed beyond four times the highest of the ordinary ones: the line hardly
// moves in those modes, and they are propagated stably all the same.
func (s *system) highest() {
	var each []float64
	for i := range s.elements {
		e := &s.elements[i]
		each = append(each, math.Sqrt(2*e.tension/e.h*e.ref.top/e.mass))
	}
	all := 0.0
	for _, w := range each {
		all = math.Max(all, w)
	}
	for a := range s.rows {
		for _, t := range s.rows[a] {
			if t.col == a && s.mass[a] > 0 {
				all = math.Max(all, math.Sqrt(math.Max(0, t.k/s.mass[a])))
			}
		}
	}
	sort.Float64s(each)
	if len(each) == 0 {
		s.top = all
		return
	}
	s.top = math.Min(all, 4*each[len(each)/2])
	s.above = s.top < all
}

// hung is the highest own frequency of a mass that hangs by links alone, rad/s, but
// no more than a limit: the energy account must follow it, whatever the line does.
func (s *system) hung(limit float64) float64 {
	attached := make([]bool, s.ends)
	for i := range s.elements {
		for _, ends := range [][]int{s.elements[i].end[:], s.elements[i].out} {
			for _, end := range ends {
				if end >= 0 {
					attached[end] = true
				}
			}
		}
	}
	w := 0.0
	for i := range s.rows {
		for _, t := range s.rows[i] {
			if t.col == i && !attached[i] && t.k > 0 {
				w = math.Max(w, math.Sqrt(t.k/s.mass[i]))
			}
		}
	}
	return math.Min(w, limit)
}

// watchNodes numbers the nodes at which the line's force on a fitting is recorded.
func (s *system) watchNodes() {
	s.watched = map[int]int{}
	for c := range s.m.Channels {
		for _, sp := range s.m.Channels[c].Spots {
			if reaction(s.m, &s.m.Channels[c], sp) {
				if _, ok := s.watched[sp.Node]; !ok {
					s.watched[sp.Node] = len(s.watched)
				}
			}
		}
	}
}

// proportional tells whether the damping is one multiple of the mass everywhere,
// and which, 1/s.
func (s *system) proportional() (rate float64, ok bool) {
	if len(s.brackets) > 0 {
		return 0, false
	}
	for i := range s.elements {
		if i == 0 {
			rate = s.elements[0].rate
		}
		if math.Abs(s.elements[i].rate-rate) > 1e-14*rate {
			return 0, false
		}
		if b := s.elements[i].body; b != nil && b.cii != nil {
			return 0, false
		}
	}
	for a := range s.rows {
		for _, t := range s.rows[a] {
			want := rate * t.m
			if t.col == a {
				want = rate * s.mass[a]
			}
			if math.Abs(t.c-want) > 1e-13*math.Max(math.Abs(want), math.Abs(t.c)) {
				return 0, false
			}
		}
	}
	return rate, true
}

// find is the element of a place in a piece and the place in it, -1 .. 1. At a
// border it is the element after it, at the piece's end the last one.
func (s *system) find(piece int, at float64) (*element, float64) {
	list := s.byPiece[piece]
	i := sort.Search(len(list), func(k int) bool { return s.elements[list[k]].s0 > at*(1+1e-14) })
	e := &s.elements[list[max(0, i-1)]]
	x := 2*(at-e.s0)/e.h - 1
	return e, math.Max(-1, math.Min(1, x))
}
