package modal

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"

	"github.com/tautspan/tautspan/engine/mesh"
)

// Dynamic answers for the steady motion u(x) e^{st} of a network exactly: every
// piece by its transcendental stiffness (with bending, sag and varying tension
// see stiff.go), a uniform string's being
//
//	T a/sinh(aL) [[cosh aL, -1], [-1, cosh aL]],  a = sqrt((m s^2 + c s)/T),
//
// nodes with mass, spring, dashpots (behind brackets too), ties and hung masses.
// Valid for any s that is no natural frequency, s = 0 included.
// Source: Graff, Wave Motion in Elastic Solids (1975), ch. 1 (from memory).
type Dynamic struct {
	m        *mesh.Mesh
	attached [][]mesh.Attachment
	general  bool // more than uniform strings; see system
}

// Load is a point force e^{st}, N.
type Load struct {
	Spot  mesh.Spot
	Force complex128
}

// mostNodes bounds the matrix of a Dynamic: 2000 nodes are 64 MB.
const mostNodes = 2000

// NewDynamic prepares a mesh. It fails for what is not represented.
func NewDynamic(m *mesh.Mesh) (*Dynamic, error) {
	if err := represents(m); err != nil {
		return nil, err
	}
	if words := m.Words(mesh.NonLinear); len(words) > 0 {
		return nil, fmt.Errorf("a steady response by frequency is refused, not linearised, with %s: it would hang on the amplitude", strings.Join(words, " and "))
	}
	if len(m.Nodes) > mostNodes {
		return nil, fmt.Errorf("the exact steady response takes %d nodes at most, and the network has %d", mostNodes, len(m.Nodes))
	}
	return &Dynamic{m: m, attached: m.Attached(), general: m.Features() != 0}, nil
}

// Field is one steady motion.
type Field struct {
	d     *Dynamic
	u     []complex128 // m, by node
	arcs  []steady     // by piece
	loads []Load       // inside pieces

	motion *motion // in place of the rest on more than uniform strings
}

// steady is a piece at one s.
type steady struct {
	a       complex128 // 1/m
	length  float64
	tension float64
}

// ratio is sinh(a y)/sinh(a L) for 0 <= y <= L without overflow, y/L at a = 0.
func (p steady) ratio(y float64) complex128 {
	z := p.a * complex(p.length, 0)
	if cmplx.Abs(z) < 1e-6 { // straight to 1e-13
		return complex(y/p.length, 0)
	}
	w := p.a * complex(y, 0)
	return cmplx.Exp(w-z) * (1 - cmplx.Exp(-2*w)) / (1 - cmplx.Exp(-2*z))
}

// rate is a cosh(a y)/sinh(a L), the derivative of ratio.
func (p steady) rate(y float64) complex128 {
	z := p.a * complex(p.length, 0)
	if cmplx.Abs(z) < 1e-6 {
		return complex(1/p.length, 0)
	}
	w := p.a * complex(y, 0)
	return p.a * cmplx.Exp(w-z) * (1 + cmplx.Exp(-2*w)) / (1 - cmplx.Exp(-2*z))
}

// green is the displacement at x under a unit force at y with both ends held,
//
//	sinh(a x<) sinh(a (L - x>))/(T a sinh(aL)).
func (p steady) green(x, y float64) complex128 {
	lo, hi := min(x, y), max(x, y)
	if cmplx.Abs(p.a)*p.length < 1e-6 {
		return complex(lo*(p.length-hi)/(p.tension*p.length), 0)
	}
	return p.product(lo, p.length-hi, -1) / p.a
}

// greenRate is the derivative of green with respect to x; at x = y that after it.
func (p steady) greenRate(x, y float64) complex128 {
	if cmplx.Abs(p.a)*p.length < 1e-6 {
		if x < y {
			return complex((p.length-y)/(p.tension*p.length), 0)
		}
		return complex(-y/(p.tension*p.length), 0)
	}
	if x < y {
		return p.product(x, p.length-y, 1)
	}
	return -p.product(p.length-x, y, 1)
}

