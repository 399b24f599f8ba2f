package fronts

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
)

// startAt is the start displacement or velocity at an end of the piece.
func (p *piece) startAt(end int, rate bool) float64 {
	f := p.Start
	if rate {
		f = p.StartRate
	}
	if f == nil {
		return 0
	}
	x, dir := 0.0, 1.0
	if end == 1 {
		x, dir = p.Length, -1
	}
	v, _, _ := side(f, x, dir, p.Length/4)
	return v
}

// local is the start state on one side of a place: displacement, its first and
// second derivative in x, velocity, its derivative.
type local struct{ u, ux, uxx, v, vx float64 }

func (p *piece) local(x, dir, reach float64) local {
	var l local
	if p.Start != nil {
		l.u, l.ux, l.uxx = side(p.Start, x, dir, reach)
	}
	if p.StartRate != nil {
		l.v, l.vx, _ = side(p.StartRate, x, dir, reach)
	}
	return l
}

// scales of the start state over the whole mesh, for telling jumps from noise.
type scales struct{ u, v, a float64 }

// start launches from the start shape and start velocity: at places inside
// pieces, with [q] the jump of q in x,
//
//	displacement  behind [u]/2,               ahead -[u]/2
//	velocity      behind (c[u'] + [v])/2,     ahead (c[u'] - [v])/2
//	acceleration  behind (c^2[u"] + c[v'])/2, ahead -(c^2[u"] - c[v'])/2
//
// (d'Alembert); only the lowest that is not nil. At joints the excess force of
// that order makes the joint answer.
func (s *sources) start() {
	places := make([][]float64, len(s.net.pieces))
	var size scales
	any := false
	for i := range s.net.pieces {
		p := &s.net.pieces[i]
		if p.Start == nil && p.StartRate == nil {
			continue
		}
		any = true
		places[i] = p.places()
		p.measure(places[i], &size)
	}
	if !any || (size.u == 0 && size.v == 0) {
		return
	}
	// What changes velocity (displacement) little within a transit is no front of
	// note, and scales made of rounding alone would find fronts in it.
	size.v = math.Max(size.v, size.u/s.net.long)
	size.a = math.Max(size.a, size.v/s.net.long)
	for i := range s.net.pieces {
		s.startInside(i, places[i], size)
	}
	for ji := range s.net.joints {
		s.startAtJoint(ji, places, size)
	}
	for k := range s.byKind {
		if k.list == startList {
			return
		}
	}
	s.net.note("the start shape and velocity have no jump or kink out of balance: they start no front")
}

// places are the marks of kinks and edges, and the kinks and jumps found by
// looking, sorted.
func (p *piece) places() []float64 {
	var at []float64
	for _, m := range p.Marks {
		if m.Kind == mesh.MarkKink || m.Kind == mesh.MarkEdge || m.Kind == mesh.MarkLoad {
			at = append(at, m.At)
		}
	}
	sort.Float64s(at)
	marks := append([]float64{0}, at...)
	marks = append(marks, p.Length)
	for _, f := range []func(float64) float64{p.Start, p.StartRate} {
		if f == nil {
			continue
		}
		for k := 0; k+1 < len(marks); k++ {
			at = append(at, breaksIn(f, marks[k], marks[k+1])...)
		}
	}
	sort.Float64s(at)
	n := 0
	for _, x := range at {
		if x > 1e-9*p.Length && x < (1-1e-9)*p.Length && (n == 0 || x-at[n-1] > 1e-9*p.Length) {
			at[n] = x
			n++
		}
	}
	return at[:n]
}

// looks is how finely a stretch without marks is searched for kinks and jumps.
const looks = 2000

// breaksIn finds places inside a..b at which f or its slope jumps: where the
// second difference on a grid stands out by more than 3 from those two places
// away, and still does after bisecting onto it.
func breaksIn(f func(float64) float64, a, b float64) []float64 {
	h := (b - a) / looks
	v := make([]float64, looks+1)
	top := 0.0
	for i := range v {
		v[i] = f(a + h*(float64(i)+1e-6*(1-2*float64(i)/looks))) // ends a hair inside
		top = math.Max(top, math.Abs(v[i]))
	}
	bend := make([]float64, looks+1)
	for i := 1; i < looks; i++ {
		bend[i] = math.Abs(v[i+1] - 2*v[i] + v[i-1])
	}
	var out []float64
	for i := 1; i < looks; i++ {
		left, right := 0.0, 0.0
		if i >= 3 {
			left = bend[i-2]
		}
		if i+2 < looks {
			right = bend[i+2]
		}
		if bend[i] <= 1e-7*top || bend[i] < bend[i-1] || bend[i] <= bend[i+1] || bend[i] < 3*math.Max(left, right) {
			continue
		}
		if x, ok := closeIn(f, a+h*float64(i-1), a+h*float64(i+1)); ok {
			out = append(out, x)
		}
	}
	return out
}

