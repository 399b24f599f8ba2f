package spectral

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// values writes the derivative of order d with respect to metres of the element's
// basis at x, -1 .. 1, into dst.
func (e *element) values(dst []float64, x float64, d int) []float64 {
	switch {
	case e.body != nil:
		e.body.basis(dst, x, d)
	case d == 0:
		e.ref.shape(dst, x)
	default:
		e.ref.slope(dst, make([]float64, len(dst)), x)
		for i := range dst {
			dst[i] *= 2 / e.h
		}
	}
	return dst
}

// atGauss are the values of the element's basis at Gauss point g of e.ref.gx.
func (e *element) atGauss(g int) []float64 {
	n := e.ref.p + 1
	if e.body != nil && e.body.beam != nil {
		return e.body.beam.at[0][g*n : (g+1)*n]
	}
	return e.ref.gl[g*n : (g+1)*n]
}

func (e *element) lossy() bool { return e.rate != 0 || e.body != nil && e.body.cii != nil }

// column subtracts from c and m what the inner coordinates feel of the velocity and
// acceleration of one of the outer ones, and tells whether the former is anything.
func (e *element) column(end int, c, m []float64) (lossy bool) {
	b := e.body
	for a, other := range e.out {
		if other != end {
			continue
		}
		for i, v := range b.drag[a] {
			m[e.first+i] -= v
			c[e.first+i] -= b.rate * v
		}
		lossy = lossy || b.rate != 0
		if b.cio != nil {
			lossy = true
			for i, v := range b.cio[a] {
				c[e.first+i] -= v
			}
		}
	}
	return lossy
}

// spreadBody adds loads on the basis of a body's element to its coordinates.
func (s *system) spreadBody(dst []float64, e *element, nodal []float64) {
	b := e.body
	for c := 0; c < b.ni; c++ {
		dst[e.first+c] += dot(b.shape[c], nodal)
	}
	for a, end := range e.out {
		f := dot(b.shape[b.ni+a], nodal)
		if end >= 0 {
			dst[s.inner+end] += f
		}
		if a < 2 && len(s.watched) > 0 {
			if node := s.borderNode(e, a); node >= 0 {
				if w, ok := s.watched[node]; ok {
					dst[s.size()+w] += f
				}
			}
		}
	}
}

// borderNode is the mesh node at an element's first (0) or last (1) end, -1 inside a
// piece.
func (s *system) borderNode(e *element, a int) int {
	list, p := s.byPiece[e.piece], &s.m.Pieces[e.piece]
	switch {
	case a == 0 && e == &s.elements[list[0]]:
		return p.From
	case a == 1 && e == &s.elements[list[len(list)-1]]:
		return p.To
	}
	return -1
}

// addNodalBody adds a form on the basis to a row on coordinates.
func (s *system) addNodalBody(row []float64, f *functional, e *element, g []float64, scale float64) {
	b := e.body
	for c := 0; c < b.ni; c++ {
		row[e.first+c] += scale * dot(b.shape[c], g)
	}
	for a, end := range e.out {
		v := scale * dot(b.shape[b.ni+a], g)
		if end >= 0 {
			row[s.inner+end] += v
		} else if end < endFixed {
			f.pre = append(f.pre, preTerm{moved: -2 - end, c: v})
		}
	}
}

// bodySlope is du/dx, or the force T u' - EI u”', at x in an element whose basis
// has the slopes g there. The part of internal loss is added apart.
func (s *system) bodySlope(op operator, e *element, g []float64, x float64, force bool) functional {
	if force {
		t := e.body.tensionAt(x)
		for i := range g {
			g[i] *= t
		}
		if e.body.bending > 0 {
			for i, v := range e.values(make([]float64, len(g)), x, 3) {
				g[i] -= e.body.bending * v
			}
		}
	}
	return s.nodal(op, e, g, 1)
}

// inLoss adds what internal loss gives to a force (order 3) or moment (order 2).
func (s *system) inLoss(op operator, t *tap, sp mesh.Spot, attached [][]mesh.Attachment, order int) {
	e, x := s.elementAt(sp, attached)
	if e == nil || e.body == nil || e.body.cii == nil {
		return
	}
	scale := e.body.bending * e.body.eta
	if order == 3 {
		scale = -scale
	}
	t.f[1] = s.nodal(op, e, e.values(make([]float64, e.body.n), x, order), scale)
}

