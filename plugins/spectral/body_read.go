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

// wavelength of bending waves: k with m omega^2 = T k^2 + EI k^4, rad/m.
func waveNumber(p *mesh.Piece, omega float64) float64 {
	t := p.Tension + p.TensionRise*p.Length/2
	q := p.MassPerLength * omega * omega
	if p.Bending == 0 {
		return math.Sqrt(q / t)
	}
	return math.Sqrt(2 * q / (t + math.Sqrt(t*t+4*p.Bending*q)))
}
