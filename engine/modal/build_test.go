package modal

import (
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
)

// build makes networks by hand.
type build struct{ m mesh.Mesh }

func (b *build) node(n mesh.Node) int {
	b.m.Nodes = append(b.m.Nodes, n)
	return len(b.m.Nodes) - 1
}

func (b *build) piece(from, to int, length, mass, tension, viscous float64) int {
	line := b.m.Nodes[from].Line
	for len(b.m.Lines) <= line {
		b.m.Lines = append(b.m.Lines, mesh.Line{Name: string(rune('a' + len(b.m.Lines)))})
	}
	i := len(b.m.Pieces)
	b.m.Lines[line].Pieces = append(b.m.Lines[line].Pieces, i)
	b.m.Pieces = append(b.m.Pieces, mesh.Piece{Line: line, From: from, To: to,
		Length: length, MassPerLength: mass, Tension: tension, Viscous: viscous})
	return i
}

func (b *build) link(from, to int, spring, dashpot float64) {
	b.m.Links = append(b.m.Links, mesh.Link{A: from, B: to, Spring: spring, Dashpot: dashpot})
}

var fixed = mesh.Node{Fixed: true}

// line lays pieces of one mass and tension through the given nodes at x.
func line(mass, tension, viscous float64, x []float64, nodes ...mesh.Node) *build {
	b := &build{}
	for i, n := range nodes {
		b.node(n)
		if i > 0 {
			b.piece(i-1, i, x[i]-x[i-1], mass, tension, viscous)
		}
	}
	return b
}

func find(t testing.TB, m *mesh.Mesh, want Want) *Result {
	t.Helper()
	res, err := Find(m, want)
	if err != nil {
		t.Fatal(err)
	}
	return res
}

func near(t testing.TB, what string, got, want, rel float64) {
	t.Helper()
	if !(math.Abs(got-want) <= rel*math.Abs(want)+1e-300) {
		t.Errorf("%s = %.15g, want %.15g (off by %.2g of %.2g allowed)", what, got, want, math.Abs(got/want-1), rel)
	}
}
