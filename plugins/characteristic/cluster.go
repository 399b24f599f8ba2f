package characteristic

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// kind says by what rule a node answers.
type kind uint8

const (
	fixed   kind = iota // held
	moved               // told where to be
	instant             // no state but the impulse of its loads
	dynamic             // advanced by the exponential of its cluster
)

// joint is one node at work.
type joint struct {
	node    int
	kind    kind
	mass    float64 // kg
	spring  float64 // N/m, brackets not counted
	dashpot float64 // N s/m
	r       float64 // N s/m, dashpot and impedances (links are apart)
	ports   []port
	loads   []*load
	motion  *mesh.Motion
	breaks  []float64 // s, of loads, motion and rolls, in order
	orders  []int     // of the breaks, for displacement of a massless node
	next    int
	u       float64 // m
	before  float64 // m, u where the part step began
	rate    float64 // m/s, mean over the last part step
	own     *history
	pulled  *sagging   // nil: nothing of the node's makes sag
	weighs  float64    // w_j of it
	pull    float64    // N, by the sag, now
	weight  float64    // strength of the break being handled that no port brought
	order   int        // its order
	pushed  [2]float64 // N, loads over the part step: mean and slope (Legendre)
}

// bracket is the state of a dashpot behind a spring that gives.
type bracket struct {
	joint int
	k, c  float64
	q     float64 // m at t = 0
}

// tie is a link of a cluster; b < 0 where the other side is told where to be.
type tie struct {
	a, b              int
	other             *joint // held or told, a copy for this cluster alone
	k, c              float64
	before, rate, gap float64 // other's u before and rate, rate of the difference
}

// cluster is the nodes that links join, or one node.
//
// States: u of every node with mass, y/R of every node (an impulse over an
// impedance, m), q of every bracket. Inputs: W/R and F/R of every node.
type cluster struct {
	joints   []joint
	ties     []tie
	brackets []bracket
	delta    float64 // s
	step     int
	tol      float64
	hrel     float64 // delta over the longest travel time, for the strength of breaks
	simple   bool    // one joint that needs no matrices
	light    bool    // breaks pass from node to node of it without losing an order

	laws  []resistance
	kicks matrix

	massive []int // joints with mass
	x       []float64
	a, b    matrix
	norm    float64
	full    propagator
	ux, uw  matrix // u = ux x + uw w
	scale   []float64
	in      [3][]float64 // inputs at start, middle, end
	coef    [3][]float64
	work    []float64
	input   []float64
	oldQ    []float64
	rateQ   []float64
	last    float64 // s, length of the last part step if nothing broke in it, else 0
	account energy
}

// build sets up the matrices; false where a node has nothing to resist a force.
func (c *cluster) build() bool {
	n := len(c.joints)
	r, k := newMatrix(n, n), newMatrix(n, n)
	for i := range c.joints {
		j := &c.joints[i]
		r.add(i, i, j.r)
		k.add(i, i, j.spring)
		for p := range j.ports {
			k.add(i, i, j.ports[p].p.gamma*j.ports[p].z)
		}
		if j.mass > 0 {
			c.massive = append(c.massive, i)
		}
	}
	for _, t := range c.ties {
		for m, v := range map[*matrix]float64{&r: t.c, &k: t.k} {
			m.add(t.a, t.a, v)
			if t.b >= 0 {
				m.add(t.b, t.b, v)
				m.add(t.a, t.b, -v)
				m.add(t.b, t.a, -v)
			}
		}
	}
	for _, q := range c.brackets {
		k.add(q.joint, q.joint, q.k)
	}
	c.scale = make([]float64, n)
	for i := range c.scale {
		c.scale[i] = r.at(i, i)
		if c.scale[i] == 0 {
			// No impedance: the momentum over one step stands in for it.
			c.scale[i] = c.joints[i].mass / c.delta
		}
		if !(c.scale[i] > 0) {
			return false
		}
	}
	if !c.express(r) {
		return false
	}
	c.system(r, k)
	c.full = propagate(c.a, c.b, c.delta)
	c.norm = c.a.norm()
	if len(c.laws) > 0 {
		c.kicks = c.kick(c.delta)
	}
	return true
}

// express fills u = ux x + uw w: nodes with mass are states, the others follow
// from R u = y + W.
func (c *cluster) express(r matrix) bool {
	n, nm := len(c.joints), len(c.massive)
	states := nm + n + len(c.brackets)
	c.ux, c.uw = newMatrix(n, states), newMatrix(n, n)
	var loose []int
	for i := range c.joints {
		if c.joints[i].mass == 0 {
			loose = append(loose, i)
		}
	}
	for s, i := range c.massive {
		c.ux.set(i, s, 1)
	}
	if len(loose) == 0 {
		return true
	}
	sub := newMatrix(len(loose), len(loose))
	for a, i := range loose {
		for b, j := range loose {
			sub.set(a, b, r.at(i, j))
		}
	}
	inv, ok := invert(sub)
	if !ok {
		return false
	}
	for a, i := range loose {
		for b, j := range loose {
			v := inv.at(a, b)
			c.ux.add(i, nm+j, v*c.scale[j])
			c.uw.add(i, j, v*c.scale[j])
			for s, q := range c.massive {
				c.ux.add(i, s, -v*r.at(j, q))
			}
		}
	}
	return true
}

