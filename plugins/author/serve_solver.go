package author

import (
	"context"
	"errors"
	"fmt"
	"sync"

	"github.com/tautspan/tautspan/plugins/wire"
)

type solverServer struct {
	wire.UnimplementedSolverServer
	solver Solver
}

// noFunctions answers for a problem that is only judged.
type noFunctions struct{}

func (noFunctions) Values(what string, _ int, _, _ []float64) ([]float64, error) {
	return nil, fmt.Errorf("%s is answered while solving only", what)
}

// Judge says what cannot be and what a level costs.
func (s *solverServer) Judge(_ context.Context, t *wire.Task) (*wire.Judgement, error) {
	if t.Problem == nil {
		return nil, errors.New("a task without a problem")
	}
	p := FromWire(t.Problem, noFunctions{})
	out := &wire.Judgement{}
	err := func() (err error) {
		defer caught(&err)
		if out.Refuses = s.solver.Refuses(p); len(out.Refuses) > 0 {
			return nil
		}
		plan, err := s.solver.Plan(p, Want{Level: int(t.Level), Effort: int(t.Effort)})
		out.Plan = plan.toWire()
		return err
	}()
	if err != nil {
		out.Fault, out.OverBudget = err.Error(), errors.Is(err, ErrBudget)
	}
	return out, nil
}

func (p Plan) toWire() *wire.Plan {
	return &wire.Plan{Cells: int64(p.Cells), Steps: int64(p.Steps), Work: p.Work, Bytes: p.Bytes}
}

// Solve runs the solver and streams its records.
func (s *solverServer) Solve(stream wire.Solver_SolveServer) error {
	first, err := stream.Recv()
	if err != nil {
		return err
	}
	task := first.GetTask()
	if task == nil || task.Problem == nil {
		return errors.New("the first message is a task with a problem")
	}
	a := newAsker(stream)
	p := FromWire(task.Problem, a)
	if rows := recordSize(p); rows > recordMost {
		return fmt.Errorf("%d numbers of records are more than one solution may hold", rows)
	}
	out := NewRecords(p)
	o, err := s.solve(stream.Context(), p, Want{Level: int(task.Level), Effort: int(task.Effort)}, out, a)
	if err != nil {
		return a.send(&wire.FromSolver{Of: &wire.FromSolver_Fault{Fault: err.Error()}})
	}
	for c := range p.Channels {
		for k := range p.Channels[c].Spots {
			if err := SendRow(a.send, c, k, out.Row(c, k)); err != nil {
				return err
			}
		}
	}
	return a.send(&wire.FromSolver{Of: &wire.FromSolver_Outcome{Outcome: o.ToWire()}})
}

// ToWire writes an outcome for the protocol.
func (o *Outcome) ToWire() *wire.Outcome {
	return &wire.Outcome{
		Plan: o.Plan.toWire(), Order: o.Order, Ratio: o.Ratio, Notes: o.Notes,
		EnergyStart: o.Energy.Start, EnergyEnd: o.Energy.End, EnergyWork: o.Energy.Work, EnergyLost: o.Energy.Lost, EnergyMost: o.Energy.Most,
	}
}

// recordMost bounds the records of one solution: 4 GiB.
const recordMost = 1 << 29

func recordSize(p *Problem) int64 {
	n := int64(0)
	for i := range p.Channels {
		rows := p.Rows
		if p.Channels[i].Along {
			rows = p.FieldRows
		}
		n += int64(rows) * int64(len(p.Channels[i].Spots))
		if n < 0 || n > recordMost {
			return recordMost + 1
		}
	}
	return n
}

func (s *solverServer) solve(ctx context.Context, p *Problem, w Want, out *Records, a *asker) (o Outcome, err error) {
	defer caught(&err)
	return s.solver.Solve(ctx, p, w, out, a.progress)
}

// blockRows is how many values go into one message: 1 MB of them.
const blockRows = 1 << 17

// SendRow sends one record in blocks.
func SendRow(send func(*wire.FromSolver) error, channel, spot int, row []float64) error {
	for first := 0; first < len(row); first += blockRows {
		part := row[first:min(first+blockRows, len(row))]
		err := send(&wire.FromSolver{Of: &wire.FromSolver_Block{Block: &wire.Block{
			Channel: uint32(channel), Spot: uint32(spot), First: uint64(first), Values: part,
		}}})
		if err != nil {
			return err
		}
	}
	return nil
}

// asker asks the host for the functions of a problem. Questions may come from
// several goroutines; answers come in the order of questions.
type asker struct {
	stream wire.Solver_SolveServer
	lock   sync.Mutex
	next   uint64
	told   float64
}

func newAsker(s wire.Solver_SolveServer) *asker { return &asker{stream: s} }

func (a *asker) send(m *wire.FromSolver) error {
	a.lock.Lock()
	defer a.lock.Unlock()
	return a.stream.Send(m)
}

// progress tells steps of a hundredth; more would only be traffic.
func (a *asker) progress(share float64) {
	a.lock.Lock()
	defer a.lock.Unlock()
	if share < a.told+0.01 && share < 1 {
		return
	}
	a.told = share
	// A host that is gone ends the context; there is nothing else to do here.
	_ = a.stream.Send(&wire.FromSolver{Of: &wire.FromSolver_Progress{Progress: share}})
}

// Values asks and waits.
func (a *asker) Values(what string, index int, at, time []float64) ([]float64, error) {
	a.lock.Lock()
	defer a.lock.Unlock()
	var out []float64
	for first := 0; first < len(at); first += blockRows {
		last := min(first+blockRows, len(at))
		q := &wire.Ask{Id: a.next, What: what, Index: uint32(index), At: at[first:last]}
		a.next++
		if time != nil {
			q.Time = time[first:last]
		}
		if err := a.stream.Send(&wire.FromSolver{Of: &wire.FromSolver_Ask{Ask: q}}); err != nil {
			return nil, err
		}
		m, err := a.stream.Recv()
		if err != nil {
			return nil, err
		}
		answer := m.GetAnswer()
		switch {
		case answer == nil || answer.Id != q.Id:
			return nil, errors.New("the answer does not belong to the question")
		case answer.Fault != "":
			return nil, errors.New(answer.Fault)
		}
		out = append(out, answer.Values...)
	}
	return out, nil
}
