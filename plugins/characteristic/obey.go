package characteristic

import "math"

// kick is what a constant unit force at a joint makes of the states over h.
func (c *cluster) kick(h float64) matrix {
	p := propagate(c.a, c.b, h)
	n := len(c.joints)
	out := newMatrix(n, len(c.x))
	for j := range n {
		for s := range c.x {
			out.set(j, s, p.g[0].at(s, n+j)/c.scale[j])
		}
	}
	return out
}

// obey lets the resistances act on a part step that has been done without them.
func (c *cluster) obey(t0, h float64, regular bool) {
	kick := c.kicks
	if !regular {
		kick = c.kick(h)
	}
	moves := func(joint, by int) float64 { // of a joint, by a unit force on another
		u := 0.0
		for s := range c.x {
			u += c.ux.at(joint, s) * kick.at(by, s)
		}
		return u
	}
	effect := func(e, by *resistance) float64 { // on d of e, of a unit force of by
		v := moves(e.a, by.a)
		if by.b >= 0 {
			v -= moves(e.a, by.b)
		}
		if e.b >= 0 {
			v -= moves(e.b, by.a)
			if by.b >= 0 {
				v += moves(e.b, by.b)
			}
		}
		return v * e.sign * by.sign
	}
	for i := range c.laws {
		e := &c.laws[i]
		if e.other != nil && e.other.motion != nil {
			e.other.u = e.other.motion.Displacement(math.Max(t0+h, 0))
		}
		e.was, e.force = e.d, 0
	}
	const sweeps = 200
	for range sweeps {
		change := 0.0
		for i := range c.laws {
			e := &c.laws[i]
			free := e.between(c)
			for k := range c.laws {
				if k != i {
					free += effect(e, &c.laws[k]) * c.laws[k].force
				}
			}
			before := e.d
			e.solve(t0, h, free, effect(e, e))
			change = math.Max(change, math.Abs(e.d-before)/(math.Abs(e.d)+math.Abs(e.was)+1e-300))
		}
		if len(c.laws) == 1 || change < 1e-13 {
			break
		}
	}
	for i := range c.laws {
		c.laws[i].act(c, kick)
	}
	c.shape(c.in[2])
	for i := range c.laws {
		c.laws[i].book(c)
	}
}

// act adds the force to the cluster's states.
func (e *resistance) act(c *cluster, kick matrix) {
	for s := range c.x {
		c.x[s] += e.sign * e.force * kick.at(e.a, s)
		if e.b >= 0 {
			c.x[s] -= e.sign * e.force * kick.at(e.b, s)
		}
	}
}

// book accounts for a part step, takes the states on, and stills a mass that has
// not slipped for two: the mean of its velocity is 0 then, and it is to be too.
func (e *resistance) book(c *cluster) {
	way := e.d - e.was
	grip := e.force
	for i := range e.laws {
		grip -= e.laws[i].f
	}
	lost := 0.0
	if e.rigid > 0 {
		lost = -grip * way
	}
	for i := range e.laws {
		l := &e.laws[i]
		f := l.f
		switch {
		case l.written != nil:
			lost -= f * way // less than 0 where the law gives
			copy(l.state, l.trial)
			if l.follow != nil {
				l.follow(l.mid[0], l.mid[1], l.mid[2], true)
			}
		case l.through > 0:
			lost += -f * (l.to - l.q)
			l.q = l.to
		default:
			lost += -f*way - (l.stored(e.d) - l.stored(e.was))
		}
	}
	c.account.lost += lost
	if e.other != nil {
		c.account.work += e.sign * e.force * (e.other.u - e.told)
		e.told = e.other.u
	}
	if e.stuck >= 2 {
		c.still(e.a)
	}
}

// still takes the velocity out of a joint with mass.
func (c *cluster) still(joint int) {
	n, nm := len(c.joints), len(c.massive)
	for s, i := range c.massive {
		if i != joint {
			continue
		}
		v := 0.0
		for k, a := range c.x {
			v += c.a.at(s, k) * a
		}
		for k := range n {
			v += c.b.at(s, k) * c.in[2][k]
		}
		c.x[nm+i] -= v * c.joints[i].mass / c.scale[i]
	}
}

// springs is the energy that the resistances hold.
func (c *cluster) springs() float64 {
	sum := 0.0
	for i := range c.laws {
		for k := range c.laws[i].laws {
			sum += c.laws[i].laws[k].stored(c.laws[i].d)
		}
	}
	return sum
}