// momentAt is EI u”, after the spot where two pieces meet.
func (s *system) momentAt(op operator, t *tap, sp mesh.Spot, attached [][]mesh.Attachment) {
	e, x := s.elementAt(sp, attached)
	if e == nil || e.body == nil || e.body.bending == 0 {
		return
	}
	t.f[0] = s.nodal(op, e, e.values(make([]float64, e.body.n), x, 2), e.body.bending)
	s.inLoss(op, t, sp, attached, 2)
}

// reactionFramed is what the line exerts on a node; see reactionAt. Of a sagging
// line's pull only what acts along the line counts, not that on the fitting itself.
func (s *system) reactionFramed(op operator, t *tap, node int, attached [][]mesh.Attachment) {
	n := s.size()
	var rows [3][]float64
	for i := range rows {
		rows[i] = make([]float64, n)
	}
	put := func(q, end int, v float64) {
		if end >= 0 {
			rows[q][s.inner+end] -= v
		} else if end < endFixed && v != 0 {
			t.f[q].pre = append(t.f[q].pre, preTerm{moved: -2 - end, c: -v})
		}
	}
	for _, at := range attached[node] {
		list, a := s.byPiece[at.Piece], 0
		e := &s.elements[list[0]]
		if at.End {
			e, a = &s.elements[list[len(list)-1]], 1
		}
		b := e.body
		for c, v := range b.drag[a] {
			rows[1][e.first+c] -= b.rate * v
			rows[2][e.first+c] -= v
		}
		if b.cio != nil {
			for c, v := range b.cio[a] {
				rows[1][e.first+c] -= v
			}
		}
		for d, end := range e.out {
			put(0, end, b.k[a][d])
			put(1, end, b.c[a][d])
			put(2, end, b.m[a][d])
		}
		s.sagShare(rows[0], &t.f[0], e, a)
	}
	for q := range rows {
		t.f[q].runs = compress(op.row(rows[q]))
	}
	t.share = s.watched[node]
}

// steepAtNode sets what extra tension multiplies in the line's force on a node: the
// node's row of a unit tension's stiffness, as in reactionAt.
func (s *system) steepAtNode(op operator, t *tap, node int, attached [][]mesh.Attachment) {
	row := make([]float64, s.size())
	for _, at := range attached[node] {
		p := &s.m.Pieces[at.Piece]
		if !s.stretches(p) {
			continue
		}
		t.line = p.Line
		list, a := s.byPiece[at.Piece], 0
		e := &s.elements[list[0]]
		if at.End {
			e, a = &s.elements[list[len(list)-1]], 1
		}
		b := e.body
		size := len(b.shape)
		for d, end := range e.out {
			v := b.k[a][d] / b.tension
			if b.unitK != nil {
				v = b.unitK[(b.ni+a)*size+b.ni+d]
			}
			if end >= 0 {
				row[s.inner+end] -= v
			} else if end < endFixed {
				t.steep.pre = append(t.steep.pre, preTerm{moved: -2 - end, c: -v})
			}
		}
		for c := 0; c < b.ni && b.unitK != nil; c++ {
			row[e.first+c] -= b.unitK[(b.ni+a)*size+c]
		}
	}
	t.steep.runs = compress(op.row(row))
}

// sagShare subtracts the sag's pull on an element's outer coordinate a from a row.
func (s *system) sagShare(row []float64, f *functional, e *element, a int) {
	for _, sg := range s.sags {
		line := &s.m.Lines[sg.line]
		for k, pi := range line.Pieces {
			if pi != e.piece {
				continue
			}
			own := line.Sag.Pieces[k] * e.body.area[e.body.ni+a] * sg.g
			for i, w := range sg.w {
				row[i] -= own * w
			}
			for i, w := range sg.moved {
				if w != 0 {
					f.pre = append(f.pre, preTerm{moved: i, c: -own * w})
				}
			}
		}
	}
}

