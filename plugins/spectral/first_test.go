package spectral

import (
	"math"
	"testing"
	"time"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

func plucked(damp float64, dash float64) *mesh.Mesh {
	m := chain(0.0005, 401, seg{1.2, 1, 40000, damp})
	m.Jump = 1
	p := &m.Pieces[0]
	p.Start = hat(1.2, 0.3, 0.005)
	p.Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 0.3}}
	watch(m, scenario.Displacement, 0, inside(0, 0.6))
	watch(m, scenario.Velocity, 1, inside(0, 0.6))
	watch(m, scenario.Slope, 1, inside(0, 0.6))
	watch(m, scenario.Acceleration, 2, inside(0, 0.6))
	watch(m, scenario.Force, 1, atNode(0))
	return m
}

func TestScratchPluck(t *testing.T) {
	for lev := 0; lev < 3; lev++ {
		for _, forceArrow := range []bool{false, true} {
			m := plucked(0, 0)
			if forceArrow {
				m.Nodes = append(m.Nodes, mesh.Node{Name: "tiny", Mass: 1, Line: -1, Dashpot: 1})
			}
			t0 := time.Now()
			r := solve(t, m, lev)
			d := time.Since(t0)
			want := make([]float64, 401)
			for i := range want {
				want[i] = dalembert(hat(1.2, 0.3, 0.005), 1.2, 200, 0.6, 0.0005*float64(i))
			}
			e := r.Energy
			t.Log(lev, r.Plan.Cells, d, apart(r.Series[0][0], want), "gap", e.Unaccounted()/e.Most, e.Start, e.End, r.Layout.(*layout).modal)
			for c := 1; c < 5; c++ {
				t.Log(r.Series[c][0][:6])
			}
		}
	}
	_ = math.Pi
}