// product is sinh(a u) sinh(a v)/(T sinh(aL)) for sign -1 and
// cosh(a u) sinh(a v)/(T sinh(aL)) for sign 1, u + v <= L, without overflow.
func (p steady) product(u, v float64, sign complex128) complex128 {
	w, r, z := p.a*complex(u, 0), p.a*complex(v, 0), p.a*complex(p.length, 0)
	return cmplx.Exp(w+r-z) * (1 + sign*cmplx.Exp(-2*w)) * (1 - cmplx.Exp(-2*r)) / (complex(2*p.tension, 0) * (1 - cmplx.Exp(-2*z)))
}

// Solve is the steady motion at s under loads and prescribed node displacements.
// It fails where the motion does not exist: at an undamped natural frequency.
func (d *Dynamic) Solve(s complex128, loads []Load, moves map[int]complex128) (*Field, error) {
	if d.general {
		return d.solve(s, loads, moves)
	}
	f := &Field{d: d, u: make([]complex128, len(d.m.Nodes)), arcs: make([]steady, len(d.m.Pieces))}
	var resonant []int
	for i := range d.m.Pieces {
		p := &d.m.Pieces[i]
		b := complex(p.MassPerLength, 0)*s*s + complex(p.Viscous, 0)*s
		f.arcs[i] = steady{a: cmplx.Sqrt(b / complex(p.Tension, 0)), length: p.Length, tension: p.Tension}
		if z := f.arcs[i].a * complex(p.Length, 0); cmplx.Abs(z) > 1e-6 && cmplx.Abs(1-cmplx.Exp(-2*z)) < pole {
			// The piece alone is in resonance, the network need not be: a
			// thousandth of a millionth beside the pole the answer is the same.
			f.arcs[i].a *= complex(1+pole, 0)
			resonant = append(resonant, i)
		}
	}
	unknown := make([]int, len(d.m.Nodes))
	n := 0
	for i := range d.m.Nodes {
		node := &d.m.Nodes[i]
		if move, moved := moves[i]; moved {
			f.u[i] = move
			unknown[i] = -1
		} else if node.Fixed || node.Motion != nil {
			unknown[i] = -1
		} else {
			unknown[i] = n
			n++
		}
	}
	for _, i := range resonant {
		if p := &d.m.Pieces[i]; unknown[p.From] < 0 && unknown[p.To] < 0 {
			return nil, noMotion(s)
		}
	}
	a, b := d.assemble(s, f, unknown, n)
	for _, l := range loads {
		if l.Spot.Node >= 0 {
			if k := unknown[l.Spot.Node]; k >= 0 {
				b[k] += l.Force
			}
			continue
		}
		f.loads = append(f.loads, l)
		p, arc := &d.m.Pieces[l.Spot.Piece], f.arcs[l.Spot.Piece]
		for end, share := range map[int]complex128{p.From: arc.ratio(p.Length - l.Spot.At), p.To: arc.ratio(l.Spot.At)} {
			if k := unknown[end]; k >= 0 {
				b[k] += l.Force * share
			}
		}
	}
	if !solveComplex(a, b, n) {
		return nil, noMotion(s)
	}
	for i, k := range unknown {
		if k >= 0 {
			f.u[i] = b[k]
		}
	}
	return f, nil
}

// solve is Solve on more than uniform strings.
func (d *Dynamic) solve(s complex128, loads []Load, moves map[int]complex128) (*Field, error) {
	if d.m.Features()&mesh.BenchDamper != 0 {
		if real(s) != 0 {
			return nil, fmt.Errorf("a damper known by its bench record answers at real frequencies alone")
		}
		if err := Measured(d.m, math.Abs(imag(s))); err != nil {
			return nil, err
		}
	}
	if s == 0 { // the load of sag divides by s; a period of a thousand years is at rest
		s = 1e-9
	}
	for _, l := range loads {
		for i := range d.m.Pieces {
			p := &d.m.Pieces[i]
			start, end := slackEnds(p)
			if start && onEnd(l.Spot, i, p.From, 0, p) || end && onEnd(l.Spot, i, p.To, p.Length, p) {
				return nil, fmt.Errorf("a force on the end of %s that has no tension moves it without bound", lineName(d.m, p.Line))
			}
		}
	}
	y := newSystem(d.m, func(int) bool { return true })
	y.moves, y.cuts = moves, map[int][]float64{}
	motion, ok := y.solve(s, loads)
	if !ok {
		return nil, noMotion(s)
	}
	return &Field{d: d, motion: motion}, nil
}

