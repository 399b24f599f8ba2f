package spectral

import (
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// contact is a force along one direction of the motion that is not linear in it. Over
// a step it is taken as constant; with e0 and e1 the elongation e = dir'x at the
// step's ends, and free the elongation that the step would end at without it,
//
//	e1 = free + give F,  F = law(e0, e1).
type contact struct {
	name   string
	dir    []float64 // operator's coordinates
	weight float64   // m of line that the force stands for; 1 at a joint
	law    *mesh.Law
	tie    *mesh.Link // of a tie that goes slack, along upper minus lower end
	place  float64    // m, for formulas
	e      float64    // elongation now
	slip   float64    // m, where the slider of a friction or the dashpot of a tie behind a spring is
	states []float64
	next   []float64 // states at the step's end, after force
	args   []float64
	follow scenario.Follow // of a law that is asked step by step
	held   float64         // J, stored
}

// step is the time and length of a step that a law is asked about.
type step struct{ t, d float64 }

// force is the mean force over a step and whether it could be found.
func (c *contact) force(free, give float64, s step) (float64, bool) {
	if c.tie != nil {
		return c.rootOf(free, give, func(e1 float64) float64 { return -c.pull(e1, s.d) })
	}
	switch {
	case c.law.Friction != nil:
		return c.friction(free, give), true
	case c.law.Stop != nil:
		return c.rootOf(free, give, func(e1 float64) float64 { return -c.weight * secant(c.law.Stop, c.e, e1) })
	}
	return c.rootOf(free, give, func(e1 float64) float64 { return c.weight * c.written(e1, s) })
}

// friction sticks if the force that holds it is not more than it can take.
func (c *contact) friction(free, give float64) float64 {
	f := c.law.Friction
	most := f.Force * c.weight
	if f.Through == 0 {
		return math.Max(-most, math.Min(most, (c.e-free)/give))
	}
	k := f.Through * c.weight
	return math.Max(-most, math.Min(most, -k*((c.e+free)/2-c.slip)/(1+k*give/2)))
}

// secant is the mean force of a stop between two displacements: the difference of
// its energies over that of the displacements, so that what a step takes is what the
// spring holds.
func secant(s *mesh.Stop, u0, u1 float64) float64 {
	if d := u1 - u0; math.Abs(d) > 1e-9*(math.Abs(u0)+math.Abs(u1)) {
		return (stopEnergy(s, u1) - stopEnergy(s, u0)) / d
	}
	u := (u0 + u1) / 2
	f := 0.0
	if s.Up {
		f += s.Spring * math.Max(0, u-s.Gap)
	}
	if s.Down {
		f -= s.Spring * math.Max(0, -u-s.Gap)
	}
	return f
}

func stopEnergy(s *mesh.Stop, u float64) float64 {
	sum := 0.0
	for _, side := range []struct {
		on bool
		by float64
	}{{s.Up, u - s.Gap}, {s.Down, -u - s.Gap}} {
		if side.on && side.by > 0 {
			sum += s.Spring * side.by * side.by / 2
		}
	}
	return sum
}

// pull is the mean force of a slack tie over a step, 0 or more: its spring by the
// difference of energies, its dashpot while it is taut.
func (c *contact) pull(e1, d float64) float64 {
	stop := mesh.Stop{Spring: c.tie.Spring, Up: true}
	f, mid := secant(&stop, c.e, e1), (c.e+e1)/2
	if k, damp := c.tie.Through, c.tie.Dashpot; mid > 0 && damp > 0 {
		if k > 0 { // the bracket's force by the implicit midpoint rule
			f += k * (mid - c.slip) / (1 + k*d/(2*damp))
		} else {
			f += damp * (e1 - c.e) / d
		}
	}
	return math.Max(0, f)
}

// written evaluates a law in formulas at the middle of the step, its states by the
// implicit midpoint rule.
func (c *contact) written(e1 float64, s step) float64 {
	w := c.law.Written
	if c.follow != nil {
		return c.follow(s.t+s.d/2, (c.e+e1)/2, (e1-c.e)/s.d, false)
	}
	a := c.args
	a[formula.ArgT], a[formula.ArgX] = s.t+s.d/2, c.place
	a[mesh.ArgU], a[mesh.ArgV] = (c.e+e1)/2, (e1-c.e)/s.d
	mid := a[mesh.ArgState:]
	copy(mid, c.states)
	for it := 0; it < 50 && len(mid) > 0; it++ {
		most := 0.0
		for i := range w.Rates {
			c.next[i] = w.Rates[i].Eval(nil, a)
		}
		for i := range mid {
			v := c.states[i] + s.d/2*c.next[i]
			most = math.Max(most, math.Abs(v-mid[i])/(math.Abs(v)+1e-300))
			mid[i] = v
		}
		if most < 1e-14 {
			break
		}
	}
	for i := range mid {
		c.next[i] = 2*mid[i] - c.states[i]
	}
	return w.Force.Eval(nil, a)
}

// rootOf finds F with e1 = free + give F, F = law(e1), by bisection within a bracket
// that secants make shorter (Illinois rule). Where the law jumps the root is the jump,
// and the force what holds it there.
func (c *contact) rootOf(free, give float64, law func(e1 float64) float64) (float64, bool) {
	off := func(e1 float64) float64 { return e1 - free - give*law(e1) }
	a, fa := free, off(free)
	if fa == 0 {
		return 0, true
	}
	b, fb := a, fa
	reach := -math.Copysign(math.Max(math.Abs(fa), 1e-15*(math.Abs(free)+math.Abs(c.e))), fa)
	for i := 0; fa*fb > 0; i++ {
		if i == 60 || math.IsNaN(fb) {
			return 0, false
		}
		b = free + reach
		fb = off(b)
		reach *= 2
	}
	for i := 0; i < 200 && math.Abs(b-a) > 4e-16*(math.Abs(a)+math.Abs(b)); i++ {
		m := b - fb*(b-a)/(fb-fa)
		if i%3 == 2 || !(m > math.Min(a, b) && m < math.Max(a, b)) {
			m = (a + b) / 2
		}
		fm := off(m)
		switch {
		case fm == 0:
			return (m - free) / give, true
		case fm*fb < 0:
			a, fa = b, fb
		default:
			fa /= 2
		}
		b, fb = m, fm
	}
	if math.IsNaN(fb) {
		return 0, false
	}
	return (b - free) / give, true
}

// settle takes a step's outcome: the elongation e1 under the force f. It returns
// what was lost.
func (c *contact) settle(e1, f float64, s step) (lost float64) {
	given := -f * (e1 - c.e) // taken from the line
	before := c.held
	switch {
	case c.tie != nil:
		c.held = stopEnergy(&mesh.Stop{Spring: c.tie.Spring, Up: true}, e1)
		if k, damp := c.tie.Through, c.tie.Dashpot; k > 0 && damp > 0 {
			mid := (c.e + e1) / 2
			if mid > 0 {
				c.slip += s.d / damp * k * (mid - c.slip) / (1 + k*s.d/(2*damp))
			} else {
				c.slip = e1 // slack, and its bracket at rest
			}
			c.held += k * (e1 - c.slip) * (e1 - c.slip) / 2
		}
	case c.law.Stop != nil:
		c.held = c.weight * stopEnergy(c.law.Stop, e1)
	case c.law.Friction != nil && c.law.Friction.Through > 0:
		k, most := c.law.Friction.Through, c.law.Friction.Force
		mid := (c.e + e1) / 2
		if over := mid - c.slip; math.Abs(k*over) > most {
			c.slip = mid - math.Copysign(most/k, over)
		}
		c.held = c.weight * k * (e1 - c.slip) * (e1 - c.slip) / 2
	case c.follow != nil:
		c.follow(s.t+s.d/2, (c.e+e1)/2, (e1-c.e)/s.d, true)
	case c.law.Written != nil:
		c.written(e1, s)
		copy(c.states, c.next)
	}
	c.e = e1
	return given - (c.held - before)
}
