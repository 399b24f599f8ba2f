package transform

import (
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
)

// cellScratch is one worker's room for polynomials.
type cellScratch struct {
	poly        [][4]complex128
	weights     []complex128
	left, right []complex128
	table       []moments
}

func (s *cellScratch) room(n int) {
	if cap(s.left) < n {
		s.left, s.right, s.table = make([]complex128, 2*n), make([]complex128, 2*n), make([]moments, 2*n)
	}
	s.left, s.right, s.table = s.left[:cap(s.left)], s.right[:cap(s.right)], s.table[:cap(s.table)]
}

// spread is the particular solution under a force by place.
func (e *element) spread(w *wave, c *covering, k int, s *cellScratch) particular {
	s.weights = s.weights[:0]
	for _, b := range c.places.of {
		s.weights = append(s.weights, b.of[k])
	}
	s.poly = c.shape.sum(s.weights, s.poly)
	return e.convolve(w, s.poly, c.shape.at, s)
}

// begin is the particular solution of a start: g = (m s + c) u0 + m v0.
func (e *element) begin(w *wave, p *mesh.Piece, s *cellScratch) particular {
	m := complex(p.MassPerLength, 0)
	s.poly = e.given.sum([]complex128{m*w.s + complex(p.Viscous, 0), m}, s.poly)
	return e.convolve(w, s.poly, e.given.at, s)
}

// convolve is the particular solution
//
//	string: u = 1/(2 T a) integral of e^{-a|x-y|} g(y) dy
//	stiff:  u = integral of [A2 e^{-r2|x-y|} - A1 e^{-r1|x-y|}] g(y) dy,  Ai = 1/(2 EI (r1^2 - r2^2) ri)
//
// by running integrals from the left and from the right, exact over each cubic.
func (e *element) convolve(w *wave, poly [][4]complex128, edges []float64, s *cellScratch) particular {
	n := len(poly)
	exps := 1
	if w.stiff {
		exps = 2
	}
	out := particular{probes: make([]state, len(e.probes))}
	for i := range exps {
		r := w.r[i]
		gain := 1 / (2 * w.t * r)
		q := w.t // force of u' for this exponent: T u' - EI u”'
		if w.stiff {
			gain = 1 / (2 * w.ei * (w.r[0]*w.r[0] - w.r[1]*w.r[1]) * r)
			if i == 0 {
				gain = -gain
			}
			q = w.ei * w.r[1-i] * w.r[1-i]
		}
		s.room(n + 1)
		left, right, table := s.left, s.right, s.table
		left[0], right[n] = 0, 0
		for c := range n {
			h := edges[c+1] - edges[c]
			if c > 0 && edges[c]-edges[c-1] == h {
				table[c] = table[c-1]
			} else {
				table[c] = newMoments(r, h)
			}
			l, _ := table[c].sums(&poly[c])
			left[c+1] = left[c]*table[c].e + l
		}
		for c := n - 1; c >= 0; c-- {
			_, rr := table[c].sums(&poly[c])
			right[c] = right[c+1]*table[c].e + rr
		}
		at := func(l, rr complex128) state {
			at := state{gain * (l + rr), gain * r * (rr - l), gain * r * (rr - l) * q, 0}
			if w.stiff {
				at[3] = gain * r * r * (l + rr) * w.ei
			}
			return at
		}
		out.start, out.end = out.start.plus(at(left[0], right[0])), out.end.plus(at(left[n], right[n]))
		c := 0
		for k, x := range e.probes {
			for c < n-1 && edges[c+1] < x {
				c++
			}
			for c > 0 && edges[c] > x {
				c--
			}
			l, rr := within(r, &poly[c], edges[c], edges[c+1], x)
			out.probes[k] = out.probes[k].plus(at(left[c]*cmplx.Exp(-r*complex(x-edges[c], 0))+l, right[c+1]*cmplx.Exp(-r*complex(edges[c+1]-x, 0))+rr))
		}
	}
	for c := range n {
		h := complex(edges[c+1]-edges[c], 0)
		out.load += h * (poly[c][0] + poly[c][1]/2 + poly[c][2]/3 + poly[c][3]/4)
	}
	return out
}

// within are the parts of the running integrals of the cell that holds x: the
// cubic on either side of x, each in its own xi.
func within(r complex128, p *[4]complex128, a, b, x float64) (left, right complex128) {
	h := b - a
	if x > a {
		f := (x - a) / h // xi = f eta
		q := [4]complex128{p[0], p[1] * complex(f, 0), p[2] * complex(f*f, 0), p[3] * complex(f*f*f, 0)}
		m := newMoments(r, x-a)
		left, _ = m.sums(&q)
	}
	if x < b {
		g := (b - x) / h
		f := complex((x-a)/h, 0)
		k := complex(g, 0) // xi = f + g eta
		q := [4]complex128{
			p[0] + f*(p[1]+f*(p[2]+f*p[3])),
			k * (p[1] + f*(2*p[2]+3*f*p[3])),
			k * k * (p[2] + 3*f*p[3]),
			k * k * k * p[3],
		}
		m := newMoments(r, b-x)
		_, right = m.sums(&q)
	}
	return left, right
}
