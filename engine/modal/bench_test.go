package modal

import (
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// threePieces is a line of three unlike pieces with a mass and, with damping, a
// dashpot and a bracketed one.
func threePieces(damped bool) *mesh.Mesh {
	b := &build{}
	j, k := mesh.Node{Mass: 1.5}, mesh.Node{Spring: 2e4}
	if damped {
		j.Dashpot = 150
		k.Brackets = []mesh.Maxwell{{K: 3e5, C: 400}}
	}
	l := b.node(fixed)
	b.piece(l, b.node(j), 1.3, 2, 20000, 0)
	b.piece(1, b.node(k), 6.5, 3.5, 20000, 0)
	b.piece(2, b.node(fixed), 2.2, 2, 20000, 0)
	return &b.m
}

func benchmark(b *testing.B, m *mesh.Mesh, want Want) {
	b.ReportAllocs()
	for b.Loop() {
		res, err := Find(m, want)
		if err != nil || len(res.Modes) < want.Count {
			b.Fatal(err, len(res.Modes))
		}
	}
}

func BenchmarkUndamped10(b *testing.B)  { benchmark(b, threePieces(false), Want{Count: 10}) }
func BenchmarkUndamped400(b *testing.B) { benchmark(b, threePieces(false), Want{Count: 400}) }
func BenchmarkUndampedShapes(b *testing.B) {
	benchmark(b, threePieces(false), Want{Count: 10, Shapes: true})
}
func BenchmarkDamped10(b *testing.B)         { benchmark(b, threePieces(true), Want{Count: 10}) }
func BenchmarkDamped50(b *testing.B)         { benchmark(b, threePieces(true), Want{Count: 50}) }
func BenchmarkDamped300(b *testing.B)        { benchmark(b, threePieces(true), Want{Count: 300}) }
func BenchmarkDampedOneDashpot(b *testing.B) { benchmark(b, stay(0.02, 8), Want{Count: 10}) }

// tied makes lines side by side, each of five pieces with two masses and a damper
// near an end, tied to the next at two places.
func tied(lines int, damped bool) *mesh.Mesh {
	b := &build{}
	for l := 0; l < lines; l++ {
		first := len(b.m.Nodes)
		for i := 0; i <= 5; i++ {
			n := mesh.Node{Line: l, Fixed: i == 0 || i == 5}
			if i == 1 || i == 4 {
				n.Mass = 5
			}
			if damped && i == 1 {
				n.Dashpot = 4e3
			}
			at := b.node(n)
			if i > 0 {
				b.piece(at-1, at, 10+float64((i*7+l*3)%5), 50+float64(l), 3e6, 0)
			}
		}
		if l > 0 {
			b.link(first+1, first-5, 1e5, 0)
			b.link(first+3, first-3, 1e5, 0)
		}
	}
	return &b.m
}

func BenchmarkEightTiedUndamped(b *testing.B) { benchmark(b, tied(8, false), Want{Count: 20}) }
func BenchmarkEightTiedDamped(b *testing.B)   { benchmark(b, tied(8, true), Want{Count: 20}) }