func onEnd(at mesh.Spot, piece, node int, x float64, p *mesh.Piece) bool {
	return at.Node == node || at.Node < 0 && at.Piece == piece && math.Abs(at.At-x) <= 1e-12*p.Length
}

func noMotion(s complex128) error {
	return fmt.Errorf("there is no steady motion at %.6g Hz: nothing damps the resonance", cmplx.Abs(s)/(2*math.Pi))
}

// pole is how near to a piece's own resonance, in the relative sense, its
// stiffness is not evaluated.
const pole = 1e-9

// assemble builds the stiffness of the unknown nodes and the load that the
// prescribed ones put on them.
func (d *Dynamic) assemble(s complex128, f *Field, unknown []int, n int) (a, b []complex128) {
	a, b = make([]complex128, n*n), make([]complex128, n)
	add := func(i, j int, k complex128) {
		r, c := unknown[i], unknown[j]
		switch {
		case r < 0:
		case c < 0:
			b[r] -= k * f.u[j]
		default:
			a[r*n+c] += k
		}
	}
	pair := func(i, j int, own, cross complex128) {
		add(i, i, own)
		add(j, j, own)
		add(i, j, cross)
		add(j, i, cross)
	}
	for i := range d.m.Pieces {
		p, arc := &d.m.Pieces[i], f.arcs[i]
		t := complex(p.Tension, 0)
		pair(p.From, p.To, t*arc.rate(p.Length), -t*arc.rate(0))
	}
	for _, l := range d.m.Links {
		k := complex(l.Spring, 0) + s*complex(l.Dashpot, 0)
		pair(l.A, l.B, k, -k)
	}
	for i := range d.m.Nodes {
		node := &d.m.Nodes[i]
		k := complex(node.Mass, 0)*s*s + complex(node.Dashpot, 0)*s + complex(node.Spring, 0)
		for _, m := range node.Brackets {
			if c := complex(m.C, 0) * s; c != 0 {
				k += c * complex(m.K, 0) / (c + complex(m.K, 0))
			}
		}
		add(i, i, k)
	}
	return a, b
}

// solveComplex replaces b by the solution of a x = b by elimination with row
// exchanges, skipping zeros, of which a network along lines has most.
func solveComplex(a, b []complex128, n int) bool {
	largest := 0.0
	for k := 0; k < n; k++ {
		p := k
		for r := k + 1; r < n; r++ {
			if cmplx.Abs(a[r*n+k]) > cmplx.Abs(a[p*n+k]) {
				p = r
			}
		}
		pivot := cmplx.Abs(a[p*n+k])
		largest = max(largest, pivot)
		if !(pivot > 1e-14*largest) || cmplx.IsNaN(a[p*n+k]) || cmplx.IsInf(a[p*n+k]) {
			return false
		}
		if p != k {
			for c := k; c < n; c++ {
				a[p*n+c], a[k*n+c] = a[k*n+c], a[p*n+c]
			}
			b[p], b[k] = b[k], b[p]
		}
		for r := k + 1; r < n; r++ {
			if a[r*n+k] == 0 {
				continue
			}
			w := a[r*n+k] / a[k*n+k]
			for c := k + 1; c < n; c++ {
				if v := a[k*n+c]; v != 0 {
					a[r*n+c] -= w * v
				}
			}
			b[r] -= w * b[k]
		}
	}
	for k := n - 1; k >= 0; k-- {
		for c := k + 1; c < n; c++ {
			if v := a[k*n+c]; v != 0 {
				b[k] -= v * b[c]
			}
		}
		b[k] /= a[k*n+k]
	}
	return true
}

