package spectral

import (
	"context"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// chain builds one line of pieces in a row with fixed ends.
type seg struct{ l, m, t, c float64 }

func chain(every float64, rows int, segs ...seg) *mesh.Mesh {
	m := &mesh.Mesh{Timing: mesh.Timing{Every: every, Rows: rows}, Jump: mesh.SmoothJump}
	line := mesh.Line{Name: "line"}
	x := 0.0
	m.Nodes = append(m.Nodes, mesh.Node{Name: "line.start", Fixed: true, Support: true, Fitting: true})
	for i, s := range segs {
		m.Pieces = append(m.Pieces, mesh.Piece{Segment: i, From: i, To: i + 1, X0: x, Length: s.l, MassPerLength: s.m, Tension: s.t, Viscous: s.c})
		x += s.l
		m.Nodes = append(m.Nodes, mesh.Node{Name: "line.node", X: x})
		line.Pieces = append(line.Pieces, i)
	}
	end := &m.Nodes[len(segs)]
	end.Fixed, end.Support, end.Fitting = true, true, true
	line.Length = x
	m.Lines = []mesh.Line{line}
	return m
}

// watch adds a channel and returns its number.
func watch(m *mesh.Mesh, q scenario.Quantity, means int, spots ...mesh.Spot) int {
	m.Channels = append(m.Channels, mesh.Channel{Watch: "w", Quantity: q, Spots: spots, X: make([]float64, len(spots)), Means: means})
	return len(m.Channels) - 1
}

func inside(piece int, at float64) mesh.Spot { return mesh.Spot{Node: -1, Piece: piece, At: at} }
func atNode(n int) mesh.Spot                 { return mesh.Spot{Node: n, Piece: -1} }

// program is a history over time.
func program(p formula.Program, breaks ...float64) scenario.History {
	return scenario.History{Value: p, Breaks: breaks}
}

func halfSine(peak, d float64) scenario.History {
	return program(formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), formula.Const(peak), formula.Const(d)), 0, d)
}

func sine(a, f float64) scenario.History {
	return program(formula.Apply(formula.OpSine, formula.Arg(formula.ArgT), formula.Const(a), formula.Const(f), formula.Const(0)), 0)
}

func solve(t testing.TB, m *mesh.Mesh, level int) *solver.Result {
	t.Helper()
	r, err := New().Solve(context.Background(), m, solver.Request{Level: level, Effort: 1}, nil)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// apart is the relative L2 distance of two records.
func apart(a, b []float64) float64 {
	d, n := 0.0, 0.0
	for i := range a {
		d += (a[i] - b[i]) * (a[i] - b[i])
		n += b[i] * b[i]
	}
	return math.Sqrt(d / n)
}

// hat is a triangle of height h at a on a line of length l.
func hat(l, a, h float64) func(float64) float64 {
	return func(s float64) float64 {
		if s <= a {
			return h * s / a
		}
		return h * (l - s) / (l - a)
	}
}

// dalembert is the motion of a uniform undamped line with fixed ends from a start
// shape: half the sum of its odd 2L-periodic extension at x-ct and x+ct.
func dalembert(f func(float64) float64, l, c, x, t float64) float64 {
	ext := func(s float64) float64 {
		s = math.Mod(s, 2*l)
		if s < 0 {
			s += 2 * l
		}
		if s > l {
			return -f(2*l - s)
		}
		return f(s)
	}
	return (ext(x-c*t) + ext(x+c*t)) / 2
}
