package characteristic

import (
	"context"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

const (
	name    = "characteristic"
	version = "1"
	// fastest is the highest speed of a rolling load in wave speeds: ahead of
	// it the slope grows with 1/(1 - V/c).
	fastest = 0.95
	// heaviest is the largest loss gamma tau of one piece; beyond it what
	// crosses the piece is no number any more when it is sent backwards in time
	// to start from.
	heaviest = 200
)

// tracker is the solver.
type tracker struct{}

// New is the characteristic-tracking solver.
func New() solver.Solver { return tracker{} }

// Name is the solver's word.
func (tracker) Name() string { return name }

// Version changes whenever answers may change.
func (tracker) Version() string { return version }

// Refuses lists what characteristics cannot represent of the mesh.
func (tracker) Refuses(m *mesh.Mesh) []string {
	const known = mesh.Sagging | mesh.JointLaw | mesh.SlackTie
	phi := m.Neglect()
	if beyond := m.Unknown(known | mesh.Bending); len(beyond) > 0 {
		return beyond
	}
	if phi > 0 {
		bending := m.Unknown(known)[0]
		switch {
		case math.IsInf(phi, 1):
			return []string{bending + "; what leaving it out would do has no bound here, since the motion has kinks or jumps"}
		case phi > mesh.NeglectMost:
			return []string{fmt.Sprintf("%s; to leave it out would make records wrong by about %.2g of their size (phi), and up to %g is allowed", bending, phi, mesh.NeglectMost)}
		case asksMoment(m):
			return []string{bending + ", of which a moment is asked"}
		}
	}
	var out []string
	if err := sound(m); err != nil {
		return []string{err.Error()}
	}
	for i := range m.Rolls {
		r := &m.Rolls[i]
		if r.Speed < 0 {
			out = append(out, fmt.Sprintf("roll %s runs against the walking order of its line", r.Name))
			continue
		}
		if m.Lines[r.Line].Sag != nil {
			out = append(out, fmt.Sprintf("roll %s runs along a line with sag", r.Name))
			continue
		}
		for _, k := range m.Lines[r.Line].Pieces {
			p := &m.Pieces[k]
			if c := p.WaveSpeed(); r.Speed >= fastest*c && r.From < p.X0+p.Length {
				out = append(out, fmt.Sprintf("roll %s at %.4g m/s is not slower than %g of the wave speed %.4g m/s", r.Name, r.Speed, fastest, c))
				break
			}
		}
	}
	m = unspliced(m)
	if k, short := stub(m); short {
		out = append(out, fmt.Sprintf("the piece at x = %.4g m is so short beside the longest that its steps would rule the run; leave it out", m.Pieces[k].X0))
	}
	for i := range m.Pieces {
		p := &m.Pieces[i]
		if loss := p.Viscous / (2 * p.MassPerLength) * p.TravelTime(); loss > heaviest {
			out = append(out, fmt.Sprintf("the viscous loss leaves exp(-%.3g) of a wave that crosses the piece at x = %.4g m", loss, p.X0))
		}
	}
	touched := make([]bool, len(m.Nodes))
	for i := range m.Pieces {
		touched[m.Pieces[i].From], touched[m.Pieces[i].To] = true, true
	}
	for i := range m.Links {
		l := &m.Links[i]
		if l.Dashpot > 0 {
			touched[l.A], touched[l.B] = true, true
		}
	}
	for i := range m.Nodes {
		n := &m.Nodes[i]
		if !touched[i] && !n.Fixed && n.Motion == nil && !(n.Mass > 0) && !(n.Dashpot > 0) {
			out = append(out, fmt.Sprintf("node %s has neither mass nor line nor dashpot, so nothing tells how it moves", n.Name))
		}
	}
	return out
}

// Plan says what a level costs.
func (tracker) Plan(m *mesh.Mesh, req solver.Request) (solver.Plan, error) {
	if err := sound(m); err != nil {
		return solver.Plan{}, err
	}
	m = unspliced(m)
	lay, _ := plan(m, req)
	p := size(m, &lay)
	return p, within(p)
}

// Solve computes the records.
func (t tracker) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(share float64)) (*solver.Result, error) {
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	if err := sound(m); err != nil {
		return nil, err
	}
	if no := t.Refuses(m); len(no) > 0 {
		return nil, &solver.FaultError{Solver: name, What: no[0]}
	}
	m = unspliced(m)
	lay, frozen := plan(m, req)
	cost := size(m, &lay)
	if err := within(cost); err != nil {
		return nil, err
	}
	r, err := assemble(m, &lay)
	if err != nil {
		return nil, err
	}
	if err := r.march(ctx, progress); err != nil {
		return nil, err
	}
	out := &solver.Result{Plan: cost, Order: r.order(), Ratio: 2, Layout: lay, Frozen: frozen, Series: r.series, Energy: r.books(), Notes: r.notes}
	if phi := m.Neglect(); phi > 0 {
		out.Neglect = phi
		if phi > mesh.NeglectSilent {
			out.Notes = append(out.Notes, fmt.Sprintf("Bending stiffness is left out; records may be off by %.2g of their size for it (phi), which the error bars hold.", phi))
		}
	}
	if req.Freeze != nil && !frozen {
		out.Notes = append(out.Notes, "The earlier discretisation does not fit this line: a travel time has become too short, or a loss or load has come to a piece that had none.")
	}
	return out, finite(out)
}

