package modal

import (
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/numeric"
)

// poor is the size (against its natural one) from which on a stiffness counts as
// near a pole. Chosen: it costs one digit or two.
const poor = 20

// system is the matrix of a group with everything that a mesh can carry: bending
// and slopes, tension that varies, sag. Unknowns are displacements of nodes and
// of the places where pieces are cut, slopes where bending meets, far ends of
// brackets, and the extra tension of each sagging line.
type system struct {
	m       *mesh.Mesh
	in      func(node int) bool
	pieces  []int
	starts  [][]int // pieces that start at a node
	turns   []bool  // a piece with bending meets here
	still   []bool  // no unknown: held, a free end without tension, or nothing there
	sagging []int   // lines with the sag term
	sagOf   []int   // by piece: index into sagging, -1 none
	weight  []float64

	// For steady motion.
	cuts  map[int][]float64 // inside pieces, sorted
	moves map[int]complex128

	// What was assembled last, at one s.
	places   []place // by mesh node, then those inside pieces
	spans    []stretch
	sagRow   []int
	n        int
	a, da    []complex128
	rhs      []complex128
	w        dual // sum of log W
	inner    int
	last     []int
	real     []float64
	brackets []int   // first row of a node's brackets
	bends    []int   // first row of what gives at a tie's dashpot, by link; -1: nothing
	lossless bool    // loss factors left out
	loss     float64 // sign of the loss factors
}

// port is an unknown (row >= 0) or a given value (row -1).
type port struct {
	row   int
	value complex128
}

type place struct{ u, t port }

// stretch is a part of a piece between two places.
type stretch struct {
	piece  int
	x0, x1 float64
	a, b   int
	k      stiff
	ta, tb port // slopes at both ends
}

func newSystem(m *mesh.Mesh, in func(node int) bool) *system {
	n := len(m.Nodes)
	y := &system{m: m, in: in, starts: make([][]int, n), turns: make([]bool, n), still: make([]bool, n),
		sagOf: make([]int, len(m.Pieces)), weight: make([]float64, len(m.Pieces)), brackets: make([]int, n), bends: make([]int, len(m.Links))}
	busy := make([]bool, n)
	for i := range m.Nodes {
		d := &m.Nodes[i]
		busy[i] = d.Mass > 0 || d.Spring > 0 || d.Dashpot > 0 || len(d.Brackets) > 0 || len(d.Benches) > 0
		y.still[i] = held(d)
	}
	for _, l := range m.Links {
		if l.Spring > 0 || l.Dashpot > 0 {
			busy[l.A], busy[l.B] = true, true
		}
	}
	for i := range m.Pieces {
		p := &m.Pieces[i]
		y.sagOf[i] = -1
		if !in(p.From) {
			continue
		}
		busy[p.From], busy[p.To] = true, true
		y.pieces = append(y.pieces, i)
		y.starts[p.From] = append(y.starts[p.From], i)
		if p.Bending > 0 {
			y.turns[p.From], y.turns[p.To] = true, true
			continue
		}
		start, end := slackEnds(p)
		y.still[p.From] = y.still[p.From] || start
		y.still[p.To] = y.still[p.To] || end
	}
	for i := range busy {
		y.still[i] = y.still[i] || !busy[i]
	}
	for l := range m.Lines {
		line := &m.Lines[l]
		if line.Sag == nil || len(line.Pieces) == 0 || !in(m.Pieces[line.Pieces[0]].From) {
			continue
		}
		for k, i := range line.Pieces {
			y.sagOf[i], y.weight[i] = len(y.sagging), line.Sag.Pieces[k]
		}
		y.sagging = append(y.sagging, l)
	}
	y.sagRow = make([]int, len(y.sagging))
	return y
}

// slackEnds tells at which ends a string has no tension.
func slackEnds(p *mesh.Piece) (start, end bool) {
	if p.TensionRise == 0 || p.Bending > 0 {
		return false, false
	}
	rise := p.TensionRise * p.Length
	slack := 1e-12 * (math.Abs(p.Tension) + math.Abs(rise))
	return p.Tension <= slack, p.Tension+rise <= slack
}

