package differences

import (
	"context"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

const (
	name    = "differences"
	version = "1"
)

// maxBytes is the memory that a solution may take, results included.
const maxBytes = 2e9

// fourthWork is what a cell-step of order 4 costs in those of order 2, rounded
// down to the plain ones that a Plan counts: 15 ns were measured against 0.4 to 1.
const fourthWork = 10

// New is the finite-difference solver.
func New() solver.Solver { return differences{} }

type differences struct{}

func (differences) Name() string    { return name }
func (differences) Version() string { return version }

func (differences) Refuses(m *mesh.Mesh) []string { return refuses(m) }

func (differences) Plan(m *mesh.Mesh, req solver.Request) (solver.Plan, error) {
	t, err := newTask(m, req)
	if err != nil {
		return solver.Plan{}, err
	}
	return t.plan, nil
}

// task is what a request comes to.
type task struct {
	layout *Layout
	level  int
	frozen bool
	notes  []string
	plan   solver.Plan
}

func newTask(m *mesh.Mesh, req solver.Request) (*task, error) {
	if no := refuses(m); len(no) > 0 {
		return nil, &solver.FaultError{Solver: name, What: no[0]}
	}
	t := &task{level: max(req.Level, 0)}
	if old := thaw(req.Freeze, m); old != nil {
		var note string
		t.layout, t.frozen, note = frozen(old, m)
		if note != "" {
			t.notes = append(t.notes, note)
		}
	} else {
		t.layout, t.notes = newLayout(m, req.Effort)
		if req.Freeze != nil {
			t.notes = append(t.notes, "The layout to be kept is not one of this network, so a new one was made.")
		}
	}
	return t, t.size(m)
}

// size works out what the task costs, in numbers that cannot overflow, and
// refuses what does not fit.
func (t *task) size(m *mesh.Mesh) error {
	finer := math.Exp2(float64(t.level))
	cells := 0.0
	for _, n := range t.layout.Cells {
		cells += float64(n) * finer
	}
	steps := reach(m, t.layout.Step/finer)
	bytes := t.memory(m, cells, finer)
	if !(bytes <= maxBytes) || !(steps < 1e15) || !(cells*steps < 1e18) {
		return fmt.Errorf("solver %s: level %d needs %.3g cells, %.3g steps and %.3g bytes: %w", name, t.level, cells, steps, bytes, solver.ErrBudget)
	}
	work := cells * steps
	if t.layout.Order == 4 {
		work *= fourthWork
	}
	t.plan = solver.Plan{Cells: int(cells), Steps: int(steps), Work: int64(work), Bytes: int64(bytes)}
	return nil
}

// memory estimates the bytes held while solving.
func (t *task) memory(m *mesh.Mesh, cells, finer float64) float64 {
	const number, tapBytes, tapeNumbers = 8, 72, ring + 40
	points := cells + float64(len(m.Nodes)+2*len(m.Pieces))
	b := number * 3 * points
	if t.layout.Order == 4 {
		b = number * 8 * points
	}
	implicit := 0.0
	for i, n := range t.layout.Cells {
		if t.layout.Implicit[i] {
			implicit += float64(n) * finer
		}
	}
	b += 300 * (implicit + float64(len(m.Nodes)+len(m.Links)))
	for _, p := range m.Presses {
		for _, part := range p.Parts {
			share := math.Abs(part.To-part.From) / m.Pieces[part.Piece].Length
			b += (tapBytes + 4*number) * (share*float64(t.layout.Cells[part.Piece])*finer + 2)
		}
	}
	rows, _ := m.FieldRows()
	for i := range m.Channels {
		ch := &m.Channels[i]
		n := float64(m.Timing.Rows)
		if ch.Along {
			n = float64(rows)
		}
		b += number * (n + tapeNumbers) * float64(len(ch.Spots))
	}
	return b
}

func (differences) Solve(ctx context.Context, m *mesh.Mesh, req solver.Request, progress func(share float64)) (*solver.Result, error) {
	t, err := newTask(m, req)
	if err != nil {
		return nil, err
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	res := &solver.Result{Plan: t.plan, Ratio: 2, Layout: t.layout, Frozen: t.frozen, Notes: t.notes, Series: solver.NewSeries(m)}
	res.Order = order(m, t.layout)
	if t.layout.Order == 4 {
		err = t.fourth(ctx, m, res, progress)
	} else {
		err = t.second(ctx, m, res, progress)
	}
	if err != nil {
		return nil, err
	}
	if !finite(res.Series) {
		return nil, &solver.FaultError{Solver: name, What: "a record is not finite"}
	}
	if progress != nil {
		progress(1)
	}
	return res, nil
}

// second solves by the scheme of order 2.
func (t *task) second(ctx context.Context, m *mesh.Mesh, res *solver.Result, progress func(float64)) error {
	r, err := newRun(newNetwork(m, t.layout, t.level), res.Series)
	if err != nil {
		return &solver.FaultError{Solver: name, What: err.Error()}
	}
	if err := r.all(ctx, t.plan.Steps, progress); err != nil {
		return err
	}
	res.Energy = r.energy
	return account(&res.Energy, accountLimit)
}

// fourth solves by the scheme of order 4.
func (t *task) fourth(ctx context.Context, m *mesh.Mesh, res *solver.Result, progress func(float64)) error {
	r := newFourthRun(newNetwork(m, t.layout, t.level), res.Series)
	if err := r.all(ctx, t.plan.Steps, progress); err != nil {
		return err
	}
	res.Energy = r.energy
	return account(&res.Energy, fourthLimit)
}

// Shares of the energy that went through a run that may be missing: at order 2 far
// above rounding (1e-11 seen), at order 4, whose time stepping takes a little from
// the shortest waves, enough for that; both far below what a growing error makes
// of it.
const (
	accountLimit = 1e-6
	fourthLimit  = 0.1
)

// order is the order of accuracy to expect of a record.
func order(m *mesh.Mesh, l *Layout) float64 {
	if m.Jump <= 1 {
		return 1
	}
	return float64(l.Order)
}
