package mesh

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/statics"
)

// Build turns a bound scenario into its mesh. It fails with a
// *scenario.PathError where the scenario has no static shape to start from.
func Build(net *scenario.Network) (*Mesh, error) {
	rest, err := statics.Hold(net)
	if err != nil {
		return nil, err
	}
	b := &builder{net: net, rest: rest, m: &Mesh{Timing: timing(&net.Run), Source: net}}
	b.cut()
	b.fittings()
	b.links()
	b.sags()
	b.stretches()
	b.starts()
	if err := b.loads(); err != nil {
		return nil, err
	}
	b.watches()
	for i := range b.m.Pieces {
		p := &b.m.Pieces[i]
		sort.SliceStable(p.Marks, func(a, c int) bool { return p.Marks[a].At < p.Marks[c].At })
	}
	smoothness := b.smoothness()
	if b.m.Features()&(JointLaw|SpreadLaw|SlackTie) != 0 {
		smoothness = math.Min(smoothness, 2) // the force is continuous, its rate is not
	}
	b.m.Jump = int(math.Ceil(smoothness))
	b.m.Band = b.band()
	for i := range b.m.Channels {
		c := &b.m.Channels[i]
		c.Means = means(c.Quantity, smoothness, b.stiffLine(c.Line))
	}
	return b.m, nil
}

// timing is the output grid: whole steps that fit into the duration.
func timing(r *scenario.RunOf[float64]) Timing {
	return Timing{Every: r.Every, Rows: int(math.Floor(r.For/r.Every*(1+1e-12))) + 1}
}

// means is how often a record must be averaged over one output interval to be
// continuous, when the displacement grows anew by the given power of time. A
// slope counts as a time derivative on a string, as half of one on a stiff line;
// there a moment is one and a shear force one and a half.
func means(q scenario.Quantity, smoothness float64, stiff bool) int {
	order := 0.0
	switch q {
	case scenario.Velocity:
		order = 1
	case scenario.Slope, scenario.Force:
		order = 1
		if stiff {
			order = map[scenario.Quantity]float64{scenario.Slope: 0.5, scenario.Force: 1.5}[q]
		}
	case scenario.Moment:
		if stiff {
			order = 1
		}
	case scenario.Acceleration:
		order = 2
	case scenario.Tension:
		return 0
	}
	return min(max(0, int(math.Floor(order-smoothness))+1), 2)
}

// stiffLine tells whether a line has bending stiffness somewhere.
func (b *builder) stiffLine(line int) bool {
	for _, s := range b.net.Lines[line].Segments {
		if s.Bending > 0 {
			return true
		}
	}
	return false
}

type builder struct {
	net    *scenario.Network
	rest   *statics.Rest
	m      *Mesh
	cuts   [][]float64 // of each line: places where pieces meet, m along it, increasing
	nodeAt [][]int     // node of each cut
}

// inner is where a named node, tie end or sensor mass cuts a line.
func (b *builder) cut() {
	net := b.net
	b.cuts = make([][]float64, len(net.Lines))
	ends := make([][]float64, len(net.Lines)) // segment ends, exact sums in walking order
	for i := range net.Lines {
		x := 0.0
		ends[i] = append(ends[i], 0)
		for _, s := range net.Lines[i].Segments {
			x += s.Length
			ends[i] = append(ends[i], x)
		}
		b.cuts[i] = append(b.cuts[i], ends[i]...)
	}
	for i := range net.Lines {
		for k := range net.Lines[i].Segments {
			for _, row := range scenario.Rows(&net.Lines[i].Segments[k]) {
				b.cuts[i] = append(b.cuts[i], ends[i][k]+row.At)
			}
		}
	}
	add := func(p scenario.Place) {
		if p.Node < 0 {
			b.cuts[p.Line] = append(b.cuts[p.Line], net.Travel(p))
		}
	}
	for _, tie := range net.Ties {
		add(tie.From)
		add(tie.To)
	}
	for _, w := range net.Watches {
		if !w.Along && w.Mass > 0 {
			add(w.At)
		}
	}
	b.nodeAt = make([][]int, len(net.Lines))
	for i := range net.Lines {
		sort.Float64s(b.cuts[i])
		kept := b.cuts[i][:1]
		for _, x := range b.cuts[i][1:] {
			if x > kept[len(kept)-1] {
				kept = append(kept, x)
			}
		}
		b.cuts[i] = kept
		b.pieces(i, ends[i])
	}
}

