package characteristic

import (
	"fmt"
	"testing"
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

func TestZZ(t *testing.T) {
	for level := range 4 {
		m := span(0.05, 401, stretch{3.1, 20000, 2, 0}, stretch{4.7, 20000, 3.5, 0}, stretch{2.2, 20000, 2, 0})
		m.Jump = 1
		m.Pieces[1].Start = hat(4.7, 1.9, 0.01)
		m.Pieces[1].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 1.9}}
		look(m, scenario.Displacement, 0, inside(0, 1.3), inside(1, 2))
		e := solve(t, m, level).Energy
		m = jointed()
		m.Channels = nil
		m.Band = 40
		m.Nodes[1].Fitting, m.Nodes[2].Fitting = true, true
		m.Nodes[1].Spring = 4000
		m.Pushes = []mesh.Push{{At: node(1), Force: bump(300, 0.08)}}
		for _, q := range []scenario.Quantity{scenario.Displacement, scenario.Velocity, scenario.Acceleration, scenario.Force} {
			look(m, q, 0, node(1), node(2))
		}
		s := solve(t, m, level).Series
		worst, most := 0.0, 0.0
		for row := range m.Timing.Rows {
			f := m.Pushes[0].Force.Value.At(float64(row)*m.Timing.Every, 0)
			worst = math.Max(worst, math.Abs(1.5*s[2][0][row] + 4000*s[0][0][row] - f-s[3][0][row]))
			most = math.Max(most, math.Abs(s[3][0][row]))
		}
		m = span(0.01, 200, stretch{60, 20000, 1.35, 0})
		m.Jump = 1
		m.Rolls = []mesh.Roll{{Name: "r", Speed: 40, Force: 150, From: 5, Starting: 0.1}}
		look(m, scenario.Displacement, 0, inside(0, 30))
		g := solve(t, m, level).Energy
		t.Log(level, "kink energy lost", 1-e.End/e.Start, "node law", worst/most, "roll gap", g.Unaccounted()/g.Most, g)
	}
	for level := range 3 {
	  for _, v := range []float64{0.05} {
		m := span(1e-3, 3000, stretch{3.1, 20000, 2, v}, stretch{4.7, 20000, 3.5, v}, stretch{2.2, 20000, 2, v})
		m.Jump = 1
		m.Pieces[1].Start = hat(4.7, 1.9, 0.01)
		m.Pieces[1].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 1.9}}
		e := solve(t, m, level).Energy
		fmt.Println(level, "lossy kinks gap", e.Unaccounted()/e.Most, e)
	  }
	}
}