// startFrame projects start displacement and velocity. Displacements of strings are
// interpolated; those of pieces that bend are fitted in the mean square by mass, as
// are all velocities.
func (s *system) startFrame(x, v []float64) {
	momentum := make([]float64, s.size())
	for i := range s.m.Nodes {
		if end := s.nodeEnd[i]; end >= 0 {
			momentum[s.inner+end] = s.m.Nodes[i].Mass * s.m.Nodes[i].StartRate
		}
	}
	fit := newFrame(s, 1)
	bends := false
	for i := range s.elements {
		e := &s.elements[i]
		p := &s.m.Pieces[e.piece]
		s.addMoments(e, momentum, p.StartRate)
		bends = bends || e.body.bending > 0
	}
	s.told(momentum, func(m *mesh.Motion) float64 { return m.Velocity(0) })
	copy(v, momentum)
	fit.settle(v)
	if !bends {
		for i := range s.elements {
			s.interpolate(&s.elements[i], x)
		}
		return
	}
	for i := range x {
		x[i] = 0
	}
	for i := range s.m.Nodes {
		if end := s.nodeEnd[i]; end >= 0 {
			x[s.inner+end] = s.m.Nodes[i].Mass * s.m.Nodes[i].Start
		}
	}
	for i := range s.elements {
		e := &s.elements[i]
		s.addMoments(e, x, s.m.Pieces[e.piece].Start)
	}
	s.told(x, func(m *mesh.Motion) float64 { return m.Displacement(0) })
	fit.settle(x)
}

// told takes off what prescribed nodes carry of the moments.
func (s *system) told(dst []float64, at func(*mesh.Motion) float64) {
	for i, node := range s.moved {
		u := at(s.m.Nodes[node].Motion)
		for _, t := range s.movedPF[i] {
			dst[s.inner+t.col] -= t.m * u
		}
		for e := range s.elements {
			el := &s.elements[e]
			for a, end := range el.out {
				for k, d := range el.body.drag[a] {
					if end == -2-i {
						dst[el.first+k] -= d * u
					}
				}
			}
		}
	}
}

// addMoments adds the integrals of mass times a function times each coordinate's
// shape.
func (s *system) addMoments(e *element, dst []float64, f func(float64) float64) {
	if f == nil {
		return
	}
	b := e.body
	gx, gw := e.ref.gx, e.ref.gw
	if b.beam == nil { // the quadrature of its mass
		gx, gw = e.ref.x, e.ref.w
	}
	const inside = 1 - 1e-9 // the side that counts where the function jumps at a border
	nodal, l := make([]float64, b.n), make([]float64, b.n)
	for g, x := range gx {
		c := gw[g] * e.h / 2 * b.mass * f(e.s0+e.h*(x*inside+1)/2)
		e.values(l, x, 0)
		for i := range l {
			nodal[i] += c * l[i]
		}
	}
	for c := 0; c < b.ni; c++ {
		dst[e.first+c] += dot(b.shape[c], nodal)
	}
	for a, end := range e.out {
		if end >= 0 {
			dst[s.inner+end] += dot(b.shape[b.ni+a], nodal)
		}
	}
}

// interpolate sets a string element's displacement from its start shape.
func (s *system) interpolate(e *element, x []float64) {
	f := s.m.Pieces[e.piece].Start
	if f == nil {
		f = func(float64) float64 { return 0 }
	}
	b := e.body
	var ends [2]float64
	for a, node := range [2]int{s.borderNode(e, 0), s.borderNode(e, 1)} {
		switch {
		case node < 0:
			ends[a] = f(e.s0 + e.h*float64(a))
			x[s.inner+e.end[a]] = ends[a]
		case s.m.Nodes[node].Motion != nil:
			ends[a] = s.m.Nodes[node].Motion.Displacement(0)
		case e.end[a] >= 0:
			ends[a] = s.m.Nodes[node].Start
		}
		for k, d := range b.drag[a] {
			x[e.first+k] -= d * ends[a]
		}
	}
	for i, w := range e.ref.w {
		u := f(e.s0 + e.h*(e.ref.x[i]+1)/2)
		if i == 0 || i == b.n-1 {
			u = ends[i/(b.n-1)]
		}
		c := b.mass * e.h / 2 * w * u
		for k := 0; k < b.ni; k++ {
			x[e.first+k] += c * b.shape[k][i]
		}
	}
}

// wavelength of bending waves: k with m omega^2 = T k^2 + EI k^4, rad/m.
func waveNumber(p *mesh.Piece, omega float64) float64 {
	t := p.Tension + p.TensionRise*p.Length/2
	q := p.MassPerLength * omega * omega
	if p.Bending == 0 {
		return math.Sqrt(q / t)
	}
	return math.Sqrt(2 * q / (t + math.Sqrt(t*t+4*p.Bending*q)))
}
