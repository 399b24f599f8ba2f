package mesh

import (
	"math"

	"github.com/tautspan/tautspan/engine/statics"
)

// gravity is standard gravity, m/s^2, exact by definition (CGPM 1901).
const gravity = 9.80665

// sags gives the lines that ask for it their shallow-cable term. H is the mean
// tension, Le = L (1 + (w L/H)^2/8) with the line's whole weight in place of
// w L, shared by the segments in proportion to their lengths.
func (b *builder) sags() {
	for i := range b.net.Lines {
		line := &b.net.Lines[i]
		if !line.Sag {
			continue
		}
		h, cos := statics.MeanTension(line), math.Cos(line.Incline)
		ml := &b.m.Lines[i]
		sag := &Sag{Nodes: map[int]float64{}}
		weight := 0.0
		for _, k := range ml.Pieces {
			p := &b.m.Pieces[k]
			w := p.MassPerLength * gravity * cos / h
			sag.Pieces = append(sag.Pieces, w)
			weight += w * p.Length
			for _, end := range []int{p.From, p.To} {
				if n := &b.m.Nodes[end]; n.Mass > 0 && !n.Fixed && !n.Support {
					sag.Nodes[end] = n.Mass * gravity * cos / h
				}
			}
		}
		for _, w := range sag.Nodes {
			weight += w
		}
		give := 0.0
		for _, s := range line.Segments {
			give += s.Length / s.Axial * (1 + weight*weight/8)
		}
		sag.Stiffness = 1 / (give + ends(line))
		ml.Sag = sag
	}
}
