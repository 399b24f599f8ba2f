package scatter

import (
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
)

// chain is a stretch of line in walking order: nodes with the spans between
// them, and an endless line beyond the first or the last node, or both.
type chain struct {
	nodes         []fitting
	spans         []span // span i lies between nodes i and i+1
	before, after *medium
}

// fitting is what stands at a node of a chain.
type fitting struct {
	held     bool
	clamped  bool
	mass     float64 // kg
	spring   float64 // N/m
	dashpot  float64 // N s/m
	rotary   float64 // N m/rad
	brackets []mesh.Maxwell
	hung     []hung
	eta      float64 // loss factor of the spring
	inertia  float64 // kg m^2
	hinge    bool
	benches  []*mesh.Bench
	law      complex128 // N/m, first harmonic of what answers differently to large motion
}

// hung is a mass on a spring, with a loss factor, and a dashpot.
type hung struct{ mass, k, c, eta float64 }

// stiffness is that of what a mass hangs on, N/m.
func (h *hung) stiffness(omega float64) complex128 {
	return complex(h.k, h.k*h.eta+omega*h.c)
}

// span is a uniform stretch.
type span struct {
	medium
	length float64
}

// echo is what becomes of a wave of amplitude 1 that reaches a chain.
type echo struct {
	back, on complex128 // amplitudes thrown back and let through, at the end nodes
	lost     float64    // share of power that dashpots at the nodes take
	moved    complex128 // displacement of the first node
}

// part is where one unknown vector begins and how long it is: the displacement,
// then, where turning counts, the slope, then the hung masses of a node; the
// wave amplitudes of a span or of an endless line.
type part struct{ at, n int }

type layout struct {
	before, after part
	nodes, spans  []part
	turns         []bool
	hinges        []bool // the line bends on both sides, each with a slope of its own
	total         int
}

// slopes is how many slopes a node has.
func (l *layout) slopes(i int) int {
	switch {
	case l.hinges[i]:
		return 2
	case l.turns[i]:
		return 1
	}
	return 0
}

// slope is the unknown slope at a node of what starts there (sign above 0) or
// ends there.
func (l *layout) slope(i int, sign float64) int {
	if l.hinges[i] && sign < 0 {
		return l.nodes[i].at + 2
	}
	return l.nodes[i].at + 1
}

func (c *chain) layout() *layout {
	l := &layout{turns: make([]bool, len(c.nodes)), hinges: make([]bool, len(c.nodes))}
	take := func(n int) part {
		p := part{l.total, n}
		l.total += n
		return p
	}
	waves := func(d *medium) int {
		switch {
		case d == nil:
			return 0
		case d.beam():
			return 2
		}
		return 1
	}
	l.before = take(waves(c.before))
	for i := range c.nodes {
		ends := l.before.n == 2 && i == 0 || i > 0 && c.spans[i-1].beam()
		starts := waves(c.after) == 2 && i == len(c.nodes)-1 || i < len(c.spans) && c.spans[i].beam()
		l.turns[i] = ends || starts
		l.hinges[i] = ends && starts && c.nodes[i].hinge
		n := 1 + len(c.nodes[i].hung) + l.slopes(i)
		l.nodes = append(l.nodes, take(n))
		if i < len(c.spans) {
			l.spans = append(l.spans, take(2*waves(&c.spans[i].medium)))
		}
	}
	l.after = take(waves(c.after))
	return l
}

// equations are the conditions of a chain at one frequency: displacement, and
// with bending slope, of every span and endless line agree with those of the
// node; forces and moments at every node balance. Wave amplitudes are unknowns
// of their own, so that no frequency is singular because a span by itself would
// resonate with its ends held.
type equations struct {
	*system
	l     *layout
	omega float64
}

// solve sends a wave of amplitude 1 along the endless line before (or after) the
// chain. ok is false where no such wave can travel.
func (c *chain) solve(omega float64, fromBefore bool) (e echo, ok bool) {
	in, out := c.before, c.after
	if !fromBefore {
		in, out = out, in
	}
	if in == nil || !in.carries(omega) || out != nil && !out.carries(omega) {
		return echo{}, false
	}
	l := c.layout()
	eq := &equations{newSystem(l.total), l, omega}
	for i := range c.nodes {
		eq.node(i, &c.nodes[i])
	}
	for i := range c.spans {
		eq.span(i, &c.spans[i], c)
	}
	if c.before != nil {
		eq.endless(c.before, l.before, 0, -1, fromBefore, c)
	}
	if c.after != nil {
		eq.endless(c.after, l.after, len(c.nodes)-1, 1, !fromBefore, c)
	}
	x, ok := eq.system.solve()
	if !ok {
		return echo{}, false
	}
	back, on := l.before, l.after
	if !fromBefore {
		back, on = on, back
	}
	e.back, e.moved = x[back.at], x[l.nodes[0].at]
	if out != nil {
		e.on = x[on.at]
	}
	for i := range c.nodes {
		e.lost += c.nodes[i].loss(omega, x[l.nodes[i].at:], l.slopes(i))
	}
	e.lost /= in.flux(omega)
	return e, true
}

