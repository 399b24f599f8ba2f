package conform

import (
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Cases lists the manufactured solutions: each feature of taut strings alone
// and the combinations that real lines need.
func Cases() []Case {
	held := func() scenario.Node { return scenario.Node{Fixed: true} }
	var out []Case
	add := func(name string, seconds float64, build func(k *maker)) {
		k := &maker{net: &scenario.Network{}}
		build(k)
		c := k.finish(name, seconds)
		watchAll(c.Net)
		out = append(out, c)
	}
	add("uniform, lossless", 0.8, func(k *maker) {
		k.line([]scenario.Node{held(), held()}, segment("s", 20, 0.5, 2000, 0))
		k.motions = []motion{{{shape(20, true), rise(9)}}}
	})
	add("uniform, viscous", 0.8, func(k *maker) {
		k.line([]scenario.Node{held(), held()}, segment("s", 20, 0.5, 2000, 0.8))
		k.motions = []motion{{{shape(20, true), rise(9)}}}
	})
	add("two segments, mass, dashpot and spring between them", 0.7, func(k *maker) {
		joint := scenario.Node{Mass: 3, Spring: 900, Dashpots: []scenario.DashpotOf[float64]{{C: 60}}}
		k.line([]scenario.Node{held(), joint, held()}, segment("s", 7, 0.5, 3000, 0), segment("u", 13, 1.4, 3000, 0))
		k.motions = []motion{{{shape(20, true), rise(11)}}}
	})
	add("the same with different losses", 0.7, func(k *maker) {
		joint := scenario.Node{Mass: 3, Spring: 900, Dashpots: []scenario.DashpotOf[float64]{{C: 60}}}
		k.line([]scenario.Node{held(), joint, held()}, segment("s", 7, 0.5, 3000, 0.7), segment("u", 13, 1.4, 3000, 0.2))
		k.motions = []motion{{{shape(20, true), rise(11)}}}
	})
	add("supports with mass, spring and dashpot", 0.7, func(k *maker) {
		near := scenario.Node{Mass: 1.5, Spring: 2500}
		far := scenario.Node{Mass: 4, Spring: 700, Dashpots: []scenario.DashpotOf[float64]{{C: 30}}}
		k.line([]scenario.Node{near, far}, segment("s", 16, 0.8, 4000, 0))
		wave := cosine(formula.ArgX, 1, 2.2/16, 0.4).plus(cosine(formula.ArgX, 0.3, 6/16.0, 1))
		k.motions = []motion{{{wave, rise(10)}}}
	})
	add("free and absorbing ends", 0.7, func(k *maker) {
		k.line([]scenario.Node{{}, {Absorbing: true}}, segment("s", 16, 0.8, 4000, 0))
		k.motions = []motion{{{cosine(formula.ArgX, 1, 2.2/16, 0.4), rise(10)}}}
	})
	add("a support that is moved", 0.7, func(k *maker) {
		k.line([]scenario.Node{held(), held()}, segment("s", 16, 0.8, 4000, 0.3))
		wave := cosine(formula.ArgX, 1, 1.1/16, -1.1).plus(cosine(formula.ArgX, -0.5, 2.9/16, 0)) // moves both ends
		k.motions = []motion{{{wave, rise(10)}}}
		for node, x := range []float64{0, 16} {
			at := substitute(k.motions[0].at(0, 0), formula.ArgX, formula.Const(x))
			k.net.Moves = append(k.net.Moves, scenario.MoveOf[float64]{Name: "m", Node: node, Motion: scenario.History{Value: at}})
		}
	})
	add("two motions at once, a change of tension held by a joint", 0.7, func(k *maker) {
		joint := scenario.Node{Holds: true, Mass: 1}
		k.line([]scenario.Node{held(), joint, held()}, segment("s", 9, 0.6, 5000, 0), segment("u", 11, 0.9, 3500, 0))
		k.motions = []motion{{{shape(20, true), rise(8)}, {cosine(formula.ArgX, 0.5, 5*math.Pi/20, -math.Pi/2), rise(13)}}}
		// sin(5 pi x/20) does not vanish at 20 m by itself; an even multiple does
		k.motions[0][1].shape = cosine(formula.ArgX, 0.5, 4*math.Pi/20, -math.Pi/2)
	})
	add("two lines and a tie with spring, dashpot and mass", 0.7, func(k *maker) {
		k.line([]scenario.Node{held(), held()}, segment("s", 20, 0.5, 2000, 0.2))
		k.line([]scenario.Node{held(), {Spring: 3000}}, segment("s", 14, 0.7, 2600, 0))
		k.motions = []motion{{{shape(20, true), rise(9)}}, {{shape(14, false), rise(12)}}}
		k.net.Ties = []scenario.TieOf[float64]{{
			Name: "tie", From: scenario.Place{Node: -1, Offset: 8}, To: scenario.Place{Line: 1, Node: -1, Offset: 5},
			Spring: 4000, Dashpot: 25, Mass: 0.8,
		}}
	})
	out = append(out, bracketCase(), tunedCase())
	return append(append(out, realCases()...), lawCases()...)
}

// bracketCase has a dashpot behind a bracket. The dashpot's own end moves as
// q = Q(t); then u at the joint is Q + (C/K) Q', and the fitting takes C Q'.
func bracketCase() Case {
	const C, K, at, length = 90.0, 5200.0, 6.0, 18.0
	k := &maker{net: &scenario.Network{}}
	joint := scenario.Node{Dashpots: []scenario.DashpotOf[float64]{{C: C, Bracket: true, Through: K}}}
	k.line([]scenario.Node{{Fixed: true}, joint, {Fixed: true}}, segment("s", at, 0.5, 2400, 0), segment("u", length-at, 0.9, 2400, 0))
	q := rise(11)
	course := jetOf(func(i int) formula.Program {
		return formula.Add(q[i], formula.Mul(formula.Const(C/K), derivative(11, i+1)))
	})
	k.motions = []motion{{{shape(length, true), course}}}
	c := k.finish("a dashpot behind a bracket", 0.7)
	// finish has pushed the joint for its mass, spring and rigid dashpots; add the bracket.
	here := substitute(k.motions[0][0].shape[0], formula.ArgX, formula.Const(at))
	k.push("bracket", scenario.Place{Node: 1}, formula.Mul(formula.Const(C), formula.Mul(here, q[1])))
	watchAll(c.Net)
	return c
}

func jetOf(f func(i int) formula.Program) jet { return jet{f(0), f(1), f(2), f(3), f(4)} }

// derivative is the n-th derivative of rise(w), n from 1.
func derivative(w float64, n int) formula.Program {
	sum := formula.Const(0)
	for m := 1; m < len(waves); m++ {
		k := float64(m) * w
		angle := formula.Add(formula.Mul(formula.Const(k), formula.Arg(formula.ArgT)), formula.Const(float64(n)*math.Pi/2))
		sum = formula.Add(sum, formula.Mul(formula.Const(waves[m]*math.Pow(k, float64(n))), formula.Apply(formula.OpCos, angle)))
	}
	return sum
}

// tunedCase hangs a mass on a spring. The mass moves as D(t); the joint under it
// then moves as D + (M/k) D”, and the spring pulls the joint by M D”.
func tunedCase() Case {
	const M, K, at, length = 2.5, 1900.0, 6.0, 18.0
	k := &maker{net: &scenario.Network{}}
	joint := scenario.Node{Mass: 0.4, Tuned: []scenario.TunedOf[float64]{{Mass: M, Spring: K}}}
	k.line([]scenario.Node{{Fixed: true}, joint, {Fixed: true}}, segment("s", at, 0.5, 2400, 0), segment("u", length-at, 0.9, 2400, 0))
	course := jetOf(func(i int) formula.Program {
		own := rise(7)[i]
		return formula.Add(own, formula.Mul(formula.Const(M/K), derivative(7, i+2)))
	})
	k.motions = []motion{{{shape(length, true), course}}}
	c := k.finish("a mass hung on a spring", 0.7)
	here := substitute(k.motions[0][0].shape[0], formula.ArgX, formula.Const(at))
	k.push("hung", scenario.Place{Node: 1}, formula.Mul(formula.Const(M), formula.Mul(here, derivative(7, 2))))
	watchAll(c.Net)
	return c
}
