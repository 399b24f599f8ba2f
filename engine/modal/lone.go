package modal

import (
	"math"

	"github.com/tautspan/tautspan/engine/numeric"
)

// lone is a single span: one uniform piece, held across at both ends, each of
// which turns, where it bends, against a rotary spring, freely (0) or not at all
// (infinite). Nothing is damped. It has the closed frequency equation below,
// which is fifty times faster than the matrix; a fit asks for thousands.
type lone struct {
	t, m, ei, len float64    // N, kg/m, N m^2, m
	turn          [2]float64 // N m/rad
	piece         int
}

// lone tells whether the group is a single span.
func (w *network) lone() (*lone, bool) {
	if w.damped || len(w.elements) != 1 || w.sys != nil && len(w.sys.sagging) > 0 || len(w.nodes) > 0 || len(w.links) > 0 {
		return nil, false
	}
	p := &w.m.Pieces[w.elements[0].piece]
	if p.Bending < 0 || p.TensionRise != 0 || p.Tension < 0 || p.Bending == 0 && p.Tension == 0 || p.TensionLoss != 0 || p.BendingLoss != 0 || p.Law != nil {
		return nil, false
	}
	out := &lone{t: p.Tension, m: p.MassPerLength, ei: p.Bending, len: p.Length, piece: w.elements[0].piece}
	for k, i := range []int{p.From, p.To} {
		n := &w.m.Nodes[i]
		if !held(n) || n.Inertia != 0 || n.Hinge || p.From == p.To {
			return nil, false
		}
		if out.turn[k] = n.Rotary; n.Clamped {
			out.turn[k] = math.Inf(1)
		}
	}
	return out, true
}

// omega is the angular frequency of wavenumber q, m w^2 = T q^2 + EI q^4.
func (l *lone) omega(q float64) float64 {
	return q * math.Sqrt((l.t+l.ei*q*q)/l.m)
}

// delta is zero at the wavenumbers q of the vibrations. With p^2 = q^2 + T/EI,
// h = L/2 and N = EI(p^2+q^2), the moments that turn both ends alike and apart
// are N cos(qh)/S and N sin(qh)/A times the slope, with
//
//	S = q sin(qh) + p tanh(ph) cos(qh),  A = p coth(ph) sin(qh) - q cos(qh),
//
// so that with the springs K1, K2
//
//	delta = N^2 sin cos + (K1+K2)/2 N (A cos + S sin) + K1 K2 S A.
//
// Ends that do not turn keep the terms of the highest power of their spring.
// Source: the shapes cos(qx)/cos(qh) - cosh(px)/cosh(ph) and their odd twins,
// which are zero at both ends; derived here.
func (l *lone) delta(q float64) float64 {
	p := math.Sqrt(q*q + l.t/l.ei)
	h := l.len / 2
	sin, cos := math.Sincos(q * h)
	tanh := math.Tanh(p * h)
	n := l.ei * (p*p + q*q)
	s := q*sin + p*tanh*cos
	a := p/tanh*sin - q*cos
	k1, k2 := l.turn[0], l.turn[1]
	switch {
	case math.IsInf(k1, 1) && math.IsInf(k2, 1):
		return s * a
	case math.IsInf(k1, 1):
		return n*(a*cos+s*sin)/2 + k2*s*a
	case math.IsInf(k2, 1):
		return n*(a*cos+s*sin)/2 + k1*s*a
	}
	return n*n*sin*cos + (k1+k2)/2*n*(a*cos+s*sin) + k1*k2*s*a
}

// root is the wavenumber of vibration n. Turning springs carry it from n pi/L,
// where the ends turn freely, towards where they do not, short of (n+1) pi/L: by
// Rayleigh's theorem on added constraints exactly one lies between.
func (l *lone) root(n int) float64 {
	lo, hi := float64(n)*math.Pi/l.len, float64(n+1)*math.Pi/l.len
	if l.ei == 0 || l.turn[0] == 0 && l.turn[1] == 0 {
		return lo
	}
	flo, fhi := l.delta(lo), l.delta(hi)
	if flo == 0 || (flo > 0) == (fhi > 0) {
		return lo // springs too weak to be told from none
	}
	return numeric.Root(l.delta, lo, hi, flo, fhi, 0)
}

// modes lists as undampedModes does.
func (l *lone) modes(want Want, notes []string) found {
	f := found{notes: notes}
	for n := 1; ; n++ {
		omega := l.omega(l.root(n))
		if n > want.Count || want.Below > 0 && omega >= 2*math.Pi*want.Below {
			f.complete = omega
			return f
		}
		f.osc = append(f.osc, complex(0, omega))
	}
}

// spanShape is a E(y) + b O(y), y from the middle, with
//
//	E = cos(qy) - cos(qh) cosh(py)/cosh(ph),  O = sin(qy) - sin(qh) sinh(py)/sinh(ph),
//
// which are zero at both ends.
type spanShape struct {
	piece         int
	q, p, h, a, b float64
}

// shape is the shape at an angular frequency that is a root: with the first end's
// N(a cos - b sin)(qh) + K1 (a S - b A) = 0.
func (l *lone) shape(omega float64) *Shape {
	q := math.Sqrt(2 * l.m * omega * omega / (l.t + math.Sqrt(l.t*l.t+4*l.ei*l.m*omega*omega)))
	s := &spanShape{piece: l.piece, q: q, p: math.Sqrt(q*q + l.t/l.ei), h: l.len / 2}
	sin, cos := math.Sincos(q * s.h)
	tanh := math.Tanh(s.p * s.h)
	n := l.ei * (s.p*s.p + q*q)
	sym, anti := q*sin+s.p*tanh*cos, s.p/tanh*sin-q*cos
	if k := l.turn[0]; math.IsInf(k, 1) {
		s.a, s.b = anti, sym
	} else {
		s.a, s.b = n*sin+k*anti, n*cos+k*sym
	}
	// The first of the largest places: looks, then thirds of the interval about it.
	looks := max(400, int(40*q*l.len))
	most, where := 0.0, 0.0
	for i := 1; i < looks; i++ {
		x := l.len * float64(i) / float64(looks)
		if v := math.Abs(s.at(x)); v > most*(1+1e-3) { // equal tops: looks hit one better than another
			most, where = v, x
		}
	}
	low, high := where-l.len/float64(looks), where+l.len/float64(looks)
	for range 60 {
		a, b := low+(high-low)/3, high-(high-low)/3
		if math.Abs(s.at(a)) < math.Abs(s.at(b)) {
			low = a
		} else {
			high = b
		}
	}
	return &Shape{span: s, factor: complex(1/s.at((low+high)/2), 0)}
}

// at is the shape at x from the start.
func (s *spanShape) at(x float64) float64 {
	y := x - s.h
	e := math.Exp(-s.p * (s.h - math.Abs(y))) // cosh(py)/cosh(ph) without overflow
	low := math.Exp(-2 * s.p * math.Abs(y))
	end := math.Exp(-2 * s.p * s.h)
	even := e * (1 + low) / (1 + end)
	odd := math.Copysign(e*(1-low)/(1-end), y)
	sin, cos := math.Sincos(s.q * y)
	sinh, cosh := math.Sincos(s.q * s.h)
	return s.a*(cos-cosh*even) + s.b*(sin-sinh*odd)
}
