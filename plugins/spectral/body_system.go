package spectral

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// framed are the features with which elements are bodies.
const framed = mesh.Bending | mesh.VaryingTension | mesh.Sagging | mesh.InternalLoss | mesh.TurningJoint | mesh.Stretching

// framing tells whether a mesh is solved as a frame: for its features, or for its size,
// because a frame's outer system is banded.
func framing(m *mesh.Mesh) bool { return m.Features()&framed != 0 || len(m.Nodes) > denseMost }

// sagging is the sag term of one line: the energy g (w'x + moved'u)^2/2.
type sagging struct {
	line  int
	g     float64   // N/m
	w     []float64 // [size] weight of each coordinate
	moved []float64 // of the prescribed nodes
}

// stock keeps what elements have in common.
type stock struct {
	beams  map[int]*beam
	bodies map[material]*body
}

// turnable numbers the slopes at nodes. Pieces that bend and meet share one, except
// at a hinge, where every piece has its own, and where the node does not turn.
func (s *system) turnable() {
	s.turns = make([]int, len(s.m.Nodes))
	for i := range s.turns {
		s.turns[i] = endFixed
	}
	if !s.frame {
		return
	}
	for i := range s.m.Pieces {
		p := &s.m.Pieces[i]
		for _, id := range []int{p.From, p.To} {
			if nd := &s.m.Nodes[id]; p.Bending > 0 && !nd.Clamped && !nd.Hinge && s.turns[id] == endFixed {
				s.turns[id] = s.ends
				s.ends++
			}
		}
	}
}

// turnAt is the slope at one end of a piece; endFixed where it does not turn or the
// piece does not bend.
func (s *system) turnAt(piece int, last bool) int {
	p := &s.m.Pieces[piece]
	id := p.From
	if last {
		id = p.To
	}
	if !s.frame || p.Bending == 0 {
		return endFixed
	}
	if nd := &s.m.Nodes[id]; nd.Hinge && !nd.Clamped {
		s.ends++
		return s.ends - 1
	}
	return s.turns[id]
}

// dress gives an element of a frame its body and its outer coordinates; turn is the
// slope at its start. It returns the slope at its end.
func (s *system) dress(e *element, st stock, turn int, final bool) (int, bool) {
	p := &s.m.Pieces[e.piece]
	mt := material{degree: e.ref.p, h: e.h, mass: p.MassPerLength, tension: p.Tension + p.TensionRise*e.s0, rise: p.TensionRise,
		rate: e.rate, bending: p.Bending, eta: p.Internal, stretch: s.stretches(p)}
	if p.Bending == 0 {
		mt.eta = 0
	}
	e.tension = mt.tension
	b := st.bodies[mt]
	if b == nil {
		var bm *beam
		if p.Bending > 0 {
			if bm = st.beams[mt.degree]; bm == nil {
				bm = newBeam(mt.degree)
				st.beams[mt.degree] = bm
			}
		}
		var ok bool
		if b, ok = newBody(mt, e.ref, bm); !ok {
			return 0, false
		}
		st.bodies[mt] = b
	}
	e.body, e.out = b, []int{e.end[0], e.end[1]}
	if p.Bending == 0 {
		return endFixed, true
	}
	next := s.ends
	if final {
		next = s.turnAt(e.piece, true)
	} else {
		s.ends++
	}
	e.out = append(e.out, turn, next)
	return next, true
}

func (s *system) stretches(p *mesh.Piece) bool {
	return within(p.Line, s.m.Lines) && s.m.Lines[p.Line].Stretch != nil
}

// tightens tells whether a piece's tension moves: by sag or stretch.
func (s *system) tightens(p *mesh.Piece) bool {
	return s.stretches(p) || within(p.Line, s.m.Lines) && s.m.Lines[p.Line].Sag != nil
}

// assembleBody adds an element's outer coordinates.
func (s *system) assembleBody(e *element) {
	b := e.body
	copy(s.omega2[e.first:], b.omega2)
	for a, ea := range e.out {
		for d, ed := range e.out {
			s.couple(ea, ed, b.k[a][d], b.c[a][d])
			if a == d {
				s.addMass(ea, b.m[a][a])
			} else {
				s.coupleMass(ea, ed, b.m[a][d])
			}
		}
	}
}

// coupleMass adds a mass that two different outer coordinates share; couple has made
// the entry.
func (s *system) coupleMass(a, b int, m float64) {
	add := func(row []entry, col int) {
		for i := range row {
			if row[i].col == col {
				row[i].m += m
			}
		}
	}
	switch {
	case a >= 0 && b >= 0:
		add(s.rows[a], b)
	case a < endFixed && b >= 0:
		add(s.movedPF[-2-a], b)
	case a < endFixed && b < endFixed:
		add(s.movedPP[-2-a], -2-b)
	}
}

// hang adds what turns at nodes, and the sag of lines.
func (s *system) hang() {
	for i := range s.m.Nodes {
		if nd := &s.m.Nodes[i]; s.turns[i] >= 0 {
			s.couple(s.turns[i], s.turns[i], nd.Rotary, 0)
			s.addMass(s.turns[i], nd.Inertia)
		}
	}
	for l := range s.m.Lines {
		if sag := s.m.Lines[l].Sag; sag != nil && sag.Stiffness > 0 {
			sg := s.sagOf(l, sag)
			for i, wi := range sg.moved {
				for j, wj := range sg.moved {
					s.couple(-2-i, -2-j, sg.g*wi*wj, 0)
				}
			}
			s.sags = append(s.sags, sg)
		}
	}
}

func (s *system) sagOf(l int, sag *mesh.Sag) sagging {
	sg := sagging{line: l, g: sag.Stiffness, w: make([]float64, s.size()), moved: make([]float64, len(s.moved))}
	put := func(end int, w float64) {
		if end >= 0 {
			sg.w[s.inner+end] += w
		} else if end < endFixed {
			sg.moved[-2-end] += w
		}
	}
	for k, pi := range s.m.Lines[l].Pieces {
		for _, i := range s.byPiece[pi] {
			e := &s.elements[i]
			for c := 0; c < e.body.ni; c++ {
				sg.w[e.first+c] = sag.Pieces[k] * e.body.area[c]
			}
			for a, end := range e.out {
				put(end, sag.Pieces[k]*e.body.area[e.body.ni+a])
			}
		}
	}
	for node, w := range sag.Nodes {
		put(s.nodeEnd[node], w)
	}
	return sg
}

// highestFramed is highest for frames. The vibrations of elements that bend reach
// far above what is asked for: those above three times the layout's highest are not
// followed.
func (s *system) highestFramed(lay *layout) {
	all := 0.0
	for i := range s.elements {
		if w := s.elements[i].body.omega2; len(w) > 0 {
			all = math.Max(all, math.Sqrt(w[len(w)-1]))
		}
	}
	for a := range s.rows {
		for _, t := range s.rows[a] {
			if t.col == a && s.mass[a] > 0 {
				all = math.Max(all, math.Sqrt(math.Max(0, t.k/s.mass[a])))
			}
		}
	}
	travel := 0.0
	for i := range s.m.Pieces {
		travel += travelTime(&s.m.Pieces[i])
	}
	s.lowest = math.Pi / travel
	follow := 3 * lay.omega * math.Pow(ratio, float64(lay.level))
	s.top = math.Min(all, follow)
	s.above = false
}
