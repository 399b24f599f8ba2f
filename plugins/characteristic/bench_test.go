package characteristic

import (
	"context"
	"fmt"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
)

// pluckedBench: L 20 m, 0.35 kg/m, 8400 N, 0.05 N s/m^2, apex 0.02 m at 4 m with
// the kink replaced by the tangent parabola within 0.2 m; watched at 7 m.
func pluckedBench() *mesh.Mesh {
	m := span(1.0/2000, 20001, stretch{20, 8400, 0.35, 0.05})
	m.Jump = 2
	m.Pieces[0].Start = rounded20
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkEdge, At: 3.8}, {Kind: mesh.MarkEdge, At: 4.2}}
	look(m, scenario.Displacement, 0, inside(0, 7))
	return m
}

func rounded20(x float64) float64 {
	const a, w = 0.02 / 4, 0.02 / 16
	switch {
	case x < 3.8:
		return a * x
	case x > 4.2:
		return w * (20 - x)
	}
	// Slopes a at 3.8 and -w at 4.2, value a*3.8 at 3.8.
	d := x - 3.8
	return a*3.8 + a*d - (a+w)/0.4*d*d/2
}

// modes20 is the closed mode sum of pluckedBench at x: coefficients of the
// shape's second derivative, which is -(a+w)/0.4 between 3.8 and 4.2:
// b_n = 2/L (L/(n pi))^2 integral of that times sin, damped modes
// e^{-s t}(cos w t + s/w sin w t).
func modes20(x float64, rows int, every float64, modes int) []float64 {
	const L, a, w = 20.0, 0.02 / 4, 0.02 / 16
	c, s := math.Sqrt(8400/0.35), 0.05/0.7
	out := make([]float64, rows)
	for n := 1; n <= modes; n++ {
		k := float64(n) * math.Pi / L
		b := 2 / L / (k * k) * (a + w) / 0.4 * (math.Cos(k*3.8) - math.Cos(k*4.2)) / k
		om := math.Sqrt(k*k*c*c - s*s)
		amp := b * math.Sin(k*x)
		// Rotation, restarted often enough that rounding stays small.
		for i := 0; i < rows; i++ {
			t := float64(i) * every
			sin, cos := math.Sincos(om * t)
			out[i] += amp * math.Exp(-s*t) * (cos + s/om*sin)
		}
	}
	return out
}

// pairs times one level against a reference and reports both.
func pairs(b *testing.B, m *mesh.Mesh, level int, ref []float64) {
	b.ReportAllocs()
	var res *solver.Result
	for b.Loop() {
		var err error
		res, err = New().Solve(context.Background(), m, solver.Request{Level: level, Effort: 1}, nil)
		if err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(relative(res.Series[0][0], ref), "relL2")
	b.ReportMetric(res.Energy.Unaccounted()/res.Energy.Most, "gap")
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(res.Plan.Steps*len(m.Pieces)), "ns/piece-step")
}

// The plucked line against its closed mode sum of 20,000 modes.
func BenchmarkPlucked(b *testing.B) {
	m := pluckedBench()
	ref := modes20(7, 20001, m.Timing.Every, 20000)
	for level := 0; level < 5; level++ {
		b.Run(fmt.Sprint(level), func(b *testing.B) { pairs(b, m, level, ref) })
	}
}

// Three segments, against level 5 of the same solver: no independent reference.
func BenchmarkThree(b *testing.B) {
	for _, viscous := range []float64{0, 0.08} {
		m := threeBench(viscous)
		res, err := New().Solve(context.Background(), m, solver.Request{Level: 5, Effort: 1}, nil)
		if err != nil {
			b.Fatal(err)
		}
		for level := 0; level < 4; level++ {
			b.Run(fmt.Sprint(viscous, "/", level), func(b *testing.B) { pairs(b, m, level, res.Series[0][0]) })
		}
	}
}

// threeBench: three segments 30/45/25 m, 0.9/1.6/0.9 kg/m, 20 kN, viscous, mass 4
// at the first joint, 1.5 kg and 120 N s/m at the second, half sine 500 N, 8 ms
// at 12 m, watched at 60 m.
func threeBench(viscous float64) *mesh.Mesh {
	m := span(1.0/2000, 10001, stretch{30, 20000, 0.9, viscous}, stretch{45, 20000, 1.6, viscous}, stretch{25, 20000, 0.9, viscous})
	m.Nodes[1].Mass = 4
	m.Nodes[2].Mass, m.Nodes[2].Dashpot = 1.5, 120
	m.Jump, m.Band = 3, 200
	m.Pushes = []mesh.Push{{At: inside(0, 12), Force: halfSine(500, 0.008)}}
	look(m, scenario.Displacement, 0, inside(1, 30))
	return m
}

func tones() scenario.History {
	p := formula.Const(0)
	for k := 1; k <= 40; k++ {
		frac := math.Mod(0.6180339887498949*float64(k), 1)
		f := 0.25 + 0.5*(float64(k)-1+frac)
		p = formula.Add(p, formula.Apply(formula.OpSine, formula.Arg(formula.ArgT), formula.Const(5), formula.Const(f), formula.Const(0)))
	}
	return scenario.History{Value: p, Breaks: []float64{0}}
}
