package scatter

import (
	"context"
	"fmt"
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
)

// End is what becomes of a wave that comes along the line to one of its
// supports, everything near that end counted together.
type End struct {
	Support string
	Node    int // of the mesh
	Joints  []string
	// One a frequency; NaN where no wave can travel. The phase, rad, is that at
	// the joint farthest from the support, or at the support where there is none.
	Reflected, ReflectedPhase []float64 // share of displacement
	Taken                     []float64 // share of power lost, 1 - Reflected^2
}

// Ends gives what each end of each line takes, at the frequencies (Hz) asked for.
//
// Near an end is everything between the support and the first stretch, seen from
// the support, that reaches to the middle of the line or beyond: the wave arrives
// along that stretch, taken as endless and without loss. What lies nearer keeps
// its own losses, and the waves that run to and fro in it are added up with their
// phases. That is why a damper near a support takes another share than alone: the
// support's echo meets it too.
//
// Units: shares are pure numbers. Accuracy: rounding, for uniform stretches;
// see chain.stretch where the tension rises. It stops with the context's error.
func Ends(ctx context.Context, m *mesh.Mesh, frequencies []float64) ([]End, []string, error) {
	if err := answers(m, frequencies); err != nil {
		return nil, nil, err
	}
	s := newSite(m)
	var out []End
	asked := map[int]bool{}
	for line := range m.Lines {
		for _, last := range []bool{false, true} {
			e := s.end(ctx, line, last, frequencies, asked)
			if ctx.Err() != nil {
				return nil, nil, ctx.Err()
			}
			out = append(out, e)
		}
	}
	s.noteTies(asked)
	return out, s.notes, nil
}

// EndAt gives what the end with a support, by mesh node, reflects (share of
// displacement) and takes (share of power) at one frequency.
func EndAt(m *mesh.Mesh, node int, frequency float64) (reflected, taken float64, err error) {
	if err := answers(m, []float64{frequency}); err != nil {
		return 0, 0, err
	}
	s := newSite(m)
	for line := range m.Lines {
		nodes := s.nodes(line)
		for _, last := range []bool{false, true} {
			if last && nodes[len(nodes)-1] == node || !last && nodes[0] == node {
				e := s.end(context.Background(), line, last, []float64{frequency}, map[int]bool{})
				return e.Reflected[0], e.Taken[0], nil
			}
		}
	}
	return 0, 0, fmt.Errorf("%s is no support at the end of a line", s.name(node))
}

func (s *site) end(ctx context.Context, line int, last bool, frequencies []float64, asked map[int]bool) End {
	l := &s.m.Lines[line]
	nodes := s.nodes(line)
	c, first, from, to := s.near(line, last, nodes)
	support := nodes[0]
	if last {
		support = nodes[len(nodes)-1]
	}
	e := End{Support: s.name(support), Node: support, Joints: []string{}}
	for k := from; k <= to; k++ {
		asked[nodes[k]] = true
		if nodes[k] != support {
			e.Joints = append(e.Joints, s.name(nodes[k]))
		}
	}
	incoming := &s.m.Pieces[l.Pieces[first]]
	d := mediumAt(incoming, 0)
	if last {
		d = mediumAt(incoming, incoming.Length)
		c.before = &d
	} else {
		c.after = &d
	}
	for _, f := range frequencies {
		if ctx.Err() != nil {
			return e
		}
		reflected, turned, taken := math.NaN(), math.NaN(), math.NaN()
		if r, ok := c.solve(2*math.Pi*f, last); ok {
			reflected, turned = cmplx.Abs(r.back), phase(r.back)
			taken = settled(1 - reflected*reflected)
		}
		e.Reflected = append(e.Reflected, reflected)
		e.ReflectedPhase = append(e.ReflectedPhase, turned)
		e.Taken = append(e.Taken, taken)
	}
	return e
}

// near builds the chain between a support and the stretch on which the wave
// arrives: that stretch's index in the line, and the first and last node of the
// chain in walking order.
func (s *site) near(line int, last bool, nodes []int) (c *chain, arrives, from, to int) {
	l := &s.m.Lines[line]
	c = &chain{}
	middle := l.Length / 2
	slack := 1e-9 * l.Length
	if !last {
		for k := range l.Pieces {
			c.nodes = append(c.nodes, s.fitting(nodes[k]))
			if s.m.Nodes[nodes[k+1]].X >= middle-slack {
				return c, k, 0, k
			}
			c.stretch(&s.m.Pieces[l.Pieces[k]])
		}
	}
	k := len(l.Pieces) - 1
	for s.m.Nodes[nodes[k]].X > middle+slack {
		k--
	}
	for i := k + 1; i < len(nodes); i++ {
		c.nodes = append(c.nodes, s.fitting(nodes[i]))
		if i < len(l.Pieces) {
			c.stretch(&s.m.Pieces[l.Pieces[i]])
		}
	}
	return c, k, k + 1, len(nodes) - 1
}

// settled rounds a share that rounding alone keeps from 0 down to 0.
func settled(share float64) float64 {
	if math.Abs(share) < 1e-12 {
		return 0
	}
	return share
}