// system fills x' = A x + B (w, f).
func (c *cluster) system(r, k matrix) {
	n, nm := len(c.joints), len(c.massive)
	states := nm + n + len(c.brackets)
	c.a, c.b = newMatrix(states, states), newMatrix(states, 2*n)
	combine := func(row int, factor float64, u matrix, i int) {
		for j := 0; j < n; j++ {
			v := factor * u.at(i, j)
			if v == 0 {
				continue
			}
			for s := 0; s < states; s++ {
				c.a.add(row, s, v*c.ux.at(j, s))
			}
			for s := 0; s < n; s++ {
				c.b.add(row, s, v*c.uw.at(j, s))
			}
		}
	}
	for s, i := range c.massive {
		m := c.joints[i].mass
		c.a.add(s, nm+i, c.scale[i]/m)
		c.b.add(s, i, c.scale[i]/m)
		combine(s, -1/m, r, i)
	}
	for i := 0; i < n; i++ {
		c.b.add(nm+i, n+i, 1)
		combine(nm+i, -1/c.scale[i], k, i)
	}
	for s, q := range c.brackets {
		row := nm + n + s
		c.a.add(nm+q.joint, row, q.k/c.scale[q.joint])
		one := newMatrix(n, n)
		one.set(q.joint, q.joint, 1)
		combine(row, q.k/q.c, one, q.joint)
		c.a.add(row, row, -q.k/q.c)
	}
	c.x = make([]float64, states)
	c.work = make([]float64, 2*states)
	c.input = make([]float64, 3*states)
	c.oldQ = make([]float64, len(c.brackets))
	c.rateQ = make([]float64, len(c.brackets))
	for i := range c.in {
		c.in[i] = make([]float64, 2*n)
		c.coef[i] = make([]float64, 2*n)
	}
}

// start sets the states from displacements and velocities at t = 0; the ports'
// incoming waves are known.
func (c *cluster) start(m *mesh.Mesh) {
	if c.simple {
		j := &c.joints[0]
		if j.kind == instant {
			c.x[0] = j.r * j.u
			for p := range j.ports {
				c.x[0] -= 2 * j.ports[p].z * j.ports[p].a
			}
		}
		return
	}
	n, nm := len(c.joints), len(c.massive)
	c.waves(c.in[0])
	for s, i := range c.massive {
		c.x[s] = c.joints[i].u
	}
	for i := range c.joints {
		j := &c.joints[i]
		y := j.mass*m.Nodes[j.node].StartRate + j.r*j.u
		for _, t := range c.ties {
			if t.a == i || t.b == i {
				y += t.c * j.u
				if t.b >= 0 {
					y -= t.c * c.joints[t.a+t.b-i].u
				}
			}
		}
		c.x[nm+i] = y/c.scale[i] - c.in[0][i]
	}
	for i, q := range c.brackets {
		c.x[nm+n+i] = q.q
	}
	copy(c.oldQ, c.x[nm+n:])
}

// waves fills the inputs W/R and the waves' part of F/R from the ports' a.
func (c *cluster) waves(in []float64) {
	n := len(c.joints)
	for i := range c.joints {
		j := &c.joints[i]
		w, f := 0.0, 0.0
		for p := range j.ports {
			q := &j.ports[p]
			w += 2 * q.z * q.a
			f += 2 * q.p.gamma * q.z * q.a
		}
		in[i], in[n+i] = w, f-j.pull
	}
	for _, t := range c.ties {
		if t.other != nil {
			in[t.a] += t.c * t.other.u
			in[n+t.a] += t.k * t.other.u
		}
	}
	for i := range c.joints {
		in[i] /= c.scale[i]
		in[n+i] /= c.scale[i]
	}
}

// shape sets every joint's u from the states and the inputs w.
func (c *cluster) shape(w []float64) {
	for i := range c.joints {
		u := 0.0
		for s, v := range c.x {
			u += c.ux.at(i, s) * v
		}
		for s := range c.joints {
			u += c.uw.at(i, s) * w[s]
		}
		c.joints[i].u = u
	}
}

