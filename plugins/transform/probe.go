package transform

import (
	"math"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
)

// probe is one watched quantity at one spot: a sum of element states.
type probe struct {
	quantity scenario.Quantity
	terms    []term // empty: nothing to ask (a held place at rest)
	point    int    // of displacement, velocity, acceleration at a node; -1: by terms
	line     int    // of tension
	means    int
	field    bool

	// What is known at t = 0: the static part that goes on, and the value and rate
	// of the rest, per quantity.
	static, begin float64
	u0, v0        float64 // displacement and velocity of the part that is not static
}

// term is one component of the state of an element at its start (-1), its end
// (-2) or an inner probe.
type term struct {
	element, at int
	component   int // of state
	sign        float64
}

// probes prepares all channels, and tells the elements where they are asked.
func (n *network) probes() [][]*probe {
	out := make([][]*probe, len(n.m.Channels))
	for c := range n.m.Channels {
		ch := &n.m.Channels[c]
		for _, spot := range ch.Spots {
			p := &probe{quantity: ch.Quantity, point: -1, line: ch.Line, means: ch.Means, field: ch.Along}
			n.aim(p, spot)
			n.atStart(p, spot)
			out[c] = append(out[c], p)
		}
	}
	return out
}

// component of the state that a quantity reads.
func component(q scenario.Quantity) int {
	switch q {
	case scenario.Slope:
		return 1
	case scenario.Force:
		return 2
	case scenario.Moment:
		return 3
	}
	return 0
}

func (n *network) aim(p *probe, spot mesh.Spot) {
	if p.quantity == scenario.Tension {
		return
	}
	c := component(p.quantity)
	if spot.Node < 0 {
		e := n.elementAt(spot.Piece, spot.At)
		el := &n.elements[e]
		x := math.Max(0, math.Min(el.length, spot.At-el.x0))
		el.probes = append(el.probes, x)
		p.terms = []term{{e, len(el.probes) - 1, c, 1}}
		return
	}
	node := &n.m.Nodes[spot.Node]
	if c == 0 {
		p.point = n.nodeAt[spot.Node]
		return
	}
	before, after := n.around(spot.Node)
	switch {
	case p.quantity == scenario.Force && node.Fitting:
		if after >= 0 {
			p.terms = append(p.terms, term{after, -1, c, 1})
		}
		if before >= 0 {
			p.terms = append(p.terms, term{before, -2, c, -1})
		}
	case after >= 0:
		p.terms = []term{{after, -1, c, 1}}
	case before >= 0:
		p.terms = []term{{before, -2, c, 1}}
	}
}

// around are the elements that end and start at a node, -1 where there is none.
func (n *network) around(node int) (before, after int) {
	before, after = -1, -1
	for k := range n.m.Pieces {
		list := n.segments[k]
		if n.m.Pieces[k].To == node {
			before = list[len(list)-1]
		}
		if n.m.Pieces[k].From == node {
			after = list[0]
		}
	}
	return before, after
}

// atStart works out what the probe shows at t = 0 by differences of order four of
// the start shapes, taken within the element.
func (n *network) atStart(p *probe, spot mesh.Spot) {
	given := func(e *element) func(float64) float64 { return shifted(n.m.Pieces[e.piece].Given, e.x0) }
	static := func(e *element) func(float64) float64 {
		piece := &n.m.Pieces[e.piece]
		if piece.Start == nil {
			return nil
		}
		return func(x float64) float64 {
			v := piece.Start(e.x0 + x)
			if piece.Given != nil {
				v -= piece.Given(e.x0 + x)
			}
			return v
		}
	}
	rate := func(e *element) func(float64) float64 { return shifted(n.m.Pieces[e.piece].StartRate, e.x0) }
	switch {
	case p.quantity == scenario.Tension:
		p.static = n.tensionAt(spot)
		if sag := n.m.Lines[p.line].Sag; sag != nil {
			p.static += n.staticExtra(p.line)
		}
	case p.point >= 0:
		i := n.points[p.point].node
		p.u0, p.v0 = n.given(i), n.m.Nodes[i].StartRate
		if p.quantity == scenario.Displacement {
			p.static = n.m.Nodes[i].Start - p.u0
		}
	default:
		for _, t := range p.terms {
			e := &n.elements[t.element]
			x := 0.0
			if t.at == -2 {
				x = e.length
			} else if t.at >= 0 {
				x = e.probes[t.at]
			}
			p.static += t.sign * n.stateOf(e, static(e), x, t.component)
			p.begin += t.sign * n.stateOf(e, given(e), x, t.component)
			if t.component == 0 {
				p.u0, p.v0 = valueOf(given(e), x), valueOf(rate(e), x)
			}
		}
		if p.quantity == scenario.Velocity || p.quantity == scenario.Acceleration {
			p.static, p.begin = 0, 0
		}
	}
	switch p.quantity {
	case scenario.Displacement:
		p.begin = p.u0
	case scenario.Velocity:
		p.begin = p.v0
	}
}

