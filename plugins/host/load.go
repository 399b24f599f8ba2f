package host

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"

	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/wire"
)

// Load is a load in a process of its own, as author.Load.
type Load struct{ process *Process }

// NewLoad is the load that a process serves.
func NewLoad(p *Process) (*Load, error) {
	if p.Kind != "load" {
		return nil, fmt.Errorf("plugin %s is a %s, not a load", p.About.Name, p.Kind)
	}
	return &Load{p}, nil
}

// About is the description.
func (l *Load) About() author.About { return l.process.About }

func (l *Load) task(q author.LoadWant) *wire.LoadTask {
	return &wire.LoadTask{Parameters: q.Parameters, Along: q.Along, Length: q.Length, Duration: q.Duration, Places: q.Places}
}

func (l *Load) fault(err error) error {
	return fmt.Errorf("load %s: %w", l.process.About.Name, l.process.because(err))
}

// Prepare asks how finely to sample.
func (l *Load) Prepare(q author.LoadWant) (step, spacing float64, err error) {
	ctx, cancel := context.WithTimeout(context.Background(), l.process.spec.Limits.Stall)
	defer cancel()
	p, err := wire.NewLoadClient(l.process.conn).Prepare(ctx, l.task(q))
	switch {
	case err != nil:
		return 0, 0, l.fault(err)
	case p.Refuses != "":
		return 0, 0, errors.New(p.Refuses)
	}
	return p.Step, p.Spacing, nil
}

// Evaluate fills the forces; t must be evenly spaced from 0.
func (l *Load) Evaluate(ctx context.Context, q author.LoadWant, t []float64, force [][]float64) error {
	ctx, cancel := context.WithTimeout(ctx, l.process.spec.Limits.Stall)
	defer cancel()
	task := l.task(q)
	task.Count = uint64(len(t))
	if len(t) > 1 {
		task.Step = t[1] - t[0]
	}
	stream, err := wire.NewLoadClient(l.process.conn).Evaluate(ctx, task)
	if err != nil {
		return l.fault(err)
	}
	next, places := 0, len(force)
	for {
		b, err := stream.Recv()
		if err == io.EOF {
			break
		}
		if err != nil {
			return l.fault(err)
		}
		if b.First != uint64(next) || places == 0 || len(b.Values)%places != 0 || len(b.Values)/places > len(t)-next {
			return fmt.Errorf("load %s: answered %d numbers from instant %d, and %d places from instant %d are awaited", l.process.About.Name, len(b.Values), b.First, places, next)
		}
		for i, v := range b.Values {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				return fmt.Errorf("load %s: answered %v", l.process.About.Name, v)
			}
			force[i%places][next+i/places] = v
		}
		next += len(b.Values) / places
	}
	if next != len(t) {
		return fmt.Errorf("load %s: answered %d of %d instants", l.process.About.Name, next, len(t))
	}
	return nil
}
