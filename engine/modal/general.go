package modal

import (
	"fmt"
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/mat"

	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/numeric"
)

// mostSteps bounds the series that a piece with bending and varying tension is
// made of; each costs some microseconds at every evaluation.
const mostSteps = 2000

// represents says what of a mesh's bending, varying tension and sag the exact
// solutions do not take; nil where they take all.
func represents(m *mesh.Mesh) error {
	at := m.Attached()
	for i := range m.Pieces {
		p := &m.Pieces[i]
		rise := p.TensionRise * p.Length
		least, most := math.Min(p.Tension, p.Tension+rise), math.Max(p.Tension, p.Tension+rise)
		if math.IsNaN(rise) || math.IsInf(rise, 0) || !(p.Bending >= 0) || math.IsInf(p.Bending, 0) || !(p.Internal >= 0) || math.IsInf(p.Internal, 0) {
			return fmt.Errorf("modal: piece %d has a tension, bending stiffness or loss that is no number of use", i)
		}
		if least < -1e-12*most {
			return fmt.Errorf("modal: piece %d would be in compression", i)
		}
		if xi := p.Length * math.Sqrt(most/p.Bending); p.Bending > 0 && rise != 0 && xi > mostSteps {
			return fmt.Errorf("the exact solution takes bending on an inclined line only up to xi = L sqrt(T/EI) = %d, and a piece of %s has %.3g: bending hardly tells there (say `bending 0 N*m^2`)",
				mostSteps, lineName(m, p.Line), xi)
		}
		start, end := slackEnds(p)
		for k, slack := range []bool{start, end} {
			node := p.From
			if k == 1 {
				node = p.To
			}
			if !slack {
				continue
			}
			n := &m.Nodes[node]
			bare := !held(n) && n.Mass == 0 && n.Spring == 0 && n.Dashpot == 0 && len(n.Brackets) == 0 && len(at[node]) == 1
			for _, l := range m.Links {
				bare = bare && l.A != node && l.B != node
			}
			if !bare || lineSag(m, p.Line) != nil {
				return fmt.Errorf("%s has no tension at %s, which can only be a free end that carries nothing", lineName(m, p.Line), n.Name)
			}
		}
	}
	return nil
}

func lineName(m *mesh.Mesh, line int) string {
	if line >= 0 && line < len(m.Lines) {
		return m.Lines[line].Name
	}
	return "the line"
}

func lineSag(m *mesh.Mesh, line int) *mesh.Sag {
	if line >= 0 && line < len(m.Lines) {
		return m.Lines[line].Sag
	}
	return nil
}

// absorbs names an end where a line with bending goes on for ever: such a
// network has waves of all frequencies in place of modes.
func absorbs(m *mesh.Mesh) error {
	for i := range m.Pieces {
		p := &m.Pieces[i]
		for _, n := range []int{p.From, p.To} {
			if p.Bending > 0 && m.Nodes[n].Absorbing {
				return fmt.Errorf("natural vibrations: %s has bending stiffness and goes on without end at %s; its near field has no natural vibrations (say `bending 0 N*m^2` for those of a string)",
					lineName(m, p.Line), m.Nodes[n].Name)
			}
		}
	}
	return nil
}

// remarks are the notes on a general group.
func (w *network) remarks() {
	for _, l := range w.sys.sagging {
		line := &w.m.Lines[l]
		weight, length, mean := 0.0, 0.0, 0.0
		for k, i := range line.Pieces {
			p := &w.m.Pieces[i]
			weight += line.Sag.Pieces[k] * p.Length
			length += p.Length
			mean += (p.Tension + p.TensionRise*p.Length/2) * p.Length
		}
		// Irvine, Caughey (1974), see mesh.Sag; of unlike pieces by their whole.
		w.notes = append(w.notes, fmt.Sprintf("the sag of %s counts with lambda^2 = %.4g.", line.Name,
			line.Sag.Stiffness*weight*weight*length*length/mean))
	}
}

// generalStarts gives approximate roots of a general group: eigenvalues of a
// mesh of cubic elements with displacement and slope at their ends, two to three
// a half wave, and the vibrations without loss.
// Source: Clough, Penzien, Dynamics of Structures, for the element's matrices
// (from memory).
func (w *network) generalStarts(omega float64) []complex128 {
	g := w.cubic(omega, 2*mostStates)
	var out []complex128
	if g != nil {
		out = g.roots(w, omega)
	}
	c := newCounter(w)
	if c.below(omega)-w.rigid <= 200 {
		lo := w.slow(omega)
		for _, x := range c.roots(span{lo, omega, c.below(lo), c.below(omega)}) {
			out = append(out, complex(0, x))
		}
	}
	return out
}

// cubes is the mesh of cubic elements.
type cubes struct {
	n       int
	k, c, m *mat.Dense
}

