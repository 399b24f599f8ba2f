package app

import (
	"context"
	"fmt"
	"io"
	"os"
	"runtime"
	"slices"
	"strings"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
	"github.com/tautspan/tautspan/plugins/characteristic"
	"github.com/tautspan/tautspan/plugins/differences"
	"github.com/tautspan/tautspan/plugins/host"
	"github.com/tautspan/tautspan/plugins/spectral"
	"github.com/tautspan/tautspan/plugins/transform"
)

// builtin lists the solvers that the program carries, in the order in which
// they are named everywhere.
func builtin() []solver.Solver {
	return []solver.Solver{differences.New(), spectral.New(), characteristic.New(), transform.New()}
}

// engineOf says who computes, for a document's head.
func engineOf() Engine {
	e := Engine{Platform: runtime.GOOS + "/" + runtime.GOARCH, Solvers: map[string]string{}}
	for _, s := range builtin() {
		e.Solvers[s.Name()] = s.Version()
	}
	return e
}

// ServeCommand is the command by which this program serves one of its own
// solvers to itself.
const ServeCommand = "plugin-serve"

// ServeBuiltin serves a built-in solver until the host lets go.
func ServeBuiltin(name string) error {
	for _, s := range builtin() {
		if s.Name() == name {
			host.ServeSolver(s)
			return nil
		}
	}
	return fmt.Errorf("there is no solver %q", name)
}

// solverWant says which solvers are to run.
type solverWant struct {
	builtin []string // none and no foreign: all
	foreign []string
	apart   bool      // the built-in ones in processes of their own
	log     io.Writer // what plugins write; nil: dropped
}

// solverSet is the solvers of one run, with the processes behind them.
type solverSet struct {
	list      []solver.Solver
	checksums map[string]string // of foreign ones
	processes []*host.Process
}

// close ends the processes.
func (s *solverSet) close() {
	for _, p := range s.processes {
		p.Close()
	}
}

// sort the names of --solver into built-in and foreign ones.
func (w *solverWant) named(names []string) error {
	var known []string
	for _, s := range builtin() {
		known = append(known, s.Name())
	}
	for _, name := range names {
		if slices.Contains(known, name) {
			w.builtin = append(w.builtin, name)
			continue
		}
		store, err := pluginStore()
		if err != nil {
			return err
		}
		t, found, err := store.Find(name)
		switch {
		case err != nil:
			return err
		case !found || t.Kind != "solver":
			return fmt.Errorf("there is no solver %q; there are %s, and those that `tautspan plugins list` shows", name, strings.Join(known, ", "))
		}
		w.foreign = append(w.foreign, name)
	}
	return nil
}

// chosen starts the solvers of a run. A plugin that does not start is among them
// as one that refuses, with the reason: the run goes on without it.
func chosen(ctx context.Context, w solverWant) *solverSet {
	out := &solverSet{checksums: map[string]string{}}
	for _, s := range builtin() {
		if len(w.builtin)+len(w.foreign) > 0 && !slices.Contains(w.builtin, s.Name()) {
			continue
		}
		if w.apart {
			s = out.apart(ctx, s, w.log)
		}
		out.list = append(out.list, s)
	}
	for _, name := range w.foreign {
		out.list = append(out.list, out.foreign(ctx, name, w.log))
	}
	return out
}

func (s *solverSet) apart(ctx context.Context, own solver.Solver, log io.Writer) solver.Solver {
	exe, err := os.Executable()
	if err != nil {
		return &absent{own.Name(), own.Version(), err.Error()}
	}
	p, err := host.Start(ctx, host.Spec{Name: own.Name(), Path: exe, Args: []string{ServeCommand, own.Name()}, Log: log})
	if err != nil {
		return &absent{own.Name(), own.Version(), err.Error()}
	}
	s.processes = append(s.processes, p)
	served, err := host.NewSolver(p, true)
	if err != nil {
		return &absent{own.Name(), own.Version(), err.Error()}
	}
	return served
}

func (s *solverSet) foreign(ctx context.Context, name string, log io.Writer) solver.Solver {
	store, err := pluginStore()
	if err != nil {
		return &absent{name, "", err.Error()}
	}
	t, found, err := store.Find(name)
	switch {
	case err != nil:
		return &absent{name, "", err.Error()}
	case !found:
		return &absent{name, "", "is not installed"}
	}
	s.checksums[name] = t.SHA256
	p, err := startTrusted(ctx, &t, log)
	if err != nil {
		return &absent{name, t.About.Version, err.Error()}
	}
	s.processes = append(s.processes, p)
	served, err := host.NewSolver(p, false)
	if err != nil {
		return &absent{name, t.About.Version, err.Error()}
	}
	return served
}

// absent stands for a solver that could not be started.
type absent struct{ name, version, reason string }

// Name is that of the solver it stands for.
func (a *absent) Name() string { return a.name }

// Version likewise.
func (a *absent) Version() string { return a.version }

// Refuses everything, with the reason.
func (a *absent) Refuses(*mesh.Mesh) []string { return []string{a.reason} }

// Plan is not asked of one that refuses.
func (a *absent) Plan(*mesh.Mesh, solver.Request) (solver.Plan, error) {
	return solver.Plan{}, &solver.FaultError{Solver: a.name, What: a.reason}
}

// Solve is not asked of one that refuses.
func (a *absent) Solve(context.Context, *mesh.Mesh, solver.Request, func(float64)) (*solver.Result, error) {
	return nil, &solver.FaultError{Solver: a.name, What: a.reason}
}
