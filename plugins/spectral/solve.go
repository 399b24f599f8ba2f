package spectral

import (
	"context"
	"errors"
	"fmt"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

const (
	name    = "spectral"
	version = "2"
	// maxBytes is the memory that one solution may hold.
	maxBytes = int64(2e9)
	// modalMost is the largest network that is diagonalised as a whole: the cost
	// grows with the cube and cannot be interrupted.
	modalMost = 500
)

// Solver is the spectral solver. The zero value is ready.
type Solver struct{}

// New returns the spectral solver.
func New() solver.Solver { return Solver{} }

// Name is the solver's word.
func (Solver) Name() string { return name }

// Version changes whenever answers may change.
func (Solver) Version() string { return version }

// denseMost is from how many nodes on the element ends' system is banded: the dense
// one's factors take the cube. Chosen at a tenth of a second.
const denseMost = 300

// mostNodes bounds what is assembled at all.
const mostNodes = 100000

// Refuses lists what the solver cannot represent: of a network without laws, only a
// free mass of no mass.
func (Solver) Refuses(m *mesh.Mesh) []string {
	if len(m.Nodes) > mostNodes {
		return []string{fmt.Sprintf("takes %d nodes at most; there are %d", mostNodes, len(m.Nodes))}
	}
	for i := range m.Pieces {
		if !within(m.Pieces[i].From, m.Nodes) || !within(m.Pieces[i].To, m.Nodes) {
			return []string{fmt.Sprintf("piece %d has no nodes", i)}
		}
	}
	return refuses(m)
}

// Plan says what a level costs.
func (Solver) Plan(m *mesh.Mesh, req solver.Request) (solver.Plan, error) {
	j, err := newJob(m, req)
	if err != nil {
		return solver.Plan{}, err
	}
	return j.plan, nil
}

// job is one solution being prepared or computed.
type job struct {
	m      *mesh.Mesh
	lay    *layout
	frozen bool
	capped bool
	sys    *system
	rate   float64 // of proportional damping, 1/s
	sub    int     // base steps of one output interval
	steps  int     // base steps in all
	plan   solver.Plan
}

// newJob chooses the discretisation and assembles the network, after its size has
// been found to fit.
func newJob(m *mesh.Mesh, req solver.Request) (*job, error) {
	if err := validate(m); err != nil {
		return nil, err
	}
	if no := refuses(m); len(no) > 0 {
		return nil, fault("%s", no[0])
	}
	if req.Level < 0 || req.Level > 12 {
		return nil, fmt.Errorf("level %d: %w", req.Level, solver.ErrBudget)
	}
	j := &job{m: m}
	if lay, ok := req.Freeze.(*layout); ok && lay != nil && lay.fits(m) {
		copied := *lay
		j.lay, j.frozen = &copied, true
	} else {
		j.lay, j.capped = newLayout(m, req)
	}
	j.baseSteps()
	if err := j.size(); err != nil {
		return nil, err
	}
	var ok bool
	if j.sys, ok = newSystem(m, j.lay); !ok {
		return nil, fault("an element's eigenvalues did not converge")
	}
	if !finite(j.sys.top) || !finite(j.sys.mass...) || !finite(j.sys.omega2...) {
		return nil, fault("the network's numbers are out of range")
	}
	j.choose()
	return j, nil
}

// run goes through the time, again with half the step where the tension of a line
// grows more than the step allows.
func (j *job) run(ctx context.Context, op operator, res *solver.Result, progress func(float64)) (*walk, error) {
	const tries = 8
	for i := 0; ; i++ {
		w := newWalk(j, op, res.Series)
		err := w.march(ctx, progress)
		if i < tries && errors.Is(err, errCoarse) {
			j.lay.law /= 2
			res.Series = solver.NewSeries(j.m)
			continue
		}
		if errors.Is(err, errCoarse) {
			err = fault("the tension grows to many times its start")
		}
		return w, err
	}
}

// claim is the order to expect and what is to be said about it.
func (j *job) claim(notes []string) (float64, []string) {
	f := j.m.Features()
	switch {
	case f&(mesh.JointLaw|mesh.SpreadLaw|mesh.SlackTie) != 0:
		return 1, append(notes, "Friction, stops, slack ties and laws send kinks through the elements, which resolve them slowly: records are good to about a thousandth of their size at the usual levels.")
	case f&mesh.RollingSprung != 0:
		return 1, append(notes, "A load that rolls with a mass of its own bends the line under it, which the elements resolve slowly: records are good to about a thousandth of their size at the usual levels.")
	}
	return 0, notes
}

// Solve computes the records of a mesh.
func (Solver) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(share float64)) (*solver.Result, error) {
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	j, err := newJob(m, req)
	if err != nil {
		return nil, err
	}
	var op operator
	switch {
	case j.lay.modal:
		mo, ok := newModal(j.sys, j.rate)
		if !ok {
			return nil, fault("the network's eigenvalues did not converge")
		}
		op = mo
	case j.sys.frame:
		op = newFrame(j.sys, j.lay.hot)
	default:
		op = newArrow(j.sys, j.lay.hot)
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	res := &solver.Result{Plan: j.plan, Order: 0, Ratio: ratio, Layout: j.lay, Frozen: j.frozen, Series: solver.NewSeries(m)}
	if j.capped {
		res.Notes = append(res.Notes, "The excitations reach above the frequencies that the coarsest level resolves; further levels close the gap.")
	}
	if j.sys.above && !j.lay.modal {
		res.Notes = append(res.Notes, "A very short stretch or a very stiff attachment has vibrations far above the line's; they are damped by the time step instead of followed.")
	}
	res.Order, res.Notes = j.claim(res.Notes)
	w, err := j.run(ctx, op, res, progress)
	if err != nil {
		return nil, err
	}
	res.Energy = w.meter.acct
	for c := range res.Series {
		for k := range res.Series[c] {
			if !finite(res.Series[c][k]...) {
				return nil, fault("channel %s is not finite", m.Channels[c].Name())
			}
		}
	}
	if !finite(res.Energy.Start, res.Energy.End, res.Energy.Work, res.Energy.Lost) {
		return nil, fault("the energy account is not finite")
	}
	return res, nil
}
