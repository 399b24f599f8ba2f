package conform

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// crossForce is what a segment carries across at a distance s from its start:
// T u' - EI (u”' + eta u”'_t).
func crossForce(g *scenario.Segment, m motion, s float64) formula.Program {
	c := formula.Const
	f := formula.Mul(c(g.Tension+g.TensionRise*s), m.at(1, 0))
	if g.Bending > 0 {
		f = formula.Sub(f, formula.Mul(c(g.Bending), m.at(3, 0)))
		f = formula.Sub(f, formula.Mul(c(g.Bending*g.Internal), m.at(3, 1)))
	}
	return f
}

// pulled is the derivative of crossForce along the line, of a segment that starts at
// x: (T u')' - EI (u”” + eta u””_t).
func (k *maker) pulled(g *scenario.Segment, m motion, x float64) formula.Program {
	c := formula.Const
	along := formula.Sub(formula.Arg(formula.ArgX), c(x))
	t := formula.Add(c(g.Tension), formula.Mul(c(g.TensionRise), along))
	f := formula.Add(formula.Mul(t, m.at(2, 0)), formula.Mul(c(g.TensionRise), m.at(1, 0)))
	if g.Bending > 0 {
		f = formula.Sub(f, formula.Mul(c(g.Bending), m.at(4, 0)))
		f = formula.Sub(f, formula.Mul(c(g.Bending*g.Internal), m.at(4, 1)))
	}
	return f
}

// sagOf is a line's sag term, nil without. Its numbers are the mesh's, which has
// tests of its own.
func (k *maker) sagOf(li int) *mesh.Line {
	if !k.net.Lines[li].Sag {
		return nil
	}
	bare := *k.net
	bare.Pushes, bare.Presses, bare.Moves, bare.Ties = nil, nil, nil, nil
	bare.Run = scenario.RunOf[float64]{For: 1, Every: 0.1}
	m, err := mesh.Build(&bare)
	if err != nil {
		panic(fmt.Sprintf("the kit's own scenario: %v", err))
	}
	line := m.Lines[li]
	weights := map[int]float64{} // by node of the line
	for i, p := range line.Pieces {
		if w, ok := line.Sag.Nodes[m.Pieces[p].To]; ok {
			weights[i+1] = w
		}
	}
	line.Sag.Nodes = weights
	return &line
}

// extraTension is h = G (sum w_p int u dx + sum w_j u_j), the integrals by 64 Gauss
// points' worth of Simpson's rule.
func (k *maker) extraTension(li int, line *mesh.Line) formula.Program {
	segs := k.net.Lines[li].Segments
	sum := formula.Const(0)
	for _, term := range k.motions[li] {
		total, x := 0.0, 0.0
		for i := range segs {
			total += line.Sag.Pieces[i] * integral(func(s float64) float64 { return term.shape[0].At(0, s) }, x, x+segs[i].Length)
			x += segs[i].Length
			total += line.Sag.Nodes[i+1] * term.shape[0].At(0, x)
		}
		sum = formula.Add(sum, formula.Mul(formula.Const(line.Sag.Stiffness*total), term.course[0]))
	}
	return sum
}

// integral is Simpson's rule on 2000 parts: good to rounding for the kit's shapes.
func integral(f func(float64) float64, a, b float64) float64 {
	const n = 2000
	h := (b - a) / n
	sum := f(a) + f(b)
	for i := 1; i < n; i++ {
		sum += f(a+h*float64(i)) * float64(2+2*(i%2))
	}
	return sum * h / 3
}

func (k *maker) sagPull(li, si int) formula.Program {
	line := k.sagOf(li)
	if line == nil {
		return formula.Const(0)
	}
	return formula.Mul(formula.Const(line.Sag.Pieces[si]), k.extraTension(li, line))
}

func (k *maker) sagAt(li, ni int) formula.Program {
	line := k.sagOf(li)
	if line == nil || line.Sag.Nodes[ni] == 0 {
		return formula.Const(0)
	}
	return formula.Mul(formula.Const(line.Sag.Nodes[ni]), k.extraTension(li, line))
}

