package spectral

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
)

// source is a load that is a fixed pattern times a function of time.
type source struct {
	at      func(t float64) float64
	pattern []float64 // operator's coordinates, then the watched nodes' shares
	lo      int       // coordinates below carry nothing
	moved   bool      // stems from a prescribed motion: its work is counted there
	// Of a moved source: which prescribed node, and whether it follows its velocity.
	node     int
	velocity bool
	// accelerates: it follows its acceleration, the derivative of its velocity's polynomial.
	accelerates bool
}

// field is a load whose pattern changes with time: it adds its element loads.
type field func(t float64, add func(e *element, nodal []float64))

// excitation is all that acts, with the times at which any of it may jump or bend.
type excitation struct {
	sys     *system
	op      operator
	sources []source
	fields  []field
	breaks  []float64
	motions []mesh.Motion

	times  [loadDegree + 1]float64                 // Gauss points on 0 .. 1
	toTau  [loadDegree + 1][loadDegree + 1]float64 // values there to tau-derivatives at 0
	total  load                                    // everything
	forces load                                    // without prescribed motions and contacts
	apart  bool                                    // the two differ
	values [loadDegree + 1][]float64               // scratch, arrow coordinates
	up, vp [][loadDegree + 1]float64               // prescribed displacement and velocity, tau-derivatives
	wide   *wide                                   // see slice
}

// newExcitation prepares every load of the mesh for an operator.
func newExcitation(s *system, op operator) *excitation {
	x := &excitation{sys: s, op: op}
	x.nodesInTime()
	n := s.size() + len(s.watched)
	for j := range x.values {
		x.values[j] = make([]float64, n)
		x.total.at[j] = make([]float64, n)
	}
	x.forces = x.total
	for i := range s.m.Pushes {
		x.addPush(&s.m.Pushes[i])
	}
	for i := range s.m.Presses {
		x.addPress(&s.m.Presses[i])
	}
	for i := range s.m.Rolls {
		x.addRoll(&s.m.Rolls[i])
	}
	for i, node := range s.moved {
		x.addMotion(i, s.m.Nodes[node].Motion)
	}
	if x.apart = len(s.moved) > 0 || s.m.Features()&lawful != 0; x.apart {
		for j := range x.forces.at {
			x.forces.at[j] = make([]float64, n)
		}
		x.up = make([][loadDegree + 1]float64, len(s.moved))
		x.vp = make([][loadDegree + 1]float64, len(s.moved))
	}
	sort.Float64s(x.breaks)
	return x
}

// nodesInTime sets the Gauss points and the matrix from values there to the
// derivatives at tau = 0 of the polynomial through them.
func (x *excitation) nodesInTime() {
	g, _ := gauss(loadDegree + 1)
	for i := range x.times {
		x.times[i] = (1 + g[i]) / 2
	}
	for i, ti := range x.times {
		// The Lagrange polynomial of point i, coefficient by coefficient.
		poly := []float64{1}
		for j, tj := range x.times {
			if j == i {
				continue
			}
			next := make([]float64, len(poly)+1)
			for k, c := range poly {
				next[k+1] += c / (ti - tj)
				next[k] -= c * tj / (ti - tj)
			}
			poly = next
		}
		fact := 1.0
		for j, c := range poly {
			if j > 0 {
				fact *= float64(j)
			}
			x.toTau[j][i] = c * fact
		}
	}
}

// history is a load's function of time, 0 before t = 0.
func history(p formula.Program, place float64) func(float64) float64 {
	return func(t float64) float64 {
		if t < 0 {
			return 0
		}
		return p.At(t, place)
	}
}

// addSource takes a pattern in arrow coordinates.
func (x *excitation) addSource(at func(float64) float64, arrow []float64) {
	p := x.op.row(arrow)
	lo := 0
	for lo < len(p) && p[lo] == 0 {
		lo++
	}
	x.sources = append(x.sources, source{at: at, pattern: p, lo: lo})
}

