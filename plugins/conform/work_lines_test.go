package conform_test

import (
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

func inside(segment int, at float64) scenario.Place {
	return scenario.Place{Node: -1, Segment: segment, Offset: at}
}

func probe(net *scenario.Network, at scenario.Place, duration, every float64) *scenario.Network {
	net.Watches = []scenario.Watch{{Name: "w", At: at, Quantities: []scenario.Quantity{scenario.Displacement}}}
	net.Run = scenario.RunOf[float64]{For: duration, Every: every}
	return net
}

// uniformPluck is a damped uniform line released from a plucked shape whose kink
// is replaced by the parabola that touches both flanks 0.2 m from it.
func uniformPluck() *scenario.Network {
	const L, m, T, c, a, h, r = 20.0, 0.35, 8400.0, 0.05, 4.0, 0.02, 0.2
	c1, c2 := h/a, -h/(L-a)
	k := formula.Const
	x := formula.Arg(formula.ArgX)
	left := formula.Mul(k(c1), x)
	right := formula.Mul(k(c2), formula.Sub(x, k(L)))
	// The parabola through both tangent points: value and slope of the left flank
	// at a-r, slope of the right one at a+r.
	s := formula.Sub(x, k(a-r))
	bend := formula.Add(formula.Mul(k(c1), x), formula.Mul(k((c2-c1)/(4*r)), formula.Mul(s, s)))
	shape := formula.Apply(formula.OpSelect, formula.Apply(formula.OpLess, x, k(a-r)), left,
		formula.Apply(formula.OpSelect, formula.Apply(formula.OpLess, x, k(a+r)), bend, right))
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{{Name: "a", Fixed: true}, {Name: "b", Fixed: true}},
		Segments: []scenario.Segment{{Name: "s", Length: L, MassPerLength: m, Tension: T, Viscous: c}}}}
	net.Starts = []scenario.StartOf[float64]{{Name: "p", Along: scenario.SpanOf{Segment: -1}, Shape: shape}}
	probe(net, inside(0, 7), 10, 1.0/2000)
	return net
}

// pluckRecord is the exact record of uniformPluck's probe, a closed mode sum.
func pluckRecord() []float64 {
	const L, m, T, c, a, h, r = 20.0, 0.35, 8400.0, 0.05, 4.0, 0.02, 0.2
	const c1, c2 = h / a, -h / (L - a)
	// b_n = (2/L) integral of u0 sin(k x): for a broken line whose slope falls
	// evenly over 2r, (2/(L k^2)) (c1-c2) sin(k a) sin(k r)/(k r). Modes of
	// amplitude below rounding are left out: 20000 are taken.
	const rows, modes = 20001, 20000
	out := make([]float64, rows)
	g := c / (2 * m)
	for n := 1; n <= modes; n++ {
		kn := float64(n) * math.Pi / L
		b := 2 / (L * kn * kn) * (c1 - c2) * math.Sin(kn*a) * math.Sin(kn*r) / (kn * r) * math.Sin(kn*7)
		if math.Abs(b) < 1e-13*h {
			continue
		}
		w := math.Sqrt(T/m*kn*kn - g*g)
		step := cmplx.Exp(complex(-g, w) / 2000)
		z := complex(b, 0)
		for i := range out {
			// u = b e^{-gt} (cos wt + g/w sin wt)
			out[i] += real(z) + g/w*imag(z)
			z *= step
		}
	}
	return out
}

// threeSegments is a damped line of three segments with two clamps and a
// dashpot, hit by a half sine: the chain of struck().
func threeSegments() *scenario.Network {
	const T, c = 20000.0, 0.08
	seg := func(name string, length, m float64) scenario.Segment {
		return scenario.Segment{Name: name, Length: length, MassPerLength: m, Tension: T, Viscous: c}
	}
	net := &scenario.Network{}
	net.Lines = []scenario.Line{{Name: "l", Nodes: []scenario.Node{
		{Name: "a", Fixed: true}, {Name: "j", Kind: scenario.Joint, Mass: 4},
		{Name: "k", Kind: scenario.Joint, Mass: 1.5, Dashpots: []scenario.DashpotOf[float64]{{C: 120}}}, {Name: "b", Fixed: true},
	}, Segments: []scenario.Segment{seg("s", 30, 0.9), seg("t", 45, 1.6), seg("u", 25, 0.9)}}}
	const F0, d = 500.0, 0.008
	force := formula.Apply(formula.OpHalfSine, formula.Arg(formula.ArgT), formula.Const(F0), formula.Const(d))
	net.Pushes = []scenario.PushOf[float64]{{Name: "h", At: inside(0, 12), Force: scenario.History{Value: force, Breaks: []float64{0, d}}}}
	probe(net, inside(1, 30), 5, 1.0/2000)
	return net
}

func relativeError(got, want []float64, stride int) float64 {
	diff, norm := 0.0, 0.0
	for i := 0; i < len(want); i += stride {
		diff += (got[i] - want[i]) * (got[i] - want[i])
		norm += want[i] * want[i]
	}
	return math.Sqrt(diff / norm)
}
