package spectral

import "github.com/tautspan/tautspan/engine/mesh"

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
