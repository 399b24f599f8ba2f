package statics

import (
	"math"
	"sort"

	"github.com/tautspan/tautspan/engine/scenario"
)

// Gravity is standard gravity, m/s^2, exact by definition (CGPM 1901).
const Gravity = 9.80665

// sag is the shallow-cable term of one line: an extra tension
//
//	h = G (integral of w u dx + sum of w_j u_j),
//
// that pulls back by w h per length and w_j h at places, with w = m g cos(incline)/H.
//
// Source: Irvine, Caughey, Proc. R. Soc. Lond. A 341 (1974) 299-315 (from memory).
type sag struct {
	line  int
	give  float64   // 1/G, m/N
	load  []float64 // of each unknown: what w and w_j stand for
	bulge float64   // integral of w u with all places held, under the load w
	moved []float64 // displacements under load
}

// sagOf gives the elements of a line their weight and works out the term.
func (g *grid) sagOf(line int) sag {
	l := &g.net.Lines[line]
	h, cos := MeanTension(l), math.Cos(l.Incline)
	s := sag{line: line, load: make([]float64, len(g.held))}
	weight := 0.0
	seg, end := 0, l.Segments[0].Length
	for k := range g.elements[line] {
		e := &g.elements[line][k]
		for e.x0+e.length/2 > end && seg+1 < len(l.Segments) {
			seg++
			end += l.Segments[seg].Length
		}
		e.weight = l.Segments[seg].MassPerLength * Gravity * cos / h
		weight += e.weight * e.length
		f0, m0, f1, m1 := e.load()
		for i, f := range []float64{f0, m0, f1, m1} {
			if e.at[i] >= 0 {
				s.load[e.at[i]] += e.weight * f
			}
		}
		s.bulge += e.weight * e.weight * e.bulge()
	}
	for row, mass := range g.masses(line) {
		if !g.held[row] {
			w := mass * Gravity * cos / h
			s.load[row] += w
			weight += w
		}
	}
	for _, segment := range l.Segments {
		s.give += segment.Length / segment.Axial * (1 + weight*weight/8)
	}
	for _, n := range []*scenario.Node{&l.Nodes[0], &l.Nodes[len(l.Nodes)-1]} {
		if n.AxialGive > 0 {
			s.give += 1 / n.AxialGive
		}
	}
	return s
}

// masses are what rides on a line between its supports, by unknown, kg.
func (g *grid) masses(line int) map[int]float64 {
	out := map[int]float64{}
	l := &g.net.Lines[line]
	for k := range l.Nodes {
		if n := &l.Nodes[k]; n.Kind != scenario.Support && n.Mass > 0 {
			out[g.index(scenario.Place{Line: line, Node: k})] += n.Mass
		}
	}
	for _, at := range g.rows(line) {
		if m := at.row.Joint.Mass; m > 0 {
			out[g.u[line][sort.SearchFloat64s(g.x[line], at.x)]] += m
		}
	}
	ride := func(p scenario.Place, mass float64) {
		if p.Line != line || mass == 0 || p.Node >= 0 && l.Nodes[p.Node].Kind == scenario.Support {
			return
		}
		out[g.index(p)] += mass
	}
	for i := range g.net.Watches {
		if w := &g.net.Watches[i]; !w.Along {
			ride(w.At, w.Mass)
		}
	}
	for _, t := range g.net.Ties {
		ride(t.From, t.Mass/2)
		ride(t.To, t.Mass/2)
	}
	return out
}

// shape is a solution: displacements and slopes, and the distributed load of
// each line as a multiple of its elements' weights.
type shape struct {
	moved []float64
	press []float64 // by line
}

// under solves for forces with the sag terms: with d the displacements under the
// forces alone and d_i those under the load of line i, the multiples a_i obey
//
//	a_i (1/G_i + bulge_i) + sum over j of a_j load_i.d_j = -load_i.d.
func (g *grid) under(forces []float64) shape {
	g.solve(forces)
	out := shape{moved: forces, press: make([]float64, len(g.net.Lines))}
	n := len(g.sags)
	if n == 0 {
		return out
	}
	small, b := newSkyline(make([]int, n)), make([]float64, n)
	for i := range g.sags {
		s := &g.sags[i]
		if s.moved == nil {
			s.moved = append([]float64(nil), s.load...)
			g.solve(s.moved)
		}
	}
	for i := range g.sags {
		s := &g.sags[i]
		b[i] = -dot(s.load, forces)
		for j := 0; j <= i; j++ {
			small.add(i, j, dot(s.load, g.sags[j].moved))
		}
		small.add(i, i, s.give+s.bulge)
	}
	small.factor() // positive definite: compliances, and gives above 0
	small.solve(b)
	for i := range g.sags {
		out.press[g.sags[i].line] = b[i]
		for row := range forces {
			forces[row] += b[i] * g.sags[i].moved[row]
		}
	}
	return out
}

func dot(a, b []float64) float64 {
	sum := 0.0
	for i := range a {
		sum += a[i] * b[i]
	}
	return sum
}
