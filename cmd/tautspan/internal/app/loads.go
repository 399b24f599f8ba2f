package app

import (
	"context"
	"fmt"
	"io"
	"math"
	"sync"

	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/plugins/author"
	"github.com/tautspan/tautspan/plugins/host"
	"github.com/tautspan/tautspan/plugins/laws"
	"github.com/tautspan/tautspan/plugins/loads"
)

// forceSet finds loads and laws that are followed step by step by name: built-in
// ones, and those of plugins, each started when it is first needed.
type forceSet struct {
	log       io.Writer
	lock      sync.Mutex
	running   map[string]*host.Process
	used      []PluginUse
	processes []*host.Process
}

// load is the load of a name.
func (s *forceSet) load(ctx context.Context, name string) (author.Load, error) {
	for _, l := range loads.BuiltIn() {
		if about := l.About(); about.Name == name {
			s.lock.Lock()
			defer s.lock.Unlock()
			s.note(PluginUse{Name: name, Kind: "load", Version: about.Version})
			return l, nil
		}
	}
	p, err := s.process(ctx, name, "load")
	if err != nil {
		return nil, err
	}
	return host.NewLoad(p)
}

// process is the running plugin of a name.
func (s *forceSet) process(ctx context.Context, name, kind string) (*host.Process, error) {
	s.lock.Lock()
	defer s.lock.Unlock()
	if p, ok := s.running[name]; ok {
		return p, nil
	}
	store, err := pluginStore()
	if err != nil {
		return nil, err
	}
	t, found, err := store.Find(name)
	switch {
	case err != nil:
		return nil, err
	case !found || t.Kind != kind:
		return nil, fmt.Errorf("no %s called %s is installed", kind, name)
	}
	p, err := startTrusted(ctx, &t, s.log)
	if err != nil {
		return nil, err
	}
	s.processes = append(s.processes, p)
	if s.running == nil {
		s.running = map[string]*host.Process{}
	}
	s.running[name] = p
	s.note(PluginUse{Name: name, Kind: kind, Version: p.About.Version, SHA256: &t.SHA256})
	return p, nil
}

// note remembers once who was used.
func (s *forceSet) note(u PluginUse) {
	for _, known := range s.used {
		if known.Name == u.Name && known.Kind == u.Kind {
			return
		}
	}
	s.used = append(s.used, u)
}

// follow gives the followed laws of a network their plugins.
func (s *forceSet) follow(ctx context.Context, net *scenario.Network) error {
	var first error
	eachLaw(net, func(l *scenario.LawOf[float64]) {
		f := l.Followed
		if f == nil || first != nil {
			return
		}
		p, err := s.process(ctx, f.Plugin, "law")
		if err != nil {
			first = err
			return
		}
		law, err := host.NewLaw(p)
		if err != nil {
			first = err
			return
		}
		values := map[string]float64{}
		for _, q := range f.Parameters {
			values[q.Name] = q.Value / q.Factor
		}
		f.Start = func() (scenario.Follow, error) {
			follower, err := law.Follow(values)
			if err != nil {
				return nil, err
			}
			return func(t, u, v float64, settled bool) float64 {
				force, err := follower.Force(t, u, v, settled)
				if err != nil {
					return math.NaN()
				}
				return force
			}, nil
		}
	})
	return first
}

// eachLaw visits the laws of a network.
func eachLaw(net *scenario.Network, visit func(*scenario.LawOf[float64])) {
	for i := range net.Lines {
		for k := range net.Lines[i].Nodes {
			for j := range net.Lines[i].Nodes[k].Laws {
				visit(&net.Lines[i].Nodes[k].Laws[j])
			}
		}
		for k := range net.Lines[i].Segments {
			if l := net.Lines[i].Segments[k].Law; l != nil {
				visit(l)
			}
		}
	}
}

// workOut is the hook that turns the loads of a network into forces.
func (s *forceSet) workOut(ctx context.Context) func(*scenario.Network) error {
	return func(net *scenario.Network) error {
		if err := s.follow(ctx, net); err != nil {
			return err
		}
		if len(net.Loads) == 0 {
			return nil
		}
		return loads.WorkOut(ctx, net, func(name string) (author.Load, error) { return s.load(ctx, name) })
	}
}

// close ends the processes.
func (s *forceSet) close() {
	for _, p := range s.processes {
		p.Close()
	}
}

// builtInLaws are the laws that the network uses and the program carries, and
// those of plugins that are written.
func (r *runner) builtInLaws() []PluginUse {
	var out []PluginUse
	seen := map[string]bool{}
	eachLaw(r.net, func(l *scenario.LawOf[float64]) {
		if l.Written == nil || seen[l.Name] {
			return
		}
		seen[l.Name] = true
		for _, own := range laws.BuiltIn() {
			if own.Is.Name == l.Name {
				out = append(out, PluginUse{Name: l.Name, Kind: "law", Version: own.Is.Version})
				return
			}
		}
		store, err := pluginStore()
		if err != nil {
			return // a law of the scenario's own then, as far as can be told
		}
		if t, found, err := store.Find(l.Name); err == nil && found && t.Kind == "law" {
			out = append(out, PluginUse{Name: l.Name, Kind: "law", Version: t.About.Version, SHA256: &t.SHA256})
		}
	})
	return out
}