// node enters what stands at a node. Held unknowns get the equation x = 0.
func (eq *equations) node(i int, f *fitting) {
	p := eq.l.nodes[i]
	u := p.at
	if f.held {
		eq.add(u, u, 1)
	} else {
		eq.add(u, u, f.toGround(eq.omega))
	}
	next := u + 1
	for range eq.l.slopes(i) {
		if f.clamped {
			eq.add(next, next, 1)
		} else {
			eq.add(next, next, complex(f.rotary-f.inertia*eq.omega*eq.omega, 0))
		}
		next++
	}
	for _, h := range f.hung {
		k := h.stiffness(eq.omega)
		if !f.held {
			eq.add(u, u, k)
			eq.add(u, next, -k)
		}
		eq.add(next, next, k-complex(h.mass*eq.omega*eq.omega, 0))
		eq.add(next, u, -k)
		next++
	}
}

// toGround is the dynamic stiffness of a node's mass, spring, dashpot, brackets
// and bench records, N/m.
func (f *fitting) toGround(omega float64) complex128 {
	d := complex(f.spring-f.mass*omega*omega, f.spring*f.eta+f.dashpot*omega)
	d += f.law
	for _, b := range f.benches {
		d += complex(0, omega) * modal.Impedance(b, omega)
	}
	for _, b := range f.brackets {
		d += bracket(b, omega)
	}
	return d
}

// bracket is a spring and a dashpot in series, N/m.
func bracket(b mesh.Maxwell, omega float64) complex128 {
	if b.K <= 0 || b.C <= 0 {
		return 0
	}
	c := complex(0, omega*b.C)
	return c / (1 + c/complex(b.K, 0))
}

// loss is the mean power that the dashpots of a node take, over omega/2: the sum
// of Im(stiffness) |stroke|^2.
func (f *fitting) loss(omega float64, x []complex128, slopes int) float64 {
	square := func(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }
	sum := imag(f.toGround(omega)) * square(x[0])
	next := 1 + slopes
	for _, h := range f.hung {
		sum += imag(h.stiffness(omega)) * square(x[next]-x[0])
		next++
	}
	return sum
}

// meets enters one wave of unknown col (or, for col < 0, of given amplitude 1)
// into the conditions of node i: value at the node, exponent e^{lx}, sign +1
// where the stretch starts at the node and -1 where it ends there. rows is where
// the agreement of displacement and slope stands.
func (eq *equations) meets(c *chain, i, rows, col int, d *medium, value, l complex128, sign float64) {
	force, moment := d.push(l, eq.omega)
	s := complex(sign, 0)
	put := func(row int, v complex128) {
		if col < 0 {
			eq.right[row] -= v
		} else {
			eq.add(row, col, v)
		}
	}
	put(rows, value)
	u := eq.l.nodes[i].at
	if !c.nodes[i].held {
		put(u, s*force*value)
	}
	if d.beam() {
		put(rows+1, l*value)
		if !c.nodes[i].clamped {
			put(eq.l.slope(i, sign), s*moment*value)
		}
	}
}

// agree enters the node's own displacement and slope into the conditions of what
// starts (sign 1) or ends (sign -1) there.
func (eq *equations) agree(i, rows int, d *medium, sign float64) {
	u := eq.l.nodes[i].at
	eq.add(rows, u, -1)
	if d.beam() {
		eq.add(rows+1, eq.l.slope(i, sign), -1)
	}
}

// endless enters the endless line on one side: sign +1 beyond the last node, -1
// before the first.
func (eq *equations) endless(d *medium, p part, node int, sign float64, comes bool, c *chain) {
	clean := d.lossless()
	eq.agree(node, p.at, &clean, sign)
	s := complex(sign, 0)
	for k, r := range clean.roots(eq.omega) {
		eq.meets(c, node, p.at, p.at+k, &clean, 1, -s*r, sign)
		if comes && k == 0 {
			eq.meets(c, node, p.at, -1, &clean, 1, s*r, sign)
		}
	}
}

// span enters the stretch between nodes i and i+1. Waves towards +x have their
// amplitude at its start, waves towards -x at its end, so that none overflows.
func (eq *equations) span(i int, sp *span, c *chain) {
	p := eq.l.spans[i]
	d := &sp.medium
	far := p.at + p.n/2
	eq.agree(i, p.at, d, 1)
	eq.agree(i+1, far, d, -1)
	for k, r := range d.roots(eq.omega) {
		fade := cmplx.Exp(-r * complex(sp.length, 0))
		eq.meets(c, i, p.at, p.at+k, d, 1, -r, 1)
		eq.meets(c, i+1, far, p.at+k, d, fade, -r, -1)
		eq.meets(c, i, p.at, far+k, d, fade, r, 1)
		eq.meets(c, i+1, far, far+k, d, 1, r, -1)
	}
}

// stretch appends a piece to a chain, its nodes in walking order. Where the
// tension rises the piece is cut into uniform parts of equal change, each with
// the tension of its middle: second order in the length of a part, over which the
// tension changes by 0.05 % of its mean unless that takes more than maxParts.
func (c *chain) stretch(p *mesh.Piece) {
	parts := 1
	if p.TensionRise != 0 {
		change := math.Abs(p.TensionRise) * p.Length
		mean := p.Tension + p.TensionRise*p.Length/2
		parts = min(maxParts, max(1, int(math.Ceil(change/(0.0005*mean)))))
	}
	h := p.Length / float64(parts)
	for k := 0; k < parts; k++ {
		if k > 0 {
			c.nodes = append(c.nodes, fitting{})
		}
		c.spans = append(c.spans, span{mediumAt(p, (float64(k)+0.5)*h), h})
	}
}

// maxParts bounds the work; chosen.
const maxParts = 2000
