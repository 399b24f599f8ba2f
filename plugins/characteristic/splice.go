package characteristic

import (
	"math"
	"slices"

	"github.com/tautspan/tautspan/engine/mesh"
)

// unspliced is the mesh without stubs that a bare splice has cut off a piece of
// the same stuff: such a cut changes nothing, and its short travel time would rule
// the run. The mesh itself where there is none.
func unspliced(m *mesh.Mesh) *mesh.Mesh {
	for range m.Pieces {
		k, found := stub(m)
		if !found {
			break
		}
		a, b, ok := mate(m, k)
		if !ok {
			break
		}
		m = joined(m, a, b)
	}
	return m
}

// mate finds the neighbour that a stub may be made one with: both in walking order.
func mate(m *mesh.Mesh, stub int) (a, b int, ok bool) {
	s := &m.Pieces[stub]
	for k := range m.Pieces {
		p := &m.Pieces[k]
		if k == stub || p.Line != s.Line || p.Tension != s.Tension || p.MassPerLength != s.MassPerLength || p.Viscous != s.Viscous ||
			p.TensionRise != 0 || s.TensionRise != 0 || p.Bending != s.Bending {
			continue
		}
		switch {
		case p.To == s.From && bare(m, p.To):
			return k, stub, true
		case s.To == p.From && bare(m, s.To):
			return stub, k, true
		}
	}
	return 0, 0, false
}

// bare tells whether nothing but two pieces meets at a node.
func bare(m *mesh.Mesh, node int) bool {
	n := &m.Nodes[node]
	if n.Fixed || n.Support || n.Fitting || n.Motion != nil || n.Mass > 0 || n.Spring > 0 || n.Dashpot > 0 ||
		len(n.Brackets) > 0 || len(n.Laws) > 0 || len(m.Attached()[node]) != 2 {
		return false
	}
	for i := range m.Links {
		if m.Links[i].A == node || m.Links[i].B == node {
			return false
		}
	}
	for i := range m.Lines {
		if m.Lines[i].Sag != nil && m.Lines[i].Sag.Nodes[node] != 0 {
			return false
		}
	}
	return true
}

// joined is a copy of the mesh in which piece b, which follows a, is part of a.
func joined(m *mesh.Mesh, a, b int) *mesh.Mesh {
	out := *m
	pa, pb := m.Pieces[a], m.Pieces[b]
	middle, cut := pa.To, pa.Length
	one := pa
	one.To, one.Length = pb.To, pa.Length+pb.Length
	one.Start, one.StartRate = chained(pa.Start, pb.Start, cut), chained(pa.StartRate, pb.StartRate, cut)
	one.Marks = slices.Clone(pa.Marks)
	if pa.Start != nil || pb.Start != nil || pa.StartRate != nil || pb.StartRate != nil {
		one.Marks = append(one.Marks, mesh.Mark{Kind: mesh.MarkKink, At: cut})
	}
	for _, k := range pb.Marks {
		k.At += cut
		one.Marks = append(one.Marks, k)
	}
	out.Pieces = slices.Clone(m.Pieces)
	out.Pieces[a] = one
	out.Pieces = slices.Delete(out.Pieces, b, b+1)
	number := func(k int) int {
		if k == b {
			k = a
		}
		if k > b {
			k--
		}
		return k
	}
	shift := func(k int) float64 {
		if k == b {
			return cut
		}
		return 0
	}
	spot := func(s mesh.Spot) mesh.Spot {
		switch {
		case s.Node == middle:
			return mesh.Spot{Node: -1, Piece: number(a), At: cut}
		case s.Node < 0:
			return mesh.Spot{Node: -1, Piece: number(s.Piece), At: s.At + shift(s.Piece)}
		}
		return s
	}
	// Nothing is left at the node; held, it takes no part.
	out.Nodes = slices.Clone(m.Nodes)
	out.Nodes[middle].Fixed = true
	out.Lines = slices.Clone(m.Lines)
	for i := range out.Lines {
		l := &out.Lines[i]
		at := slices.Index(l.Pieces, b)
		l.Pieces = slices.Clone(l.Pieces)
		if at >= 0 {
			l.Pieces = slices.Delete(l.Pieces, at, at+1)
			if l.Sag != nil {
				sag := *l.Sag
				sag.Pieces = slices.Delete(slices.Clone(sag.Pieces), at, at+1)
				l.Sag = &sag
			}
		}
		for k := range l.Pieces {
			l.Pieces[k] = number(l.Pieces[k])
		}
	}
	out.Pushes = slices.Clone(m.Pushes)
	for i := range out.Pushes {
		out.Pushes[i].At = spot(out.Pushes[i].At)
	}
	out.Presses = slices.Clone(m.Presses)
	for i := range out.Presses {
		parts := slices.Clone(out.Presses[i].Parts)
		for k := range parts {
			by := shift(parts[k].Piece)
			parts[k] = mesh.Part{Piece: number(parts[k].Piece), From: parts[k].From + by, To: parts[k].To + by, Origin: parts[k].Origin - by}
		}
		out.Presses[i].Parts = parts
	}
	out.Channels = slices.Clone(m.Channels)
	for i := range out.Channels {
		spots := slices.Clone(out.Channels[i].Spots)
		for k := range spots {
			spots[k] = spot(spots[k])
		}
		out.Channels[i].Spots = spots
	}
	return &out
}

// chained is a shape on two pieces, one after the other; nil where both are.
func chained(a, b func(float64) float64, cut float64) func(float64) float64 {
	if a == nil && b == nil {
		return nil
	}
	return func(s float64) float64 {
		switch {
		case s < cut && a != nil:
			return a(s)
		case s >= cut && b != nil:
			return b(math.Max(0, s-cut))
		}
		return 0
	}
}
