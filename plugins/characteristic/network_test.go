package characteristic

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// against compares level with the independent integration and checks the
// account. The tolerance is the reference's own doubt times 3 plus own.
func against(t *testing.T, what string, m *mesh.Mesh, n []int, level int, own, gap float64, spots ...mesh.Spot) {
	t.Helper()
	m.Channels = nil
	look(m, scenario.Displacement, 0, spots...)
	ref, doubt := reference(m, n, spots)
	if doubt > 5e-5 {
		t.Errorf("%s: the reference is not fine enough: %.2g", what, doubt)
	}
	res := solve(t, m, level)
	for k := range spots {
		if d := relative(res.Series[0][k], ref[k]); !(d < own+3*doubt) {
			t.Errorf("%s, spot %d: relative difference %.3g, reference %.2g", what, k, d, doubt)
		} else {
			t.Logf("%s, spot %d: relative difference %.3g, reference %.2g", what, k, d, doubt)
		}
	}
	e := res.Energy
	t.Logf("%s: energy %+v gap %.2g", what, e, e.Unaccounted()/e.Most)
	if g := math.Abs(e.Unaccounted()) / e.Most; !(g < gap) {
		t.Errorf("%s: account off by %.3g of the most stored", what, g)
	}
}

func uniform2(v, w float64) *mesh.Mesh {
	m := span(1e-3, 301, stretch{8, 20000, 2, v}, stretch{12, 20000, 3.5, w})
	m.Band = 60
	return m
}

func TestJointWithMassSpringDashpot(t *testing.T) {
	m := uniform2(0, 0)
	m.Nodes[1].Mass, m.Nodes[1].Spring, m.Nodes[1].Dashpot = 1.5, 20000, 150
	m.Pushes = []mesh.Push{{At: inside(0, 4), Force: bump(300, 0.08)}}
	against(t, "joint", m, []int{160, 240}, 2, 1e-6, 1e-5, node(1), inside(1, 6))
}

func TestMovedSupport(t *testing.T) {
	m := uniform2(0, 0)
	m.Nodes[0].Fixed = false
	s := func(t float64) float64 { return math.Sin(math.Pi * t / 0.1) }
	m.Nodes[0].Motion = &mesh.Motion{
		Displacement: func(t float64) float64 {
			if t <= 0 || t >= 0.1 {
				return 0
			}
			return 0.01 * math.Pow(s(t), 8)
		},
		Velocity: func(t float64) float64 {
			if t <= 0 || t >= 0.1 {
				return 0
			}
			return 0.01 * 8 * math.Pow(s(t), 7) * math.Cos(math.Pi*t/0.1) * math.Pi / 0.1
		},
		Breaks: []float64{0, 0.1}}
	m.Nodes[1].Mass = 2
	m.Nodes[1].Dashpot = 60
	against(t, "motion", m, []int{160, 240}, 2, 1e-6, 1e-4, node(1), inside(1, 6))
}

