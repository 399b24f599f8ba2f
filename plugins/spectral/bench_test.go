package spectral

import (
	"math"
	"math/cmplx"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
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

// rounded is case B1: a pluck of 0.02 m at 4 of 20 m whose kink is replaced by the
// tangent parabola within 0.2 m, on a lossy uniform line.
func rounded(x float64) float64 {
	const a, l, h, r = 4.0, 20.0, 0.02, 0.2
	s1, s2 := h/a, -h/(l-a)
	switch {
	case x < a-r:
		return s1 * x
	case x > a+r:
		return s2 * (x - l)
	}
	d := x - (a - r)
	return s1*x + (s2-s1)/(4*r)*d*d
}

func caseB1() *mesh.Mesh {
	m := chain(0.0005, 20001, seg{20, 0.35, 8400, 0.05})
	m.Jump = 2
	p := &m.Pieces[0]
	p.Start = rounded
	p.Marks = []mesh.Mark{{Kind: mesh.MarkEdge, At: 3.8}, {Kind: mesh.MarkEdge, At: 4.2}}
	watch(m, scenario.Displacement, 0, inside(0, 7))
	return m
}

// exactB1 is the closed mode sum: the shape's second derivative is a constant on the
// parabola, so that b_n = -2/(L k^2) times its sine integral, k = n pi/L.
func exactB1(rows int) []float64 {
	const l, mass, tension, c, r = 20.0, 0.35, 8400.0, 0.05, 0.2
	bend := (-0.02/16 - 0.02/4) / (2 * r)
	out := make([]float64, rows)
	for n := 1; n <= 20000; n++ {
		k := float64(n) * math.Pi / l
		b := -2 / (l * k * k) * bend * (math.Cos(k*(4-r)) - math.Cos(k*(4+r))) / k * math.Sin(7*k)
		g := c / (2 * mass)
		w := math.Sqrt(k*k*tension/mass - g*g)
		// e^{-gt}(cos wt + g/w sin wt) by rotation.
		s, co := math.Sincos(w * 0.0005)
		d := math.Exp(-g * 0.0005)
		x, y := b, 0.0
		for i := range out {
			out[i] += x + g/w*y
			x, y = d*(x*co-y*s), d*(x*s+y*co)
		}
	}
	return out
}

func BenchmarkB1(b *testing.B) {
	want := exactB1(20001)
	for level := 0; level < 5; level++ {
		b.Run(string(rune('0'+level)), func(b *testing.B) {
			m := caseB1()
			b.ReportAllocs()
			for b.Loop() {
				r := solve(b, m, level)
				b.ReportMetric(float64(r.Plan.Cells), "dof")
				b.ReportMetric(apart(r.Series[0][0], want), "error")
			}
		})
	}
}

func BenchmarkB2(b *testing.B) {
	for level := 0; level < 4; level++ {
		b.Run(string(rune('0'+level)), func(b *testing.B) {
			m := caseB2()
			b.ReportAllocs()
			for b.Loop() {
				r := solve(b, m, level)
				b.ReportMetric(float64(r.Plan.Cells), "dof")
				b.ReportMetric(float64(r.Plan.Steps), "steps")
			}
		})
	}
}

// caseB5 is the long record: 40 tones on a lossy line.
func tonesB5() []float64 {
	f := make([]float64, 40)
	for k := range f {
		_, frac := math.Modf(0.6180339887498949 * float64(k+1))
		f[k] = 0.25 + 0.5*(float64(k)+frac)
	}
	return f
}

func caseB5(rows int) *mesh.Mesh {
	m := chain(0.001, rows, seg{50, 4, 60000, 0.4})
	m.Jump, m.Band = 2, 20.3
	m.Pieces[0].Marks = []mesh.Mark{{Kind: mesh.MarkLoad, At: 13}}
	t := formula.Arg(formula.ArgT)
	sum := formula.Const(0)
	for _, f := range tonesB5() {
		sum = formula.Add(sum, formula.Mul(formula.Const(5), formula.Apply(formula.OpSin, formula.Mul(formula.Const(2*math.Pi*f), t))))
	}
	m.Pushes = []mesh.Push{{At: inside(0, 13), Force: program(sum, 0)}}
	watch(m, scenario.Displacement, 0, inside(0, 8.5), inside(0, 17), inside(0, 31))
	return m
}

// exactB5 is the response at x at every stride-th row: the steady part by the exact
// wave receptance sin K a sin K(L-x)/(T K sin K L), T K^2 = m w^2 - i c w, and the start-up by
// modes, each released from minus its own steady state.
func exactB5(x float64, rows, stride int) []float64 {
	const l, mass, tension, c, a = 50.0, 4.0, 60000.0, 0.4, 13.0
	count := (rows-1)/stride + 1
	out := make([]float64, count)
	dt := 0.001 * float64(stride)
	const modes = 3000
	var q0, v0 [modes]float64
	for _, f := range tonesB5() {
		w := 2 * math.Pi * f
		k := cmplx.Sqrt(complex(mass*w*w, -c*w) / tension)
		h := 5 * cmplx.Sin(k*complex(math.Min(a, x), 0)) * cmplx.Sin(k*complex(l-math.Max(a, x), 0)) /
			(tension * k * cmplx.Sin(k*l))
		for i := range out {
			s, co := math.Sincos(w * dt * float64(i))
			out[i] += real(h)*s + imag(h)*co
		}
		for n := range q0 {
			kn := float64(n+1) * math.Pi / l
			amp := 2 * 5 / (mass * l) * math.Sin(kn*a) * math.Sin(kn*x)
			hn := complex(amp, 0) / complex(kn*kn*tension/mass-w*w, c/mass*w)
			q0[n] -= imag(hn)
			v0[n] -= w * real(hn)
		}
	}
	g := c / (2 * mass)
	for n := range q0 {
		kn := float64(n+1) * math.Pi / l
		w := math.Sqrt(kn*kn*tension/mass - g*g)
		s, co := math.Sincos(w * dt)
		d := math.Exp(-g * dt)
		xr, yr := q0[n], (v0[n]+g*q0[n])/w // q = e^{-gt}(xr cos + yr sin)
		for i := range out {
			out[i] += xr
			xr, yr = d*(xr*co+yr*s), d*(yr*co-xr*s)
		}
	}
	return out
}

func BenchmarkB5(b *testing.B) {
	const rows, stride = 1000000, 500
	want := [3][]float64{}
	for i, x := range []float64{8.5, 17, 31} {
		want[i] = exactB5(x, rows, stride)
	}
	for level := 0; level < 3; level++ {
		b.Run(string(rune('0'+level)), func(b *testing.B) {
			m := caseB5(rows)
			for b.Loop() {
				r := solve(b, m, level)
				worst := 0.0
				for i := range want {
					got := make([]float64, len(want[i]))
					for k := range got {
						got[k] = r.Series[0][i][k*stride]
					}
					worst = math.Max(worst, apart(got, want[i]))
				}
				b.ReportMetric(float64(r.Plan.Cells), "dof")
				b.ReportMetric(worst, "error")
			}
		})
	}
}
