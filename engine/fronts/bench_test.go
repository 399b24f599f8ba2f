package fronts

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// incommensurate is a lossless line of three segments, at the middle two nodes
// of which masses may hang.
func incommensurate(mass float64) *mesh.Mesh {
	m := lineOf(1e4, []mesh.Node{{Fixed: true}, {Mass: mass}, {Mass: mass}, {Fixed: true}}, seg{100, 1, 10000, 0}, seg{100 * math.Sqrt2, 4, 10000, 0}, seg{100 * math.Pi, 2, 10000, 0})
	m.Pushes = []mesh.Push{{Name: "k", At: on(1), Force: stepAt(1, 0)}}
	watchAt(m, "w", in(2, 10))
	return m
}

// BenchmarkTrace follows 1e4 meetings on a lossless line.
func BenchmarkTrace(b *testing.B) {
	for _, c := range []struct {
		name string
		mass float64
	}{{"steps", 0}, {"shapes", 1}} {
		b.Run(c.name, func(b *testing.B) {
			m := incommensurate(c.mass)
			b.ReportAllocs()
			for i := 0; i < b.N; i++ {
				if _, err := Trace(m, Options{Most: 10000}); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(1e4*float64(b.N)/b.Elapsed().Seconds(), "meetings/s")
		})
	}
}

// BenchmarkResponse prepares one joint that smears.
func BenchmarkResponse(b *testing.B) {
	l := newLaw(1)
	l.mass[0], l.resistance[0][0], l.spring[0][0] = 2, 300, 1e4
	if err := l.solve(); err != nil {
		b.Fatal(err)
	}
	grid := shapeGrid(1e-3, 0.1, 10)
	for i := 0; i < b.N; i++ {
		newResponse(l, grid)
	}
}
