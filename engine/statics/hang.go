package statics

import (
	"math"

	"github.com/tautspan/tautspan/engine/numeric"
	"github.com/tautspan/tautspan/engine/scenario"
)

// Hanging is a line at rest under its own weight and that of what rides on it:
// the drop v across the chord of
//
//	(EI v'')'' - (T v')' = m g cos(incline), and M g cos(incline) at masses M,
//
// held at its supports and inner supports, which turn as they say. Springs,
// dashpots and ties carry no weight: they are set when the line hangs. It is the
// shallow line, a parabola where it is uniform: its drop d is short of that of a
// catenary by the share 4/3 (d/L)^2, for d = L/50 some 0.05 %.
//
// Source: Irvine (1981), Cable Structures, ch. 1 (from memory).
type Hanging struct {
	line *scenario.Line
	rest Rest
}

// Hang works out how a line hangs with its tension changed by so much all along,
// N. It reports false where the line would be slack.
func Hang(net *scenario.Network, line int, change float64) (*Hanging, bool) {
	l := net.Lines[line]
	l.Sag = false
	l.Segments = append([]scenario.Segment(nil), l.Segments...)
	l.Nodes = append([]scenario.Node(nil), l.Nodes...)
	for i := range l.Segments {
		s := &l.Segments[i]
		s.Tension += change
		if !(s.Tension > 0 && s.Tension+s.TensionRise*s.Length > 0) {
			return nil, false
		}
	}
	for i := range l.Nodes {
		l.Nodes[i].Fixed = l.Nodes[i].Fixed || l.Nodes[i].Kind == scenario.Support
		l.Nodes[i].Spring = 0
	}
	alone := &scenario.Network{}
	alone.Lines = []scenario.Line{l}
	ride := func(p scenario.Place, mass float64) { // as a pluck, so that the grid has the place
		if p.Line == line && mass > 0 {
			p.Line = 0
			alone.Plucks = append(alone.Plucks, scenario.PluckOf[float64]{At: p, Force: mass})
		}
	}
	for i := range l.Nodes {
		mass := l.Nodes[i].Mass
		for _, t := range l.Nodes[i].Tuned {
			mass += t.Mass
		}
		ride(scenario.Place{Line: line, Node: i}, mass)
	}
	for i := range l.Segments {
		for _, row := range scenario.Rows(&l.Segments[i]) {
			mass := row.Joint.Mass
			for _, t := range row.Joint.Tuned {
				mass += t.Mass
			}
			ride(scenario.Place{Line: line, Node: -1, Segment: i, Offset: row.At}, mass)
		}
		l.Segments[i].Every = springless(l.Segments[i].Every)
	}
	for i := range net.Watches {
		if w := &net.Watches[i]; !w.Along {
			ride(w.At, w.Mass)
		}
	}
	for _, t := range net.Ties {
		ride(t.From, t.Mass/2)
		ride(t.To, t.Mass/2)
	}
	g, err := newGrid(alone, nil)
	if err != nil || !g.stiff.factor() {
		return nil, false
	}
	s := shape{moved: make([]float64, len(g.held)), press: []float64{1}}
	pull := Gravity * math.Cos(l.Incline)
	seg, end := 0, l.Segments[0].Length
	for k := range g.elements[0] {
		e := &g.elements[0][k]
		for e.x0+e.length/2 > end && seg+1 < len(l.Segments) {
			seg++
			end += l.Segments[seg].Length
		}
		e.weight = l.Segments[seg].MassPerLength * pull
		f0, m0, f1, m1 := e.load()
		for i, f := range []float64{f0, m0, f1, m1} {
			if e.at[i] >= 0 {
				s.moved[e.at[i]] += e.weight * f
			}
		}
	}
	for _, p := range alone.Plucks {
		s.moved[g.index(p.At)] += p.Force * pull
	}
	g.solve(s.moved)
	return &Hanging{line: &l, rest: Rest{grid: g, shape: s}}, true
}

// springless are rows of joints without their springs.
func springless(rows []scenario.EveryOf[float64]) []scenario.EveryOf[float64] {
	out := append([]scenario.EveryOf[float64](nil), rows...)
	for i := range out {
		out[i].Joint.Spring = 0
	}
	return out
}

// upright turns a distance across the chord into one straight down to the line.
// A line that stands upright has no chord to drop from.
func (h *Hanging) upright() float64 {
	if c := math.Cos(h.line.Incline); c > 1e-9 {
		return 1 / c
	}
	return 0
}

// Drop is how far the line hangs below its chord, straight down, at x metres
// along the chord, m.
func (h *Hanging) Drop(x float64) float64 { return h.rest.Displacement(0, x) * h.upright() }

// Deepest is the place of the deepest drop, m along the chord from the line's
// start, and the drop there, m.
func (h *Hanging) Deepest() (at, drop float64) {
	drop = math.Inf(-1)
	note := func(x float64) {
		if v := h.Drop(x); v > drop {
			at, drop = x, v
		}
	}
	for k := range h.rest.grid.elements[0] {
		e := &h.rest.grid.elements[0][k]
		v := h.rest.ends(0, e)
		slope := func(s float64) float64 { return e.slopeAt(v, s) }
		looks := 1
		if e.beam() {
			looks = 16
		}
		note(e.x0)
		note(e.x0 + e.length)
		for i := range looks {
			a, b := e.length*float64(i)/float64(looks), e.length*float64(i+1)/float64(looks)
			if fa, fb := slope(a), slope(b); fa > 0 && fb < 0 {
				note(e.x0 + numeric.Root(slope, a, b, fa, fb, 1e-14*e.length))
			}
		}
	}
	return at, drop
}