// listen sets every port's a to the wave at time t.
func (c *cluster) listen(t float64, regular bool, which, side int) {
	for i := range c.joints {
		for p := range c.joints[i].ports {
			q := &c.joints[i].ports[p]
			q.a = q.incoming(c.step+1, t, regular, which, side)
			if q.p.sway != nil {
				q.half = 0.5 * q.p.sway.at(t)
				q.a += q.half
			}
		}
		if j := &c.joints[i]; j.pulled != nil {
			j.pull = j.weighs * j.pulled.at(t)
		}
	}
	for i := range c.ties {
		if o := c.ties[i].other; o != nil && o.kind == moved {
			o.u = o.motion.Displacement(math.Max(t, 0))
		}
	}
}

// forces adds to inputs a, b, d the loads as the quadratic through their values
// at Gauss's three points of t0 .. t1, which keeps the loads' first three
// moments, and hence the order, even where a load bends or jumps inside.
func (c *cluster) forces(t0, h float64) {
	n := len(c.joints)
	places, weights := gauss()
	for i := range c.joints {
		j := &c.joints[i]
		j.pushed = [2]float64{}
		for _, l := range j.loads {
			var m [3]float64 // against shifted Legendre polynomials
			for k, s := range places {
				v := weights[k] * l.at(t0+s*h)
				z := 2*s - 1
				m[0] += v
				m[1] += 3 * v * z
				m[2] += 5 * v * 0.5 * (3*z*z - 1)
			}
			j.pushed[0] += m[0]
			j.pushed[1] += m[1]
			s := 1 / c.scale[i]
			// m0 + m1 (2s-1) + m2 (6s^2-6s+1)
			c.coef[0][n+i] += s * (m[0] - m[1] + m[2])
			c.coef[1][n+i] += s * (2*m[1] - 6*m[2])
			c.coef[2][n+i] += s * 6 * m[2]
		}
	}
}

// part moves the cluster from t0 to t1; regular: one whole step of its own.
func (c *cluster) part(t0, t1 float64, regular bool) {
	h := t1 - t0
	for i := range c.joints {
		j := &c.joints[i]
		j.before = j.u
		for p := range j.ports {
			j.ports[p].before = j.ports[p].a
		}
	}
	for i := range c.ties {
		if o := c.ties[i].other; o != nil {
			c.ties[i].before = o.u
		}
	}
	if c.simple {
		c.plain(t0, t1, regular)
		return
	}
	c.waves(c.in[0])
	c.listen(t0+h/2, regular, 1, -1)
	c.waves(c.in[1])
	c.listen(t1, regular, 0, -1)
	c.waves(c.in[2])
	for i := range c.coef[0] {
		a, b, d := c.in[0][i], c.in[1][i], c.in[2][i]
		c.coef[0][i] = a
		c.coef[1][i] = -3*a + 4*b - d
		c.coef[2][i] = 2 * (a - 2*b + d)
	}
	c.forces(t0, h)
	p := &c.full
	if !regular {
		c.odd(h)
	} else {
		y := c.work[:len(c.x)]
		for i := range y {
			y[i] = 0
		}
		p.e.addTo(y, c.x)
		for k := range p.g {
			p.g[k].addTo(y, c.coef[k])
		}
		copy(c.x, y)
	}
	c.shape(c.in[2])
	if len(c.laws) > 0 {
		c.obey(t0, h, regular)
	}
	c.settle(h)
}

// odd advances by part of a step.
func (c *cluster) odd(h float64) {
	const most = 400 // parts of the series beyond which a matrix is cheaper; chosen
	if c.norm*h > most {
		p := propagate(c.a, c.b, h)
		y := make([]float64, len(c.x))
		p.e.addTo(y, c.x)
		for k := range p.g {
			p.g[k].addTo(y, c.coef[k])
		}
		copy(c.x, y)
		return
	}
	n := len(c.x)
	var weighted [3][]float64
	for k := range weighted {
		weighted[k] = c.input[k*n : (k+1)*n]
		for i := range weighted[k] {
			weighted[k][i] = 0
		}
		c.b.addTo(weighted[k], c.coef[k])
	}
	taylor(c.a, c.norm, h, c.x, &weighted, c.work)
}

// plain moves a joint without states.
func (c *cluster) plain(t0, t1 float64, regular bool) {
	j := &c.joints[0]
	c.listen(t1, regular, 0, -1)
	h := t1 - t0
	switch j.kind {
	case moved:
		j.u = j.motion.Displacement(math.Max(t1, 0))
	case instant:
		j.pushed = [2]float64{}
		places, weights := gauss()
		for _, l := range j.loads {
			for k, s := range places {
				v := weights[k] * l.at(t0+s*h)
				j.pushed[0] += v
				j.pushed[1] += 3 * v * (2*s - 1)
			}
		}
		c.x[0] += h * j.pushed[0]
		j.u = c.answer()
	}
	c.settle(h)
}

// answer is the displacement of an instant joint: (y + W)/R.
func (c *cluster) answer() float64 {
	j := &c.joints[0]
	w := c.x[0]
	for p := range j.ports {
		w += 2 * j.ports[p].z * j.ports[p].a
	}
	return w / j.r
}
