package transform

import "math"

// system solves the network at one frequency: a symmetric band for the points and
// their slopes, bordered by the forces of links and the extra tensions of sagging
// lines. The stiffness of a passive network at Re s > 0 needs no exchange of rows.
type system struct {
	n       *network
	band    [][]complex128 // band[i][j] = A(i, i-width+j), lower half
	rhs     []complex128
	columns [][]complex128 // of the borders
	small   [][]complex128 // border by border
	smallR  []complex128
	waves   []*wave
	parts   []particular
	scratch cellScratch

	x []complex128 // solution
	h []complex128 // of the borders
}

func newSystem(n *network) *system {
	s := &system{n: n, band: make([][]complex128, n.unknowns), rhs: make([]complex128, n.unknowns), waves: make([]*wave, len(n.elements)), parts: make([]particular, len(n.elements))}
	for i := range s.band {
		s.band[i] = make([]complex128, n.width+1)
	}
	for range n.borders {
		s.columns = append(s.columns, make([]complex128, n.unknowns))
		s.small = append(s.small, make([]complex128, len(n.borders)))
	}
	s.smallR, s.x, s.h = make([]complex128, len(n.borders)), make([]complex128, n.unknowns), make([]complex128, len(n.borders))
	return s
}

func (s *system) clear() {
	for i := range s.band {
		clear(s.band[i])
	}
	clear(s.rhs)
	for i := range s.columns {
		clear(s.columns[i])
		clear(s.small[i])
	}
	clear(s.smallR)
}

func (s *system) add(i, j int, v complex128) {
	if i >= j {
		s.band[i][j-i+s.n.width] += v
	}
}

// unknownsOf are the unknowns of an element's four end values, -1 where held, and
// the values of those that are.
func (n *network) unknownsOf(e *element, k int) (list [4]int, held [4]complex128) {
	for side := range 2 {
		p := &n.points[e.ends[side]]
		list[2*side], list[2*side+1] = p.u, e.turn[side]
		if p.u < 0 && p.node >= 0 {
			if m := n.motions[p.node]; m != nil {
				held[2*side] = m.of[k]
			}
		}
	}
	return list, held
}

// solve assembles and solves at frequency k.
func (s *system) solve(g *grid, k int) {
	n, at := s.n, g.at(k)
	s.clear()
	for i := range n.elements {
		e := &n.elements[i]
		p := &n.m.Pieces[e.piece]
		w := e.newWave(p, at, n.refs.line[p.Line])
		part := e.under(w, p, k, &s.scratch)
		s.waves[i], s.parts[i] = w, part
		list, held := n.unknownsOf(e, k)
		dp := [4]complex128{part.start[0], part.start[1], part.end[0], part.end[1]}
		fp := [4]complex128{-part.start[2], -part.start[3], part.end[2], part.end[3]}
		for a := range 4 {
			if list[a] < 0 {
				continue
			}
			r := -fp[a]
			for b := range 4 {
				r += w.d[a][b] * (dp[b] - held[b])
				if list[b] >= 0 {
					s.add(list[a], list[b], w.d[a][b])
				}
			}
			s.rhs[list[a]] += r
		}
	}
	s.nodes(at)
	for _, f := range n.forces {
		if f.force != nil {
			s.rhs[f.unknown] += f.force.of[k]
		}
		s.rhs[f.unknown] += complex(f.step, 0) / at
	}
	for b := range n.borders {
		if n.borders[b].link >= 0 {
			s.link(b, at, k)
		} else {
			s.sag(b, k)
		}
	}
	s.factor()
}

// nodes adds what sits at the nodes, with what it held at the start.
func (s *system) nodes(at complex128) {
	n := s.n
	for i := range n.m.Nodes {
		nd := &n.m.Nodes[i]
		if u := n.points[n.nodeAt[i]].u; u >= 0 {
			given, rate := complex(n.given(i), 0), complex(nd.StartRate, 0)
			m, c := complex(nd.Mass, 0), complex(nd.Dashpot, 0)
			z := m*at*at + c*at + complex(nd.Spring, 0)*lossy(at, nd.SpringLoss, n.refs.line[max(nd.Line, 0)])
			r := m*(at*given+rate) + c*given
			for _, b := range nd.Brackets {
				kb, cb := complex(b.K, 0), complex(b.C, 0)
				z += kb * cb * at / (kb + cb*at)
				r += kb * cb / (kb + cb*at) * given
			}
			s.add(u, u, z)
			s.rhs[u] += r
		}
		if len(n.slope[i]) > 0 {
			phi := n.slope[i][0]
			s.add(phi, phi, complex(nd.Rotary, 0)+complex(nd.Inertia, 0)*at*at)
		}
	}
}