func valueOf(f func(float64) float64, x float64) float64 {
	if f == nil {
		return 0
	}
	return f(x)
}

// stateOf is a component of the state of a shape at x.
func (n *network) stateOf(e *element, f func(float64) float64, x float64, component int) float64 {
	if f == nil {
		return 0
	}
	p := &n.m.Pieces[e.piece]
	h := e.length / 400
	d := func(order int) float64 { return derivative(f, x, h, e.length, order) }
	switch component {
	case 0:
		return f(x)
	case 1:
		return d(1)
	case 2:
		q := (p.Tension + p.TensionRise*(e.x0+x)) * d(1)
		if e.stiff {
			q -= p.Bending * d(3)
		}
		return q
	}
	return p.Bending * d(2)
}

// derivative by a polynomial of degree six through seven places around x that
// stay within 0 .. length.
func derivative(f func(float64) float64, x, h, length float64, order int) float64 {
	first := math.Max(0, math.Min(x-3*h, length-6*h))
	at := (x - first) / h
	w := weights(at, order)
	sum := 0.0
	for j := range w {
		sum += w[j] * f(first+h*float64(j))
	}
	return sum / math.Pow(h, float64(order))
}

// weights are those of the derivative at a place among 0 .. 6.
// Source: Fornberg, Math. Comp. 51 (1988) 699-706, from memory.
func weights(z float64, order int) [7]float64 {
	var c [7][4]float64
	c1, c4 := 1.0, -z
	c[0][0] = 1
	for i := 1; i < 7; i++ {
		mn := min(i, 3)
		c2, c5 := 1.0, c4
		c4 = float64(i) - z
		for j := range i {
			c3 := float64(i - j)
			c2 *= c3
			if j == i-1 {
				for k := mn; k > 0; k-- {
					c[i][k] = c1 * (float64(k)*c[i-1][k-1] - c5*c[i-1][k]) / c2
				}
				c[i][0] = -c1 * c5 * c[i-1][0] / c2
			}
			for k := mn; k > 0; k-- {
				c[j][k] = (c4*c[j][k] - float64(k)*c[j][k-1]) / c3
			}
			c[j][0] = c4 * c[j][0] / c3
		}
		c1 = c2
	}
	var out [7]float64
	for j := range out {
		out[j] = c[j][order]
	}
	return out
}

// tensionAt is the tension at rest at a spot.
func (n *network) tensionAt(s mesh.Spot) float64 {
	if s.Node < 0 {
		p := &n.m.Pieces[s.Piece]
		return p.Tension + p.TensionRise*s.At
	}
	for i := range n.m.Pieces {
		p := &n.m.Pieces[i]
		if p.From == s.Node {
			return p.Tension
		}
	}
	for i := range n.m.Pieces {
		p := &n.m.Pieces[i]
		if p.To == s.Node {
			return p.Tension + p.TensionRise*p.Length
		}
	}
	return 0
}

// staticExtra is the extra tension of a line's static start shape, by Simpson's
// rule over each element.
func (n *network) staticExtra(line int) float64 {
	l := &n.m.Lines[line]
	sum := 0.0
	shape := func(p *mesh.Piece, x float64) float64 {
		v := valueOf(p.Start, x)
		return v - valueOf(p.Given, x)
	}
	for i, k := range l.Pieces {
		p := &n.m.Pieces[k]
		for _, ei := range n.segments[k] {
			e := &n.elements[ei]
			const parts = 200
			h := e.length / parts
			for j := range parts + 1 {
				w := h / 3 * float64(2+2*(j%2))
				if j == 0 || j == parts {
					w = h / 3
				}
				sum += l.Sag.Pieces[i] * w * shape(p, e.x0+h*float64(j))
			}
		}
	}
	for node, w := range l.Sag.Nodes {
		sum += w * (n.m.Nodes[node].Start - n.given(node))
	}
	return l.Sag.Stiffness * sum
}