// Displacement is the complex displacement at a spot, m.
func (f *Field) Displacement(at mesh.Spot) complex128 {
	if f.motion != nil {
		return f.motion.displacement(at)
	}
	if at.Node >= 0 {
		return f.u[at.Node]
	}
	p, arc := &f.d.m.Pieces[at.Piece], f.arcs[at.Piece]
	u := f.u[p.From]*arc.ratio(p.Length-at.At) + f.u[p.To]*arc.ratio(at.At)
	for _, l := range f.loads {
		if l.Spot.Piece == at.Piece {
			u += l.Force * arc.green(at.At, l.Spot.At)
		}
	}
	return u
}

// slope is du/dx in a piece; at a load that after it.
func (f *Field) slope(piece int, x float64) complex128 {
	if f.motion != nil {
		return f.motion.slope(piece, x)
	}
	p, arc := &f.d.m.Pieces[piece], f.arcs[piece]
	v := f.u[p.To]*arc.rate(x) - f.u[p.From]*arc.rate(p.Length-x)
	for _, l := range f.loads {
		if l.Spot.Piece == piece {
			v += l.Force * arc.greenRate(x, l.Spot.At)
		}
	}
	return v
}

// end is the slope at an attachment's end of its piece.
func (f *Field) end(a mesh.Attachment) complex128 {
	if a.End {
		return f.slope(a.Piece, f.d.m.Pieces[a.Piece].Length)
	}
	return f.slope(a.Piece, 0)
}

// after is the attachment of the piece that starts at a node, or the only one.
func (f *Field) after(node int) (mesh.Attachment, bool) {
	at := f.d.attached[node]
	for _, a := range at {
		if !a.End {
			return a, true
		}
	}
	if len(at) == 0 {
		return mesh.Attachment{}, false
	}
	return at[0], true
}

// Slope is du/dx at a spot, at a node that of the piece after it.
func (f *Field) Slope(at mesh.Spot) complex128 {
	if at.Node < 0 {
		return f.slope(at.Piece, at.At)
	}
	if a, ok := f.after(at.Node); ok {
		return f.end(a)
	}
	return 0
}

// across is the transverse force T u' - EI u”' in a piece; at a load that after it.
func (f *Field) across(piece int, x float64) complex128 {
	if f.motion != nil {
		return f.motion.at(piece, x).force
	}
	return complex(f.d.m.Pieces[piece].Tension, 0) * f.slope(piece, x)
}

// acrossEnd is that at an attachment's end of its piece.
func (f *Field) acrossEnd(a mesh.Attachment) complex128 {
	if a.End {
		return f.across(a.Piece, f.d.m.Pieces[a.Piece].Length)
	}
	return f.across(a.Piece, 0)
}

// Force is T du/dx - EI d3u/dx3, N; at a support or a node that carries something what the
// line exerts on it.
func (f *Field) Force(at mesh.Spot) complex128 {
	if at.Node < 0 {
		return f.across(at.Piece, at.At)
	}
	node := &f.d.m.Nodes[at.Node]
	if !node.Support && !node.Fitting {
		a, ok := f.after(at.Node)
		if !ok {
			return 0
		}
		return f.acrossEnd(a)
	}
	var sum complex128
	for _, a := range f.d.attached[at.Node] {
		t := f.acrossEnd(a)
		if a.End {
			t = -t
		}
		sum += t
	}
	return sum
}

// Moment is the bending moment EI (1 + s tau) d2u/dx2, N m, at a node that of the
// piece after it: none on a string.
func (f *Field) Moment(at mesh.Spot) complex128 {
	if f.motion == nil {
		return 0
	}
	if at.Node < 0 {
		return f.motion.at(at.Piece, at.At).moment
	}
	a, ok := f.after(at.Node)
	switch {
	case !ok:
		return 0
	case a.End:
		return f.motion.at(a.Piece, f.d.m.Pieces[a.Piece].Length).moment
	}
	return f.motion.at(a.Piece, 0).moment
}
