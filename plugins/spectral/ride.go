package spectral

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// ride is a load with a mass of its own that travels on a spring and a dashpot: with
// y the mass's place and w the line's under it,
//
//	M y'' = Q - F,  F = k (y - w) + c (y - w)' on the line.
//
// It rests on the line: F never has the sign opposite to Q (contact is lost), except
// where Q is 0. It comes and goes with its spring in balance with Q.
type ride struct {
	sys  *system
	op   operator
	roll *mesh.Roll
	end  float64 // m, where its line ends
	on   bool
	y, v float64
	w    float64
}

func newRide(s *system, op operator, r *mesh.Roll) *ride {
	line := &s.m.Lines[r.Line]
	last := &s.m.Pieces[line.Pieces[len(line.Pieces)-1]]
	return &ride{sys: s, op: op, roll: r, end: last.X0 + last.Length}
}

// under is the derivative of order d of the displacement at a place of its line as a
// direction.
func (r *ride) under(at float64, d int) []float64 {
	s := r.sys
	row := make([]float64, s.size()+len(s.watched))
	pieces := s.m.Lines[r.roll.Line].Pieces
	for i, pi := range pieces {
		p := &s.m.Pieces[pi]
		if at <= p.X0+p.Length || i == len(pieces)-1 {
			e, x := s.find(pi, at-p.X0)
			s.spread(row, e, e.values(make([]float64, e.ref.p+1), x, d))
			break
		}
	}
	return r.op.row(row[:s.size()])
}

// move takes one step: it adds its force to the loads and to the trial state, and
// returns the work of its weight and of what drives it along, and the loss.
func (r *ride) move(l *laws, ld *load, st *state, s step) (work, lost float64) {
	q := r.roll
	place := func(t float64) float64 { return q.From + q.Speed*(t-q.Starting) }
	mid := place(s.t + s.d/2)
	if s.t+s.d/2 < q.Starting || mid < 0 || mid > r.end {
		work = -r.stored()
		r.on = false
		return work, 0
	}
	inLine := func(at float64) float64 { return math.Max(0, math.Min(r.end, at)) }
	if !r.on {
		here := inLine(place(s.t))
		r.on, r.w = true, dot(r.under(here, 0), st.x)
		r.y = r.w + q.Force/q.Spring
		r.v = dot(r.under(here, 0), st.v) + q.Speed*dot(r.under(here, 1), st.x)
		work += r.stored()
	}
	dir, far := r.under(mid, 0), r.under(inLine(place(s.t+s.d)), 0)
	by := l.response(dir, s.d)
	free, give := dot(far, l.trial.x), dot(far, by.x)
	// F = k mean(y - w) + c change(y - w)/d with y1 = y + v d + (Q - F) d^2/2M and
	// w1 = free + give F.
	fall := s.d * s.d / (2 * q.Mass)
	y1 := r.y + r.v*s.d + q.Force*fall
	k, c := q.Spring/2, q.Dashpot/s.d
	f := (k*(r.y-r.w+y1-free) + c*(y1-free-r.y+r.w)) / (1 + (k+c)*(fall+give))
	if f*q.Force < 0 {
		f = 0
	}
	y1 -= f * fall
	w1 := free + give*f
	held := r.spring()
	if f != 0 {
		lost = c * (y1 - w1 - r.y + r.w) * (y1 - w1 - r.y + r.w)
		ld.push(f, dir)
		l.trial.addScaled(f, by)
		work += f * (dot(dir, l.trial.x) - dot(dir, st.x))
	}
	work += q.Force*(y1-r.y) - f*(w1-r.w)
	r.v = 2*(y1-r.y)/s.d - r.v
	r.y, r.w = y1, w1
	if f == 0 { // out of contact the spring is slack, and what it held is lost
		lost = held - r.spring()
	}
	return work, lost
}

// spring is what the spring holds, J: nothing off the line.
func (r *ride) spring() float64 {
	d := r.y - r.w
	if d*r.roll.Force < 0 {
		return 0
	}
	return r.roll.Spring * d * d / 2
}

// stored is the mass's motion and what its spring holds, J.
func (r *ride) stored() float64 {
	if !r.on {
		return 0
	}
	return r.roll.Mass*r.v*r.v/2 + r.spring()
}
