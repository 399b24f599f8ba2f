package characteristic

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// A millionth of a line cut off by a bare splice, before or behind the rest,
// changes nothing: whatever acts on it.
func TestBareSplice(t *testing.T) {
	const short = 2e-5
	build := func(parts ...float64) *mesh.Mesh {
		var all []stretch
		for _, l := range parts {
			all = append(all, stretch{l, 9000, 0.6, 0.1})
		}
		m := span(1e-3, 201, append(all, stretch{9, 9000, 1.1, 0})...)
		last := len(parts)
		m.Nodes[last].Mass, m.Nodes[last].Fitting = 2, true
		h := hat(20, 11, 0.01)
		m.Jump = 1
		x := formula.Arg(formula.ArgX)
		press := mesh.Press{Name: "w", Force: scenario.History{Value: formula.Mul(formula.Const(3), x)}}
		for i := range m.Pieces {
			p := &m.Pieces[i]
			p.Start = func(s float64) float64 { return h(p.X0 + s) }
			m.Nodes[p.To].Start = h(p.X0 + p.Length)
			press.Parts = append(press.Parts, mesh.Part{Piece: i, From: 0, To: p.Length, Origin: p.X0})
		}
		m.Presses = []mesh.Press{press}
		long := 0
		if len(parts) > 1 && parts[0] < 1 {
			long = 1
		}
		m.Pushes = []mesh.Push{{At: inside(long, 4), Force: halfSine(100, 0.02)}}
		w := m.Lines[0]
		w.Sag = &mesh.Sag{Stiffness: 5e4, Nodes: map[int]float64{last: 0.01}}
		for range w.Pieces {
			w.Sag.Pieces = append(w.Sag.Pieces, 0.002)
		}
		m.Lines[0] = w
		look(m, scenario.Displacement, 0, inside(long, 3), node(last), node(1))
		return m
	}
	whole := solve(t, build(11), 1)
	for _, parts := range [][]float64{{short, 11 - short}, {11 - short, short}} {
		m := build(parts...)
		before := fmt.Sprintf("%+v", m.Lines)
		if no := New().Refuses(m); len(no) > 0 {
			t.Fatal(no)
		}
		got := solve(t, m, 1)
		for k := range 2 {
			if d := relative(got.Series[0][k], whole.Series[0][k]); !(d < 3e-5) {
				t.Errorf("%v: spot %d off by %.2g", parts, k, d)
			}
		}
		if math.Abs(got.Energy.Start/whole.Energy.Start-1) > 1e-5 {
			t.Errorf("%v: %g J at the start, whole %g", parts, got.Energy.Start, whole.Energy.Start)
		}
		if fmt.Sprintf("%+v", m.Lines) != before || len(m.Pieces) != 3 {
			t.Error("the mesh has changed")
		}
	}
	// The joint's mass keeps a stub that ends at it on one side and a splice between
	// different stuff apart.
	m := build(short, 11-short)
	m.Pieces[0].MassPerLength *= 2
	if no := New().Refuses(m); len(no) != 1 || !strings.Contains(no[0], "short") {
		t.Errorf("%q", no)
	}
}
