package app

import (
	"context"
	"fmt"
	"io"
	"sync"

	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/host"
	"github.com/tautspan/tautspan/plugins/loads"
)

// loadSet finds loads by name: built-in ones, and those of plugins, each started
// when it is first needed.
type loadSet struct {
	log       io.Writer
	lock      sync.Mutex
	running   map[string]author.Load
	processes []*host.Process
}

// find is the load of a name.
func (s *loadSet) find(ctx context.Context, name string) (author.Load, error) {
	for _, l := range loads.BuiltIn() {
		if l.About().Name == name {
			return l, nil
		}
	}
	s.lock.Lock()
	defer s.lock.Unlock()
	if l, ok := s.running[name]; ok {
		return l, nil
	}
	store, err := pluginStore()
	if err != nil {
		return nil, err
	}
	t, found, err := store.Find(name)
	switch {
	case err != nil:
		return nil, err
	case !found:
		return nil, fmt.Errorf("no load called %s is installed", name)
	}
	p, err := startTrusted(ctx, &t, s.log)
	if err != nil {
		return nil, err
	}
	s.processes = append(s.processes, p)
	l, err := host.NewLoad(p)
	if err != nil {
		return nil, err
	}
	if s.running == nil {
		s.running = map[string]author.Load{}
	}
	s.running[name] = l
	return l, nil
}

// workOut is the hook that turns the loads of a network into forces.
func (s *loadSet) workOut(ctx context.Context) func(*scenario.Network) error {
	return func(net *scenario.Network) error {
		if len(net.Loads) == 0 {
			return nil
		}
		return loads.WorkOut(ctx, net, func(name string) (author.Load, error) { return s.find(ctx, name) })
	}
}

// close ends the processes.
func (s *loadSet) close() {
	for _, p := range s.processes {
		p.Close()
	}
}
