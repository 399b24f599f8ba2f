package characteristic

import (
	"context"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// stretch is one piece of a test line.
type stretch struct{ length, tension, mass, viscous float64 }

// span is a line of pieces with fixed ends; nodes are 0 .. len(parts).
func span(every float64, rows int, parts ...stretch) *mesh.Mesh {
	m := &mesh.Mesh{Timing: mesh.Timing{Every: every, Rows: rows}, Jump: mesh.SmoothJump}
	line := mesh.Line{Name: "line"}
	m.Nodes = append(m.Nodes, mesh.Node{Name: "left", Fixed: true, Support: true})
	for i, s := range parts {
		m.Nodes = append(m.Nodes, mesh.Node{Name: "n", X: line.Length + s.length})
		m.Pieces = append(m.Pieces, mesh.Piece{Segment: i, From: i, To: i + 1, X0: line.Length, Length: s.length,
			MassPerLength: s.mass, Tension: s.tension, Viscous: s.viscous})
		line.Pieces = append(line.Pieces, i)
		line.Length += s.length
	}
	last := &m.Nodes[len(parts)]
	last.Name, last.Fixed, last.Support = "right", true, true
	m.Lines = []mesh.Line{line}
	return m
}

func inside(piece int, at float64) mesh.Spot { return mesh.Spot{Node: -1, Piece: piece, At: at} }
func node(i int) mesh.Spot                   { return mesh.Spot{Node: i, Piece: -1} }

func look(m *mesh.Mesh, q scenario.Quantity, means int, spots ...mesh.Spot) {
	m.Channels = append(m.Channels, mesh.Channel{Watch: "w", Quantity: q, Spots: spots, X: make([]float64, len(spots)), Means: means})
}

func halfSine(peak, duration float64) scenario.History {
	return scenario.History{Value: formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), formula.Const(peak), formula.Const(duration)),
		Breaks: []float64{0, duration}}
}

func step(value, at float64) scenario.History {
	return scenario.History{Value: formula.Apply(formula.OpStep, formula.Arg(formula.ArgT), formula.Const(value), formula.Const(at)), Breaks: []float64{at}}
}

// bump is peak sin^8(pi t/duration) for 0 <= t <= duration: seven derivatives
// are continuous.
func bump(peak, duration float64) scenario.History {
	t := formula.Arg(formula.ArgT)
	hs := formula.Apply(formula.OpHalfSine, t, formula.Const(1), formula.Const(duration))
	return scenario.History{Value: formula.Mul(formula.Const(peak), formula.Apply(formula.OpPow, hs, formula.Const(8))), Breaks: []float64{0, duration}}
}

func solve(t testing.TB, m *mesh.Mesh, level int) *solver.Result {
	t.Helper()
	res, err := New().Solve(context.Background(), m, solver.Request{Level: level, Effort: 1}, nil)
	if err != nil {
		t.Fatal(err)
	}
	return res
}

// near compares with an absolute tolerance.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.15g, want %.15g (difference %.2g, tolerance %.2g)", what, got, want, got-want, tol)
	}
}

// relative is the relative L2 difference of two records.
func relative(a, b []float64) float64 {
	var num, den float64
	for i := range a {
		num += (a[i] - b[i]) * (a[i] - b[i])
		den += b[i] * b[i]
	}
	return math.Sqrt(num / den)
}

// hat is a pluck of height h at a.
func hat(length, a, h float64) func(float64) float64 {
	return func(x float64) float64 {
		if x < a {
			return h * x / a
		}
		return h * (length - x) / (length - a)
	}
}
