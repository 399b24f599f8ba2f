package characteristic

import (
	"fmt"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// at is one published value: displacement y at place x and time t.
type at struct{ x, t, y float64 }

// probes watches every place of a table in one piece and compares. Times of the
// tables are whole multiples of every.
func probes(t *testing.T, m *mesh.Mesh, table []at, tol float64) {
	t.Helper()
	for _, p := range table {
		look(m, scenario.Displacement, 0, inside(0, p.x))
	}
	res := solve(t, m, 0)
	for i, p := range table {
		row := int(math.Round(p.t / m.Timing.Every))
		near(t, fmt.Sprintf("u(%g m, %g s)", p.x, p.t), res.Series[i][0][row], p.y, tol)
	}
}

// D'Alembert's solution for a string plucked at a quarter: Morse 1948, Vibration
// and Sound, 2nd ed., ch. III; Rayleigh 1894, Theory of Sound, vol. 1, ch. VI
// (cited from memory; values recomputed from the odd periodic extension). The
// solver carries straight flanks without error: tolerance 1e-13 of the height,
// rounding of some hundred readings.
func TestPluckedString(t *testing.T) {
	const c, tension = 200.0, 1000.0
	m := span(0.0005, 31, stretch{1.2, tension, tension / (c * c), 0})
	m.Jump = 1
	m.Pieces[0].Start = hat(1.2, 0.3, 0.005)
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 0.3}}
	probes(t, m, []at{
		{0.6, 0, 0.00333333333333333}, {0.6, 0.001, 0.00333333333333333}, {0.3, 0.0025, -0.000555555555555556},
		{0.9, 0.004, -0.000555555555555556}, {0.6, 0.006, -0.00333333333333333}, {1.0, 0.0105, 0.00111111111111111},
		{0.3, 0.012, 0.005},
	}, 5e-16)
}

// A string struck over 0.4 .. 0.6 m: Morse 1948 (cited from memory, recomputed).
func TestStruckString(t *testing.T) {
	const c, tension = 120.0, 1000.0
	m := span(0.0005, 71, stretch{2, tension, tension / (c * c), 0})
	m.Jump = 1
	m.Pieces[0].StartRate = func(x float64) float64 {
		if x >= 0.4 && x <= 0.6 {
			return 1.5
		}
		return 0
	}
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkEdge, At: 0.4}, {Kind: mesh.MarkEdge, At: 0.6}}
	probes(t, m, []at{
		{0.5, 0.0005, 0.00075}, {0.5, 0.001, 0.00125}, {1.2, 0.006, 0.00075}, {1.5, 0.02, -0.00125}, {0.3, 0.031, -0.001125},
	}, 1e-15)
}

// A triangular hump released on an endless string: Rayleigh 1894, ch. VI (cited
// from memory). The line ends in matched dashpots.
func TestHumpOnEndlessString(t *testing.T) {
	const c, tension = 50.0, 1000.0
	m := span(0.01, 21, stretch{12, tension, tension / (c * c), 0})
	m.Jump = 1
	for i := range m.Nodes {
		m.Nodes[i].Fixed, m.Nodes[i].Absorbing, m.Nodes[i].Dashpot = false, true, m.Pieces[0].Impedance()
	}
	m.Pieces[0].Start = func(x float64) float64 { return math.Max(0, 0.1*(1-math.Abs(x-6)/2)) }
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkKink, At: 4}, {Kind: mesh.MarkKink, At: 6}, {Kind: mesh.MarkKink, At: 8}}
	probes(t, m, []at{{6, 0, 0.1}, {6, 0.02, 0.05}, {7, 0.02, 0.05}, {8.5, 0.05, 0.05}, {9, 0.1, 0}, {6, 0.2, 0}}, 1e-15)
}

// A Gaussian pulse running into a fixed and a free end: Kinsler and co-workers
// 2000, Fundamentals of Acoustics, ch. 2; Morse 1948 (cited from memory).
// Tolerance: a millionth of the height for eight samples to a standard deviation
// (level 3), read by quintics some times (chosen; seen 0.85e-6 at the free end).
func TestGaussianPulseAtAnEnd(t *testing.T) {
	const c, tension, A, s = 100.0, 1000.0, 0.01, 0.5
	shape := func(x float64) float64 { return A * math.Exp(-(x-5)*(x-5)/(2*s*s)) }
	for _, free := range []bool{false, true} {
		m := span(0.01, 20, stretch{20, tension, tension / (c * c), 0})
		m.Pieces[0].Start = shape
		m.Pieces[0].StartRate = func(x float64) float64 { return c * (x - 5) / (s * s) * shape(x) }
		m.Nodes[1].Fixed = !free
		table := []at{{18, 0.13, 0.00999999999999987}, {19.5, 0.15, 0}, {16, 0.19, -0.01}}
		end := 0.0
		if free {
			table = []at{{18, 0.13, 0.0100000000000001}, {19.5, 0.15, 0.0121306131942527}, {16, 0.19, 0.01}}
			end = 0.02
		}
		for _, p := range table {
			look(m, scenario.Displacement, 0, inside(0, p.x))
		}
		look(m, scenario.Displacement, 0, node(1))
		res := solve(t, m, 3)
		for i, p := range table {
			near(t, fmt.Sprintf("free %v u(%g, %g)", free, p.x, p.t), res.Series[i][0][int(math.Round(p.t/0.01))], p.y, 1e-8)
		}
		near(t, "end", res.Series[3][0][15], end, 1e-8)
	}
}

// Arrivals after a knock on a line with fixed ends, path lengths over c, with
// their signs: Graff 1975, Wave Motion in Elastic Solids, ch. 1 (cited from
// memory). A short rectangular knock moves the line by F dt/(2Z) when it has
// passed and by half of that in the middle of its passing.
func TestArrivals(t *testing.T) {
	const c, tension, d = 149.637, 412000.0, 1e-3
	m := span(1e-3, 1801, stretch{160.5, tension, tension / (c * c), 0})
	m.Jump = 1
	on, off := step(100, 0), step(-100, d)
	m.Pushes = []mesh.Push{{Name: "on", At: inside(0, 12), Force: on}, {Name: "off", At: inside(0, 12), Force: off}}
	table := []float64{0.456103771126125, 0.616491910423224, 1.52869945267547, 1.68908759197257}
	signs := []float64{1, -1, -1, 1}
	m.Timing = mesh.Timing{Every: 1e-4, Rows: 17001}
	look(m, scenario.Displacement, 0, inside(0, 80.25))
	u := solve(t, m, 0).Series[0][0]
	full := 100 * d / (2 * m.Pieces[0].Impedance())
	for i, ta := range table {
		// Straight rise from 0 to full between ta and ta+d.
		for _, after := range []float64{0.2, 0.5, 0.8} {
			row := math.Floor((ta + after*d) / 1e-4)
			share := (row*1e-4 - ta) / d
			before := u[int(row)-15]
			near(t, fmt.Sprintf("arrival %d", i), u[int(row)], before+signs[i]*share*full, 1e-11*full)
		}
	}
}
