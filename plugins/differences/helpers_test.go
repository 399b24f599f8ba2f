package differences

import (
	"context"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// stretch1 is a piece for the test networks.
type stretch1 struct{ length, mass, tension, viscous float64 }

// line is a mesh of one line between fixed supports.
func line(every float64, rows int, parts ...stretch1) *mesh.Mesh {
	m := &mesh.Mesh{Timing: mesh.Timing{Every: every, Rows: rows}, Jump: mesh.SmoothJump}
	addLine(m, parts...)
	return m
}

// addLine adds a line between fixed supports and returns its first node.
func addLine(m *mesh.Mesh, parts ...stretch1) int {
	first, x := len(m.Nodes), 0.0
	l := mesh.Line{Name: "line"}
	id := len(m.Lines)
	m.Nodes = append(m.Nodes, mesh.Node{Name: "start", Line: id, Fixed: true, Support: true, Fitting: true})
	for _, p := range parts {
		l.Pieces = append(l.Pieces, len(m.Pieces))
		m.Pieces = append(m.Pieces, mesh.Piece{
			Line: id, From: len(m.Nodes) - 1, To: len(m.Nodes), X0: x, Length: p.length,
			MassPerLength: p.mass, Tension: p.tension, Viscous: p.viscous,
		})
		x += p.length
		m.Nodes = append(m.Nodes, mesh.Node{Name: "joint", Line: id, X: x})
	}
	end := &m.Nodes[len(m.Nodes)-1]
	end.Name, end.Fixed, end.Support, end.Fitting = "end", true, true, true
	l.Length = x
	m.Lines = append(m.Lines, l)
	return first
}

// watchNode and watchAt add a channel of one spot and return its index.
func watchNode(m *mesh.Mesh, q scenario.Quantity, node, means int) int {
	return watch(m, q, mesh.Spot{Node: node, Piece: -1}, means)
}

func watchAt(m *mesh.Mesh, q scenario.Quantity, piece int, at float64, means int) int {
	return watch(m, q, mesh.Spot{Node: -1, Piece: piece, At: at}, means)
}

func watch(m *mesh.Mesh, q scenario.Quantity, s mesh.Spot, means int) int {
	m.Channels = append(m.Channels, mesh.Channel{Watch: "w", Quantity: q, Spots: []mesh.Spot{s}, X: []float64{0}, Means: means})
	return len(m.Channels) - 1
}

// solve runs a request that must succeed.
func solve(t testing.TB, m *mesh.Mesh, req solver.Request) *solver.Result {
	t.Helper()
	res, err := New().Solve(context.Background(), m, req, nil)
	if err != nil {
		t.Fatal(err)
	}
	return res
}

// distance is the relative L2 difference of a record from want.
func distance(got, want []float64) float64 {
	d, s := 0.0, 0.0
	for i := range want {
		d += (got[i] - want[i]) * (got[i] - want[i])
		s += want[i] * want[i]
	}
	return math.Sqrt(d / s)
}

// sample is f on the mesh's time grid.
func sample(m *mesh.Mesh, f func(t float64) float64) []float64 {
	out := make([]float64, m.Timing.Rows)
	for i := range out {
		out[i] = f(float64(i) * m.Timing.Every)
	}
	return out
}

// timeHistory is a history that is an operation on time and constants.
func timeHistory(op formula.Op, breaks []float64, values ...float64) scenario.History {
	operands := []formula.Program{formula.Arg(formula.ArgT)}
	for _, v := range values {
		operands = append(operands, formula.Const(v))
	}
	return scenario.History{Value: formula.Apply(op, operands...), Breaks: breaks}
}

// triangle is a hat of height high at a on [0, length].
func triangle(length, a, high float64) func(float64) float64 {
	return func(x float64) float64 {
		if x < a {
			return high * x / a
		}
		return high * (length - x) / (length - a)
	}
}

// oddPeriodic extends f on [0, length] by odd reflection at both ends.
func oddPeriodic(length float64, f func(float64) float64) func(float64) float64 {
	return func(x float64) float64 {
		x = math.Mod(x, 2*length)
		if x < 0 {
			x += 2 * length
		}
		if x > length {
			return -f(2*length - x)
		}
		return f(x)
	}
}