func TestBracketLinksAndHungMass(t *testing.T) {
	m := uniform2(0.5, 0)
	// A second line, tied to the first, a hung mass on the second and a bracket.
	base := len(m.Nodes)
	m.Nodes = append(m.Nodes, mesh.Node{Name: "a", Fixed: true}, mesh.Node{Name: "tied"}, mesh.Node{Name: "b", Fixed: true}, mesh.Node{Name: "hung", Line: -1, Mass: 3})
	m.Pieces = append(m.Pieces, mesh.Piece{Line: 1, From: base, To: base + 1, Length: 6, MassPerLength: 1.2, Tension: 9000},
		mesh.Piece{Line: 1, From: base + 1, To: base + 2, X0: 6, Length: 9, MassPerLength: 1.2, Tension: 9000})
	m.Lines = append(m.Lines, mesh.Line{Name: "second", Pieces: []int{2, 3}, Length: 15})
	m.Links = []mesh.Link{{Name: "tie", A: 1, B: base + 1, Spring: 8000, Dashpot: 20}, {Name: "hanger", A: base + 1, B: base + 3, Spring: 5000, Dashpot: 15}}
	m.Nodes[1].Mass = 1
	m.Nodes[1].Brackets = []mesh.Maxwell{{K: 40000, C: 200}}
	m.Pushes = []mesh.Push{{At: node(1), Force: bump(300, 0.08)}}
	against(t, "links", m, []int{160, 240, 120, 180}, 2, 2e-6, 1e-3, node(1), node(base+1), node(base+3), inside(1, 6))
	m.Nodes[1].Mass = 0
	against(t, "links, massless", m, []int{160, 240, 120, 180}, 2, 2e-6, 1e-3, node(1), node(base+1), node(base+3), inside(1, 6))
	// The same hung mass on a fixed support tells nothing; a link to a moved one does.
	m.Nodes[base].Fixed = true
	m.Links = append(m.Links, mesh.Link{Name: "stay", A: 1, B: base, Spring: 3000, Dashpot: 5})
	against(t, "link to ground", m, []int{160, 240, 120, 180}, 2, 2e-6, 1e-3, node(1), node(base+1))
}

func TestViscousLine(t *testing.T) {
	m := uniform2(30, 12)
	m.Nodes[1].Mass = 1
	m.Pushes = []mesh.Push{{At: inside(0, 4), Force: bump(300, 0.08)}}
	against(t, "viscous", m, []int{160, 240}, 3, 2e-5, 1e-5, node(1), inside(1, 6), inside(0, 2))
}

// pressed is a force per length that varies with place and rises smoothly.
func pressedMesh(v float64) *mesh.Mesh {
	m := uniform2(v, v)
	x, tt := formula.Arg(formula.ArgX), formula.Arg(formula.ArgT)
	hs := formula.Apply(formula.OpHalfSine, tt, formula.Const(1), formula.Const(0.06))
	f := formula.Mul(formula.Apply(formula.OpPow, hs, formula.Const(6)),
		formula.Add(formula.Const(50), formula.Mul(formula.Const(3), x)))
	m.Presses = []mesh.Press{{Name: "w", Parts: []mesh.Part{{Piece: 0, From: 0, To: 8, Origin: 0}, {Piece: 1, From: 0, To: 12, Origin: 8}},
		Force: scenario.History{Value: f, Breaks: []float64{0, 0.06}}}}
	return m
}

func TestPress(t *testing.T) {
	m := pressedMesh(0)
	m.Nodes[1].Mass = 1
	against(t, "press", m, []int{80, 120}, 2, 1e-6, 1e-4, node(1), inside(1, 6), inside(0, 2))
	m = pressedMesh(10)
	against(t, "press, viscous", m, []int{80, 120}, 2, 1e-5, 1e-3, node(1), inside(1, 6), inside(0, 2))
	m = pressedMesh(0)
	m.Presses[0].Parts = []mesh.Part{{Piece: 1, From: 3, To: 9, Origin: 0}}
	against(t, "press on a part", m, []int{80, 160}, 2, 1e-4, 1e-3, node(1), inside(1, 6), inside(0, 2))
}

func TestStubPiece(t *testing.T) {
	m := span(1e-3, 301, stretch{8, 20000, 2, 0}, stretch{0.05, 20000, 2, 0}, stretch{11.95, 20000, 3.5, 0})
	m.Band = 60
	m.Nodes[1].Mass, m.Nodes[2].Dashpot = 0.5, 100
	m.Pushes = []mesh.Push{{At: inside(0, 4), Force: bump(300, 0.08)}}
	against(t, "stub", m, []int{160, 2, 240}, 2, 1e-5, 1e-4, node(1), node(2), inside(2, 11.95/2))
	if res := solve(t, m, 0); len(res.Notes) != 1 {
		t.Errorf("notes %q", res.Notes)
	}
}