// asksMoment tells whether a record is of what a string has not.
func asksMoment(m *mesh.Mesh) bool {
	for i := range m.Channels {
		if m.Channels[i].Quantity == scenario.Moment {
			return true
		}
	}
	return false
}

// shortest is the share of the longest travel time below which a piece is not
// followed: its nodes would take that many sub-steps in every step. Chosen; a
// millionth took a minute where a thousandth takes a second.
const shortest = 1e-5

// stub finds a piece below that share.
func stub(m *mesh.Mesh) (piece int, found bool) {
	longest := 0.0
	for i := range m.Pieces {
		longest = math.Max(longest, m.Pieces[i].TravelTime())
	}
	for i := range m.Pieces {
		if m.Pieces[i].TravelTime() < shortest*longest {
			return i, true
		}
	}
	return 0, false
}

// order is what successive levels should show. Breaks are followed, so that
// kinked data mostly do better than stated; how many breaks find room depends on
// the level, and the statement should not.
func (r *run) order() float64 {
	loss := 0.0
	for _, p := range r.lines {
		loss = math.Max(loss, p.gamma*p.tau)
	}
	switch {
	case r.m.Features()&mesh.NonLinear != 0:
		// Sticking, slipping and striking fall between steps and are not followed.
		return 1
	case r.m.Jump <= 1:
		return 1.5
	case loss > lossy || len(r.m.Presses) > 0:
		// A press is summed on a lattice whose fourth order shows only where the
		// lattice is fine against it: manufactured cases fall by 2.3 to 3.1.
		return 2
	}
	return 4
}

// lossy: above this gamma tau the second order of the loss shows before the
// fourth of the rest; below it its share is at most lossy^2/12 of a squared
// step in travel times. Chosen.
const lossy = 0.1

// march runs to the end of the time grid and as far beyond it as means reach.
func (r *run) march(ctx context.Context, progress func(float64)) error {
	end := r.m.Timing.End() + window(r.m)
	check := 0
	for k := 0; !r.recorded(); k++ {
		if float64(k)*r.step > end+20*r.step+4*r.coarsest {
			return &solver.FaultError{Solver: name, What: "the run did not reach its last row"}
		}
		if check++; check >= r.checkEvery {
			check = 0
			if err := ctx.Err(); err != nil {
				return err
			}
			if progress != nil {
				progress(math.Min(1, float64(k)*r.step/end))
			}
			if !r.sane() {
				return &solver.FaultError{Solver: name, What: fmt.Sprintf("the solution is not finite at t = %.6g s", float64(k)*r.step)}
			}
		}
		r.advance()
		r.output(float64(k+1) * r.step)
	}
	if progress != nil {
		progress(1)
	}
	return ctx.Err()
}

// advance does one step of the whole network.
func (r *run) advance() {
	r.k++
	now := float64(r.k) * r.step
	for _, s := range r.sources {
		for i := 0; i < s.per; i++ {
			s.advance()
		}
	}
	for _, w := range r.winds {
		for float64(w.step) < now/w.ds+windAhead-1 {
			w.advance()
		}
	}
	for _, g := range r.groups {
		for i := 0; i < g.substeps; i++ {
			for _, c := range g.clusters {
				c.advance()
			}
		}
	}
	for _, g := range r.sags {
		g.correct()
	}
	for _, l := range r.lattices {
		for l.due(now) {
			l.advance()
		}
	}
	for _, s := range r.sources {
		s.book(now)
	}
	for _, p := range r.lines {
		for i := range p.rolls {
			r.rolled += p.rolls[i].work(p, now-r.step, now)
		}
	}
	if s := r.stored(); s > r.most {
		r.most = s
	}
}

// sane tells whether every displacement is a number.
func (r *run) sane() bool {
	for _, g := range r.groups {
		for _, c := range g.clusters {
			for i := range c.joints {
				if u := c.joints[i].u; math.IsNaN(u) || math.IsInf(u, 0) {
					return false
				}
			}
		}
	}
	return true
}

func finite(res *solver.Result) error {
	bad := func(v float64) bool { return math.IsNaN(v) || math.IsInf(v, 0) }
	for _, ch := range res.Series {
		for _, s := range ch {
			for _, v := range s {
				if bad(v) {
					return &solver.FaultError{Solver: name, What: "a record is not finite"}
				}
			}
		}
	}
	e := res.Energy
	if bad(e.Start + e.End + e.Work + e.Lost + e.Most) {
		return &solver.FaultError{Solver: name, What: "the energy account is not finite"}
	}
	return nil
}
