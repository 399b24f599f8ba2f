package spectral

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
)

// laws advances a network with forces that are not linear in its motion. The linear
// part of a step is exact; the forces of contacts are constant over it and are found
// by going round them until none changes; the extra tension of stretching lines acts
// in kicks between (see stretches).
type laws struct {
	sys      *system
	op       operator
	contacts []contact
	rides    []*ride
	stretch  *stretches // nil: no line stretches
	trial    *state
	answers  []answer // by step length
	forces   []float64
	free     []float64
	scale    float64 // m, largest elongation so far
}

// answer is what a unit force over one step of length d, along each direction, has
// moved by its end.
type answer struct {
	d    float64
	by   []*state
	give [][]float64 // [i][j] elongation i from force j
}

// lawful are the features whose forces are not linear in the motion.
const lawful = mesh.Stretching | mesh.JointLaw | mesh.SpreadLaw | mesh.SlackTie | mesh.RollingSprung

// newLaws is nil where there is nothing of the kind.
func newLaws(s *system, op operator, st *state) *laws {
	if s.m.Features()&lawful == 0 {
		return nil
	}
	l := &laws{sys: s, op: op, trial: newState(op.size(), len(s.brackets), st.z != nil)}
	for i := range s.m.Nodes {
		for k := range s.m.Nodes[i].Laws {
			if end := s.nodeEnd[i]; end >= 0 {
				row := make([]float64, s.size())
				row[s.inner+end] = 1
				l.add(contact{name: s.m.Nodes[i].Laws[k].Name, law: &s.m.Nodes[i].Laws[k], weight: 1, place: s.m.Nodes[i].X}, row)
			}
		}
	}
	for i := range s.m.Links {
		if k := &s.m.Links[i]; k.Slack && k.A != k.B {
			row := make([]float64, s.size())
			for sign, node := range map[float64]int{1: k.A, -1: k.B} {
				if end := s.nodeEnd[node]; end >= 0 {
					row[s.inner+end] = sign
				}
			}
			l.add(contact{name: k.Name, tie: k, weight: 1}, row)
		}
	}
	for i := range s.m.Pieces {
		if s.m.Pieces[i].Law != nil {
			l.spread(i)
		}
	}
	for i := range s.m.Rolls {
		if s.m.Rolls[i].Mass > 0 {
			l.rides = append(l.rides, newRide(s, op, &s.m.Rolls[i]))
		}
	}
	l.stretch = newStretches(s, op)
	l.forces, l.free = make([]float64, len(l.contacts)), make([]float64, len(l.contacts))
	return l
}

// add takes a contact with its direction in arrow coordinates.
func (l *laws) add(c contact, row []float64) {
	c.dir = l.op.row(row)
	if c.law != nil && c.law.Written != nil {
		w := c.law.Written
		c.states = append([]float64(nil), w.Starts...)
		c.next = make([]float64, len(w.Starts))
		c.args = make([]float64, mesh.ArgState+len(w.Starts))
		if w.Start != nil {
			follow, err := w.Start()
			if err != nil { // every question then fails, and the run says so
				follow = func(float64, float64, float64, bool) float64 { return math.NaN() }
			}
			c.follow = follow
		}
	}
	l.contacts = append(l.contacts, c)
}

// lawPoints is on how many points an element of a degree carries a law.
func lawPoints(degree int) int { return max(3, (degree+1)/2) }

// spread puts the law of a piece on Gauss points, half as many as the element's
// degree: laws are no smoother than that.
func (l *laws) spread(piece int) {
	p := &l.sys.m.Pieces[piece]
	for _, i := range l.sys.byPiece[piece] {
		e := &l.sys.elements[i]
		gx, gw := gauss(lawPoints(e.ref.p))
		for g, x := range gx {
			row := make([]float64, l.sys.size()+len(l.sys.watched))
			l.sys.spread(row, e, e.values(make([]float64, e.ref.p+1), x, 0))
			l.add(contact{name: p.Law.Name, law: p.Law, weight: gw[g] * e.h / 2, place: p.X0 + e.s0 + e.h*(x+1)/2}, row[:l.sys.size()])
		}
	}
}

// begin takes the start elongations.
func (l *laws) begin(st *state) {
	for i := range l.contacts {
		c := &l.contacts[i]
		c.e = dot(c.dir, st.x)
		c.slip = c.e
		s := step{0, 0}
		c.held = 0
		if c.tie != nil || c.law.Stop != nil {
			c.settle(c.e, 0, s)
		}
		l.scale = math.Max(l.scale, math.Abs(c.e))
	}
}

// stored is what contacts, rides and stretching lines hold, J.
func (l *laws) stored(st *state) float64 {
	sum := 0.0
	for i := range l.contacts {
		sum += l.contacts[i].held
	}
	for _, r := range l.rides {
		sum += r.stored()
	}
	if l.stretch != nil {
		sum += l.stretch.energy(st.x)
	}
	return sum
}

// answerFor is what unit forces move over a step, prepared or remembered.
func (l *laws) answerFor(d float64) *answer {
	for i := range l.answers {
		if l.answers[i].d == d {
			return &l.answers[i]
		}
	}
	a := answer{d: d}
	for j := range l.contacts {
		a.by = append(a.by, l.response(l.contacts[j].dir, d))
	}
	for i := range l.contacts {
		row := make([]float64, len(l.contacts))
		for j := range row {
			row[j] = dot(l.contacts[i].dir, a.by[j].x)
		}
		a.give = append(a.give, row)
	}
	if len(l.answers) >= keptPlans {
		l.answers = l.answers[1:]
	}
	l.answers = append(l.answers, a)
	return &l.answers[len(l.answers)-1]
}

// response is what a unit force moves from rest over a step.
func (l *laws) response(dir []float64, d float64) *state {
	st := newState(l.op.size(), len(l.sys.brackets), l.trial.z != nil)
	ld := load{active: true}
	for j := range ld.at {
		ld.at[j] = make([]float64, l.op.size())
	}
	copy(ld.at[0], dir)
	l.op.step(st, d, &ld)
	return st
}

// copyFrom makes one state equal to another.
func (st *state) copyFrom(o *state) {
	for k, v := range st.parts() {
		copy(v, o.parts()[k])
	}
}

func (st *state) parts() [5][]float64 { return [5][]float64{st.x, st.v, st.r, st.z, st.y} }

// addScaled adds a multiple of another state.
func (st *state) addScaled(c float64, o *state) {
	if c == 0 {
		return
	}
	for k, v := range st.parts() {
		for i, w := range o.parts()[k] {
			v[i] += c * w
		}
	}
}

// find sets the contacts' forces over a step that would end at the trial state
// without them.
func (l *laws) find(s step) error {
	a := l.answerFor(s.d)
	for i := range l.contacts {
		l.free[i] = dot(l.contacts[i].dir, l.trial.x)
		l.scale = math.Max(l.scale, math.Abs(l.free[i]))
	}
	const rounds = 1000
	for n := 0; n < rounds; n++ {
		most := 0.0
		for i := range l.contacts {
			free := l.free[i]
			for j, g := range a.give[i] {
				if j != i {
					free += g * l.forces[j]
				}
			}
			f, ok := l.contacts[i].force(free, a.give[i][i], s)
			if !ok {
				return fault("the law %q has no force that agrees with the motion after %g s", l.contacts[i].name, s.t)
			}
			most = math.Max(most, math.Abs(f-l.forces[i])*a.give[i][i])
			l.forces[i] = f
		}
		if len(l.contacts) < 2 || most <= 1e-13*l.scale {
			return nil
		}
	}
	return fault("the laws at joints find no common forces after %g s", s.t)
}