// spread adds an element's nodal loads (N) to a vector of arrow coordinates.
func (s *system) spread(dst []float64, e *element, nodal []float64) {
	if e.body != nil {
		s.spreadBody(dst, e, nodal)
		return
	}
	p := e.ref.p
	root := 1 / math.Sqrt(e.mass)
	out := dst[e.first : e.first+p-1]
	for i := 1; i < p; i++ {
		if f := nodal[i] * root; f != 0 {
			for k, v := range e.ref.v[(i-1)*(p-1) : i*(p-1)] {
				out[k] += v * f
			}
		}
	}
	for a, i := range [2]int{0, p} {
		if e.end[a] >= 0 {
			dst[s.inner+e.end[a]] += nodal[i]
		}
	}
	if len(s.watched) == 0 {
		return
	}
	// The share of a node's own elements, also where the node is fixed.
	pc := &s.m.Pieces[e.piece]
	list := s.byPiece[e.piece]
	if e == &s.elements[list[0]] {
		if w, ok := s.watched[pc.From]; ok {
			dst[s.size()+w] += nodal[0]
		}
	}
	if e == &s.elements[list[len(list)-1]] {
		if w, ok := s.watched[pc.To]; ok {
			dst[s.size()+w] += nodal[p]
		}
	}
}

func (x *excitation) zeros() []float64 { return make([]float64, x.sys.size()+len(x.sys.watched)) }

// addPush adds a point force, at a node or by the element's basis at its place.
func (x *excitation) addPush(p *mesh.Push) {
	v := x.zeros()
	x.breaks = append(x.breaks, p.Force.Breaks...)
	if p.At.Node >= 0 {
		end := x.sys.nodeEnd[p.At.Node]
		if end < 0 {
			return // on a held node: the support takes it
		}
		v[x.sys.inner+end] = 1
	} else {
		e, at := x.sys.find(p.At.Piece, p.At.At)
		x.sys.spread(v, e, e.values(make([]float64, e.ref.p+1), at, 0))
	}
	x.addSource(history(p.Force.Value, 0), v)
}

// addPress adds a force per length: one pattern if it does not depend on both
// time and place, else a field.
func (x *excitation) addPress(p *mesh.Press) {
	x.breaks = append(x.breaks, p.Force.Breaks...)
	if p.Force.Value.UsesArg(formula.ArgX) && p.Force.Value.UsesArg(formula.ArgT) {
		x.fields = append(x.fields, func(t float64, add func(*element, []float64)) {
			if t >= 0 {
				x.sys.press(p, func(place float64) float64 { return p.Force.Value.At(t, place) }, add)
			}
		})
		return
	}
	v := x.zeros()
	add := func(e *element, nodal []float64) { x.sys.spread(v, e, nodal) }
	if p.Force.Value.UsesArg(formula.ArgX) {
		x.sys.press(p, func(place float64) float64 { return p.Force.Value.At(0, place) }, add)
		x.addSource(func(t float64) float64 {
			if t < 0 {
				return 0
			}
			return 1
		}, v)
		return
	}
	x.sys.press(p, func(float64) float64 { return 1 }, add)
	x.addSource(history(p.Force.Value, 0), v)
}

// press integrates a force per length against the basis, element by element,
// with p+2 Gauss points on the loaded part: exact for loads of degree p+3.
func (s *system) press(p *mesh.Press, q func(float64) float64, add func(*element, []float64)) {
	for _, part := range p.Parts {
		for _, i := range s.byPiece[part.Piece] {
			e := &s.elements[i]
			lo, hi := e.s0, e.s0+e.h
			whole := part.From <= lo && part.To >= hi
			lo, hi = math.Max(part.From, lo), math.Min(part.To, hi)
			if !(hi > lo) {
				continue
			}
			nodal, l := make([]float64, e.ref.p+1), make([]float64, e.ref.p+1)
			for g, gx := range e.ref.gx {
				at := (lo+hi)/2 + (hi-lo)/2*gx
				f := q(part.Origin+at) * e.ref.gw[g] * (hi - lo) / 2
				at0 := l
				if whole {
					at0 = e.atGauss(g)
				} else {
					e.values(l, 2*(at-e.s0)/e.h-1, 0)
				}
				for k, l := range at0 {
					nodal[k] += f * l
				}
			}
			add(e, nodal)
		}
	}
}

