package mesh

import (
	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// starts sets the displacement and velocity at t = 0 of every piece and node:
// the static shape of the plucks plus the shapes given along stretches.
func (b *builder) starts() {
	for i := range b.m.Pieces {
		p := &b.m.Pieces[i]
		p.Start = b.profile(p, false, true)
		p.Given = b.profile(p, false, false)
		p.StartRate = b.profile(p, true, false)
	}
	for i, pieces := range b.m.Attached() {
		n := &b.m.Nodes[i]
		if n.Fixed || len(pieces) == 0 {
			continue
		}
		// Where pieces disagree (a stretch with a start velocity beside one at
		// rest) the node takes the mean by impedance, as a wave would have it.
		sum := 0.0
		for _, a := range pieces {
			p := &b.m.Pieces[a.Piece]
			at := 0.0
			if a.End {
				at = p.Length
			}
			z := max(p.Impedance(), 1e-300) // a rope that hangs free has none at its end
			sum += z
			n.Start += z * value(p.Start, at)
			n.StartRate += z * value(p.StartRate, at)
		}
		n.Start /= sum
		n.StartRate /= sum
	}
	for _, l := range b.m.Links {
		if hung := &b.m.Nodes[l.B]; hung.Line < 0 {
			hung.Start = b.m.Nodes[l.A].Start
			hung.StartRate = b.m.Nodes[l.A].StartRate
		}
	}
	for i := range b.m.Nodes {
		n := &b.m.Nodes[i]
		for k := range n.Brackets {
			n.Brackets[k].Start = n.Start
		}
	}
	b.kinks()
}

func value(f func(float64) float64, at float64) float64 {
	if f == nil {
		return 0
	}
	return f(at)
}

// profile is the start displacement or velocity of a piece as a function of the
// distance from its start, with the static shape or without, nil where it is 0.
func (b *builder) profile(p *Piece, velocity, static bool) func(float64) float64 {
	type shape struct {
		program formula.Program
		origin  float64 // m, the piece's start on the shape's own x axis
	}
	var shapes []shape
	for _, s := range b.net.Starts {
		switch {
		case s.Velocity != velocity || s.Along.Line != p.Line:
		case s.Along.Segment < 0:
			shapes = append(shapes, shape{s.Shape, p.X0})
		case s.Along.Segment == p.Segment:
			shapes = append(shapes, shape{s.Shape, p.S0})
		}
	}
	drawn := static && !b.rest.Flat()
	if !drawn && len(shapes) == 0 {
		return nil
	}
	rest, line, x0 := b.rest, p.Line, p.X0
	return func(at float64) float64 {
		v := 0.0
		if drawn {
			v = rest.Displacement(line, x0+at)
		}
		for _, s := range shapes {
			v += s.program.At(0, s.origin+at)
		}
		return v
	}
}

// kinks marks the places inside pieces where the static shape of a string bends.
// That of a stiff piece is smooth up to its second derivative: only the force that
// held it is told of.
func (b *builder) kinks() {
	for _, p := range b.net.Plucks {
		at, kind := b.spot(p.At), MarkKink
		if b.stiffAt(at) {
			kind = MarkLoad
		}
		b.mark(at, kind)
	}
}

func (b *builder) mark(s Spot, kind MarkKind) {
	if s.Node < 0 {
		p := &b.m.Pieces[s.Piece]
		p.Marks = append(p.Marks, Mark{Kind: kind, At: s.At})
	}
}

// along lists the pieces of a stretch, with the place of each on the stretch's
// own x axis.
func (b *builder) along(s scenario.SpanOf) []Part {
	var parts []Part
	for i := range b.m.Pieces {
		p := &b.m.Pieces[i]
		switch {
		case p.Line != s.Line:
		case s.Segment < 0:
			parts = append(parts, Part{Piece: i, To: p.Length, Origin: p.X0})
		case p.Segment == s.Segment:
			parts = append(parts, Part{Piece: i, To: p.Length, Origin: p.S0})
		}
	}
	return parts
}
