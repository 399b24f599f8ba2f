package author

import (
	"context"
	"errors"
	"io"

	"github.com/tautspan/tautspan/plugins/wire"
)

type loadServer struct {
	wire.UnimplementedLoadServer
	load Load
}

func loadWant(t *wire.LoadTask) LoadWant {
	return LoadWant{Parameters: t.Parameters, Along: t.Along, Length: t.Length, Duration: t.Duration, Places: t.Places}
}

// Prepare says how finely to sample.
func (s *loadServer) Prepare(_ context.Context, t *wire.LoadTask) (*wire.LoadPlan, error) {
	out := &wire.LoadPlan{}
	err := func() (err error) {
		defer caught(&err)
		out.Step, out.Spacing, err = s.load.Prepare(loadWant(t))
		return err
	}()
	if err != nil {
		out.Refuses = err.Error()
	}
	return out, nil
}

// instantsBlock is how many instants a load is asked for at once.
const instantsBlock = 4096

// Evaluate streams the forces.
func (s *loadServer) Evaluate(t *wire.LoadTask, stream wire.Load_EvaluateServer) error {
	want := loadWant(t)
	places := len(want.Places)
	if int64(t.Count) > recordMost/int64(max(places, 1)) {
		return errors.New("more forces than one load may hold")
	}
	for first := 0; first < int(t.Count); first += instantsBlock {
		n := min(instantsBlock, int(t.Count)-first)
		times := make([]float64, n)
		for i := range times {
			times[i] = float64(first+i) * t.Step
		}
		force := make([][]float64, places)
		for k := range force {
			force[k] = make([]float64, n)
		}
		err := func() (err error) {
			defer caught(&err)
			return s.load.Evaluate(stream.Context(), want, times, force)
		}()
		if err != nil {
			return err
		}
		block := &wire.LoadBlock{First: uint64(first), Values: make([]float64, 0, n*places)}
		for i := range n {
			for k := range force {
				block.Values = append(block.Values, force[k][i])
			}
		}
		if err := stream.Send(block); err != nil {
			return err
		}
	}
	return nil
}

type lawServer struct {
	wire.UnimplementedLawServer
	law Law
}

// Written gives the law's text.
func (s *lawServer) Written(_ context.Context, t *wire.LawTask) (*wire.LawText, error) {
	out := &wire.LawText{}
	err := func() (err error) {
		defer caught(&err)
		out.Text, err = s.law.Written(t.Parameters)
		return err
	}()
	if err != nil {
		out.Refuses = err.Error()
	}
	return out, nil
}

// Follow answers step by step.
func (s *lawServer) Follow(stream wire.Law_FollowServer) error {
	first, err := stream.Recv()
	if err != nil {
		return err
	}
	if first.Task == nil {
		return errors.New("the first message is a task")
	}
	f, err := s.law.Follow(first.Task.Parameters)
	if err != nil {
		return err
	}
	for m := first; ; {
		out := &wire.LawForce{}
		err := func() (err error) {
			defer caught(&err)
			out.Force, err = f.Force(m.Time, m.U, m.V, m.Accepted)
			return err
		}()
		if err != nil {
			out.Fault = err.Error()
		}
		if err := stream.Send(out); err != nil {
			return err
		}
		if m, err = stream.Recv(); err == io.EOF {
			return nil
		} else if err != nil {
			return err
		}
	}
}
