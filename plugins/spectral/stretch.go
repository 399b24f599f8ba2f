package spectral

import (
	"errors"
	"math"
)

// stretchDegree is the degree of the linear steps' approximants.
const stretchDegree = 3

// errCoarse says that the steps are too long for a tension that grows so much.
var errCoarse = errors.New("steps too long for the stretch")

// topOfTension is the highest vibration of any element's tension alone, rad/s.
func (s *system) topOfTension() float64 {
	top := 0.0
	for i := range s.elements {
		e := &s.elements[i]
		top = math.Max(top, math.Sqrt(2*e.tension/e.h*e.ref.top/e.mass))
	}
	return top
}

// stretches are the lines whose tension grows with their motion. With
// e = 1/2 int u'^2 dx over the line and s its sag's own share, if it has one, the
// extra energy is G ((s + e)^2 - s^2)/2, and so the force -g(u) with
//
//	g = G ((s + e) K_1 u + e w),   K_1 = int phi' phi'.
//
// A step d of the linear network, which is exact, is cut in two and the force acts in
// kicks, at its ends d/6 each and between d 2/3 with the force d^2/24 H M^-1 g (H is
// the Hessian) added:
// order 4 with positive parts only, which losses need. Source: Chin 1997, Phys. Lett.
// A 226, scheme A (from memory).
//
// Kicks a step apart can feed vibrations whose period is that step: those of bending
// reach there. The linear steps are so short that approximants of the lowest degree
// are exact for all that is resolved, and they damp vibrations of z = omega d/2 by
// 1.4e-4 z^6 a step, more than kicks can feed within the bound of steady.
type stretches struct {
	sys   *system
	top   float64 // rad/s, highest vibration of an element's tension
	frame *frame
	lines []stretching
	force []float64 // g
	turn  []float64 // M^-1 g
	hess  []float64
	part  []float64 // K_1 times something, of one line
	up    []float64 // displacement of prescribed nodes now, m
	vp    []float64
}

type stretching struct {
	line     int
	g        float64 // N/m
	sag      []float64
	elements []int
	at       []int   // all its coordinates
	least    float64 // N, least tension
	pulled   float64 // N, largest extra tension so far
}

func newStretches(s *system, op operator) *stretches {
	f, ok := op.(*frame)
	if !ok {
		return nil
	}
	x := &stretches{sys: s, top: s.topOfTension(), frame: f, force: make([]float64, s.size()), turn: make([]float64, s.size()),
		hess: make([]float64, s.size()), part: make([]float64, s.size()),
		up: make([]float64, len(s.moved)), vp: make([]float64, len(s.moved))}
	for l := range s.m.Lines {
		line := &s.m.Lines[l]
		if line.Stretch == nil {
			continue
		}
		st := stretching{line: l, g: line.Stretch.Stiffness, least: math.Inf(1)}
		for _, sg := range s.sags {
			if sg.line == l {
				st.sag = sg.w
			}
		}
		for _, pi := range line.Pieces {
			p := &s.m.Pieces[pi]
			st.elements = append(st.elements, s.byPiece[pi]...)
			st.least = math.Min(st.least, math.Min(p.Tension, p.Tension+p.TensionRise*p.Length))
		}
		st.at = s.coordinatesOf(st.elements)
		x.lines = append(x.lines, st)
	}
	if len(x.lines) == 0 {
		return nil
	}
	f.degree = stretchDegree
	return x
}

// tell sets the motion of the prescribed nodes.
func (x *stretches) tell(t float64) {
	for i, node := range x.sys.moved {
		x.up[i], x.vp[i] = x.sys.m.Nodes[node].Motion.Displacement(t), x.sys.m.Nodes[node].Motion.Velocity(t)
	}
}

// steady tells whether kicks a step d apart are close enough. The highest vibration of
// an element's tension, omega, is driven by them as by a spring omega^2 pulled/T.
func (x *stretches) steady(d float64) error {
	for i := range x.lines {
		l := &x.lines[i]
		if l.pulled/l.least*x.top*x.top*d*d > 1 {
			return errCoarse
		}
	}
	return nil
}

