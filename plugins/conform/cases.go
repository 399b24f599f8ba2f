package conform

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Case is a scenario whose exact motion is known.
type Case struct {
	Name  string
	Net   *scenario.Network
	Exact func(line int, x, t float64) float64 // displacement, m
	// Slope is du/dx, 1.
	Slope func(line int, x, t float64) float64
	// Rate is du/dt, m/s.
	Rate func(line int, x, t float64) float64
	// Beyond tells that there is more to it than ideal strings: a solver may refuse.
	Beyond bool
	// Adjust, where not nil, adds to the mesh what a scenario cannot say.
	Adjust func(m *mesh.Mesh)
}

// maker builds a case from a network without loads and a motion for each line.
type maker struct {
	net     *scenario.Network
	motions []motion
}

// segment is one segment of the kit's own invented stock.
func segment(name string, length, mass, tension, viscous float64) scenario.Segment {
	return scenario.Segment{Name: name, Length: length, MassPerLength: mass, Tension: tension, Viscous: viscous}
}

func (k *maker) line(nodes []scenario.Node, segments ...scenario.Segment) {
	name := fmt.Sprintf("l%d", len(k.net.Lines))
	for i := range nodes {
		if nodes[i].Name == "" {
			nodes[i].Name = fmt.Sprintf("n%d", i)
		}
		nodes[i].Kind = scenario.Joint
		if i == 0 || i == len(nodes)-1 {
			nodes[i].Kind = scenario.Support
		}
	}
	k.net.Lines = append(k.net.Lines, scenario.Line{Name: name, Nodes: nodes, Segments: segments})
}

// shape is a shape in x that suits the ends: a sum of two waves that vanishes at
// x = 0 and, where both is set, at x = length.
func shape(length float64, both bool) jet {
	a, b := 2*math.Pi/length, 3*math.Pi/length
	if !both {
		a, b = 1.7/length, 4.1/length
	}
	// sin z = cos(z - pi/2)
	return cosine(formula.ArgX, 1, a, -math.Pi/2).plus(cosine(formula.ArgX, 0.4, b, -math.Pi/2))
}

// finish derives the loads.
func (k *maker) finish(name string, seconds float64) Case {
	net := k.net
	for li := range net.Lines {
		line, m := &net.Lines[li], k.motions[li]
		x := 0.0
		for si := range line.Segments {
			s := &line.Segments[si]
			q := formula.Mul(formula.Const(s.MassPerLength), m.at(0, 2))
			q = formula.Add(q, formula.Mul(formula.Const(s.Viscous), m.at(0, 1)))
			q = formula.Sub(q, k.pulled(s, m, x))
			q = formula.Add(q, k.sagPull(li, si))
			local := substitute(q, formula.ArgX, formula.Add(formula.Arg(formula.ArgX), formula.Const(x)))
			net.Presses = append(net.Presses, scenario.PressOf[float64]{
				Name: fmt.Sprintf("q%d_%d", li, si), Along: scenario.SpanOf{Line: li, Segment: si}, Force: scenario.History{Value: local},
			})
			x += s.Length
		}
		k.nodes(li)
	}
	k.ties()
	net.Run = scenario.RunOf[float64]{For: seconds, Every: seconds / 200}
	motions := append([]motion(nil), k.motions...)
	pick := func(dx, dt int) func(int, float64, float64) float64 {
		programs := make([]formula.Program, len(motions))
		for i, m := range motions {
			programs[i] = m.at(dx, dt)
		}
		return func(line int, x, t float64) float64 { return programs[line].At(t, x) }
	}
	return Case{Name: name, Net: net, Exact: pick(0, 0), Slope: pick(1, 0), Rate: pick(0, 1)}
}

// nodes pushes every node that is not held so that it moves as chosen.
func (k *maker) nodes(li int) {
	line, m := &k.net.Lines[li], k.motions[li]
	moved := map[int]bool{}
	for _, mv := range k.net.Moves {
		moved[mv.Node] = moved[mv.Node] || mv.Line == li
	}
	x := 0.0
	for ni := range line.Nodes {
		n := &line.Nodes[ni]
		at := func(p formula.Program) formula.Program { return substitute(p, formula.ArgX, formula.Const(x)) }
		force := formula.Mul(formula.Const(n.Mass), at(m.at(0, 2)))
		c := 0.0
		for _, d := range n.Dashpots {
			if !d.Bracket {
				c += d.C
			}
		}
		if ni > 0 {
			s := &line.Segments[ni-1]
			force = formula.Add(force, at(crossForce(s, m, s.Length)))
			if n.Absorbing {
				c += math.Sqrt(s.Tension * s.MassPerLength)
			}
		}
		if ni < len(line.Segments) {
			s := &line.Segments[ni]
			force = formula.Sub(force, at(crossForce(s, m, 0)))
			if n.Absorbing {
				c += math.Sqrt(s.Tension * s.MassPerLength)
			}
		}
		force = formula.Add(force, formula.Mul(formula.Const(c), at(m.at(0, 1))))
		force = formula.Add(force, formula.Mul(formula.Const(n.Spring), at(m.at(0, 0))))
		force = formula.Add(force, k.sagAt(li, ni))
		if !n.Fixed && !moved[ni] {
			k.push(fmt.Sprintf("f%d_%d", li, ni), scenario.Place{Line: li, Node: ni}, force)
		}
		if ni < len(line.Segments) {
			x += line.Segments[ni].Length
		}
	}
}

func (k *maker) push(name string, at scenario.Place, force formula.Program) {
	if v, constant := force.IsConst(); constant && v == 0 {
		return
	}
	k.net.Pushes = append(k.net.Pushes, scenario.PushOf[float64]{Name: name, At: at, Force: scenario.History{Value: force}})
}

// ties holds the force of every tie, and its shared mass, up by pushes.
func (k *maker) ties() {
	for _, tie := range k.net.Ties {
		ends := []scenario.Place{tie.From, tie.To}
		value := func(end, dt int) formula.Program {
			p := ends[end]
			return substitute(k.motions[p.Line].at(0, dt), formula.ArgX, formula.Const(k.net.Travel(p)))
		}
		for end := range ends {
			other := 1 - end
			stretch := formula.Sub(value(other, 0), value(end, 0))
			rate := formula.Sub(value(other, 1), value(end, 1))
			pull := formula.Add(formula.Mul(formula.Const(tie.Spring), stretch), formula.Mul(formula.Const(tie.Dashpot), rate))
			inertia := formula.Mul(formula.Const(tie.Mass/2), value(end, 2))
			k.push(fmt.Sprintf("%s_%d", tie.Name, end), ends[end], formula.Sub(inertia, pull))
		}
	}
}

// watchAll watches displacement at a few odd places of every line, and
// displacement, velocity and force at the first support and the last.
func watchAll(net *scenario.Network) {
	for li := range net.Lines {
		line := &net.Lines[li]
		for si := range line.Segments {
			at := scenario.Place{Line: li, Node: -1, Segment: si, Offset: 0.61803 * line.Segments[si].Length}
			net.Watches = append(net.Watches, scenario.Watch{
				Name: fmt.Sprintf("w%d_%d", li, si), At: at, Quantities: []scenario.Quantity{scenario.Displacement, scenario.Velocity},
			})
		}
	}
}
