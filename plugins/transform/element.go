package transform

import (
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
)

// wave is an element at one frequency: its exponents and what it is made of.
type wave struct {
	s, b   complex128 // b = m s^2 + c s
	t, ei  complex128 // with their losses
	r      [2]complex128
	length float64
	stiff  bool
	d      [4][4]complex128 // force at the ends for u0, u0', uL, uL'
	inv    [4][4]complex128 // coefficients of the waves for the same
}

// newWave makes an element's matrix. On a string
//
//	a = sqrt(b/T), D = T a/(1-e^2) [[1+e^2, -2e], [-2e, 1+e^2]], e = e^{-aL};
//
// with bending the waves are e^{-r x} and e^{-r(L-x)} for
// r1^2 = (T + sqrt(T^2 - 4 EI b))/(2 EI), r2^2 = b/(EI r1^2), which overflow
// nowhere.
func (e *element) newWave(p *mesh.Piece, s complex128, w0 float64) *wave {
	w := &wave{s: s, length: e.length, stiff: e.stiff}
	w.b = complex(p.MassPerLength, 0)*s*s + complex(p.Viscous, 0)*s
	w.t = complex(e.tension, 0) * lossy(s, p.TensionLoss, w0)
	l := complex(e.length, 0)
	if !e.stiff {
		a := cmplx.Sqrt(w.b / w.t)
		if real(a) < 0 {
			a = -a
		}
		w.r[0] = a
		x := cmplx.Exp(-a * l)
		k := w.t * a / (1 - x*x)
		w.d[0][0], w.d[2][2] = k*(1+x*x), k*(1+x*x)
		w.d[0][2], w.d[2][0] = -2*k*x, -2*k*x
		// u = A e^{-ax} + B e^{-a(L-x)}: A = (u0 - x uL)/(1-x^2), B = (uL - x u0)/(1-x^2).
		n := 1 / (1 - x*x)
		w.inv[0][0], w.inv[0][2] = n, -x*n
		w.inv[1][0], w.inv[1][2] = -x*n, n
		return w
	}
	w.ei = complex(p.Bending, 0) * (lossy(s, p.BendingLoss, w0) + s*complex(p.Internal, 0))
	root := cmplx.Sqrt(w.t*w.t - 4*w.ei*w.b)
	if real(root)*real(w.t)+imag(root)*imag(w.t) < 0 {
		root = -root
	}
	r1s := (w.t + root) / (2 * w.ei)
	w.r[0] = cmplx.Sqrt(r1s)
	w.r[1] = cmplx.Sqrt(w.b / (w.ei * r1s))
	for i := range w.r {
		if real(w.r[i]) < 0 {
			w.r[i] = -w.r[i]
		}
	}
	var x [4][4]complex128
	for j := range 4 {
		u, du, _, _ := w.basis(j, 0)
		x[0][j], x[1][j] = u, du
		u, du, _, _ = w.basis(j, e.length)
		x[2][j], x[3][j] = u, du
	}
	w.inv = inverse(x)
	for i := range 4 {
		for j := range 4 {
			_, _, q0, m0 := w.basis(j, 0)
			_, _, ql, ml := w.basis(j, e.length)
			w.d[0][i] -= q0 * w.inv[j][i]
			w.d[1][i] -= m0 * w.inv[j][i]
			w.d[2][i] += ql * w.inv[j][i]
			w.d[3][i] += ml * w.inv[j][i]
		}
	}
	return w
}

// basis is wave j of a stiff element at x: u, u', the force T u' - EI u”' and
// the moment EI u”. T - EI r1^2 = EI r2^2, and the other way about.
func (w *wave) basis(j int, x float64) (u, du, q, m complex128) {
	r, other := w.r[j/2], w.r[1-j/2]
	y, sign := x, complex(-1, 0)
	if j%2 == 1 {
		y, sign = w.length-x, 1
	}
	u = cmplx.Exp(-r * complex(y, 0))
	du = sign * r * u
	return u, du, sign * r * w.ei * other * other * u, w.ei * r * r * u
}

