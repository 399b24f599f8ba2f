package modal

import (
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/numeric"
)

// Shape is the displacement of one mode over the network, scaled so that its
// largest modulus along the lines is 1 and the first place where that is reached
// in walking order has the value 1.
type Shape struct {
	nodes  map[int]complex128
	pieces map[int]arc
	motion *motion    // in place of both for a general group
	span   *spanShape // in place of all for a single span
	factor complex128
}

// arc is u(x) on a piece: even*cosh(ay)/cosh(h) + odd*sinh(ay)/sinh(h), y from
// the middle, h = aL/2; near a zero of cosh(h) or sinh(h) the share that it
// belongs to is even*cosh(ay) or odd*sinh(ay)/a instead.
type arc struct {
	a         complex128
	length    float64
	keep      kept
	even, odd complex128
}

// At is the complex displacement at a spot: modulus and phase of the motion
// there. It is 0 outside the mode's group.
func (s *Shape) At(spot mesh.Spot) complex128 {
	if s.span != nil {
		if spot.Node >= 0 || spot.Piece != s.span.piece {
			return 0
		}
		return s.factor * complex(s.span.at(spot.At), 0)
	}
	if s.motion != nil {
		if spot.Node >= 0 && !s.motion.y.in(spot.Node) {
			return 0
		}
		return s.factor * s.motion.displacement(spot)
	}
	if spot.Node >= 0 {
		return s.nodes[spot.Node]
	}
	if p, ok := s.pieces[spot.Piece]; ok {
		return p.at(spot.At)
	}
	return 0
}

func (p *arc) at(x float64) complex128 {
	y := complex(x-p.length/2, 0)
	h := p.a * complex(p.length/2, 0)
	if cmplx.Abs(h) < 1e-7 { // straight to rounding, also where a = 0
		return p.even + p.odd*y/complex(p.length/2, 0)
	}
	if real(h) > 300 {
		near, far := cmplx.Exp(-p.a*complex(x, 0)), cmplx.Exp(-p.a*complex(p.length-x, 0))
		return p.even*(far+near) + p.odd*(far-near)
	}
	sh, ch := sinhCosh(p.a * y)
	sh0, ch0 := sinhCosh(h)
	switch p.keep {
	case keepEven:
		return p.even*ch + p.odd*sh/sh0
	case keepOdd:
		return p.even*ch/ch0 + p.odd*sh/p.a
	}
	return p.even*ch/ch0 + p.odd*sh/sh0
}

// shapes gives the shapes at a root: as many as there are, want at most.
func (w *network) shapes(s complex128, want int) (shapes []*Shape, rank int) {
	if l, ok := w.lone(); ok && l.ei > 0 {
		return []*Shape{l.shape(imag(s))}, 1
	}
	if w.sys != nil {
		return w.generalShapes(s, want)
	}
	e := newEvaluator(w)
	e.assemble(s)
	n := e.n
	want = min(want, n)
	size := 0.0
	for _, v := range e.da[:n*n] {
		size = math.Max(size, cmplx.Abs(s)*cmplx.Abs(v))
	}
	vectors, pivots := numeric.NullVectors(append([]complex128(nil), e.a[:n*n]...), n, want)
	rank = want
	// A pivot that is no zero betrays a missing shape. 1e-6: chosen, between
	// the 1e-12 of true zeros and the size of the others; coinciding roots are
	// known to 1e-8 (see merge).
	for rank > 1 && pivots[n-rank] > 1e-6*math.Max(size, pivots[0]) {
		rank--
	}
	if rank < want {
		vectors, _ = numeric.NullVectors(append([]complex128(nil), e.a[:n*n]...), n, rank)
	}
	if rank > 1 && real(s) == 0 {
		w.orthogonal(e, vectors)
	}
	for _, v := range vectors {
		shapes = append(shapes, w.shape(e, v))
	}
	return shapes, rank
}

// orthogonal makes real shapes of one frequency orthogonal to each other in the
// kinetic energy, whose matrix is proportional to the derivative of the dynamic
// stiffness (Gram and Schmidt).
func (w *network) orthogonal(e *evaluator, vectors [][]complex128) {
	n := e.n
	energy := func(x, y []complex128) complex128 {
		var sum complex128
		for i := 0; i < n; i++ {
			for j := 0; j < n; j++ {
				sum += x[i] * e.da[i*n+j] * y[j]
			}
		}
		return sum
	}
	for i := range vectors {
		for k := 0; k < i; k++ {
			f := energy(vectors[k], vectors[i]) / energy(vectors[k], vectors[k])
			for j := range vectors[i] {
				vectors[i][j] -= f * vectors[k][j]
			}
		}
	}
}