// given is the part of a node's start that is no static shape.
func (n *network) given(node int) float64 {
	nd := &n.m.Nodes[node]
	if nd.Line < 0 { // a hung mass starts with its joint
		for _, l := range n.m.Links {
			if l.B == node {
				return n.given(l.A)
			}
			if l.A == node {
				return n.given(l.B)
			}
		}
		return nd.Start
	}
	for i := range n.m.Pieces {
		p := &n.m.Pieces[i]
		if p.From != node && p.To != node || p.Start == nil {
			continue
		}
		x := 0.0
		if p.To == node {
			x = p.Length
		}
		static := p.Start(x)
		if p.Given != nil {
			static -= p.Given(x)
		}
		return nd.Start - static
	}
	return 0
}

// link couples two points: u_B - u_A - p/k = (C/k)(u_B - u_A at the start), p the
// force on A.
func (s *system) link(b int, at complex128, k int) {
	n := s.n
	l := &n.m.Links[n.borders[b].link]
	stiff := complex(l.Spring, 0)*lossy(at, l.SpringLoss, n.refs.link[n.borders[b].link]) + complex(l.Dashpot, 0)*at
	before := complex(n.given(l.B)-n.given(l.A), 0)
	s.small[b][b] = -1 / stiff
	s.smallR[b] = complex(l.Dashpot, 0) / stiff * before
	for side, node := range []int{l.A, l.B} {
		sign := complex(float64(2*side-1), 0)
		if u := n.points[n.nodeAt[node]].u; u >= 0 {
			s.columns[b][u] += sign
		} else if m := n.motions[node]; m != nil {
			s.smallR[b] -= sign * m.of[k]
		}
	}
}

// sag couples a line by its extra tension h: the load -w h per length on every
// piece, -w_j h at nodes, and h/G = sum w int u + sum w_j u_j, with
// b int u = (force at both ends) + int g - w h L.
func (s *system) sag(b, k int) {
	n := s.n
	line := &n.m.Lines[n.borders[b].line]
	s.small[b][b] = -complex(1/line.Sag.Stiffness, 0)
	for i, piece := range line.Pieces {
		weight := complex(line.Sag.Pieces[i], 0)
		for _, ei := range n.segments[piece] {
			e, w, part := &n.elements[ei], s.waves[ei], &s.parts[ei]
			list, held := n.unknownsOf(e, k)
			var row [4]complex128 // of e^T D
			for c := range 4 {
				row[c] = w.d[0][c] + w.d[2][c]
			}
			dp := [4]complex128{part.start[0], part.start[1], part.end[0], part.end[1]}
			constant := part.load - part.start[2] + part.end[2]
			for c := range 4 {
				constant += row[c] * (held[c] - dp[c])
				if list[c] >= 0 {
					s.columns[b][list[c]] += weight / w.b * row[c]
				}
			}
			s.smallR[b] -= weight / w.b * constant
			s.small[b][b] += weight * weight / w.b * ((row[0]+row[2])/w.b - complex(e.length, 0))
		}
	}
	for node, weight := range line.Sag.Nodes {
		if u := n.points[n.nodeAt[node]].u; u >= 0 {
			s.columns[b][u] += complex(weight, 0)
		}
	}
}

// factor solves [A B; B' D][x; h] = [r; q].
func (s *system) factor() {
	n, w := s.n.unknowns, s.n.width
	for i := range n {
		for j := max(0, i-w); j < i; j++ {
			sum := s.band[i][j-i+w]
			for t := max(0, i-w, j-w); t < j; t++ {
				sum -= s.band[i][t-i+w] * s.band[j][t-j+w] * s.band[t][w]
			}
			s.band[i][j-i+w] = sum / s.band[j][w]
		}
		d := s.band[i][w]
		for t := max(0, i-w); t < i; t++ {
			l := s.band[i][t-i+w]
			d -= l * l * s.band[t][w]
		}
		s.band[i][w] = d
	}
	copy(s.x, s.rhs)
	s.back(s.x)
	m := len(s.columns)
	if m == 0 {
		return
	}
	solved := make([][]complex128, m)
	schur := make([][]complex128, m)
	for b := range m {
		solved[b] = append([]complex128(nil), s.columns[b]...)
		s.back(solved[b])
		schur[b] = append([]complex128(nil), s.small[b]...)
	}
	for b := range m {
		s.h[b] = s.smallR[b] - dot(s.columns[b], s.x)
		for c := range m {
			schur[b][c] -= dot(s.columns[b], solved[c])
		}
	}
	gauss(schur, s.h)
	for b := range m {
		for i := range s.x {
			s.x[i] -= solved[b][i] * s.h[b]
		}
	}
}

