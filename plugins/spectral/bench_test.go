package spectral

import (
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// threeLossy is a three-piece stay with two dashpots and unequal loss, 40 s at
// 5 ms: 8001 rows, about 37 transits.
func threeLossy() *mesh.Mesh {
	m := chain(0.005, 8001, seg{30, 75, 4.5e6, 8}, seg{150, 60, 4.5e6, 8}, seg{90, 75, 4.5e6, 5})
	m.Nodes[1].Mass, m.Nodes[1].Dashpot = 40, 15000
	m.Nodes[2].Dashpot = 4000
	m.Nodes[1].Fitting, m.Nodes[2].Fitting = true, true
	p := &m.Pieces[1]
	p.Marks = []mesh.Mark{{Kind: mesh.MarkLoad, At: 60}}
	m.Pushes = []mesh.Push{{At: inside(1, 60), Force: halfSine(2000, 0.02)}}
	m.Jump, m.Band = 2, 75
	watch(m, scenario.Displacement, 0, inside(1, 75))
	watch(m, scenario.Velocity, 0, atNode(1))
	watch(m, scenario.Force, 0, atNode(0))
	return m
}

func BenchmarkThreeLossy(b *testing.B) {
	for level := 0; level < 3; level++ {
		b.Run(string(rune('0'+level)), func(b *testing.B) {
			m := threeLossy()
			for b.Loop() {
				r := solve(b, m, level)
				b.ReportMetric(float64(r.Plan.Cells), "dof")
				b.ReportMetric(float64(r.Plan.Steps), "steps")
				b.ReportMetric(r.Energy.Unaccounted()/r.Energy.Most, "gap")
			}
		})
	}
}

// caseB2 is three segments with two masses and a dashpot, hit by a half sine.
func caseB2() *mesh.Mesh {
	m := chain(0.0005, 10001, seg{30, 0.9, 20000, 0.08}, seg{45, 1.6, 20000, 0.08}, seg{25, 0.9, 20000, 0.08})
	m.Nodes[1].Mass = 4
	m.Nodes[2].Mass, m.Nodes[2].Dashpot = 1.5, 120
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkLoad, At: 12}}
	m.Pushes = []mesh.Push{{At: inside(0, 12), Force: halfSine(500, 0.008)}}
	m.Jump, m.Band = 2, 1.5/0.008
	watch(m, scenario.Displacement, 0, inside(1, 30))
	return m
}