// cubic assembles it for frequencies up to omega; nil where it has more than
// `most` states.
func (w *network) cubic(omega, most float64) *cubes {
	y := w.sys
	u, t := make([]int, len(w.m.Nodes)), make([]int, len(w.m.Nodes))
	n := 0
	for i := range w.m.Nodes {
		u[i], t[i] = -1, -1
		if !y.in(i) {
			continue
		}
		if !held(&w.m.Nodes[i]) {
			u[i] = n
			n++
		}
		if y.turns[i] && !w.m.Nodes[i].Clamped && !w.m.Nodes[i].Hinge {
			t[i] = n
			n++
		}
	}
	parts := make([]int, len(w.elements))
	size := n
	for i, el := range w.elements {
		parts[i] = 2 + int(math.Min(0.6*omega*el.tau, 1e6))
		size += 2*parts[i] + 2
	}
	if float64(2*size) > most {
		return nil
	}
	g := &cubes{k: mat.NewDense(size, size, nil), c: mat.NewDense(size, size, nil), m: mat.NewDense(size, size, nil)}
	for i := range w.m.Nodes {
		if d := &w.m.Nodes[i]; y.in(i) {
			put(g.m, u[i], u[i], d.Mass)
			put(g.k, u[i], u[i], d.Spring)
			put(g.c, u[i], u[i], d.Dashpot)
			put(g.k, t[i], t[i], d.Rotary)
			put(g.m, t[i], t[i], d.Inertia)
		}
	}
	for _, l := range w.m.Links {
		if l.A == l.B || !y.in(l.A) && !y.in(l.B) {
			continue
		}
		for _, e := range []struct {
			to   *mat.Dense
			size float64
		}{{g.k, l.Spring}, {g.c, l.Dashpot}} {
			put(e.to, u[l.A], u[l.A], e.size)
			put(e.to, u[l.B], u[l.B], e.size)
			put(e.to, u[l.A], u[l.B], -e.size)
			put(e.to, u[l.B], u[l.A], -e.size)
		}
	}
	sag := make([][]float64, len(y.sagging))
	for i, l := range y.sagging {
		sag[i] = make([]float64, size)
		for node, v := range w.m.Lines[l].Sag.Nodes {
			if u[node] >= 0 {
				sag[i][u[node]] += v
			}
		}
	}
	for i, el := range w.elements {
		n = g.piece(w, el.piece, parts[i], u, t, n, sag)
	}
	for i, l := range y.sagging {
		for r, a := range sag[i] {
			for c, b := range sag[i] {
				put(g.k, r, c, w.m.Lines[l].Sag.Stiffness*a*b)
			}
		}
	}
	g.n = n
	return g
}

func put(m *mat.Dense, i, j int, v float64) {
	if i >= 0 && j >= 0 && v != 0 {
		m.Set(i, j, m.At(i, j)+v)
	}
}

// piece adds the elements of a piece; unknowns are numbered from n on.
func (g *cubes) piece(w *network, piece, parts int, u, t []int, n int, sag [][]float64) int {
	p := &w.m.Pieces[piece]
	h := p.Length / float64(parts)
	bendCube, slopeCube, massCube := cube()
	next := func() int { n++; return n - 1 }
	turn := func(node int) int {
		if p.Bending > 0 && !w.m.Nodes[node].Hinge {
			return t[node]
		}
		return next() // a string turns by itself, and so does a part at a hinge
	}
	at := [4]int{u[p.From], turn(p.From), 0, 0}
	for q := 0; q < parts; q++ {
		if q == parts-1 {
			at[2], at[3] = u[p.To], turn(p.To)
		} else {
			at[2], at[3] = next(), next()
		}
		tension := p.Tension + p.TensionRise*h*(float64(q)+0.5)
		for i := range at {
			for j := range at {
				f := math.Pow(h, float64(i%2+j%2))
				bend := p.Bending / (h * h * h) * f * bendCube[i][j]
				mass := f * h / 420 * massCube[i][j]
				put(g.k, at[i], at[j], bend+tension/(30*h)*f*slopeCube[i][j])
				put(g.c, at[i], at[j], p.Internal*bend+p.Viscous*mass)
				put(g.m, at[i], at[j], p.MassPerLength*mass)
			}
			if l := w.sys.sagOf[piece]; l >= 0 && at[i] >= 0 {
				sag[l][at[i]] += w.sys.weight[piece] * h * [...]float64{0.5, h / 12, 0.5, -h / 12}[i]
			}
		}
		at[0], at[1] = at[2], at[3]
	}
	return n
}