// shape reads the unknowns v of the matrix last assembled.
func (w *network) shape(e *evaluator, v []complex128) *Shape {
	s := &Shape{nodes: map[int]complex128{}, pieces: map[int]arc{}}
	for i, node := range w.nodes {
		s.nodes[node] = v[e.row[i]]
	}
	value := func(i int) complex128 {
		if i < 0 {
			return 0
		}
		return v[e.row[i]]
	}
	for i := range w.elements {
		el, b := &w.elements[i], &e.blocks[i]
		a, c := value(el.i), value(el.j)
		p := arc{a: b.a, length: el.len, keep: b.keep, even: (a + c) / 2, odd: (c - a) / 2}
		switch b.keep {
		case keepEven:
			p.even = v[e.hidden(i)]
		case keepOdd:
			p.odd = v[e.hidden(i)] * complex(b.scale, 0)
		}
		s.pieces[el.piece] = p
	}
	w.normalise(s)
	return s
}

// normalise scales by the largest displacement on the lines; where the lines
// stand still, by that of the hung masses.
func (w *network) normalise(s *Shape) {
	var top, first complex128
	for i := range w.elements {
		p := s.pieces[w.elements[i].piece]
		v := p.peak()
		if cmplx.Abs(v) > cmplx.Abs(top) {
			top = v
		}
	}
	hung := 0.0
	for _, node := range w.nodes {
		hung = math.Max(hung, cmplx.Abs(s.nodes[node]))
	}
	if cmplx.Abs(top) <= 1e-9*hung {
		top = 0
		for _, node := range w.nodes {
			if v := s.nodes[node]; cmplx.Abs(v) > cmplx.Abs(top) {
				top = v
			}
		}
		first = top
	}
	// The first of several equal tops decides the sign. 1e-6: chosen, so that
	// rounding does not make the sign jump.
	for i := 0; i < len(w.elements) && first == 0; i++ {
		p := s.pieces[w.elements[i].piece]
		first = p.firstNear((1 - 1e-6) * cmplx.Abs(top))
	}
	if first == 0 {
		return
	}
	f := complex(cmplx.Abs(first)/cmplx.Abs(top), 0) / first
	for k, v := range s.nodes {
		s.nodes[k] = v * f
	}
	for k, p := range s.pieces {
		p.even *= f
		p.odd *= f
		s.pieces[k] = p
	}
}

// places is the number of intervals at which a piece is looked at for its
// largest displacement: sixteen to a half wave.
func (p *arc) places() int {
	return 16 * (1 + int(math.Min(math.Abs(imag(p.a))*p.length/math.Pi, 1e5)))
}

// peak is the displacement of largest modulus.
func (p *arc) peak() complex128 {
	n := p.places()
	h := p.length / float64(n)
	best, at := p.at(0), 0
	for k := 1; k <= n; k++ {
		if v := p.at(float64(k) * h); cmplx.Abs(v) > cmplx.Abs(best) {
			best, at = v, k
		}
	}
	return p.climb(best, float64(at)*h, h)
}

// firstNear is the first displacement of a local top with at least that modulus;
// 0 where there is none.
func (p *arc) firstNear(level float64) complex128 {
	n := p.places()
	h := p.length / float64(n)
	for k := 0; k <= n; k++ {
		v := p.at(float64(k) * h)
		// Between neighbours of a top the modulus falls by 1-cos(pi/32) at most.
		if cmplx.Abs(v) < 0.99*level {
			continue
		}
		if top := p.climb(v, float64(k)*h, h); cmplx.Abs(top) >= level {
			return top
		}
	}
	return 0
}

// climb refines a top within one interval on either side by golden section.
func (p *arc) climb(v complex128, x, h float64) complex128 { return climb(p.at, p.length, v, x, h) }

func climb(at func(float64) complex128, length float64, v complex128, x, h float64) complex128 {
	lo, hi := math.Max(0, x-h), math.Min(length, x+h)
	const g = 0.6180339887498949
	x1, x2 := hi-g*(hi-lo), lo+g*(hi-lo)
	v1, v2 := at(x1), at(x2)
	for step := 0; step < 45; step++ {
		if cmplx.Abs(v1) > cmplx.Abs(v2) {
			hi, x2, v2 = x2, x1, v1
			x1 = hi - g*(hi-lo)
			v1 = at(x1)
		} else {
			lo, x1, v1 = x1, x2, v2
			x2 = lo + g*(hi-lo)
			v2 = at(x2)
		}
	}
	if cmplx.Abs(v1) > cmplx.Abs(v) {
		v = v1
	}
	if cmplx.Abs(v2) > cmplx.Abs(v) {
		v = v2
	}
	return v
}