func (b *builder) pieces(line int, ends []float64) {
	l := &b.net.Lines[line]
	meshLine := Line{Name: l.Name, Length: ends[len(ends)-1]}
	seg := 0
	for k, x := range b.cuts[line] {
		b.nodeAt[line] = append(b.nodeAt[line], len(b.m.Nodes))
		b.m.Nodes = append(b.m.Nodes, Node{Name: "line." + l.Name, Line: line, X: x})
		if k == 0 {
			continue
		}
		for x > ends[seg+1] {
			seg++
		}
		s := &l.Segments[seg]
		from := b.cuts[line][k-1]
		meshLine.Pieces = append(meshLine.Pieces, len(b.m.Pieces))
		p := Piece{
			Line: line, Segment: seg, From: len(b.m.Nodes) - 2, To: len(b.m.Nodes) - 1,
			X0: from, S0: from - ends[seg], Length: x - from,
			MassPerLength: s.MassPerLength, Tension: s.Tension + s.TensionRise*(from-ends[seg]), Viscous: s.Viscous,
			TensionRise: s.TensionRise, Bending: s.Bending, Internal: s.Internal,
			TensionLoss: s.TensionLoss, BendingLoss: s.BendingLoss,
		}
		if s.Law != nil {
			p.Law = b.law(s.Law)
			if s.Law.Written != nil {
				if k, c, linear := linearLaw(s.Law.Written); linear && k == 0 {
					p.Law, p.Viscous = nil, p.Viscous+c
				}
			}
		}
		if from == ends[seg] && x == ends[seg+1] {
			p.Length = s.Length // as given, not as the difference of two sums
		}
		b.m.Pieces = append(b.m.Pieces, p)
	}
	b.m.Lines = append(b.m.Lines, meshLine)
}

// cutIndex is the index of the cut at x.
func (b *builder) cutIndex(line int, x float64) int { return sort.SearchFloat64s(b.cuts[line], x) }

// node is the mesh node at a place that is cut.
func (b *builder) node(p scenario.Place) int {
	return b.nodeAt[p.Line][b.cutIndex(p.Line, b.net.Travel(p))]
}

// spot is the mesh place of a scenario place, which may or may not be cut.
func (b *builder) spot(p scenario.Place) Spot { return b.spotAt(p.Line, b.net.Travel(p)) }

func (b *builder) spotAt(line int, x float64) Spot {
	k := b.cutIndex(line, x)
	cuts := b.cuts[line]
	if k < len(cuts) && cuts[k] == x {
		return Spot{Node: b.nodeAt[line][k], Piece: -1}
	}
	k = min(max(k, 1), len(cuts)-1)
	return Spot{Node: -1, Piece: b.m.Lines[line].Pieces[k-1], At: x - cuts[k-1]}
}

func (b *builder) fittings() {
	for i := range b.net.Lines {
		line := &b.net.Lines[i]
		for k := range line.Nodes {
			from := &line.Nodes[k]
			id := b.node(scenario.Place{Line: i, Node: k})
			n := &b.m.Nodes[id]
			n.Support = from.Kind == scenario.Support
			n.Name = "line." + line.Name + "." + from.Name
			if from.Name == "" {
				n.Name = "line." + line.Name + "." + line.Segments[k-1].Name + "|" + line.Segments[k].Name
			}
			b.fit(n, from)
			n.Fitting = n.Fitting || n.Support
			if from.Absorbing {
				n.Absorbing = true
				for _, p := range b.m.Pieces {
					if p.From == id || p.To == id {
						n.Dashpot += p.Impedance()
					}
				}
			}
		}
	}
	b.rows(func(id int, row scenario.Row) { b.fit(&b.m.Nodes[id], row.Joint) })
	for _, w := range b.net.Watches {
		if !w.Along && w.Mass > 0 {
			n := &b.m.Nodes[b.node(w.At)]
			n.Mass += w.Mass
			if n.Name == "line."+b.net.Lines[w.At.Line].Name {
				n.Name += "." + w.Name
			}
		}
	}
}

func (b *builder) links() {
	for i := range b.net.Lines {
		line := &b.net.Lines[i]
		for k := range line.Nodes {
			at := b.node(scenario.Place{Line: i, Node: k})
			b.hang(at, &line.Nodes[k])
		}
	}
	b.rows(func(id int, row scenario.Row) { b.hang(id, row.Joint) })
	for _, tie := range b.net.Ties {
		ends := [2]int{b.node(tie.From), b.node(tie.To)}
		for k, place := range []scenario.Place{tie.From, tie.To} {
			n := &b.m.Nodes[ends[k]]
			n.Mass += tie.Mass / 2
			n.Fitting = true
			if n.Name == "line."+b.net.Lines[place.Line].Name {
				n.Name += "." + tie.Name
			}
		}
		b.m.Links = append(b.m.Links, Link{Name: "tie." + tie.Name, A: ends[0], B: ends[1], Spring: tie.Spring, Dashpot: tie.Dashpot, SpringLoss: tie.SpringLoss, Through: tie.Through, Slack: tie.Slack})
	}
}
