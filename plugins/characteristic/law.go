package characteristic

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// resistance is what acts at a node, or between two, and is not linear: the laws
// of a node, or a tie that goes slack. Over each part of a step its force is
// taken as constant: the cluster is moved without it, which gives the free
// displacement, and a constant force moves that by mu times itself, so that
//
//	d1 = free + mu F(d0, d1)
//
// is a scalar equation. F is the mean force by energies (spring, stop) or by the
// mean velocity (friction, written laws), so that what is stored and lost closes.
type resistance struct {
	a, b   int     // joints; b < 0: ground or a node that is told where to be
	other  *joint  // such a node
	sign   float64 // of d against joint a
	laws   []law
	was, d float64 // m, displacement where the part step began, and now
	force  float64 // N, mean over the last part step
	told   float64 // m, where the other node was booked to be
	stuck  int     // part steps in a row without slipping
	rigid  float64 // N, friction without a bracket, all laws together
}

// law is one force law at work.
type law struct {
	stop     *mesh.Stop
	written  *mesh.Written
	friction float64 // N, behind a bracket
	through  float64 // N/m, the bracket's
	q, to    float64 // m, the slider's place, and where the trial takes it
	k, c     float64 // N/m, N s/m, of a slack tie
	f        float64 // N, mean force of the last trial
	x        float64 // m along the line
	state    []float64
	trial    []float64
	args     []float64
	follow   scenario.Follow // of a law that is asked step by step
	mid      [3]float64      // time, displacement and velocity of its last trial
}

// makeLaws gives a cluster its resistances.
func (r *run) makeLaws(c *cluster) {
	m := r.m
	for i := range c.joints {
		j := &c.joints[i]
		n := &m.Nodes[j.node]
		if j.kind != dynamic || len(n.Laws) == 0 {
			continue
		}
		e := resistance{a: i, b: -1, sign: 1, was: j.u, d: j.u}
		for k := range n.Laws {
			given := &n.Laws[k]
			switch {
			case given.Friction != nil && given.Friction.Through == 0:
				e.rigid += given.Friction.Force
			case given.Friction != nil:
				e.laws = append(e.laws, law{friction: given.Friction.Force, through: given.Friction.Through, q: j.u})
			case given.Stop != nil:
				e.laws = append(e.laws, law{stop: given.Stop})
			case given.Written != nil:
				w := given.Written
				size := mesh.ArgState + len(w.Starts)
				l := law{written: w, x: n.X, state: append([]float64(nil), w.Starts...),
					trial: make([]float64, len(w.Starts)), args: make([]float64, size)}
				if w.Start != nil {
					follow, err := w.Start()
					if err != nil { // every question then fails, and the run says so
						follow = func(float64, float64, float64, bool) float64 { return math.NaN() }
					}
					l.follow = follow
				}
				e.laws = append(e.laws, l)
			}
		}
		c.laws = append(c.laws, e)
	}
}

// slacken makes a resistance of a tie that goes slack: its force on the upper end
// is K d + C d' while d = u_A - u_B > 0, and never upward.
func (c *cluster) slacken(l *mesh.Link, a, b int, other *joint, upper bool) {
	e := resistance{a: a, b: b, other: other, laws: []law{{k: l.Spring, c: l.Dashpot}}, sign: 1}
	if !upper {
		e.sign = -1
	}
	e.d = e.between(c)
	e.was = e.d
	if other != nil {
		e.told = other.u
	}
	c.laws = append(c.laws, e)
}

// between is what a resistance feels: a node's displacement, or that of a tie's
// upper end beyond its lower one.
func (e *resistance) between(c *cluster) float64 {
	d := c.joints[e.a].u
	switch {
	case e.b >= 0:
		d -= c.joints[e.b].u
	case e.other != nil:
		d -= e.other.u
	}
	if e.sign < 0 {
		return -d
	}
	return d
}

// mean is the law's mean force over a part step from d0 to d1, positive upward.
func (l *law) mean(t, h, d0, d1 float64) float64 {
	v := (d1 - d0) / h
	switch {
	case l.stop != nil:
		return -chord(l.spring, l.stored, d0, d1)
	case l.through > 0:
		reach := l.friction / l.through
		l.to = math.Max(d1-reach, math.Min(d1+reach, l.q))
		return -0.5 * l.through * (d0 - l.q + d1 - l.to)
	case l.written != nil:
		return l.writtenMean(t, h, d0, d1, v)
	}
	f := chord(l.spring, l.stored, d0, d1)
	if d0+d1 > 0 {
		f += l.c * v
	}
	return -math.Max(0, f)
}

