package differences

import (
	"context"
	"math"

	"github.com/tautspan/tautspan/engine/solver"
)

// run is one solution by the scheme of order 2 under way.
type run struct {
	w      *network
	j      *joints
	l      *loads
	u, o   []float64 // m: state at t_n and at t_n-1, which becomes that at t_n+1
	v      []float64 // m/s, state at t = 0
	force  []float64 // N, explicit forces on the nodes
	tapes  []*tape
	energy solver.Energy
}

func newRun(w *network, series [][][]float64) (*run, error) {
	j, err := newJoints(w)
	if err != nil {
		return nil, err
	}
	arena := make([]float64, 3*w.size)
	r := &run{w: w, j: j, l: newLoads(w), force: make([]float64, w.nodes)}
	r.u, r.o, r.v = arena[:w.size:w.size], arena[w.size:2*w.size:2*w.size], arena[2*w.size:]
	w.shape(r.u)
	w.rates(r.v)
	r.tapes = newTapes(w, series, r.v, 4)
	return r, nil
}

// pull sums the forces of the cells and the loads on the nodes.
func (r *run) pull() {
	copy(r.force, r.l.onNode)
	for i := range r.w.strands {
		s := &r.w.strands[i]
		if s.implicit {
			continue
		}
		r.force[s.from] += s.stiff * (r.u[s.at+1] - r.u[s.at])
		r.force[s.to] += s.stiff * (r.u[s.at+s.n-1] - r.u[s.at+s.n])
	}
}

// guide sets the increments of the held nodes towards step n+1.
func (r *run) guide(n int) {
	for i := range r.w.m.Nodes {
		if r.w.held[i] {
			r.j.x[i] = 0
			if mo := r.w.m.Nodes[i].Motion; mo != nil {
				r.j.x[i] = mo.Displacement(float64(n+1)*r.w.dt) - r.u[i]
			}
		}
	}
}

// land writes the nodes' next displacements and passes them to the strands.
func (r *run) land() {
	for i := 0; i < r.w.nodes; i++ {
		r.o[i] = r.u[i] + r.j.x[i]
	}
	r.w.tell(r.o)
}

// begin makes the first step: the scheme at n = 0 with u- = u+ - 2 dt v0.
func (r *run) begin() {
	w, dt := r.w, r.w.dt
	r.l.set(0)
	for i := range r.o {
		r.o[i] = r.u[i] - dt*r.v[i]
	}
	r.l.remember(r.o)
	for i := range w.strands {
		s := &w.strands[i]
		if s.implicit {
			continue
		}
		g := s.loss * dt / (2 * s.mass)
		for k := s.at + 1; k < s.at+s.n; k++ {
			r.o[k] = r.u[k] + dt*r.v[k]/(1+g) + s.a*((r.u[k-1]+r.u[k+1])-2*r.u[k])/2
		}
	}
	r.l.act(r.o, 0.5)
	r.pull()
	r.guide(0)
	soft := r.gives()
	r.j.begin(r.u, r.v, r.force)
	r.land()
	r.record(0)
	e := r.stored()
	r.energy.Start = e - r.beginAccount(soft)
	r.energy.Most = math.Max(e, r.energy.Start)
	r.u, r.o = r.o, r.u
	r.j.x, r.j.y = r.j.y, r.j.x
}

// gives is the energy of the brackets at t = 0.
func (r *run) gives() float64 {
	sum := 0.0
	for i := range r.w.mounts {
		mt := &r.w.mounts[i]
		s := r.u[mt.node] - mt.q
		sum += mt.spring * s * s / 2
	}
	return sum
}

// beginAccount enters the work and the loss of the first half step and returns
// the energy that they account for. brackets is the energy of those at t = 0.
func (r *run) beginAccount(brackets float64) float64 {
	w, j, dt := r.w, r.j, r.w.dt
	work := r.l.work(r.o) / 2
	lost := brackets
	for i := 0; i < w.nodes; i++ {
		both := j.x[i] + dt*r.v[i]
		lost += w.loss[i] * j.x[i] * both / (4 * dt)
		if w.held[i] {
			work += 2 * j.reaction(i) * both / 4
		}
	}
	for _, l := range w.links {
		lost += l.Dashpot * (j.x[l.A] - j.x[l.B]) * (j.x[l.A] - j.x[l.B] + dt*(r.v[l.A]-r.v[l.B])) / (4 * dt)
	}
	for i := range w.mounts {
		mt := &w.mounts[i]
		s := r.u[mt.node] + j.x[mt.node]/2 - mt.q
		lost += mt.spring*s*(j.x[mt.node]+dt*r.v[mt.node])/4 - mt.spring*s*s/2
	}
	for i := range w.strands {
		s := &w.strands[i]
		for k := s.at + 1; k < s.at+s.n && !s.implicit && s.loss > 0; k++ {
			x := r.o[k] - r.u[k]
			lost += s.loss * x * (x + dt*r.v[k]) / (4 * dt)
		}
	}
	r.energy.Work, r.energy.Lost = work, lost
	return work - lost
}