// shares are where a piece is cut when it is near a pole whole: no two have
// poles in common.
func shares() [5]float64 { return [...]float64{0, 0.38196601125, 0.2360679775, 0.4142135624, 0.3} }

// lay cuts the pieces and evaluates the stretches at s.
func (y *system) lay(s complex128) {
	y.spans = y.spans[:0]
	y.places = append(y.places[:0], make([]place, len(y.m.Nodes))...)
	y.n, y.w, y.inner = 0, dual{}, 0
	next := func() port { y.n++; return port{row: y.n - 1} }
	none := port{row: -1}
	y.loss = sign(imag(s))
	if y.lossless {
		y.loss = 0
	}
	for i := range y.m.Nodes {
		if !y.in(i) {
			continue
		}
		n, at := &y.m.Nodes[i], &y.places[i]
		at.u, at.t = none, none
		if v, moved := y.moves[i]; moved {
			at.u.value = v
		} else if !y.still[i] {
			at.u = next()
		}
		if y.turns[i] && !n.Clamped && !n.Hinge {
			at.t = next()
		}
		y.brackets[i] = y.n
		y.n += len(n.Brackets)
		for _, k := range y.starts[i] {
			p := &y.m.Pieces[k]
			v := newWaveOf(p, s, y.loss)
			from, x := i, 0.0
			first := len(y.spans)
			for _, cut := range append(append([]float64(nil), y.cuts[k]...), p.Length) {
				for _, one := range v.clear(x, cut, y.sagOf[k] >= 0) {
					one.piece, one.a = k, from
					if one.x1 == p.Length {
						from = p.To
					} else {
						in := place{u: next(), t: none}
						if v.bends {
							in.t = next()
						}
						y.places = append(y.places, in)
						from = len(y.places) - 1
					}
					one.b = from
					y.w, y.inner = y.w.add(one.k.w), y.inner+one.k.inner
					y.spans = append(y.spans, one)
				}
				x = cut
			}
			if !v.bends {
				continue
			}
			// A hinge leaves every piece a slope of its own.
			y.spans[first].ta, y.spans[len(y.spans)-1].tb = none, none
			if n.Hinge {
				y.spans[first].ta = next()
			}
			if y.m.Nodes[p.To].Hinge {
				y.spans[len(y.spans)-1].tb = next()
			}
		}
	}
	for i := range y.spans {
		y.join(&y.spans[i])
	}
	for i := range y.m.Links {
		l := &y.m.Links[i]
		y.bends[i] = -1
		if l.Through > 0 && l.Dashpot > 0 && l.A != l.B && (y.in(l.A) || y.in(l.B)) {
			y.bends[i] = next().row
		}
	}
	for i := range y.sagRow {
		y.sagRow[i] = next().row
	}
}

// join gives a stretch the slopes of its ends where no hinge gave it its own.
func (y *system) join(sp *stretch) {
	hinge := func(at int) bool { return at < len(y.m.Nodes) && y.m.Nodes[at].Hinge && sp.k.bends }
	if !hinge(sp.a) {
		sp.ta = y.places[sp.a].t
	}
	if !hinge(sp.b) {
		sp.tb = y.places[sp.b].t
	}
}

// clear gives the stretch x0 .. x1 whole, or in two where it is near a pole.
func (v *wave) clear(x0, x1 float64, sag bool) []stretch {
	var best []stretch
	least := math.Inf(1)
	for _, f := range shares() {
		cand := []stretch{{x0: x0, x1: x1, k: v.between(x0, x1, sag)}}
		if f > 0 {
			x := x0 + f*(x1-x0)
			cand = []stretch{{x0: x0, x1: x, k: v.between(x0, x, sag)}, {x0: x, x1: x1, k: v.between(x, x1, sag)}}
		}
		size := 0.0
		for _, c := range cand {
			size = math.Max(size, c.k.size)
		}
		if best == nil || size < least {
			best, least = cand, size
		}
		if least < poor {
			break
		}
	}
	return best
}

