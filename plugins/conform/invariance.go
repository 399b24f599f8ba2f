package conform

import (
	"math"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Reversed is the same network walked from the other end: supports, segments,
// places and shapes in x turned about. ok is false where the network has a
// travelling load, which has a direction of its own.
func Reversed(net *scenario.Network) (*scenario.Network, bool) {
	if len(net.Rolls) > 0 {
		return nil, false
	}
	out := clone(net)
	for li := range out.Lines {
		l := &out.Lines[li]
		turn(l.Nodes)
		turn(l.Segments)
	}
	place := func(p scenario.Place) scenario.Place {
		line := &net.Lines[p.Line]
		if p.Node >= 0 {
			p.Node = len(line.Nodes) - 1 - p.Node
			return p
		}
		p.Offset = line.Segments[p.Segment].Length - p.Offset
		p.Segment = len(line.Segments) - 1 - p.Segment
		return p
	}
	span := func(s scenario.SpanOf) scenario.SpanOf {
		if s.Segment >= 0 {
			s.Segment = len(net.Lines[s.Line].Segments) - 1 - s.Segment
		}
		return s
	}
	mirror := func(p formula.Program, s scenario.SpanOf) formula.Program {
		return substitute(p, formula.ArgX, formula.Sub(formula.Const(spanLength(net, s)), formula.Arg(formula.ArgX)))
	}
	out.places(place)
	for i := range out.Starts {
		s := &out.Starts[i]
		s.Shape, s.Along = mirror(s.Shape, s.Along), span(s.Along)
	}
	for i := range out.Presses {
		p := &out.Presses[i]
		p.Force.Value, p.Along = mirror(p.Force.Value, p.Along), span(p.Along)
	}
	for i := range out.Moves {
		mv := &out.Moves[i]
		mv.Node = len(net.Lines[mv.Line].Nodes) - 1 - mv.Node
	}
	for i := range out.Watches {
		out.Watches[i].Span = span(out.Watches[i].Span)
	}
	return out.Network, true
}

func spanLength(net *scenario.Network, s scenario.SpanOf) float64 {
	segs := net.Lines[s.Line].Segments
	if s.Segment >= 0 {
		return segs[s.Segment].Length
	}
	sum := 0.0
	for _, g := range segs {
		sum += g.Length
	}
	return sum
}

func turn[T any](list []T) {
	for i, j := 0, len(list)-1; i < j; i, j = i+1, j-1 {
		list[i], list[j] = list[j], list[i]
	}
}

// copied is a network whose lists may be changed without touching the original.
type copied struct{ *scenario.Network }

func clone(net *scenario.Network) copied {
	out := *net
	out.Lines = append([]scenario.Line(nil), net.Lines...)
	for i := range out.Lines {
		out.Lines[i].Nodes = append([]scenario.Node(nil), net.Lines[i].Nodes...)
		out.Lines[i].Segments = append([]scenario.Segment(nil), net.Lines[i].Segments...)
		for k := range out.Lines[i].Nodes {
			n := &out.Lines[i].Nodes[k]
			n.Dashpots = append([]scenario.DashpotOf[float64](nil), n.Dashpots...)
			n.Tuned = append([]scenario.TunedOf[float64](nil), n.Tuned...)
		}
	}
	out.Ties = append([]scenario.TieOf[float64](nil), net.Ties...)
	out.Plucks = append([]scenario.PluckOf[float64](nil), net.Plucks...)
	out.Starts = append([]scenario.StartOf[float64](nil), net.Starts...)
	out.Pushes = append([]scenario.PushOf[float64](nil), net.Pushes...)
	out.Presses = append([]scenario.PressOf[float64](nil), net.Presses...)
	out.Moves = append([]scenario.MoveOf[float64](nil), net.Moves...)
	out.Rolls = append([]scenario.RollOf[float64](nil), net.Rolls...)
	out.Watches = append([]scenario.Watch(nil), net.Watches...)
	return copied{&out}
}

// places changes every place of a network.
func (c copied) places(f func(scenario.Place) scenario.Place) {
	for i := range c.Ties {
		c.Ties[i].From, c.Ties[i].To = f(c.Ties[i].From), f(c.Ties[i].To)
	}
	for i := range c.Plucks {
		c.Plucks[i].At = f(c.Plucks[i].At)
	}
	for i := range c.Pushes {
		c.Pushes[i].At = f(c.Pushes[i].At)
	}
	for i := range c.Rolls {
		c.Rolls[i].From = f(c.Rolls[i].From)
	}
	for i := range c.Watches {
		if !c.Watches[i].Along {
			c.Watches[i].At = f(c.Watches[i].At)
		}
	}
}

// Spliced is the same network with the longest segment of every line cut by a
// bare splice at a share of its length. ok is false where a load or shape along
// that segment alone would have to be cut with it.
func Spliced(net *scenario.Network, share float64) (out *scenario.Network, ok bool) {
	cut := make([]int, len(net.Lines))
	for li := range net.Lines {
		for si, s := range net.Lines[li].Segments {
			if s.Length > net.Lines[li].Segments[cut[li]].Length {
				cut[li] = si
			}
		}
	}
	c := clone(net)
	span := func(s *scenario.SpanOf) {
		switch {
		case s.Segment == cut[s.Line]:
			ok = false
		case s.Segment > cut[s.Line]:
			s.Segment++
		}
	}
	ok = true
	for i := range c.Starts {
		span(&c.Starts[i].Along)
	}
	for i := range c.Presses {
		span(&c.Presses[i].Along)
	}
	for i := range c.Watches {
		if c.Watches[i].Along {
			span(&c.Watches[i].Span)
		}
	}
	if !ok {
		return nil, false
	}
	c.places(func(p scenario.Place) scenario.Place {
		at := cut[p.Line]
		length := net.Lines[p.Line].Segments[at].Length
		switch {
		case p.Node > at:
			p.Node++
		case p.Node >= 0:
		case p.Segment > at || p.Segment == at && p.Offset > share*length:
			if p.Segment == at {
				p.Offset -= share * length
			}
			p.Segment++
		case p.Segment == at && p.Offset == share*length:
			p.Node = at + 1
		}
		return p
	})
	for i := range c.Moves {
		if c.Moves[i].Node > cut[c.Moves[i].Line] {
			c.Moves[i].Node++
		}
	}
	for li := range c.Lines {
		l := &c.Lines[li]
		at := cut[li]
		first, second := l.Segments[at], l.Segments[at]
		first.Length *= share
		second.Length -= first.Length
		second.Name += "x"
		l.Segments = append(l.Segments[:at:at], append([]scenario.Segment{first, second}, net.Lines[li].Segments[at+1:]...)...)
		nodes := append([]scenario.Node(nil), c.Lines[li].Nodes[:at+1]...)
		nodes = append(nodes, scenario.Node{Kind: scenario.Splice})
		l.Nodes = append(nodes, c.Lines[li].Nodes[at+1:]...)
	}
	return c.Network, true
}

// Rescaled is the same network in other units of length, time and mass: every
// number is what it would be if the metre, second and kilogram were divided by
// the factors given. Records scale with it: a displacement by length.
func Rescaled(net *scenario.Network, length, time, mass float64) *scenario.Network {
	c := clone(net)
	force := mass * length / time / time
	for li := range c.Lines {
		l := &c.Lines[li]
		for i := range l.Segments {
			s := &l.Segments[i]
			s.Length *= length
			s.MassPerLength *= mass / length
			s.Tension *= force
			s.Axial *= force
			s.Viscous *= mass / time / length
			s.TensionRise *= force / length
			s.Bending *= force * length * length
			s.Internal *= time
			if s.Law != nil {
				l := rescaledLaw(s.Law, length, time, force, force/length)
				s.Law = &l
			}
		}
		for i := range l.Nodes {
			n := &l.Nodes[i]
			n.Mass *= mass
			n.Spring *= force / length
			n.Rotary *= force * length
			n.Inertia *= mass * length * length
			n.Laws = append([]scenario.LawOf[float64](nil), n.Laws...)
			for k := range n.Laws {
				n.Laws[k] = rescaledLaw(&n.Laws[k], length, time, force, force)
			}
			for k := range n.Dashpots {
				n.Dashpots[k].C *= mass / time
				n.Dashpots[k].Through *= force / length
			}
			for k := range n.Tuned {
				td := &n.Tuned[k]
				td.Mass, td.Spring, td.Dashpot = td.Mass*mass, td.Spring*force/length, td.Dashpot*mass/time
			}
		}
	}
	for i := range c.Ties {
		t := &c.Ties[i]
		t.Spring, t.Dashpot, t.Mass = t.Spring*force/length, t.Dashpot*mass/time, t.Mass*mass
	}
	c.places(func(p scenario.Place) scenario.Place { p.Offset *= length; return p })
	program := func(p formula.Program, by float64) formula.Program {
		p = substitute(p, formula.ArgT, formula.Div(formula.Arg(formula.ArgT), formula.Const(time)))
		p = substitute(p, formula.ArgX, formula.Div(formula.Arg(formula.ArgX), formula.Const(length)))
		return formula.Mul(formula.Const(by), p)
	}
	history := func(h scenario.History, by float64) scenario.History {
		out := scenario.History{Value: program(h.Value, by)}
		for _, b := range h.Breaks {
			out.Breaks = append(out.Breaks, b*time)
		}
		return out
	}
	for i := range c.Plucks {
		p := &c.Plucks[i]
		p.Length, p.Force, p.Until = p.Length*length, p.Force*force, p.Until*time
	}
	for i := range c.Starts {
		by := length
		if c.Starts[i].Velocity {
			by = length / time
		}
		c.Starts[i].Shape = program(c.Starts[i].Shape, by)
	}
	for i := range c.Pushes {
		c.Pushes[i].Force = history(c.Pushes[i].Force, force)
	}
	for i := range c.Presses {
		c.Presses[i].Force = history(c.Presses[i].Force, force/length)
	}
	for i := range c.Moves {
		c.Moves[i].Motion = history(c.Moves[i].Motion, length/math.Pow(time, float64(c.Moves[i].Kind)))
	}
	for i := range c.Rolls {
		r := &c.Rolls[i]
		r.Speed, r.Force, r.Starting = r.Speed*length/time, r.Force*force, r.Starting*time
	}
	for i := range c.Watches {
		c.Watches[i].Mass *= mass
	}
	c.Run.For *= time
	c.Run.Every *= time
	return c.Network
}

// rescaledLaw is a law in other units; out is the unit of its force, or of its
// force per length. States keep their own units: what they are fed is turned back.
func rescaledLaw(l *scenario.LawOf[float64], length, time, force, out float64) scenario.LawOf[float64] {
	n := *l
	if f := l.Friction; f != nil {
		n.Friction = &scenario.FrictionOf[float64]{Force: f.Force * force, Bracket: f.Bracket, Through: f.Through * force / length}
	}
	if s := l.Stop; s != nil {
		n.Stop = &scenario.StopOf[float64]{Gap: s.Gap * length, Spring: s.Spring * force / length, Up: s.Up, Down: s.Down}
	}
	if w := l.Written; w != nil {
		old := func(p formula.Program) formula.Program {
			for arg, by := range map[int]float64{formula.ArgT: time, formula.ArgX: length, formula.ArgU: length, formula.ArgV: length / time} {
				p = substitute(p, arg, formula.Div(formula.Arg(arg), formula.Const(by)))
			}
			return p
		}
		n.Written = &scenario.WrittenOf[float64]{Force: formula.Mul(formula.Const(out), old(w.Force)), Starts: w.Starts}
		for _, r := range w.Rates {
			n.Written.Rates = append(n.Written.Rates, formula.Mul(formula.Const(1/time), old(r)))
		}
	}
	return n
}