// step advances from t_n to t_n+1, n >= 1.
func (r *run) step(n int) {
	w := r.w
	r.l.set(n)
	r.l.remember(r.o)
	dt4 := 4 * w.dt
	for i := range w.strands {
		s := &w.strands[i]
		if s.implicit {
			continue
		}
		prev, cur := r.o[s.at+1:s.at+s.n], r.u[s.at:s.at+s.n+1]
		if s.loss > 0 {
			var sums [lanes]float64
			advanceLossy(prev, cur, s.d, s.a, &sums)
			total := 0.0
			for _, v := range sums {
				total += v
			}
			r.energy.Lost += s.loss * total / dt4
		} else {
			advance(prev, cur, s.d, s.a)
		}
	}
	r.energy.Lost += r.l.act(r.o, 1) / dt4
	r.pull()
	r.guide(n)
	for i := range w.mounts {
		w.mounts[i].last = w.mounts[i].q
	}
	r.j.step(r.u, r.force)
	r.land()
	r.record(n)
	r.account()
	if n%flushEvery == 0 {
		flush(r.u)
		flush(r.o)
	}
	r.u, r.o = r.o, r.u
	r.j.x, r.j.y = r.j.y, r.j.x
}

// account enters the work and the loss of a step at nodes and loads.
func (r *run) account() {
	w, j := r.w, r.j
	dt4 := 4 * w.dt
	work, lost := r.l.work(r.o), 0.0
	for i := 0; i < w.nodes; i++ {
		both := j.x[i] + j.y[i]
		lost += w.loss[i] * both * both / dt4
		if w.held[i] {
			work += j.reaction(i) * both / 2
		}
	}
	for k := range w.links {
		l := &w.links[k]
		both := j.x[l.A] + j.y[l.A] - j.x[l.B] - j.y[l.B]
		lost += l.Dashpot * both * both / dt4
	}
	for i := range w.mounts {
		mt := &w.mounts[i]
		lost += mt.loss * (mt.q - mt.last) * (mt.q - mt.last) / w.dt
	}
	r.energy.Work += work
	r.energy.Lost += lost
}

// stored is the scheme's energy at the half step between r.u and r.o, J.
func (r *run) stored() float64 {
	w, j, dt := r.w, r.j, r.w.dt
	e := 0.0
	for i := 0; i < w.nodes; i++ {
		x := j.x[i]
		mid := r.u[i] + x/2
		e += w.mass[i]*x*x/(2*dt*dt) + w.spring[i]*mid*mid/2
	}
	for k := range w.links {
		l := &w.links[k]
		mid := r.u[l.A] + j.x[l.A]/2 - r.u[l.B] - j.x[l.B]/2
		e += l.Spring * mid * mid / 2
	}
	for i := range w.mounts {
		mt := &w.mounts[i]
		s := r.u[mt.node] + j.x[mt.node]/2 - mt.q
		e += mt.spring * s * s / 2
	}
	for i := range w.strands {
		s := &w.strands[i]
		if s.implicit {
			continue
		}
		a, b := r.u[s.at:s.at+s.n+1], r.o[s.at:s.at+s.n+1]
		kinetic, elastic := 0.0, (a[1]-a[0])*(b[1]-b[0])
		for k := 1; k < s.n; k++ {
			x := b[k] - a[k]
			kinetic += x * x
			elastic += (a[k+1] - a[k]) * (b[k+1] - b[k])
		}
		e += s.mass*kinetic/(2*dt*dt) + s.stiff*elastic/2
	}
	return e
}

func (r *run) record(n int) {
	at := moment{n: n, u: r.u, x: r.j.x, y: r.j.y, onEnd: r.l.onEnd}
	for _, t := range r.tapes {
		t.take(&at)
	}
}

// Rhythms of a run, steps; chosen.
const (
	flushEvery  = 64   // between looks for tiny numbers: a front falls by nu^2 a step, to 1e-308 from 1e-250 for nu^2 = 0.13
	flushFourth = 8    // the same at order 4, whose fronts fall by 1e-4 a step
	energyLooks = 1000 // looks at the stored energy in a run
	pauseCells  = 1e7  // cell-steps between looks at the context
)

// all makes steps 0 .. steps-1.
func (r *run) all(ctx context.Context, steps int, progress func(float64)) error {
	pause := max(1, int(pauseCells/float64(r.w.size)))
	look := max(1, steps/energyLooks)
	for n := 0; n < steps; n++ {
		if n == 0 {
			r.begin()
		} else {
			r.step(n)
		}
		if n%look == 0 || n == steps-1 {
			if err := r.look(n == steps-1); err != nil {
				return err
			}
		}
		if n%pause == 0 {
			if err := ctx.Err(); err != nil {
				return err
			}
			if progress != nil {
				progress(float64(n) / float64(steps))
			}
		}
	}
	return ctx.Err()
}

// look takes the energy at the last half step and stops a run gone wrong.
func (r *run) look(last bool) error {
	// After a step the two states and the increments have changed places.
	r.u, r.o = r.o, r.u
	r.j.x, r.j.y = r.j.y, r.j.x
	e := r.stored()
	r.u, r.o = r.o, r.u
	r.j.x, r.j.y = r.j.y, r.j.x
	if math.IsNaN(e) || math.IsInf(e, 0) {
		return &solver.FaultError{Solver: name, What: "the motion is not finite"}
	}
	r.energy.Most = math.Max(r.energy.Most, e)
	if last {
		r.energy.End = e
	}
	return nil
}