// assemble builds the matrix and its derivative at s, and what given
// displacements put on the right-hand side.
func (y *system) assemble(s complex128) {
	y.lay(s)
	n := y.n
	if cap(y.a) < n*n {
		y.a, y.da = make([]complex128, n*n), make([]complex128, n*n)
	}
	y.a, y.da = y.a[:n*n], y.da[:n*n]
	clear(y.a)
	clear(y.da)
	y.rhs = append(y.rhs[:0], make([]complex128, n)...)
	for i := range y.m.Nodes {
		if y.in(i) {
			y.node(i, s)
		}
	}
	for i := range y.m.Links {
		l := &y.m.Links[i]
		if (y.in(l.A) || y.in(l.B)) && l.A != l.B {
			c := complex(l.Dashpot, 0)
			a, b := y.nodePort(l.A), y.nodePort(l.B)
			if l.Through > 0 {
				y.behind(l, port{row: y.bends[i]}, a, b, s)
				c = 0
			}
			k := dual{complex(l.Spring, l.Spring*y.loss*l.SpringLoss) + s*c, c}
			y.add(a, a, k)
			y.add(b, b, k)
			y.add(a, b, k.neg())
			y.add(b, a, k.neg())
		}
	}
	for i := range y.spans {
		y.extend(&y.spans[i], s)
	}
	for i, l := range y.sagging {
		row := port{row: y.sagRow[i]}
		y.add(row, row, constant(-1/y.m.Lines[l].Sag.Stiffness))
		for node, w := range y.m.Lines[l].Sag.Nodes {
			at := y.places[node].u
			y.add(row, at, constant(w))
			y.add(at, row, constant(w))
		}
	}
}

// behind adds a tie's dashpot behind a bracket: spring from a to q, dashpot from q
// to b.
func (y *system) behind(l *mesh.Link, q, a, b port, s complex128) {
	if q.row < 0 {
		return
	}
	k, c := constant(l.Through), dual{s * complex(l.Dashpot, 0), complex(l.Dashpot, 0)}
	y.add(a, a, k)
	y.add(a, q, k.neg())
	y.add(q, a, k.neg())
	y.add(q, q, k.add(c))
	y.add(q, b, c.neg())
	y.add(b, q, c.neg())
	y.add(b, b, c)
}

// nodePort is a node's displacement; a node of another group is held.
func (y *system) nodePort(i int) port {
	if !y.in(i) {
		return port{row: -1, value: y.moves[i]}
	}
	return y.places[i].u
}

func (y *system) add(i, j port, v dual) {
	switch {
	case i.row < 0:
	case j.row < 0:
		y.rhs[i.row] -= v.v * j.value
	default:
		y.a[i.row*y.n+j.row] += v.v
		y.da[i.row*y.n+j.row] += v.d
	}
}

// node adds what sits at a node. A bracket's far end q is an unknown with the row
// -K u + (K + sC) q = 0, so that it adds no pole.
func (y *system) node(i int, s complex128) {
	d, at := &y.m.Nodes[i], y.places[i]
	m, c := complex(d.Mass, 0), complex(d.Dashpot, 0)
	if d.Absorbing && y.turns[i] {
		c = 0 // the dashpot is that of a string; see edge
		y.edge(i, s)
	}
	y.add(at.u, at.u, dual{(m*s+c)*s + complex(d.Spring, d.Spring*y.loss*d.SpringLoss), 2*m*s + c})
	j := complex(d.Inertia, 0)
	y.add(at.t, at.t, dual{complex(d.Rotary, 0) + j*s*s, 2 * j * s})
	for _, z := range d.Benches { // known at s = i omega alone; the derivative is not asked for
		v, _ := impedance(z, s)
		y.add(at.u, at.u, dual{v * s, 0})
	}
	for b, br := range d.Brackets {
		q := port{row: y.brackets[i] + b}
		if !(br.K > 0 && br.C > 0) { // exerts no force at all
			y.add(q, q, constant(1))
			continue
		}
		k, c := constant(br.K), complex(br.C, 0)
		y.add(at.u, at.u, k)
		y.add(at.u, q, k.neg())
		y.add(q, at.u, k.neg())
		y.add(q, q, k.add(dual{s * c, c}))
	}
}

