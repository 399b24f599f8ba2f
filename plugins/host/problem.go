package host

import (
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/plugins/wire"
)

// markWords are the wire's words for marks.
var markWords = map[mesh.MarkKind]string{mesh.MarkWatch: "watch", mesh.MarkKink: "kink", mesh.MarkLoad: "load", mesh.MarkEdge: "edge"}

// featureWords are the wire's words for what goes beyond taut strings. A foreign
// solver meets only those of Carried; the host refuses the others for it.
var featureWords = []struct {
	feature mesh.Features
	word    string
}{
	{mesh.Bending, "bending"},
	{mesh.VaryingTension, "varying-tension"},
	{mesh.Sagging, "sag"},
	{mesh.InternalLoss, "internal-loss"},
	{mesh.TurningJoint, "turning-joint"},
}

// carried are the features that the protocol can say.
const carried = mesh.Bending | mesh.VaryingTension | mesh.Sagging | mesh.InternalLoss | mesh.TurningJoint

// toWire writes a mesh for the protocol.
func toWire(m *mesh.Mesh) *wire.Problem {
	rows, stride := m.FieldRows()
	w := &wire.Problem{
		Every: m.Timing.Every, Rows: uint64(m.Timing.Rows), FieldRows: uint64(rows), FieldStride: uint64(stride),
		Jump: int32(m.Jump), Band: m.Band,
	}
	has := m.Features()
	for _, f := range featureWords {
		if has&f.feature != 0 {
			w.Features = append(w.Features, f.word)
		}
	}
	for i := range m.Nodes {
		w.Nodes = append(w.Nodes, nodeToWire(&m.Nodes[i]))
	}
	for i := range m.Pieces {
		p := &m.Pieces[i]
		q := &wire.Piece{
			Line: int32(p.Line), From: int32(p.From), To: int32(p.To), X0: p.X0, Length: p.Length, MassPerLength: p.MassPerLength,
			Tension: p.Tension, TensionRise: p.TensionRise, Viscous: p.Viscous, Bending: p.Bending, Internal: p.Internal,
			HasStart: p.Start != nil, HasStartRate: p.StartRate != nil,
		}
		for _, mark := range p.Marks {
			q.Marks = append(q.Marks, &wire.Mark{Kind: markWords[mark.Kind], At: mark.At})
		}
		w.Pieces = append(w.Pieces, q)
	}
	for _, l := range m.Links {
		w.Links = append(w.Links, &wire.Link{Name: l.Name, A: int32(l.A), B: int32(l.B), Spring: l.Spring, Dashpot: l.Dashpot})
	}
	loadsToWire(w, m)
	for i := range m.Lines {
		l := &m.Lines[i]
		line := &wire.Line{Name: l.Name, Length: l.Length}
		for _, p := range l.Pieces {
			line.Pieces = append(line.Pieces, int32(p))
		}
		if l.Sag != nil {
			line.SagStiffness, line.SagPieces, line.SagNodes = l.Sag.Stiffness, l.Sag.Pieces, map[int32]float64{}
			for n, v := range l.Sag.Nodes {
				line.SagNodes[int32(n)] = v
			}
		}
		w.Lines = append(w.Lines, line)
	}
	for i := range m.Channels {
		c := &m.Channels[i]
		ch := &wire.Channel{Watch: c.Watch, Quantity: c.Quantity.String(), X: c.X, Line: int32(c.Line), Along: c.Along, Means: int32(c.Means)}
		for _, s := range c.Spots {
			ch.Spots = append(ch.Spots, spotToWire(s))
		}
		w.Channels = append(w.Channels, ch)
	}
	return w
}

func nodeToWire(n *mesh.Node) *wire.Node {
	out := &wire.Node{
		Name: n.Name, Line: int32(n.Line), X: n.X, Fixed: n.Fixed, Mass: n.Mass, Spring: n.Spring, Dashpot: n.Dashpot,
		Absorbing: n.Absorbing, Fitting: n.Fitting, Support: n.Support, Start: n.Start, StartRate: n.StartRate,
		Clamped: n.Clamped, Rotary: n.Rotary, Hinge: n.Hinge, Inertia: n.Inertia,
	}
	if n.Motion != nil {
		out.Moved, out.Breaks = true, n.Motion.Breaks
	}
	for _, b := range n.Brackets {
		out.Brackets = append(out.Brackets, &wire.Bracket{Spring: b.K, Dashpot: b.C, Start: b.Start})
	}
	return out
}

func loadsToWire(w *wire.Problem, m *mesh.Mesh) {
	for i := range m.Pushes {
		p := &m.Pushes[i]
		w.Pushes = append(w.Pushes, &wire.Push{Name: p.Name, At: spotToWire(p.At), Breaks: p.Force.Breaks})
	}
	for i := range m.Presses {
		p := &m.Presses[i]
		press := &wire.Press{Name: p.Name, Breaks: p.Force.Breaks}
		for _, q := range p.Parts {
			press.Parts = append(press.Parts, &wire.Part{Piece: int32(q.Piece), From: q.From, To: q.To, Origin: q.Origin})
		}
		w.Presses = append(w.Presses, press)
	}
	for _, r := range m.Rolls {
		w.Rolls = append(w.Rolls, &wire.Roll{Name: r.Name, Line: int32(r.Line), Speed: r.Speed, Force: r.Force, From: r.From, Starting: r.Starting})
	}
}

func spotToWire(s mesh.Spot) *wire.Spot {
	return &wire.Spot{Node: int32(s.Node), Piece: int32(s.Piece), At: s.At}
}
