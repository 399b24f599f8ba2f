package tryout

import (
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/plugins/conform"
)

// sineShape is a sin(k x).
func sineShape(a, k float64) formula.Program {
	return formula.Mul(formula.Const(a), formula.Apply(formula.OpSin, formula.Mul(formula.Const(k), formula.Arg(formula.ArgX))))
}

// knock is a point force f(t) = F sin^4(pi t/d) on a held lossless line, as
// d'Alembert has it with images: u(x, t) = (1/2Z) sum over images of the impulse
// so far, the odd ones turned about.
func knock(net *scenario.Network, length, mass, tension float64) conform.Case {
	const force, d, at = 40.0, 0.08, 6.3
	// F sin^4(pi t/d) for 0 < t < d.
	s := formula.Apply(formula.OpSin, formula.Mul(formula.Const(math.Pi/d), formula.Arg(formula.ArgT)))
	square := formula.Mul(s, s)
	shape := formula.Mul(formula.Const(force), formula.Mul(square, square))
	value := formula.Apply(formula.OpSelect, formula.Apply(formula.OpLess, formula.Arg(formula.ArgT), formula.Const(d)), shape, formula.Const(0))
	net.Pushes = []scenario.PushOf[float64]{{Name: "k", At: scenario.Place{Node: -1, Offset: at}, Force: scenario.History{Value: value, Breaks: []float64{0, d}}}}
	c, z := math.Sqrt(tension/mass), math.Sqrt(tension*mass)
	// The integral of sin^4 is 3/8 t - sin(2pt)/(4p) + sin(4pt)/(32p).
	impulse := func(t float64) float64 {
		t = math.Max(0, math.Min(t, d))
		p := math.Pi / d
		return force * (3*t/8 - math.Sin(2*p*t)/(4*p) + math.Sin(4*p*t)/(32*p))
	}
	return conform.Case{Name: "a knock at one place", Net: net, Rate: nothing, Exact: func(_ int, x, t float64) float64 {
		u := 0.0
		for n := -6; n <= 6; n++ {
			u += impulse(t-math.Abs(x-at-2*float64(n)*length)/c) - impulse(t-math.Abs(x+at-2*float64(n)*length)/c)
		}
		return u / (2 * z)
	}}
}