// roots are the eigenvalues of the state matrix with 0 <= Im s.
func (g *cubes) roots(w *network, omega float64) []complex128 {
	n := g.n
	var brackets []bracket
	index := map[int]int{}
	at := 0
	for i := range w.m.Nodes {
		if w.sys.in(i) {
			if !held(&w.m.Nodes[i]) {
				index[i] = at
				at++
			}
			if w.sys.turns[i] && !w.m.Nodes[i].Clamped && !w.m.Nodes[i].Hinge {
				at++
			}
		}
	}
	for _, b := range w.brackets {
		brackets = append(brackets, bracket{index[w.nodes[b.at]], b.k, b.c})
	}
	for i := 0; i < n; i++ { // a place between ties without mass: any that moves fast
		if g.m.At(i, i) == 0 {
			g.m.Set(i, i, 1e-6*g.k.At(i, i)/(omega*omega)+1e-3*g.c.At(i, i)/omega+1e-300)
		}
	}
	right := mat.NewDense(n, 2*n+len(brackets), nil) // K, C and the brackets' pull
	for i := 0; i < n; i++ {
		for j := 0; j < n; j++ {
			right.Set(i, j, g.k.At(i, j)/omega)
			right.Set(i, n+j, g.c.At(i, j))
		}
	}
	size := 2*n + len(brackets)
	for b, br := range brackets {
		right.Set(br.at, br.at, right.At(br.at, br.at)+br.k/omega)
		right.Set(br.at, 2*n+b, -br.k/omega)
	}
	var solved mat.Dense
	if err := solved.Solve(g.m.Slice(0, n, 0, n), right); err != nil {
		return nil
	}
	a := mat.NewDense(size, size, nil)
	for i := 0; i < n; i++ {
		a.Set(i, n+i, omega)
		for j := 0; j < size; j++ {
			a.Set(n+i, j, -solved.At(i, j))
		}
	}
	for b, br := range brackets {
		a.Set(2*n+b, br.at, br.k/br.c)
		a.Set(2*n+b, 2*n+b, -br.k/br.c)
	}
	var eig mat.Eigen
	if !eig.Factorize(a, mat.EigenNone) {
		return nil
	}
	var out []complex128
	for _, s := range eig.Values(nil) {
		if imag(s) >= 0 && !cmplx.IsNaN(s) {
			out = append(out, s)
		}
	}
	return out
}

// generalShapes are the shapes of a general group at a root, as shapes.
func (w *network) generalShapes(s complex128, want int) (shapes []*Shape, rank int) {
	y := w.sys
	y.assemble(s)
	n := y.n
	scale := y.scales(s)
	for i := 0; i < n; i++ {
		for j := 0; j < n; j++ {
			f := complex(scale[i]*scale[j], 0)
			y.a[i*n+j] *= f
			y.da[i*n+j] *= f
		}
	}
	want = min(want, n)
	vectors, pivots := numeric.NullVectors(append([]complex128(nil), y.a...), n, want)
	rank = want
	for rank > 1 && pivots[n-rank] > 1e-6*math.Max(1, pivots[0]) { // as in shapes
		rank--
	}
	if rank < want {
		vectors, _ = numeric.NullVectors(append([]complex128(nil), y.a...), n, rank)
	}
	if rank > 1 && real(s) == 0 {
		w.orthogonal(&evaluator{n: n, da: y.da}, vectors)
	}
	for _, v := range vectors {
		for i := range v {
			v[i] *= complex(scale[i], 0)
		}
		f := &Shape{motion: y.moving(s, v), factor: 1}
		f.normalise(w)
		shapes = append(shapes, f)
	}
	return shapes, rank
}

// normalise scales as network.normalise does.
func (s *Shape) normalise(w *network) {
	omega := cmplx.Abs(s.motion.s)
	best := complex128(0)
	var firsts []complex128
	for _, el := range w.elements {
		at := func(x float64) complex128 { return s.motion.at(el.piece, x).u }
		n := 16 * (1 + int(math.Min(omega*el.tau/math.Pi, 1e4)))
		h := el.len / float64(n)
		before, now := complex128(0), at(0)
		for k := 0; k <= n; k++ {
			after := complex128(0)
			if k < n {
				after = at(float64(k+1) * h)
			}
			if a := cmplx.Abs(now); a >= cmplx.Abs(before) && a >= cmplx.Abs(after) && a > 0.9*cmplx.Abs(best) {
				top := climb(at, el.len, now, float64(k)*h, h)
				firsts = append(firsts, top)
				if cmplx.Abs(top) > cmplx.Abs(best) {
					best = top
				}
			}
			before, now = now, after
		}
	}
	hung := complex128(0)
	for _, node := range w.nodes {
		if v := s.motion.y.places[node].u.value; cmplx.Abs(v) > cmplx.Abs(hung) {
			hung = v
		}
	}
	if cmplx.Abs(best) <= 1e-9*cmplx.Abs(hung) {
		best, firsts = hung, []complex128{hung}
	}
	for _, v := range firsts {
		if cmplx.Abs(v) >= (1-1e-6)*cmplx.Abs(best) && v != 0 {
			s.factor = complex(cmplx.Abs(v)/cmplx.Abs(best), 0) / v
			return
		}
	}
}

// cube gives the matrices of a cubic element of unit length for displacement and slope at both
// ends: bending, slope (times 30) and mass (times 420).
func cube() (bend, slope, mass [4][4]float64) {
	bend = [4][4]float64{{12, 6, -12, 6}, {6, 4, -6, 2}, {-12, -6, 12, -6}, {6, 2, -6, 4}}
	slope = [4][4]float64{{36, 3, -36, 3}, {3, 4, -3, -1}, {-36, -3, 36, -3}, {3, -1, -3, 4}}
	mass = [4][4]float64{{156, 22, 54, -13}, {22, 4, 13, -3}, {54, 13, 156, -22}, {-13, -3, -22, 4}}
	return bend, slope, mass
}
