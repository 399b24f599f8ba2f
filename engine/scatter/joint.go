package scatter

import (
	"context"
	"fmt"
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/mesh"
)

// Shares are what becomes of a wave that meets a joint, the joint taken alone on
// an endless line. All are NaN where no wave can travel (0 Hz, no tension).
type Shares struct {
	Reflected      float64 // of displacement
	ReflectedPhase float64 // rad
	Passed         float64 // of displacement
	PassedPhase    float64 // rad
	Absorbed       float64 // of power: 1 - |r|^2 - power passed
	PassedPower    float64 // of power
}

// Joint is a joint, splice or sensor place with its shares for waves that come
// from before and from after it, one of each a frequency.
type Joint struct {
	Name          string
	Node          int // of the mesh
	Before, After []Shares
}

// NoShares stands where no wave can travel.
func noShares() Shares {
	n := math.NaN()
	return Shares{n, n, n, n, n, n}
}

// Joints gives the shares of every joint of a network at the frequencies
// (Hz) asked for, in walking order, with notes on what they leave out.
//
// With the incoming wave e^{-ikx} and u at the joint,
//
//	(D + D_before + D_after) u = force of the incoming wave held still,
//
// where D is the joint's dynamic stiffness and D_before, D_after those of the
// endless lines beside it, for displacement and, with bending, slope. On a
// string this is r = (Z1 - Z2 - D/(i omega))/(Z1 + Z2 + D/(i omega)).
// It stops with the context's error, and fails for what answers refuses. The absorbed share is summed over the dashpots, so it is exactly 0 without.
//
// Source: Graff, Wave Motion in Elastic Solids (1975), ch. 1, scattering by a
// general node (from memory); with bending the same balance of force and moment.
func Joints(ctx context.Context, m *mesh.Mesh, frequencies []float64) ([]Joint, []string, error) {
	if err := answers(m, frequencies); err != nil {
		return nil, nil, err
	}
	s := newSite(m)
	var out []Joint
	asked := map[int]bool{}
	for line := range m.Lines {
		nodes, pieces := s.nodes(line), m.Lines[line].Pieces
		for k := 1; k+1 < len(nodes); k++ {
			before, after := &m.Pieces[pieces[k-1]], &m.Pieces[pieces[k]]
			asked[nodes[k]] = true
			j := s.joint(ctx, nodes[k], mediumAt(before, before.Length), mediumAt(after, 0), frequencies)
			if ctx.Err() != nil {
				return nil, nil, ctx.Err()
			}
			out = append(out, j)
		}
	}
	s.noteTies(asked)
	for line := range m.Lines {
		if m.Lines[line].Sag != nil {
			s.notes = append(s.notes, fmt.Sprintf("the sag of line %s acts on the whole line and is no part of the shares of travelling waves", m.Lines[line].Name))
		}
	}
	return out, s.notes, nil
}

// JointAt gives the shares of one joint, by mesh node, at one frequency.
func JointAt(m *mesh.Mesh, node int, frequency float64, fromAfter bool) (Shares, error) {
	if err := answers(m, []float64{frequency}); err != nil {
		return Shares{}, err
	}
	s := newSite(m)
	for line := range m.Lines {
		nodes, pieces := s.nodes(line), m.Lines[line].Pieces
		for k := 1; k+1 < len(nodes); k++ {
			if nodes[k] == node {
				before, after := &m.Pieces[pieces[k-1]], &m.Pieces[pieces[k]]
				j := s.joint(context.Background(), node, mediumAt(before, before.Length), mediumAt(after, 0), []float64{frequency})
				if fromAfter {
					return j.After[0], nil
				}
				return j.Before[0], nil
			}
		}
	}
	return Shares{}, fmt.Errorf("%s is no joint: shares need a line on both sides", s.name(node))
}

func (s *site) joint(ctx context.Context, node int, before, after medium, frequencies []float64) Joint {
	c := &chain{nodes: []fitting{s.fitting(node)}, before: &before, after: &after}
	j := Joint{Name: s.name(node), Node: node}
	for _, f := range frequencies {
		if ctx.Err() != nil {
			return j
		}
		omega := 2 * math.Pi * f
		j.Before = append(j.Before, c.shares(omega, true))
		j.After = append(j.After, c.shares(omega, false))
	}
	return j
}

func (c *chain) shares(omega float64, fromBefore bool) Shares {
	e, ok := c.solve(omega, fromBefore)
	if !ok {
		return noShares()
	}
	in, on := c.before, c.after
	if !fromBefore {
		in, on = on, in
	}
	size := cmplx.Abs(e.on)
	return Shares{
		Reflected: cmplx.Abs(e.back), ReflectedPhase: phase(e.back), Passed: size, PassedPhase: phase(e.on),
		Absorbed: e.lost, PassedPower: size * size * on.flux(omega) / in.flux(omega),
	}
}

// phase is the argument in (-pi, pi]; 0 of a number that is 0.
func phase(z complex128) float64 {
	p := cmplx.Phase(z)
	if p == -math.Pi {
		return math.Pi
	}
	return p
}