// closeIn bisects onto a kink or jump between l and r. For a smooth function the
// bend per width falls with the width; for a kink it stays, for a jump it grows.
func closeIn(f func(float64) float64, l, r float64) (float64, bool) {
	bend := func(l, r float64) float64 { return math.Abs(f(r)-2*f((l+r)/2)+f(l)) / (r - l) }
	first := bend(l, r)
	const rounds = 24
	for k := 0; k < rounds; k++ {
		q := (r - l) / 4
		at, top := 0, -1.0
		for i := 0; i < 3; i++ {
			if b := bend(l+float64(i)*q, l+float64(i+2)*q); b > top {
				at, top = i, b
			}
		}
		l, r = l+float64(at)*q, l+float64(at+2)*q
		if top < first/16 {
			return 0, false
		}
	}
	return (l + r) / 2, true
}

// measure takes the largest displacement, velocity (also c u') and acceleration
// (c^2 u", c v') between the places, by differences on a grid fine enough not to
// step over a bell of a thousandth of the stretch.
func (p *piece) measure(places []float64, size *scales) {
	const n = 2000
	edges := append(append([]float64{0}, places...), p.Length)
	for k := 0; k+1 < len(edges); k++ {
		a, h := edges[k], (edges[k+1]-edges[k])/n
		var u, v [3]float64
		for i := 0; i < n; i++ {
			x := a + h*(float64(i)+0.5)
			u[0], u[1] = u[1], u[2]
			v[0], v[1] = v[1], v[2]
			if p.Start != nil {
				u[2] = p.Start(x)
			}
			if p.StartRate != nil {
				v[2] = p.StartRate(x)
			}
			size.u = math.Max(size.u, math.Abs(u[2]))
			size.v = math.Max(size.v, math.Abs(v[2]))
			if i >= 1 {
				size.v = math.Max(size.v, p.c*math.Abs(u[2]-u[1])/h)
				size.a = math.Max(size.a, p.c*math.Abs(v[2]-v[1])/h)
			}
			if i >= 2 {
				size.a = math.Max(size.a, p.c*p.c*math.Abs(u[2]-2*u[1]+u[0])/(h*h))
			}
		}
	}
}

func (s *sources) startInside(i int, places []float64, size scales) {
	p := &s.net.pieces[i]
	for k, x := range places {
		before, after := x, p.Length-x
		if k > 0 {
			before = x - places[k-1]
		}
		if k+1 < len(places) {
			after = places[k+1] - x
		}
		// A place found by looking is known to about 1e-9 of the piece.
		nudge := 2e-9 * p.Length
		a, b := p.local(x-nudge, -1, before/2), p.local(x+nudge, 1, after/2)
		u, ux, uxx, v, vx := b.u-a.u, b.ux-a.ux, b.uxx-a.uxx, b.v-a.v, b.vx-a.vx
		switch {
		case math.Abs(u) > slopeNoise*size.u:
			s.inside(s.account(startList, 0, ofDisplacement, s.startName), 0, i, x, u/2, -u/2, s.startName)
		case p.c*math.Abs(ux) > slopeNoise*size.v || math.Abs(v) > slopeNoise*size.v:
			if v == 0 && s.balance(func(spot mesh.Spot) bool {
				return spot.Node < 0 && spot.Piece == i && math.Abs(spot.At-x) < 1e-8*p.Length
			}, p.Tension*ux) {
				continue
			}
			s.inside(s.account(startList, 0, ofVelocity, s.startName), 0, i, x, (p.c*ux+v)/2, (p.c*ux-v)/2, s.startName)
		case p.c*p.c*math.Abs(uxx) > curveNoise*size.a || p.c*math.Abs(vx) > curveNoise*size.a:
			s.inside(s.account(startList, 0, ofAcceleration, s.startName), 0, i, x, (p.c*p.c*uxx+p.c*vx)/2, -(p.c*p.c*uxx-p.c*vx)/2, s.startName)
		}
	}
}