// spring is a law's elastic resistance at d, and stored the energy in it.
func (l *law) spring(d float64) float64 {
	switch {
	case l.stop == nil:
		return l.k * math.Max(0, d)
	case l.stop.Up && d > l.stop.Gap:
		return l.stop.Spring * (d - l.stop.Gap)
	case l.stop.Down && d < -l.stop.Gap:
		return l.stop.Spring * (d + l.stop.Gap)
	}
	return 0
}

func (l *law) stored(d float64) float64 {
	k := l.k
	switch {
	case l.stop != nil:
		k = l.stop.Spring
	case l.through > 0:
		return 0.5 * l.through * (d - l.q) * (d - l.q)
	}
	if k == 0 {
		return 0
	}
	f := l.spring(d)
	return 0.5 * f * f / k
}

// chord is the mean of a spring's force over a way, by its energy.
func chord(force, energy func(d float64) float64, d0, d1 float64) float64 {
	if way := d1 - d0; math.Abs(way) > 1e-9*(math.Abs(d0)+math.Abs(d1)) {
		return (energy(d1) - energy(d0)) / way
	}
	return force(0.5 * (d0 + d1))
}

// writtenMean is a written law at mid-step; its states go by the implicit
// midpoint rule.
func (l *law) writtenMean(t, h, d0, d1, v float64) float64 {
	if l.follow != nil {
		l.mid = [3]float64{t + h/2, 0.5 * (d0 + d1), v}
		return l.follow(l.mid[0], l.mid[1], l.mid[2], false)
	}
	a := l.args
	a[0], a[1], a[mesh.ArgU], a[mesh.ArgV] = t+h/2, l.x, 0.5*(d0+d1), v
	copy(l.trial, l.state)
	for range 20 {
		change := 0.0
		for i := range l.state {
			a[mesh.ArgState+i] = 0.5 * (l.state[i] + l.trial[i])
		}
		for i, p := range l.written.Rates {
			next := l.state[i] + h*p.Eval(nil, a)
			change = math.Max(change, math.Abs(next-l.trial[i])/(math.Abs(next)+1e-300))
			l.trial[i] = next
		}
		if !(change > 1e-13) {
			break
		}
	}
	for i := range l.state {
		a[mesh.ArgState+i] = 0.5 * (l.state[i] + l.trial[i])
	}
	return l.written.Force.Eval(nil, a)
}

// solve finds d1 and the force from the free displacement.
func (e *resistance) solve(t, h, free, mu float64) {
	rest := func(d float64) float64 {
		f := 0.0
		for i := range e.laws {
			e.laws[i].f = e.laws[i].mean(t, h, e.was, d)
			f += e.laws[i].f
		}
		return f
	}
	grip := 0.0
	if e.rigid > 0 {
		if need := (e.was-free)/mu - rest(e.was); math.Abs(need) <= e.rigid {
			e.d, e.force = e.was, (e.was-free)/mu
			e.stuck++
			return
		} else {
			grip = math.Copysign(e.rigid, need)
		}
	}
	e.stuck = 0
	e.d = root(func(d float64) float64 { return d - free - mu*(rest(d)+grip) }, free)
	e.force = (e.d - free) / mu
	rest(e.d) // leaves the trial states at the solution
}

// root finds where a function that grows at about 1 vanishes, from a guess: a
// bracket, then false position with halved weights (Illinois).
func root(f func(float64) float64, x float64) float64 {
	fx := f(x)
	if fx == 0 {
		return x
	}
	y, fy, reach := x, fx, 2*math.Abs(fx)
	for range 100 {
		y = x - math.Copysign(reach, fx)
		if fy = f(y); fy*fx <= 0 {
			break
		}
		reach *= 2
	}
	for range 200 {
		z := y - fy*(y-x)/(fy-fx)
		if math.IsNaN(z) || math.Abs(y-x) <= 4e-16*(math.Abs(x)+math.Abs(y)) {
			break
		}
		fz := f(z)
		if fz == 0 || z == y {
			return z
		}
		if fz*fy < 0 {
			x, fx = y, fy
		} else {
			fx /= 2
		}
		y, fy = z, fz
	}
	return y
}
