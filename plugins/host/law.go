package host

import (
	"context"
	"errors"
	"fmt"
	"math"

	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/wire"
)

// Law is a law in a process of its own, as author.Law.
type Law struct{ process *Process }

// NewLaw is the law that a process serves.
func NewLaw(p *Process) (*Law, error) {
	if p.Kind != "law" {
		return nil, fmt.Errorf("plugin %s is a %s, not a law", p.About.Name, p.Kind)
	}
	return &Law{p}, nil
}

// About is the description.
func (l *Law) About() author.About { return l.process.About }

func (l *Law) fault(err error) error {
	return fmt.Errorf("law %s: %w", l.process.About.Name, l.process.because(err))
}

// Written asks for the law's text.
func (l *Law) Written(parameters map[string]float64) (string, error) {
	ctx, cancel := context.WithTimeout(context.Background(), l.process.spec.Limits.Stall)
	defer cancel()
	t, err := wire.NewLawClient(l.process.conn).Written(ctx, &wire.LawTask{Parameters: parameters})
	switch {
	case err != nil:
		return "", l.fault(err)
	case t.Refuses != "":
		return "", errors.New(t.Refuses)
	}
	return t.Text, nil
}

// Follow starts one use of the law; Close ends it.
func (l *Law) Follow(parameters map[string]float64) (author.Follower, error) {
	ctx, cancel := context.WithCancel(context.Background())
	stream, err := wire.NewLawClient(l.process.conn).Follow(ctx)
	if err != nil {
		cancel()
		return nil, l.fault(err)
	}
	return &follower{law: l, stream: stream, cancel: cancel, first: &wire.LawTask{Parameters: parameters}}, nil
}

type follower struct {
	law    *Law
	stream wire.Law_FollowClient
	cancel context.CancelFunc
	first  *wire.LawTask
}

// Force crosses to the plugin and back.
func (f *follower) Force(t, u, v float64, accepted bool) (float64, error) {
	step := &wire.LawStep{Task: f.first, Time: t, U: u, V: v, Accepted: accepted}
	f.first = nil
	if err := f.stream.Send(step); err != nil {
		return 0, f.law.fault(err)
	}
	got, err := f.stream.Recv()
	switch {
	case err != nil:
		return 0, f.law.fault(err)
	case got.Fault != "":
		return 0, fmt.Errorf("law %s: %s", f.law.process.About.Name, got.Fault)
	case math.IsNaN(got.Force) || math.IsInf(got.Force, 0):
		return 0, fmt.Errorf("law %s: answered %v", f.law.process.About.Name, got.Force)
	}
	return got.Force, nil
}

// Close ends the use.
func (f *follower) Close() error {
	f.cancel()
	return nil
}
