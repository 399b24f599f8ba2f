package characteristic

import (
	"context"
	"fmt"
	"math"
	"math/cmplx"
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

// longBench: L 50 m, 4 kg/m, 60 kN, 0.4 N s/m^2, forty tones at 13 m, watched
// at 8.5, 17 and 31 m; 1 kHz.
func longBench(rows int) *mesh.Mesh {
	m := span(1e-3, rows, stretch{50, 60000, 4, 0.4})
	m.Jump, m.Band = 2, 20.25
	m.Pushes = []mesh.Push{{At: inside(0, 13), Force: tones()}}
	look(m, scenario.Displacement, 0, inside(0, 8.5), inside(0, 17), inside(0, 31))
	return m
}

// longReference is every nth sample of longBench in closed form: the exact wave
// receptance sin(k x) sin(k (L-s))/(T k sin kL) of each tone, and the free modes
// that start what the tones do not start with. Modes fall with their
// cube: 400 leave some 1e-6, 3000 some 1e-8.
func longReference(x float64, rows, nth, modes int) []float64 {
	const L, T, mass, visc, xs = 50.0, 60000.0, 4.0, 0.4, 13.0
	var om []float64
	var amp []complex128
	c, s := math.Sqrt(T/mass), visc/(2*mass)
	for k := 1; k <= 40; k++ {
		w := 2 * math.Pi * (0.25 + 0.5*(float64(k)-1+math.Mod(0.6180339887498949*float64(k), 1)))
		kk := cmplx.Sqrt(complex(mass*w*w/T, -visc*w/T))
		h := cmplx.Sin(kk*complex(min(x, xs), 0)) * cmplx.Sin(kk*complex(L-max(x, xs), 0)) / (T * kk * cmplx.Sin(kk*L))
		om = append(om, w)
		amp = append(amp, 5*h)
	}
	n := (rows-1)/nth + 1
	out := make([]float64, n)
	for i := range out {
		t := float64(i*nth) * 1e-3
		for k, w := range om {
			out[i] += imag(amp[k] * cmplx.Exp(complex(0, w*t)))
		}
	}
	for j := 1; j <= modes; j++ {
		k := float64(j) * math.Pi / L
		q, v := 0.0, 0.0
		for _, w := range om {
			a := complex(2/(mass*L)*5*math.Sin(k*xs)*math.Sin(k*x), 0) / complex(k*k*c*c-w*w, 2*s*w)
			q -= imag(a)
			v -= imag(a * complex(0, w))
		}
		d := math.Sqrt(k*k*c*c - s*s)
		for i := range out {
			t := float64(i*nth) * 1e-3
			sin, cos := math.Sincos(d * t)
			out[i] += math.Exp(-s*t) * (q*cos + (v+s*q)/d*sin)
		}
	}
	return out
}

func every(v []float64, nth int) []float64 {
	var out []float64
	for i := 0; i < len(v); i += nth {
		out = append(out, v[i])
	}
	return out
}

// Forty tones for 20 s against the closed form. Tolerances: a thousandth at level
// 0 (chosen) and fourth order from there.
func TestTones(t *testing.T) {
	m := longBench(20001)
	for level, tol := range []float64{1e-3, 6.3e-5, 4e-6} {
		res := solve(t, m, level)
		for k, x := range []float64{8.5, 17, 31} {
			d := relative(every(res.Series[0][k], 50), longReference(x, 20001, 50, 3000))
			if !(d < tol) {
				t.Errorf("level %d, x = %g: relative error %.3g", level, x, d)
			}
			t.Logf("level %d, x = %g: relative error %.3g gap %.2g", level, x, d, res.Energy.Unaccounted()/res.Energy.Most)
		}
	}
}

// The same for a tenth of the full million samples.
func BenchmarkTones(b *testing.B) {
	m := longBench(100001)
	ref := longReference(17, 100001, 1, 400)
	m.Channels[0].Spots = []mesh.Spot{inside(0, 17), inside(0, 8.5), inside(0, 31)}
	for level := 0; level < 3; level++ {
		b.Run(fmt.Sprint(level), func(b *testing.B) { pairs(b, m, level, ref) })
	}
}
