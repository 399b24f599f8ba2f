package host

import (
	"context"
	"errors"
	"fmt"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/author"
)

// InProcess is an author's solver as solver.Solver, without a process: for tests
// and for the conformance kit.
func InProcess(s author.Solver) solver.Solver { return &inProcess{s, s.About()} }

type inProcess struct {
	solver author.Solver
	about  author.About
}

// Name is the solver's own.
func (s *inProcess) Name() string { return s.about.Name }

// Version is the solver's own.
func (s *inProcess) Version() string { return s.about.Version }

func problemOf(m *mesh.Mesh) *author.Problem { return author.FromWire(toWire(m), functions{m}) }

// Refuses asks the solver; what the protocol cannot say is refused for it.
func (s *inProcess) Refuses(m *mesh.Mesh) []string {
	if beyond := m.Unknown(carried); len(beyond) > 0 {
		return beyond
	}
	return s.solver.Refuses(problemOf(m))
}

// Plan asks what a level costs.
func (s *inProcess) Plan(m *mesh.Mesh, req solver.Request) (solver.Plan, error) {
	p, err := s.solver.Plan(problemOf(m), author.Want{Level: req.Level, Effort: req.Effort})
	if errors.Is(err, author.ErrBudget) {
		err = fmt.Errorf("%s: %w", err, solver.ErrBudget)
	}
	return solver.Plan(p), err
}

// Solve runs one level, checked as if it had come from another process.
func (s *inProcess) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(float64)) (*solver.Result, error) {
	p := problemOf(m)
	records := author.NewRecords(p)
	if progress == nil {
		progress = func(float64) {}
	}
	o, err := s.solver.Solve(ctx, p, author.Want{Level: req.Level, Effort: req.Effort}, records, progress)
	if err != nil {
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		return nil, &solver.FaultError{Solver: s.Name(), What: err.Error()}
	}
	a := &assembly{mesh: m, result: &solver.Result{Series: solver.NewSeries(m)}}
	for c := range m.Channels {
		for k := range m.Channels[c].Spots {
			if err := a.row(c, k, records.Row(c, k)); err != nil {
				return nil, &solver.FaultError{Solver: s.Name(), What: err.Error()}
			}
		}
	}
	r, err := a.finish(o.ToWire())
	if err != nil {
		return nil, &solver.FaultError{Solver: s.Name(), What: err.Error()}
	}
	return r, nil
}