// edge lets a line with bending go on for ever beyond an absorbing end. The
// derivative is left out: only steady motion asks for it.
func (y *system) edge(i int, s complex128) {
	for _, k := range y.pieces {
		p := &y.m.Pieces[k]
		if p.Bending == 0 || (p.From != i && p.To != i) {
			continue
		}
		v := newWave(p, s)
		e := v.endless()
		if p.From == i { // the line goes on to the left: slopes change sign
			e[0][1], e[1][0] = -e[0][1], -e[1][0]
		}
		at := [2]port{y.places[i].u, y.places[i].t}
		for r := range at {
			for c := range at {
				y.add(at[r], at[c], dual{e[r][c], 0})
			}
		}
		return
	}
}

func (sp *stretch) ports(y *system) [4]port {
	return [4]port{y.places[sp.a].u, sp.ta, y.places[sp.b].u, sp.tb}
}

func (y *system) extend(sp *stretch, s complex128) {
	at := sp.ports(y)
	for i := range at {
		for j := range at {
			if sp.k.bends || i%2 == 0 && j%2 == 0 {
				y.add(at[i], at[j], sp.k.d[i][j])
			}
		}
	}
	line := y.sagOf[sp.piece]
	if line < 0 {
		return
	}
	w, h := y.weight[sp.piece], port{row: y.sagRow[line]}
	for i := range at {
		v := sp.k.load[i].times(w)
		y.add(at[i], h, v)
		y.add(h, at[i], v)
	}
	y.add(h, h, sp.k.fill.times(w*w))
}

// delta is log Delta(s) and its slope, as evaluator.delta.
func (y *system) delta(s complex128) (log, slope complex128, ok bool) {
	y.assemble(s)
	for len(y.last) < y.n {
		y.last = append(y.last, 0)
	}
	log, slope, ok = numeric.LogDet(y.a, y.da, y.last, y.n)
	log, slope = log+y.w.v, slope+y.w.d
	return log, slope, ok && !cmplx.IsNaN(log) && !cmplx.IsInf(log) && !cmplx.IsNaN(slope) && !cmplx.IsInf(slope)
}

// below is the count of undamped natural vibrations below omega,
//
//	J = sum of J0 over the stretches + number of negative eigenvalues of D
//	    - one for each sagging line,
//
// whose row is negative by its own -1/G, and log|Delta|. J0 of a beam is
// floor(k2 L/pi) less the number of negative eigenvalues of the 2 x 2 block of
// its slopes: hinged ends have floor(k2 L/pi), and holding the slopes takes that
// many away.
func (y *system) below(omega float64) (int, float64) {
	y.lossless = true
	y.assemble(complex(0, omega))
	y.lossless = false
	n := y.n
	y.real = append(y.real[:0], make([]float64, n*n)...)
	// Slopes in a unit that makes their rows as large as the others.
	scale := make([]float64, n)
	log := 0.0
	for i := range scale {
		top := cmplx.Abs(y.a[i*n+i])
		if top == 0 {
			top = 1
		}
		scale[i] = math.Exp2(-math.Round(0.5 * math.Log2(top)))
		log -= 2 * math.Log(scale[i])
	}
	for i := 0; i < n; i++ {
		for j := 0; j <= i; j++ {
			y.real[i*n+j] = real(y.a[i*n+j]) * scale[i] * scale[j]
		}
	}
	neg, det := numeric.Inertia(y.real, n)
	return y.inner + neg - len(y.sagging), det + log + real(y.w.v)
}
