package modal

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// The shape of a single span is the one that the matrix gives for the same span
// with a bare splice in it, for every kind of end and up to high vibrations.
func TestSpanShapes(t *testing.T) {
	build := func(ends [2]scenario.Node, lengths ...float64) *mesh.Mesh {
		net := &scenario.Network{}
		ends[0].Name, ends[1].Name = "a", "b"
		line := scenario.Line{Name: "l", Nodes: []scenario.Node{ends[0]}}
		for i, l := range lengths {
			line.Segments = append(line.Segments, scenario.Segment{Name: string(rune('s' + i)), Length: l, MassPerLength: 1.2, Tension: 5000, Bending: 40})
			if i < len(lengths)-1 {
				line.Nodes = append(line.Nodes, scenario.Node{Kind: scenario.Splice})
			}
		}
		line.Nodes = append(line.Nodes, ends[1])
		net.Lines = []scenario.Line{line}
		net.Run = scenario.RunOf[float64]{For: 1, Every: 0.1}
		m, err := mesh.Build(net)
		if err != nil {
			t.Fatal(err)
		}
		return m
	}
	clamped, pinned, sprung := scenario.Node{Fixed: true, Clamped: true}, scenario.Node{Fixed: true}, scenario.Node{Fixed: true, Rotary: 900}
	for _, ends := range [][2]scenario.Node{{clamped, clamped}, {clamped, pinned}, {sprung, clamped}, {sprung, pinned}, {pinned, sprung}} {
		whole, cut := build(ends, 10), build(ends, 3.7, 6.3)
		a, err := Find(whole, Want{Count: 40, Shapes: true})
		if err != nil {
			t.Fatal(err)
		}
		b, err := Find(cut, Want{Count: 40, Shapes: true})
		if err != nil {
			t.Fatal(err)
		}
		for k := range a.Modes {
			worst := 0.0
			sign := 1.0
			for i := 1; i < 200; i++ {
				x := 10 * float64(i) / 200
				spot := mesh.Spot{Node: -1, Piece: 0, At: x}
				if x > 3.7 {
					spot = mesh.Spot{Node: -1, Piece: 1, At: x - 3.7}
				}
				u, v := real(a.Modes[k].Shape.At(mesh.Spot{Node: -1, Piece: 0, At: x})), real(b.Modes[k].Shape.At(spot))
				if i == 1 && u*v < 0 {
					sign = -1 // two places are equally far out; which is first is rounding's choice
				}
				worst = math.Max(worst, math.Abs(u-sign*v))
			}
			if worst > 1e-3 { // both are scaled by the largest of finitely many looks
				t.Errorf("ends %+v, vibration %d: shapes differ by %.1e", ends, k+1, worst)
			}
		}
	}
}
