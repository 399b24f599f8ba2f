package compare

import (
	"context"
	"fmt"
	"sort"
	"sync"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/solver"
)

// task is one level of one voice to solve.
type task struct {
	voice int
	level int
	plan  solver.Plan

	result *solver.Result
	err    error
	done   bool
}

// Progress tells how far one solution is.
type Progress struct {
	Solver string
	Level  int
	Share  float64 // 0 to 1
}

// solveAll solves the tasks on a bounded number of workers, the costly first,
// never holding more memory at once than fits (one task always runs). When ctx
// ends it returns at once; a solver that does not stop by itself is left behind.
func (r *runner) solveAll(ctx context.Context, tasks []task, memory int64) {
	order := make([]int, len(tasks))
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(a, b int) bool { return tasks[order[a]].plan.Work > tasks[order[b]].plan.Work })
	type answer struct {
		task   int
		result *solver.Result
		err    error
	}
	answers := make(chan answer, len(tasks))
	running, held := 0, int64(0)
	for len(order) > 0 || running > 0 {
		for i := 0; i < len(order) && running < r.workers; {
			t := order[i]
			if running > 0 && held+tasks[t].plan.Bytes > memory {
				i++
				continue
			}
			order = append(order[:i], order[i+1:]...)
			running++
			held += tasks[t].plan.Bytes
			s, level := r.voices[tasks[t].voice].solver, tasks[t].level
			go func() {
				result, err := r.guarded(ctx, s, level)
				answers <- answer{t, result, err}
			}()
		}
		select {
		case a := <-answers:
			tasks[a.task].result, tasks[a.task].err, tasks[a.task].done = a.result, a.err, true
			running--
			held += min(seriesBytes(r.mesh), tasks[a.task].plan.Bytes) - tasks[a.task].plan.Bytes
		case <-ctx.Done():
			return
		}
	}
}

// guarded solves, and turns a panic into a fault.
func (r *runner) guarded(ctx context.Context, s solver.Solver, level int) (result *solver.Result, err error) {
	defer func() {
		if p := recover(); p != nil {
			result, err = nil, &solver.FaultError{Solver: s.Name(), What: fmt.Sprintf("panic: %v", p)}
		}
	}()
	var report func(float64)
	if r.options.Progress != nil {
		name := s.Name()
		report = func(share float64) { r.progress.tell(Progress{name, level, share}) }
	}
	return s.Solve(ctx, r.mesh, solver.Request{Level: level, Effort: r.effort}, report)
}

// teller passes progress on, one call at a time.
type teller struct {
	lock sync.Mutex
	to   func(Progress)
}

func (t *teller) tell(p Progress) {
	t.lock.Lock()
	defer t.lock.Unlock()
	t.to(p)
}

// seriesBytes is what the records of one solution hold.
func seriesBytes(m *mesh.Mesh) int64 {
	fieldRows, _ := m.FieldRows()
	n := int64(0)
	for c := range m.Channels {
		rows := m.Timing.Rows
		if m.Channels[c].Along {
			rows = fieldRows
		}
		n += int64(rows) * int64(len(m.Channels[c].Spots)) * 8
	}
	return n
}
