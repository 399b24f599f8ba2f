package mesh

import (
	"fmt"

	"github.com/tautspan/tautspan/engine/scenario"
)

// fit adds to a node what stands there.
func (b *builder) fit(n *Node, from *scenario.Node) {
	n.Fixed = n.Fixed || from.Fixed
	n.Clamped, n.Rotary = n.Clamped || from.Clamped, n.Rotary+from.Rotary
	n.Hinge, n.Inertia = n.Hinge || from.Hinge, n.Inertia+from.Inertia
	n.Mass += from.Mass
	if sum := n.Spring + from.Spring; sum > 0 { // side by side: stiffnesses and what they lose add up
		n.SpringLoss = (n.Spring*n.SpringLoss + from.Spring*from.SpringLoss) / sum
		n.Spring = sum
	}
	for _, d := range from.Dashpots {
		if d.Bracket {
			n.Brackets = append(n.Brackets, Maxwell{K: d.Through, C: d.C})
		} else {
			n.Dashpot += d.C
		}
	}
	for i := range from.Laws {
		if w := from.Laws[i].Written; w != nil {
			if k, c, linear := linearLaw(w); linear && k == 0 {
				n.Dashpot += c
				continue
			}
		}
		n.Laws = append(n.Laws, *b.law(&from.Laws[i]))
	}
	for _, bench := range from.Benches {
		z := &Bench{Name: bench.Name, Frequency: bench.Frequency}
		for i := range bench.Real {
			z.Impedance = append(z.Impedance, complex(bench.Real[i], bench.Imag[i]))
		}
		n.Benches = append(n.Benches, z)
	}
	n.Fitting = n.Fitting || from.Fixed || from.Mass > 0 || from.Spring > 0 || len(from.Dashpots) > 0 || len(from.Tuned) > 0 ||
		len(from.Laws) > 0 || len(from.Benches) > 0
}

func (b *builder) law(l *scenario.LawOf[float64]) *Law {
	out := &Law{Name: l.Name}
	switch {
	case l.Friction != nil:
		out.Friction = &Friction{Force: l.Friction.Force, Through: l.Friction.Through}
	case l.Stop != nil:
		out.Stop = &Stop{Gap: l.Stop.Gap, Spring: l.Stop.Spring, Up: l.Stop.Up, Down: l.Stop.Down}
	case l.Followed != nil:
		out.Written = &Written{Start: l.Followed.Start}
	default:
		out.Written = &Written{Force: l.Written.Force, Starts: l.Written.Starts, Rates: l.Written.Rates}
	}
	return out
}

// hang adds the tuned masses of a node.
func (b *builder) hang(at int, from *scenario.Node) {
	for j, td := range from.Tuned {
		name := fmt.Sprintf("%s.tuned%d", b.m.Nodes[at].Name, j+1)
		b.m.Links = append(b.m.Links, Link{Name: name, A: at, B: len(b.m.Nodes), Spring: td.Spring, Dashpot: td.Dashpot, SpringLoss: td.Loss})
		b.m.Nodes = append(b.m.Nodes, Node{Name: name, Line: -1, X: b.m.Nodes[at].X, Mass: td.Mass})
	}
}

// rows goes through the joints that `every` made, after naming their nodes.
func (b *builder) rows(do func(node int, row scenario.Row)) {
	for i := range b.net.Lines {
		line := &b.net.Lines[i]
		start := 0.0
		for k := range line.Segments {
			s := &line.Segments[k]
			for at, row := range scenario.Rows(s) {
				id := b.nodeAt[i][b.cutIndex(i, start+row.At)]
				if n := &b.m.Nodes[id]; n.Name == "line."+line.Name {
					n.Name = fmt.Sprintf("line.%s.%s.%d", line.Name, s.Name, at+1)
				}
				do(id, row)
			}
			start += s.Length
		}
	}
}

// stretches lets the tension of the lines that ask for it grow with amplitude.
func (b *builder) stretches() {
	for i := range b.net.Lines {
		line := &b.net.Lines[i]
		if !line.Stretch || line.Weighted {
			continue
		}
		give := 0.0
		for _, s := range line.Segments {
			give += s.Length / s.Axial
		}
		b.m.Lines[i].Stretch = &Stretch{Stiffness: 1 / (give + ends(line))}
	}
}

// ends is what the supports of a line give along it, m/N.
func ends(line *scenario.Line) float64 {
	give := 0.0
	for _, n := range []*scenario.Node{&line.Nodes[0], &line.Nodes[len(line.Nodes)-1]} {
		if n.AxialGive > 0 {
			give += 1 / n.AxialGive
		}
	}
	return give
}