// graded are the places of an element between which its basis, as a moving load
// sees it, is smooth enough for one load polynomial. The basis oscillates like
// cos(p theta), x = -cos theta: equal steps of rollPhase/p in theta, from the
// element's start up to but without its end.
func (e *element) graded() []float64 {
	n := int(math.Ceil(math.Pi * float64(e.ref.p) / rollPhase))
	out := make([]float64, n)
	for k := range out {
		out[k] = e.s0 + e.h*(1-math.Cos(math.Pi*float64(k)/float64(n)))/2
	}
	return out
}

// rollPhase is the phase of the basis per substep; degree 4 then errs by about 1e-4
// of the highest basis function. Chosen.
const rollPhase = 1.2

// addRoll adds a constant force that travels: the basis at the moving point. It
// bends in time whenever it passes from element to element.
func (x *excitation) addRoll(r *mesh.Roll) {
	if r.Force == 0 && r.Mass == 0 {
		return
	}
	s := x.sys
	line := &s.m.Lines[r.Line]
	end := 0.0
	for _, pi := range line.Pieces {
		p := &s.m.Pieces[pi]
		end = p.X0 + p.Length
		for _, ei := range s.byPiece[pi] {
			e := &s.elements[ei]
			if r.Speed != 0 && r.Mass == 0 {
				for _, at := range e.graded() {
					x.breaks = append(x.breaks, r.Starting+(p.X0+at-r.From)/r.Speed)
				}
			}
		}
	}
	if r.Speed != 0 {
		x.breaks = append(x.breaks, r.Starting+(end-r.From)/r.Speed)
	}
	x.breaks = append(x.breaks, r.Starting)
	if r.Mass > 0 {
		return // see ride
	}
	x.fields = append(x.fields, func(t float64, add func(*element, []float64)) {
		at := r.From + r.Speed*(t-r.Starting)
		if t < r.Starting || t < 0 || at < 0 || at > end {
			return
		}
		for i, pi := range line.Pieces {
			p := &s.m.Pieces[pi]
			if at <= p.X0+p.Length || i == len(line.Pieces)-1 {
				e, ref := s.find(pi, at-p.X0)
				nodal := e.values(make([]float64, e.ref.p+1), ref, 0)
				for k := range nodal {
					nodal[k] *= r.Force
				}
				add(e, nodal)
				return
			}
		}
	})
}

// addMotion moves the known columns of a prescribed node to the right-hand side:
// stiffness times its displacement, link dashpots times its velocity.
func (x *excitation) addMotion(i int, m *mesh.Motion) {
	s := x.sys
	x.motions = append(x.motions, *m)
	x.breaks = append(x.breaks, m.Breaks...)
	k, c := x.zeros(), x.zeros()
	mass := x.zeros()
	lossy, heavy := false, false
	for e := range s.elements {
		el := &s.elements[e]
		if el.body != nil {
			lossy, heavy = el.column(-2-i, c, mass) || lossy, true
			continue
		}
		for a := 0; a < 2; a++ {
			if el.end[a] == -2-i {
				for _, half := range el.halves() {
					sign := [2]float64{1, half.sign}[a]
					for q := half.lo; q < half.hi; q++ {
						k[q] -= sign * s.kappa[q]
					}
				}
			}
		}
	}
	for _, t := range s.movedPF[i] {
		k[s.inner+t.col] -= t.k
		c[s.inner+t.col] -= t.c
		mass[s.inner+t.col] -= t.m
		lossy, heavy = lossy || t.c != 0, heavy || t.m != 0
	}
	for _, sg := range s.sags {
		for q, w := range sg.w {
			k[q] -= sg.g * sg.moved[i] * w
		}
	}
	x.addSource(m.Displacement, k)
	x.sources[len(x.sources)-1].moved, x.sources[len(x.sources)-1].node = true, i
	if lossy {
		x.addSource(m.Velocity, c)
		last := &x.sources[len(x.sources)-1]
		last.moved, last.node, last.velocity = true, i, true
	}
	if heavy {
		x.addSource(m.Velocity, mass)
		last := &x.sources[len(x.sources)-1]
		last.moved, last.node, last.accelerates = true, i, true
	}
}

func (src *source) add(l *load, tau *[loadDegree + 1]float64) {
	l.active = true
	l.lo = min(l.lo, src.lo)
	for j, c := range tau {
		dst := l.at[j]
		for k := src.lo; k < len(src.pattern); k++ {
			dst[k] += c * src.pattern[k]
		}
	}
}