// realCases have what makes a line more than an ideal string. Where the motion leaves
// a moment over at a node (between different stiffnesses, at an end that turns)
// nothing could hold it, so that shapes are chosen that leave none.
func realCases() []Case {
	held := func() scenario.Node { return scenario.Node{Fixed: true} }
	var out []Case
	add := func(name string, build func(k *maker)) {
		k := &maker{net: &scenario.Network{}}
		build(k)
		c := k.finish(name, 0.35)
		c.Beyond = true
		watchAll(c.Net)
		out = append(out, c)
	}
	sine := shape(20, true)
	// level has no slope at either end of 20 m: it suits clamps.
	level := constant(1).plus(cosine(formula.ArgX, -1, 2*math.Pi/20, 0)).plus(constant(0.3)).plus(cosine(formula.ArgX, -0.3, 4*math.Pi/20, 0))
	stiff := func(g scenario.Segment, ei, eta float64) scenario.Segment {
		g.Bending, g.Internal = ei, eta
		return g
	}
	inclined := func(g scenario.Segment, rise float64) scenario.Segment {
		g.TensionRise = rise
		return g
	}
	clamped := scenario.Node{Fixed: true, Clamped: true}
	joint := scenario.Node{Mass: 3, Spring: 900, Dashpots: []scenario.DashpotOf[float64]{{C: 60}}}
	add("tension that rises along two segments, mass and dashpot between", func(k *maker) {
		k.line([]scenario.Node{held(), joint, held()},
			inclined(segment("s", 7, 0.5, 1500, 0.4), 90), inclined(segment("u", 13, 1.4, 2130, 0), 40))
		k.motions = []motion{{{sine, rise(11)}}}
	})
	add("sag of two segments with a mass between", func(k *maker) {
		a, b := segment("s", 7, 2.5, 9000, 0.3), segment("u", 13, 4.4, 9000, 0)
		a.Axial, b.Axial = 4e6, 7e6
		k.line([]scenario.Node{held(), joint, held()}, a, b)
		k.net.Lines[0].Sag = true
		k.motions = []motion{{{sine.plus(cosine(formula.ArgX, 1.3, math.Pi/20, -math.Pi/2)), rise(11)}}}
	})
	add("bending between pins", func(k *maker) {
		k.line([]scenario.Node{held(), held()}, stiff(segment("s", 20, 0.5, 2000, 0.4), 60, 0))
		k.motions = []motion{{{sine, rise(9)}}}
	})
	add("bending between clamps", func(k *maker) {
		k.line([]scenario.Node{clamped, clamped}, stiff(segment("s", 20, 0.5, 2000, 0), 300, 0))
		k.motions = []motion{{{level, rise(9)}}}
	})
	add("bending with springs against turning", func(k *maker) {
		const ei, a, rotary = 300.0, math.Pi / 20, 80.0
		turn := scenario.Node{Fixed: true, Rotary: rotary}
		k.line([]scenario.Node{turn, turn}, stiff(segment("s", 20, 0.5, 2000, 0), ei, 0))
		// u = sin ax + b (1 - cos 2ax): EI u” = 4 a^2 b EI meets rotary u' = rotary a.
		b := rotary / (4 * ei * a)
		k.motions = []motion{{{cosine(formula.ArgX, 1, a, -math.Pi/2).plus(constant(b)).plus(cosine(formula.ArgX, -b, 2*a, 0)), rise(9)}}}
	})
	add("bending with internal loss, mass and dashpot", func(k *maker) {
		k.line([]scenario.Node{clamped, joint, clamped},
			stiff(segment("s", 7, 0.5, 2000, 0.2), 200, 0.003), stiff(segment("u", 13, 1.1, 2000, 0), 200, 0.003))
		k.motions = []motion{{{level, rise(9)}}}
	})
	add("rising tension, bending and sag at once, a bracketless damper", func(k *maker) {
		a := inclined(stiff(segment("s", 7, 2.5, 8000, 0.2), 500, 0.001), 40)
		b := inclined(stiff(segment("u", 13, 3.1, 8280, 0), 500, 0.001), 50)
		a.Axial, b.Axial = 4e6, 7e6
		k.line([]scenario.Node{clamped, joint, clamped}, a, b)
		k.net.Lines[0].Sag, k.net.Lines[0].Incline = true, 0.3
		k.motions = []motion{{{level, rise(9)}}}
	})
	return out
}