// back solves with the band's factors in place.
func (s *system) back(x []complex128) {
	n, w := s.n.unknowns, s.n.width
	for i := range n {
		for t := max(0, i-w); t < i; t++ {
			x[i] -= s.band[i][t-i+w] * x[t]
		}
	}
	for i := range n {
		x[i] /= s.band[i][w]
	}
	for i := n - 1; i >= 0; i-- {
		for t := i + 1; t <= min(n-1, i+w); t++ {
			x[i] -= s.band[t][i-t+w] * x[t]
		}
	}
}

func dot(a, b []complex128) complex128 {
	sum := complex128(0)
	for i, v := range a {
		if v != 0 {
			sum += v * b[i]
		}
	}
	return sum
}

// gauss solves a small system in place, with row exchanges.
func gauss(a [][]complex128, r []complex128) {
	n := len(r)
	for c := range n {
		p := c
		for i := c + 1; i < n; i++ {
			if abs1(a[i][c]) > abs1(a[p][c]) {
				p = i
			}
		}
		a[c], a[p], r[c], r[p] = a[p], a[c], r[p], r[c]
		for i := c + 1; i < n; i++ {
			f := a[i][c] / a[c][c]
			if f == 0 {
				continue
			}
			for j := c; j < n; j++ {
				a[i][j] -= f * a[c][j]
			}
			r[i] -= f * r[c]
		}
	}
	for i := n - 1; i >= 0; i-- {
		for j := i + 1; j < n; j++ {
			r[i] -= a[i][j] * r[j]
		}
		r[i] /= a[i][i]
	}
}

// end values of an element: those of its points and slopes, less its particular
// solution, for the free waves; the sag's load is part of the latter.
func (s *system) state(ei, probe, k int) state {
	e, w, part := &s.n.elements[ei], s.waves[ei], s.parts[ei]
	list, d := s.n.unknownsOf(e, k)
	for i, u := range list {
		if u >= 0 {
			d[i] = s.x[u]
		}
	}
	sag := s.sagging(ei)
	d[0] -= part.start[0] + sag
	d[1] -= part.start[1]
	d[2] -= part.end[0] + sag
	d[3] -= part.end[1]
	if probe < 0 { // -1: at the start, -2: at the end
		x, base := 0.0, part.start
		if probe == -2 {
			x, base = e.length, part.end
		}
		base[0] += sag
		return w.free(d, x).plus(base)
	}
	var base state
	if part.probes != nil {
		base = part.probes[probe]
	}
	base[0] += sag
	return w.free(d, e.probes[probe]).plus(base)
}

// sagging is the displacement -w h/b of the particular solution of the sag.
func (s *system) sagging(ei int) complex128 {
	piece := s.n.elements[ei].piece
	for b := range s.n.borders {
		if s.n.borders[b].link >= 0 || s.n.m.Pieces[piece].Line != s.n.borders[b].line {
			continue
		}
		line := &s.n.m.Lines[s.n.borders[b].line]
		for i, p := range line.Pieces {
			if p == piece {
				return -complex(line.Sag.Pieces[i], 0) * s.h[b] / s.waves[ei].b
			}
		}
	}
	return 0
}

// tension is the extra tension of a line.
func (s *system) tension(line int) complex128 {
	for b := range s.n.borders {
		if s.n.borders[b].link < 0 && s.n.borders[b].line == line {
			return s.h[b]
		}
	}
	return 0
}

func finite(z complex128) bool {
	return !math.IsNaN(real(z)) && !math.IsInf(real(z), 0) && !math.IsNaN(imag(z)) && !math.IsInf(imag(z), 0)
}
