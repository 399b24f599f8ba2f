package scatter

import (
	"fmt"
	"math"
	"sort"
	"strings"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/modal"
)

// site looks a mesh up by line.
type site struct {
	m     *mesh.Mesh
	hung  map[int][]hung // by node
	tied  map[int][]string
	notes []string
}

func newSite(m *mesh.Mesh) *site {
	s := &site{m: m, hung: map[int][]hung{}, tied: map[int][]string{}}
	for _, l := range m.Links {
		a, b := l.A, l.B
		if m.Nodes[a].Line < 0 {
			a, b = b, a
		}
		if m.Nodes[b].Line < 0 {
			s.hung[a] = append(s.hung[a], hung{m.Nodes[b].Mass, l.Spring, l.Dashpot, l.SpringLoss})
			continue
		}
		for _, n := range []int{a, b} {
			s.tied[n] = append(s.tied[n], strings.TrimPrefix(l.Name, "tie."))
		}
	}
	return s
}

// name is a node's name as a scenario would say it: the line's only where there
// are several.
func (s *site) name(node int) string {
	n := &s.m.Nodes[node]
	name := strings.TrimPrefix(n.Name, "line.")
	if len(s.m.Lines) == 1 {
		name = strings.TrimPrefix(name, s.m.Lines[0].Name+".")
	}
	return name
}

func (s *site) fitting(node int) fitting {
	n := &s.m.Nodes[node]
	return fitting{
		held: n.Fixed || n.Motion != nil, clamped: n.Clamped, mass: n.Mass, spring: n.Spring, dashpot: n.Dashpot,
		rotary: n.Rotary, brackets: n.Brackets, hung: s.hung[node],
		eta: n.SpringLoss, inertia: n.Inertia, hinge: n.Hinge, benches: n.Benches,
	}
}

// answers refuses frequencies (Hz) that cannot be answered for: of a network that
// does not answer in proportion, or beyond what a bench has measured.
func answers(m *mesh.Mesh, frequencies []float64) error {
	if words := m.Words(mesh.NonLinear); len(words) > 0 {
		return fmt.Errorf("answers by frequency are refused, not linearised, with %s: they would hang on the amplitude", strings.Join(words, " and "))
	}
	if m.Features()&mesh.BenchDamper == 0 {
		return nil
	}
	for _, f := range frequencies {
		if err := modal.Measured(m, 2*math.Pi*f); err != nil {
			return err
		}
	}
	return nil
}

// nodes lists the nodes of a line in walking order; piece k lies between the
// k-th and the next.
func (s *site) nodes(line int) []int {
	l := &s.m.Lines[line]
	out := []int{s.m.Pieces[l.Pieces[0]].From}
	for _, p := range l.Pieces {
		out = append(out, s.m.Pieces[p].To)
	}
	return out
}

// noteTies says which ties were left out at the places answered for.
func (s *site) noteTies(nodes map[int]bool) {
	seen := map[string]bool{}
	for n := range nodes {
		for _, t := range s.tied[n] {
			seen[t] = true
		}
	}
	var names []string
	for t := range seen {
		names = append(names, t)
	}
	if sort.Strings(names); len(names) > 0 {
		s.notes = append(s.notes, fmt.Sprintf("the shares of travelling waves are those of one line: left out is the pull of %s (its mass is counted)", strings.Join(names, ", ")))
	}
}