// Excess is how much longer the line is than its chord, half the integral of
// v'^2, m.
func (h *Hanging) Excess() float64 {
	sum := 0.0
	for k := range h.rest.grid.elements[0] {
		e := &h.rest.grid.elements[0][k]
		v := h.rest.ends(0, e)
		edges := e.panels()
		for i := 1; i < len(edges); i++ {
			w := edges[i] - edges[i-1]
			for g, x := range gaussAt {
				for _, s := range []float64{edges[i-1] + w*(1-x)/2, edges[i-1] + w*(1+x)/2} {
					slope := e.slopeAt(v, s)
					sum += gaussWeight[g] / 4 * w * slope * slope
				}
			}
		}
	}
	return sum
}

// panels divides a beam from both ends by doubling steps that begin with the
// length over which its ends bend; a string is left whole.
func (e *element) panels() []float64 {
	if !e.beam() || e.rise != 0 || e.k()*e.length < smallXi {
		return []float64{0, e.length}
	}
	var low, high []float64
	for step, x := 1/e.k(), 1/e.k(); x < e.length/2; step, x = 2*step, x+2*step {
		low, high = append(low, x), append([]float64{e.length - x}, high...)
	}
	return append(append(append([]float64{0}, low...), high...), e.length)
}

// give is how much the line and its ends give along it for a change of tension
// of 1 N, m; NaN where an axial stiffness is not known.
func give(line *scenario.Line) float64 {
	sum := 0.0
	for i := range line.Segments {
		if line.Segments[i].Axial <= 0 {
			return math.NaN()
		}
		sum += line.Segments[i].Length / line.Segments[i].Axial
	}
	for _, n := range []*scenario.Node{&line.Nodes[0], &line.Nodes[len(line.Nodes)-1]} {
		if n.AxialGive > 0 {
			sum += 1 / n.AxialGive
		}
	}
	return sum
}

// SaidTension is the tension of a line where it says it, N; its mean where the
// segments say their own.
func SaidTension(line *scenario.Line) float64 {
	if line.TensionSaid {
		return line.SaidTension
	}
	return MeanTension(line)
}

// TakeUp is the travel of a line's anchor, m, by which its tension, where it says
// it, becomes T: the stretch of the line, the give of its ends, and the length
// that straightening takes out of its sag,
//
//	(T - T0)(sum of L/EA + 1/K of the ends) + excess(T0) - excess(T).
//
// Neighbours that give too are not included. NaN where an axial stiffness is not
// known, T is none, or an end is weighted.
func TakeUp(net *scenario.Network, line int, tension float64) float64 {
	l := &net.Lines[line]
	change := tension - SaidTension(l)
	before, ok := Hang(net, line, 0)
	after, well := Hang(net, line, change)
	if !ok || !well || l.Weighted {
		return math.NaN()
	}
	return change*give(l) + before.Excess() - after.Excess()
}

// ChangeOfTension is what a change of temperature, K, adds to the tension of a
// line all along, N: the length without tension grows by the expansion, and
//
//	dT (sum of L/EA + 1/K of the ends) + dtheta (sum of alpha L) = excess(T + dT) - excess(T).
//
// 0 where an end is weighted, NaN where an axial stiffness is not known or the
// line would be slack.
//
// Source: the change-of-state equation of line design, as in Irvine (1981) or any
// handbook of conductors (from memory), with the excess of the loaded shape in
// place of the parabola's.
func ChangeOfTension(net *scenario.Network, line int, warmer float64) float64 {
	l := &net.Lines[line]
	if l.Weighted {
		return 0
	}
	stiff, growth := give(l), 0.0
	least := math.Inf(1)
	for i := range l.Segments {
		s := &l.Segments[i]
		growth += s.Expansion * s.Length
		least = math.Min(least, math.Min(s.Tension, EndTension(s)))
	}
	now, ok := Hang(net, line, 0)
	if !ok || math.IsNaN(stiff) {
		return math.NaN()
	}
	excess := now.Excess()
	off := func(change float64) float64 {
		h, ok := Hang(net, line, change)
		if !ok {
			return math.NaN()
		}
		return change*stiff + warmer*growth - h.Excess() + excess
	}
	if warmer*growth == 0 {
		return 0
	}
	// The left side rises with the change: bracket it, towards slack by halving what is left.
	low, high := 0.0, 0.0
	if warmer*growth > 0 {
		for left := least; ; left /= 2 {
			if left < 1e-9*least {
				return math.NaN()
			}
			if low = left/2 - least; off(low) <= 0 {
				break
			}
		}
	} else {
		high = -warmer * growth / stiff
	}
	flow, fhigh := off(low), off(high)
	if !(flow <= 0 && fhigh >= 0) {
		return math.NaN()
	}
	return numeric.Root(off, low, high, flow, fhigh, 1e-13*least)
}