// slopes writes K_1 y of one line into x.part and returns y'K_1 y; up are the
// displacements of prescribed nodes that belong to y. sides, where not nil, takes the
// rows of those nodes.
func (x *stretches) slopes(l *stretching, y, up, sides []float64) float64 {
	n, sum := x.sys.inner, 0.0
	var local [4]float64
	for _, i := range l.at {
		x.part[i] = 0
	}
	for _, i := range l.elements {
		e := &x.sys.elements[i]
		b := e.body
		in := y[e.first : e.first+b.ni]
		for a, end := range e.out {
			local[a] = 0
			if end >= 0 {
				local[a] = y[n+end]
			} else if end < endFixed && up != nil {
				local[a] = up[-2-end]
			}
		}
		if b.unitK == nil {
			// A uniform string: the stiffness is a multiple, without terms between.
			for r, w2 := range b.omega2 {
				v := w2 / b.tension * in[r]
				x.part[e.first+r] = v
				sum += v * in[r]
			}
			for a, end := range e.out {
				v := 0.0
				for d := range e.out {
					v += b.k[a][d] / b.tension * local[d]
				}
				sum += v * local[a]
				if end >= 0 {
					x.part[n+end] += v
				} else if end < endFixed && sides != nil {
					sides[-2-end] += v
				}
			}
			continue
		}
		size := b.ni + len(e.out)
		for r := 0; r < size; r++ {
			row := b.unitK[r*size : (r+1)*size]
			v := dot(in, row)
			for a := range e.out {
				v += row[b.ni+a] * local[a]
			}
			if r < b.ni {
				x.part[e.first+r] = v
				sum += v * in[r]
				continue
			}
			sum += v * local[r-b.ni]
			if end := e.out[r-b.ni]; end >= 0 {
				x.part[n+end] += v
			} else if end < endFixed && sides != nil {
				sides[-2-end] += v
			}
		}
	}
	return sum
}

// coordinatesOf are all coordinates of some elements.
func (s *system) coordinatesOf(elements []int) (at []int) {
	seen := make([]bool, s.ends)
	for _, k := range elements {
		e := &s.elements[k]
		for c := 0; c < e.body.ni; c++ {
			at = append(at, e.first+c)
		}
		for _, end := range e.out {
			if end >= 0 && !seen[end] {
				seen[end] = true
				at = append(at, s.inner+end)
			}
		}
	}
	return at
}

func (l *stretching) sagging(y []float64) float64 {
	if l.sag == nil {
		return 0
	}
	return dot(l.sag, y[:len(l.sag)])
}

// pull is the extra tension from stretch alone, G e, and with the sag's share.
func (x *stretches) pull(l *stretching, u, sides []float64) (alone, whole float64) {
	e := x.slopes(l, u, x.up, sides) / 2
	return l.g * e, l.g * (e + l.sagging(u))
}

func (x *stretches) energy(u []float64) float64 {
	sum := 0.0
	for i := range x.lines {
		l := &x.lines[i]
		e, s := x.slopes(l, u, x.up, nil)/2, l.sagging(u)
		sum += l.g * e * (s + e/2)
	}
	return sum
}

// gradient writes g into x.force and returns the power with which the prescribed
// nodes work against it, W.
func (x *stretches) gradient(u []float64) (power float64) {
	clear(x.force)
	sides := make([]float64, len(x.up))
	for i := range x.lines {
		l := &x.lines[i]
		clear(sides)
		alone, whole := x.pull(l, u, sides)
		power += whole * dot(sides, x.vp)
		l.pulled = math.Max(l.pulled, whole)
		for _, k := range l.at {
			x.force[k] += whole * x.part[k]
		}
		for k, w := range l.sag {
			x.force[k] += alone * w
		}
	}
	return power
}

// kick changes the velocity by share*d of the force, or of the modified one. It
// returns the power of the prescribed nodes.
func (x *stretches) kick(st *state, share, d float64, modified bool) (power float64) {
	n := x.sys.size()
	power = x.gradient(st.x)
	copy(x.turn, x.force)
	x.frame.settle(x.turn)
	if modified {
		x.hessian(st.x, x.turn)
		x.frame.settle(x.hess)
		for i, h := range x.hess {
			x.turn[i] -= d * d / 24 * h
		}
	}
	for i := 0; i < n; i++ {
		st.v[i] -= share * d * x.turn[i]
	}
	return power
}

// hessian writes H y at u into x.hess.
func (x *stretches) hessian(u, y []float64) {
	clear(x.hess)
	for i := range x.lines {
		l := &x.lines[i]
		e := x.slopes(l, u, x.up, nil) / 2
		s := l.sagging(u)
		along, wy := 0.0, l.sagging(y)
		at := l.at
		for _, k := range at {
			along += x.part[k] * y[k]
		}
		for _, k := range at {
			x.hess[k] += l.g * (wy + along) * x.part[k]
		}
		for k, w := range l.sag {
			x.hess[k] += l.g * along * w
		}
		x.slopes(l, y, nil, nil)
		for _, k := range at {
			x.hess[k] += l.g * (s + e) * x.part[k]
		}
	}
}