// balance tells whether the pushes that act at a place from t = 0 on hold the
// start shape's kink force there, as while a line is drawn aside: then neither
// starts a front until the push lets go.
func (s *sources) balance(here func(mesh.Spot) bool, force float64) bool {
	sum := 0.0
	var mine []int
	for i := range s.net.m.Pushes {
		p := &s.net.m.Pushes[i]
		if here(p.At) {
			v, _, _ := side(func(t float64) float64 { return p.Force.At(t, 0) }, 0, 1, gapAfter(sortedBreaks(p.Force.Breaks, s.end), 0, s.end))
			sum += v
			mine = append(mine, i)
		}
	}
	if len(mine) == 0 || math.Abs(sum+force) > slopeNoise*math.Abs(force) {
		return false
	}
	for _, i := range mine {
		s.balanced[i] = true
	}
	return true
}

// startAtJoint finds the lowest order at which a joint is out of balance at the
// start. With X the pieces' own displacement, velocity or acceleration at the
// node and f the force that the pieces, springs, links and dashpots put on it
// less that of a motion in step with X, the answer is Y f - (X - X_node).
func (s *sources) startAtJoint(ji int, places [][]float64, size scales) {
	j := &s.net.joints[ji]
	if len(j.ports) == 0 || s.net.m.Nodes[j.nodes[0]].Motion != nil {
		return
	}
	states := make([]local, len(j.ports))
	touched := false
	for i, p := range j.ports {
		pc := &s.net.pieces[p.piece]
		if pc.Start == nil && pc.StartRate == nil {
			continue
		}
		touched = true
		x, dir, reach := 0.0, 1.0, pc.Length
		at := places[p.piece]
		if len(at) > 0 {
			reach = at[0]
		}
		if p.end == 1 {
			x, dir, reach = pc.Length, -1, pc.Length
			if len(at) > 0 {
				reach = pc.Length - at[len(at)-1]
			}
		}
		states[i] = pc.local(x, dir, reach/2)
		if p.end == 1 { // derivatives along the way out of the node
			states[i].ux, states[i].vx = -states[i].ux, -states[i].vx
		}
	}
	if !touched {
		return
	}
	for order := ofDisplacement; order <= ofAcceleration; order++ {
		force, base, scale := s.excess(j, states, order, size)
		loud, limit := largest(base), slopeNoise*scale
		if order == ofAcceleration {
			limit = curveNoise * scale
		}
		z := 0.0
		for _, p := range j.ports {
			z = math.Max(z, s.net.pieces[p.piece].z)
		}
		if !j.held {
			loud = math.Max(loud, largest(force)/z)
		}
		if loud <= limit {
			continue
		}
		if order == ofVelocity && largest(base) <= limit && len(j.nodes) == 1 &&
			s.balance(func(spot mesh.Spot) bool { return spot.Node == j.nodes[0] }, force[0]) {
			return
		}
		s.atJoint(s.account(startList, 0, order, s.startName), 0, ji, force, base, s.startName)
		return
	}
}

// excess gives force and base of startAtJoint, and the scale they are judged by.
func (s *sources) excess(j *joint, states []local, order int, size scales) (force, base []float64, scale float64) {
	force, base = make([]float64, len(j.nodes)), make([]float64, len(j.ports))
	scale = [orders]float64{size.u, size.v, size.a}[order]
	node := func(k int) *mesh.Node { return &s.net.m.Nodes[j.nodes[k]] }
	for i, p := range j.ports {
		pc, st, nd := &s.net.pieces[p.piece], states[i], node(p.node)
		x, pull := 0.0, 0.0
		switch order {
		case ofDisplacement:
			x = st.u - nd.Start
		case ofVelocity:
			x, pull = st.v-nd.StartRate, pc.Tension*st.ux
		case ofAcceleration:
			x, pull = pc.c*pc.c*st.uxx-2*pc.gamma*st.v, pc.Tension*st.vx
		}
		base[i] = -x
		force[p.node] += pc.z*x + pull
	}
	if order == ofDisplacement || j.held {
		return force, base, scale
	}
	u := func(n *mesh.Node) float64 { return n.Start }
	if order == ofAcceleration {
		u = func(n *mesh.Node) float64 { return n.StartRate }
	}
	for k := range j.nodes {
		nd := node(k)
		force[k] -= nd.Spring * u(nd)
		if order == ofVelocity {
			force[k] -= nd.Dashpot * nd.StartRate
			for _, b := range nd.Brackets {
				force[k] -= b.K * (nd.Start - b.Start)
			}
		}
	}
	for _, l := range s.net.m.Links {
		for k, i := range j.nodes {
			other := l.B
			if l.B == i {
				other = l.A
			} else if l.A != i {
				continue
			}
			a, b := &s.net.m.Nodes[i], &s.net.m.Nodes[other]
			force[k] += l.Spring * (u(b) - u(a))
			if order == ofVelocity {
				force[k] += l.Dashpot * (b.StartRate - a.StartRate)
			}
		}
	}
	return force, base, scale
}
