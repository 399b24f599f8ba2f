package author

import "github.com/tautspan/tautspan/plugins/wire"

// FromWire makes a problem of what crossed the wire.
func FromWire(w *wire.Problem, source Source) *Problem {
	p := &Problem{
		Every: w.Every, Rows: int(w.Rows), FieldRows: int(w.FieldRows), FieldStride: int(w.FieldStride),
		Jump: int(w.Jump), Band: w.Band, Features: w.Features, source: source,
	}
	for _, n := range w.Nodes {
		node := Node{
			Name: n.Name, Line: int(n.Line), X: n.X, Fixed: n.Fixed, Moved: n.Moved, Breaks: n.Breaks,
			Mass: n.Mass, Spring: n.Spring, Dashpot: n.Dashpot, Absorbing: n.Absorbing, Fitting: n.Fitting, Support: n.Support,
			Start: n.Start, StartRate: n.StartRate, Clamped: n.Clamped, Rotary: n.Rotary, Hinge: n.Hinge, Inertia: n.Inertia,
		}
		for _, b := range n.Brackets {
			node.Brackets = append(node.Brackets, Bracket{Spring: b.Spring, Dashpot: b.Dashpot, Start: b.Start})
		}
		p.Nodes = append(p.Nodes, node)
	}
	for _, q := range w.Pieces {
		piece := Piece{
			Line: int(q.Line), From: int(q.From), To: int(q.To), X0: q.X0, Length: q.Length,
			MassPerLength: q.MassPerLength, Tension: q.Tension, TensionRise: q.TensionRise, Viscous: q.Viscous,
			Bending: q.Bending, Internal: q.Internal, HasStart: q.HasStart, HasStartRate: q.HasStartRate,
		}
		for _, m := range q.Marks {
			piece.Marks = append(piece.Marks, Mark{Kind: m.Kind, At: m.At})
		}
		p.Pieces = append(p.Pieces, piece)
	}
	for _, l := range w.Links {
		p.Links = append(p.Links, Link{Name: l.Name, A: int(l.A), B: int(l.B), Spring: l.Spring, Dashpot: l.Dashpot})
	}
	loads(p, w)
	for _, l := range w.Lines {
		line := Line{Name: l.Name, Pieces: ints(l.Pieces), Length: l.Length, SagStiffness: l.SagStiffness, SagPieces: l.SagPieces}
		if len(l.SagNodes) > 0 {
			line.SagNodes = map[int]float64{}
			for n, v := range l.SagNodes {
				line.SagNodes[int(n)] = v
			}
		}
		p.Lines = append(p.Lines, line)
	}
	for _, c := range w.Channels {
		ch := Channel{Watch: c.Watch, Quantity: c.Quantity, X: c.X, Line: int(c.Line), Along: c.Along, Means: int(c.Means)}
		for _, s := range c.Spots {
			ch.Spots = append(ch.Spots, spot(s))
		}
		p.Channels = append(p.Channels, ch)
	}
	return p
}

func loads(p *Problem, w *wire.Problem) {
	for _, f := range w.Pushes {
		p.Pushes = append(p.Pushes, Push{Name: f.Name, At: spot(f.At), Breaks: f.Breaks})
	}
	for _, f := range w.Presses {
		press := Press{Name: f.Name, Breaks: f.Breaks}
		for _, q := range f.Parts {
			press.Parts = append(press.Parts, Part{Piece: int(q.Piece), From: q.From, To: q.To, Origin: q.Origin})
		}
		p.Presses = append(p.Presses, press)
	}
	for _, r := range w.Rolls {
		p.Rolls = append(p.Rolls, Roll{Name: r.Name, Line: int(r.Line), Speed: r.Speed, Force: r.Force, From: r.From, Starting: r.Starting})
	}
}

func spot(s *wire.Spot) Spot {
	if s == nil {
		return Spot{Node: -1, Piece: -1}
	}
	return Spot{Node: int(s.Node), Piece: int(s.Piece), At: s.At}
}

func ints(list []int32) []int {
	out := make([]int, len(list))
	for i, v := range list {
		out[i] = int(v)
	}
	return out
}
