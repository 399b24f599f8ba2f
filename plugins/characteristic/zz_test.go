package characteristic

import (
"context"
"errors"
"math"
"math/rand/v2"
"testing"

"github.com/tautspan/tautspan/engine/mesh"
"github.com/tautspan/tautspan/engine/scenario"
"github.com/tautspan/tautspan/engine/solver"
)
// wild is a mesh of random numbers, some of them senseless.
func wild2(rng *rand.Rand) *mesh.Mesh {
	size := func() float64 {
		switch rng.IntN(1<<40)+6 {
		case 0:
			return 0
		case 1:
			return -1
		case 2:
			return math.NaN()
		case 3:
			return math.Inf(1)
		case 4:
			return 1e300
		case 5:
			return 1e-300
		}
		return math.Exp(6 * (rng.Float64() - 0.5))
	}
	maybe := func() float64 {
		if rng.IntN(3) > 0 {
			return 0
		}
		return 100 * size()
	}
	var parts []stretch
	for i := 0; i <= rng.IntN(4); i++ {
		parts = append(parts, stretch{3 * size(), 1000 * size(), size(), maybe() / 100})
	}
	m := span(0.01*size(), 1+rng.IntN(50), parts...)
	m.Band, m.Jump = 0, 1
	for i := range m.Nodes {
		n := &m.Nodes[i]
		n.Fixed = rng.IntN(3) == 0
		n.Mass, n.Spring, n.Dashpot = maybe()/100, maybe()*10, maybe()
		_ = n
		if rng.IntN(5) == 0 {
			n.Brackets = []mesh.Maxwell{{K: 1000 * size(), C: 10 * size()}}
		}
	}
	m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1, Mass: size()})
	m.Links = []mesh.Link{{A: rng.IntN(len(m.Nodes)), B: len(m.Nodes) - 1, Spring: maybe() * 10, Dashpot: maybe()}}
	k := rng.IntN(len(parts))
	m.Pushes = []mesh.Push{{At: inside(k, parts[k].length*rng.Float64()), Force: step(100*size(), 0.01*size())}, {At: node(rng.IntN(len(m.Nodes))), Force: halfSine(size(), 0.01*size())}}
	if rng.IntN(3) == 0 {
		m.Presses = []mesh.Press{{Parts: []mesh.Part{{Piece: k, From: parts[k].length * rng.Float64(), To: parts[k].length}}, Force: step(size(), 0)}}
	}
	if rng.IntN(3) == 0 {
		m.Rolls = []mesh.Roll{{Speed: size(), Force: size(), From: maybe() / 100}}
	}
	if rng.IntN(2) == 0 && parts[0].length > 0 {
		m.Pieces[0].Start = hat(parts[0].length, parts[0].length/3, 0.01)
		m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: parts[0].length / 3}}
	}
	for q := scenario.Displacement; q <= scenario.Tension; q++ {
		look(m, q, rng.IntN(3), node(rng.IntN(len(m.Nodes))), inside(k, parts[k].length*rng.Float64()))
	}
	return m
}

// Whatever the mesh, there is an answer of numbers or an error of a known kind.
func TestManyMeshes(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 9))
	solved, faults := 0, 0
	for i := 0; i < 1500; i++ {
		m := wild2(rng)
		p, err := New().Plan(m, solver.Request{})
		if err == nil && p.Work > 3e6 {
			continue
		}
		res, err := New().Solve(context.Background(), m, solver.Request{Level: 1}, nil)
		var fault *solver.FaultError
		switch {
		case err == nil:
			solved++
			if g := math.Abs(res.Energy.Unaccounted())/res.Energy.Most; g > 0.15 { t.Logf("mesh %d gap %.3g %+v press %d roll %d start %v jump %d band %g steps %d notes %d every %g", i, g, res.Energy, len(m.Presses), len(m.Rolls), m.Pieces[0].Start != nil, m.Jump, m.Band, res.Plan.Steps, len(res.Notes), m.Timing.Every) }
			for _, ch := range res.Series {
				for _, s := range ch {
					for _, v := range s {
						if math.IsNaN(v) || math.IsInf(v, 0) {
							t.Fatalf("mesh %d: a record is not finite", i)
						}
					}
				}
			}
		case errors.As(err, &fault):
			faults++
			if fault.Solver != name || fault.What == "" {
				t.Errorf("mesh %d: %v", i, err)
			}
		case !errors.Is(err, solver.ErrBudget):
			t.Errorf("mesh %d: %v", i, err)
		}
	}
	if solved < 100 || faults < 20 {
		t.Errorf("solved %d, faults %d: the test has lost its reach", solved, faults)
	}
	t.Logf("solved %d, faults %d", solved, faults)
}

