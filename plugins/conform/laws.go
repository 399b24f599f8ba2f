package conform

import (
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// lawCases are motions against forces that are not linear in them. The joint stands at
// node 1 of the first line, 8 m along.
func lawCases() []Case {
	const at, length = 8.0, 20.0
	c := formula.Const
	var out []Case
	// add makes a case of a line, clamped where it bends, whose joint feels a force
	// (on the line) of its displacement and velocity.
	add := func(name string, bending float64, force func(u, v formula.Program) formula.Program, adjust func(m *mesh.Mesh)) {
		k := &maker{net: &scenario.Network{}}
		end := scenario.Node{Fixed: true, Clamped: bending > 0}
		a, b := segment("s", at, 0.5, 2000, 0.3), segment("u", length-at, 0.9, 2000, 0)
		a.Bending, b.Bending = bending, bending
		k.line([]scenario.Node{end, {Mass: 2}, end}, a, b)
		level := constant(1).plus(cosine(formula.ArgX, -1, 2*math.Pi/length, 0))
		k.motions = []motion{{{level, rise(9)}}}
		here := func(dt int) formula.Program {
			return substitute(k.motions[0].at(0, dt), formula.ArgX, c(at))
		}
		done := k.finish(name, 0.34) // the motion turns at pi/9 s
		if force != nil {
			k.push("law", scenario.Place{Node: 1}, formula.Sub(c(0), force(here(0), here(1))))
		}
		done.Beyond, done.Adjust = true, adjust
		watchAll(done.Net)
		out = append(out, done)
	}
	joint := func(law mesh.Law) func(m *mesh.Mesh) {
		return func(m *mesh.Mesh) { m.Nodes[1].Laws = append(m.Nodes[1].Laws, law) }
	}
	u, v := formula.Arg(mesh.ArgU), formula.Arg(mesh.ArgV)
	smooth := func(u, v formula.Program) formula.Program {
		return formula.Sub(c(0), formula.Add(formula.Mul(c(3), formula.Mul(u, formula.Mul(u, u))), formula.Mul(formula.Mul(c(0.1), v), formula.Mul(u, u))))
	}
	add("a law written out at a joint", 0, smooth, joint(mesh.Law{Written: &mesh.Written{Force: smooth(u, v)}}))
	add("a law written out at a joint of a line that bends", 200, smooth, joint(mesh.Law{Written: &mesh.Written{Force: smooth(u, v)}}))
	add("dry friction at a joint of a line that bends", 200, func(_, _ formula.Program) formula.Program { return c(-400) },
		joint(mesh.Law{Friction: &mesh.Friction{Force: 400}}))
	add("a stop at a joint", 0, func(u, _ formula.Program) formula.Program {
		return formula.Mul(c(-900), formula.Apply(formula.OpMax, c(0), formula.Sub(u, c(6))))
	}, joint(mesh.Law{Stop: &mesh.Stop{Gap: 6, Spring: 900, Up: true}}))
	// The push that makes up for the stop bends where the joint meets it.
	stop := &out[len(out)-1]
	for i := range stop.Net.Pushes {
		if p := &stop.Net.Pushes[i]; p.Name == "law" {
			p.Force.Breaks = []float64{crossing(func(t float64) float64 { return stop.Exact(0, at, t) - 6 }, 0, math.Pi/9)}
		}
	}
	return append(out, stretchCase(0), stretchCase(200))
}

// crossing is where a function that rises from below passes 0, by bisection.
func crossing(f func(float64) float64, a, b float64) float64 {
	for i := 0; i < 60; i++ {
		if m := (a + b) / 2; f(m) < 0 {
			a = m
		} else {
			b = m
		}
	}
	return b
}

// stretchCase has a tension that grows by G e, e = 1/2 int u'^2 dx = a q^2 for u =
// s(x) q(t): the press takes up G a q^2 u” as well, and the joint, where u' does not
// jump, nothing.
func stretchCase(bending float64) Case {
	const length, stiffness = 20.0, 12.0
	k := &maker{net: &scenario.Network{}}
	end := scenario.Node{Fixed: true}
	g := segment("s", length, 0.5, 2000, 0.3)
	g.Bending = bending
	k.line([]scenario.Node{end, end}, g)
	s, q := shape(length, true), rise(9)
	k.motions = []motion{{{s, q}}}
	name := "tension that grows with the motion"
	if bending > 0 {
		name += ", and bending"
	}
	done := k.finish(name, 0.35)
	a := integral(func(x float64) float64 { d := s[1].At(0, x); return d * d / 2 }, 0, length)
	extra := formula.Mul(formula.Const(stiffness*a), formula.Mul(q[0], q[0]))
	press := &done.Net.Presses[0].Force.Value
	*press = formula.Sub(*press, formula.Mul(extra, formula.Mul(s[2], q[0])))
	done.Beyond = true
	done.Adjust = func(m *mesh.Mesh) { m.Lines[0].Stretch = &mesh.Stretch{Stiffness: stiffness} }
	watchAll(done.Net)
	return done
}
