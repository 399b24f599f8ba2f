package host

import (
	"context"
	"fmt"
	"io"
	"math"
	"time"

	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/wire"
)

// Solver is a solver in a process of its own, as solver.Solver. Where it is one
// of the built-in ones (ServeSolver) it gets the network itself and gives the
// same bits as in process.
type Solver struct {
	process *Process
	native  bool
}

// NewSolver is the solver that a process serves.
func NewSolver(p *Process, native bool) (*Solver, error) {
	if p.Kind != "solver" {
		return nil, fmt.Errorf("plugin %s is a %s, not a solver", p.About.Name, p.Kind)
	}
	return &Solver{process: p, native: native}, nil
}

// Name is the solver's own.
func (s *Solver) Name() string { return s.process.About.Name }

// Version is the solver's own.
func (s *Solver) Version() string { return s.process.About.Version }

func (s *Solver) fault(err error) error {
	return &solver.FaultError{Solver: s.Name(), What: s.process.because(err).Error()}
}

// task writes what is asked.
func (s *Solver) task(m *mesh.Mesh, req solver.Request) (*wire.Task, error) {
	t := &wire.Task{Problem: toWire(m), Level: uint32(req.Level), Effort: uint32(req.Effort)}
	if !s.native {
		return t, nil
	}
	var err error
	if t.Native, err = packNetwork(m); err != nil {
		return nil, err
	}
	if l, ok := req.Freeze.(apartLayout); ok && l.process == s.process {
		t.Freeze = l.name
	}
	return t, nil
}

// apartLayout names a layout that the plugin's process keeps.
type apartLayout struct {
	process *Process
	name    string
}

func (s *Solver) judge(m *mesh.Mesh, req solver.Request) (*wire.Judgement, error) {
	t, err := s.task(m, req)
	if err != nil {
		return nil, err
	}
	ctx, cancel := context.WithTimeout(context.Background(), s.process.spec.Limits.Stall)
	defer cancel()
	j, err := wire.NewSolverClient(s.process.conn).Judge(ctx, t)
	if err != nil {
		return nil, s.fault(err)
	}
	return j, nil
}

// Refuses asks the solver; what the protocol cannot say is refused for it.
func (s *Solver) Refuses(m *mesh.Mesh) []string {
	if !s.native {
		if beyond := m.Unknown(carried); len(beyond) > 0 {
			return beyond
		}
	}
	j, err := s.judge(m, solver.Request{})
	if err != nil {
		return []string{err.Error()}
	}
	return j.Refuses
}

// Plan asks what a level costs.
func (s *Solver) Plan(m *mesh.Mesh, req solver.Request) (solver.Plan, error) {
	j, err := s.judge(m, req)
	switch {
	case err != nil:
		return solver.Plan{}, err
	case j.OverBudget:
		return solver.Plan{}, fmt.Errorf("%s: %w", j.Fault, solver.ErrBudget)
	case j.Fault != "" || j.Plan == nil:
		return solver.Plan{}, &solver.FaultError{Solver: s.Name(), What: "cannot plan: " + j.Fault}
	}
	p := planFromWire(j.Plan)
	if p.Cells < 0 || p.Steps < 0 || p.Work < 0 || p.Bytes < 0 {
		return solver.Plan{}, &solver.FaultError{Solver: s.Name(), What: "plans a negative cost"}
	}
	return p, nil
}

func planFromWire(p *wire.Plan) solver.Plan {
	if p == nil {
		return solver.Plan{}
	}
	return solver.Plan{Cells: int(p.Cells), Steps: int(p.Steps), Work: p.Work, Bytes: p.Bytes}
}

// Solve runs one level. Answers of the wrong shape or not finite are faults.
func (s *Solver) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(float64)) (*solver.Result, error) {
	task, err := s.task(m, req)
	if err != nil {
		return nil, err
	}
	inner, cancel := context.WithCancel(ctx)
	defer cancel()
	stall := time.AfterFunc(s.process.spec.Limits.Stall, func() {
		s.process.end(fmt.Sprintf("was silent for %s in the middle of its work", s.process.spec.Limits.Stall))
	})
	defer stall.Stop()
	stream, err := wire.NewSolverClient(s.process.conn).Solve(inner)
	if err != nil {
		return nil, s.broken(ctx, err)
	}
	if err := stream.Send(&wire.ToSolver{Of: &wire.ToSolver_Task{Task: task}}); err != nil && err != io.EOF {
		return nil, s.broken(ctx, err)
	}
	a := &assembly{mesh: m, result: &solver.Result{Series: solver.NewSeries(m)}}
	for {
		got, err := stream.Recv()
		if err != nil {
			return nil, s.broken(ctx, err)
		}
		stall.Reset(s.process.spec.Limits.Stall)
		switch of := got.Of.(type) {
		case *wire.FromSolver_Progress:
			if progress != nil {
				progress(math.Max(0, math.Min(1, of.Progress)))
			}
		case *wire.FromSolver_Ask:
			if err := stream.Send(&wire.ToSolver{Of: &wire.ToSolver_Answer{Answer: answer(m, of.Ask)}}); err != nil && err != io.EOF {
				return nil, s.broken(ctx, err)
			}
		case *wire.FromSolver_Block:
			if err := a.take(of.Block); err != nil {
				return nil, &solver.FaultError{Solver: s.Name(), What: err.Error()}
			}
		case *wire.FromSolver_Fault:
			if err := ended(ctx, of.Fault); err != nil {
				return nil, err
			}
			return nil, &solver.FaultError{Solver: s.Name(), What: of.Fault}
		case *wire.FromSolver_Outcome:
			r, err := a.finish(of.Outcome)
			if err != nil {
				return nil, &solver.FaultError{Solver: s.Name(), What: err.Error()}
			}
			if s.native && of.Outcome.Layout != "" {
				r.Layout = apartLayout{s.process, of.Outcome.Layout}
			}
			return r, nil
		default:
			return nil, &solver.FaultError{Solver: s.Name(), What: "sent a message of no known kind"}
		}
	}
}

// ended tells a fault that is the caller's own wish to stop from others. The
// plugin's copy of a deadline may pass a moment before the caller's.
func ended(ctx context.Context, fault string) error {
	if fault == context.DeadlineExceeded.Error() || fault == context.Canceled.Error() {
		select {
		case <-ctx.Done():
		case <-time.After(100 * time.Millisecond):
		}
	}
	return ctx.Err()
}

// broken says why a stream ended early: the caller's wish first.
func (s *Solver) broken(ctx context.Context, err error) error {
	if ctx.Err() != nil {
		return ctx.Err()
	}
	// The connection's own timer may be a moment ahead of the context's.
	if _, timed := ctx.Deadline(); timed && status.Code(err) == codes.DeadlineExceeded {
		return context.DeadlineExceeded
	}
	if err == io.EOF {
		return &solver.FaultError{Solver: s.Name(), What: "ended without an outcome"}
	}
	return s.fault(err)
}

func answer(m *mesh.Mesh, q *wire.Ask) *wire.Answer {
	out := &wire.Answer{Id: q.Id}
	v, err := functions{m}.Values(q.What, int(q.Index), q.At, q.Time)
	if err != nil {
		out.Fault = err.Error()
		return out
	}
	out.Values = v
	return out
}