// inverse by elimination with row exchanges.
func inverse(a [4][4]complex128) [4][4]complex128 {
	var b [4][4]complex128
	for i := range 4 {
		b[i][i] = 1
	}
	for c := range 4 {
		p := c
		for i := c + 1; i < 4; i++ {
			if abs1(a[i][c]) > abs1(a[p][c]) {
				p = i
			}
		}
		a[c], a[p], b[c], b[p] = a[p], a[c], b[p], b[c]
		f := 1 / a[c][c]
		for j := range 4 {
			a[c][j] *= f
			b[c][j] *= f
		}
		for i := range 4 {
			if i == c {
				continue
			}
			f := a[i][c]
			for j := range 4 {
				a[i][j] -= f * a[c][j]
				b[i][j] -= f * b[c][j]
			}
		}
	}
	return b
}

func abs1(z complex128) float64 { return math.Abs(real(z)) + math.Abs(imag(z)) }

// state is displacement, slope, cross force and moment at a place.
type state [4]complex128

func (a state) plus(b state) state {
	for i := range a {
		a[i] += b[i]
	}
	return a
}

// free is the state at x of the waves that meet the end values d.
func (w *wave) free(d [4]complex128, x float64) state {
	if !w.stiff {
		var c [2]complex128
		for j := range c {
			c[j] = w.inv[j][0]*d[0] + w.inv[j][2]*d[2]
		}
		p, q := c[0]*cmplx.Exp(-w.r[0]*complex(x, 0)), c[1]*cmplx.Exp(-w.r[0]*complex(w.length-x, 0))
		return state{p + q, w.r[0] * (q - p), w.t * w.r[0] * (q - p), 0}
	}
	var out state
	for j := range 4 {
		c := w.inv[j][0]*d[0] + w.inv[j][1]*d[1] + w.inv[j][2]*d[2] + w.inv[j][3]*d[3]
		u, du, q, m := w.basis(j, x)
		out = out.plus(state{c * u, c * du, c * q, c * m})
	}
	return out
}

// particular is one solution under the element's loads: states at the ends and
// at the probes, and the integral of the load.
type particular struct {
	start, end state
	probes     []state // nil: nothing acts on the element
	load       complex128
}

func (p *particular) add(o particular) {
	p.start, p.end, p.load = p.start.plus(o.start), p.end.plus(o.end), p.load+o.load
	for i := range o.probes {
		p.probes[i] = p.probes[i].plus(o.probes[i])
	}
}

// under is the particular solution of everything that acts on the element at
// frequency k.
func (e *element) under(w *wave, p *mesh.Piece, k int, scratch *cellScratch) particular {
	if len(e.presses)+len(e.rolls) == 0 && e.given == nil {
		return particular{}
	}
	out := particular{probes: make([]state, len(e.probes))}
	for i := range e.presses {
		if c := &e.presses[i]; c.places == nil {
			q := c.force.of[k]
			out.add(e.uniform(w, q))
		} else {
			out.add(e.spread(w, c, k, scratch))
		}
	}
	for i := range e.rolls {
		out.add(e.roll(w, &e.rolls[i]))
	}
	if e.given != nil {
		out.add(e.begin(w, p, scratch))
	}
	return out
}

// uniform is u = q/b.
func (e *element) uniform(w *wave, q complex128) particular {
	s := state{q / w.b}
	out := particular{start: s, end: s, load: q * complex(e.length, 0), probes: make([]state, len(e.probes))}
	for i := range out.probes {
		out.probes[i] = s
	}
	return out
}

// roll is a load F that passes at speed V: q = (F/V) e^{-s(t0 + x/V)}.
func (e *element) roll(w *wave, r *rolling) particular {
	k := w.s / complex(r.speed, 0)
	a := complex(r.force/r.speed, 0) * cmplx.Exp(-w.s*complex(r.arrives, 0))
	den := w.b - w.t*k*k
	if w.stiff {
		den += w.ei * k * k * k * k
	}
	at := func(x float64) state {
		u := a / den * cmplx.Exp(-k*complex(x, 0))
		q, m := -w.t*k*u, complex128(0)
		if w.stiff {
			q += w.ei * k * k * k * u
			m = w.ei * k * k * u
		}
		return state{u, -k * u, q, m}
	}
	out := particular{start: at(0), end: at(e.length), load: a * (1 - cmplx.Exp(-k*complex(e.length, 0))) / k}
	for _, x := range e.probes {
		out.probes = append(out.probes, at(x))
	}
	return out
}
