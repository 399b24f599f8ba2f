package spectral

import (
	"context"
	"math"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/mesh"
	"github.com/tautspan/tautspan/engine/scenario"
	"github.com/tautspan/tautspan/engine/solver"
	"gonum.org/v1/gonum/mat"
)

// coarse is a layout of one element per stretch between border marks.
func coarse(m *mesh.Mesh, degree int) *layout {
	lay := &layout{omega: 1000, pieces: make([][]stretch, len(m.Pieces))}
	for i := range m.Pieces {
		for k := range borders(&m.Pieces[i]) {
			lay.pieces[i] = append(lay.pieces[i], stretch{mark: k, elements: 1, degree: degree + k})
		}
		lay.pieces[i] = append(lay.pieces[i], stretch{mark: -1, elements: 1, degree: degree + 2})
	}
	return lay
}

// oracle is the network in plain nodal form, assembled here once more from the
// element's stiffness and weights, and propagated by a dense matrix exponential.
type oracle struct {
	m        *mesh.Mesh
	n, nb    int
	node     []int   // unknown of each mesh node, -1 held
	points   [][]int // of each element: unknown at each point
	elements []element
	M        []float64
	K, C     *mat.Dense
}

func newOracle(m *mesh.Mesh, s *system) *oracle {
	o := &oracle{m: m, node: make([]int, len(m.Nodes)), elements: s.elements}
	for i := range m.Nodes {
		o.node[i] = -1
		if !m.Nodes[i].Fixed && m.Nodes[i].Motion == nil {
			o.node[i] = o.n
			o.n++
		}
	}
	for i := range m.Pieces {
		list := s.byPiece[i]
		last := o.node[m.Pieces[i].From]
		moved := m.Nodes[m.Pieces[i].From].Motion != nil
		if moved {
			last = -2 - m.Pieces[i].From
		}
		for k, ei := range list {
			p := s.elements[ei].ref.p
			pts := make([]int, p+1)
			pts[0] = last
			for q := 1; q <= p; q++ {
				if q == p && k == len(list)-1 {
					pts[q] = o.node[m.Pieces[i].To]
					continue
				}
				pts[q] = o.n
				o.n++
			}
			last = pts[p]
			for len(o.points) <= ei {
				o.points = append(o.points, nil)
			}
			o.points[ei] = pts
		}
	}
	o.assemble()
	return o
}

// assemble fills M, K, C; column n holds what a single prescribed node pulls.
func (o *oracle) assemble() {
	o.M = make([]float64, o.n)
	o.K, o.C = mat.NewDense(o.n, o.n+1, nil), mat.NewDense(o.n, o.n+1, nil)
	add := func(d *mat.Dense, a, b int, v float64) {
		if a >= 0 && b >= 0 {
			d.Set(a, b, d.At(a, b)+v)
		} else if a >= 0 && b <= -2 {
			d.Set(a, o.n, d.At(a, o.n)+v)
		}
	}
	for ei, pts := range o.points {
		pc := &o.m.Pieces[o.elements[ei].piece]
		h, r := o.elements[ei].h, o.elements[ei].ref
		for i, a := range pts {
			if a >= 0 {
				o.M[a] += pc.MassPerLength * h / 2 * r.w[i]
			}
			add(o.C, a, a, pc.Viscous*h/2*r.w[i])
			for j, b := range pts {
				add(o.K, a, b, 2*pc.Tension/h*r.k[i][j])
			}
		}
	}
	for i := range o.m.Nodes {
		if a := o.node[i]; a >= 0 {
			o.M[a] += o.m.Nodes[i].Mass
			add(o.K, a, a, o.m.Nodes[i].Spring)
			add(o.C, a, a, o.m.Nodes[i].Dashpot)
			o.nb += len(o.m.Nodes[i].Brackets)
		}
	}
	for _, l := range o.m.Links {
		a, b := o.node[l.A], o.node[l.B]
		for _, e := range [][3]int{{a, a, 1}, {b, b, 1}, {a, b, -1}, {b, a, -1}} {
			add(o.K, e[0], e[1], float64(e[2])*l.Spring)
			add(o.C, e[0], e[1], float64(e[2])*l.Dashpot)
		}
	}
}

// propagate returns states (u, v, q) at rows every dt from y0, under a force
// sum_j force[j] t^j/j! on unknown at, and a prescribed displacement
// sum_j moved[j] t^j/j!.
func (o *oracle) propagate(y0 []float64, at int, force, moved []float64, dt float64, rows int) [][]float64 {
	const chain = 6
	n, size := o.n, 2*o.n+o.nb
	a := mat.NewDense(size+2*chain, size+2*chain, nil)
	for i := 0; i < n; i++ {
		a.Set(i, n+i, 1)
		for j := 0; j < n; j++ {
			a.Set(n+i, j, -o.K.At(i, j)/o.M[i])
			a.Set(n+i, n+j, -o.C.At(i, j)/o.M[i])
		}
		a.Set(n+i, size+chain, -o.K.At(i, n)/o.M[i])
		a.Set(n+i, size+chain+1, -o.C.At(i, n)/o.M[i])
	}
	b := 0
	for i := range o.m.Nodes {
		if u := o.node[i]; u >= 0 {
			for _, k := range o.m.Nodes[i].Brackets {
				a.Set(n+u, u, a.At(n+u, u)-k.K/o.M[u])
				a.Set(n+u, 2*n+b, k.K/o.M[u])
				a.Set(2*n+b, u, k.K/k.C)
				a.Set(2*n+b, 2*n+b, -k.K/k.C)
				b++
			}
		}
	}
	if at >= 0 {
		a.Set(n+at, size, 1/o.M[at])
	}
	// Chains hold a polynomial and its derivatives: p' = next.
	for j := 0; j < chain-1; j++ {
		a.Set(size+j, size+j+1, 1)
		a.Set(size+chain+j, size+chain+j+1, 1)
	}
	y := append(append([]float64(nil), y0...), make([]float64, 2*chain)...)
	copy(y[size:size+chain], force)
	copy(y[size+chain:], moved)
	a.Scale(dt, a)
	var e mat.Dense
	e.Exp(a)
	out := [][]float64{append([]float64(nil), y...)}
	cur := mat.NewVecDense(len(y), y)
	for r := 1; r < rows; r++ {
		next := mat.NewVecDense(len(y), nil)
		next.MulVec(&e, cur)
		out = append(out, append([]float64(nil), next.RawVector().Data...))
		cur = next
	}
	return out
}

// start is the nodal start state.
func (o *oracle) start(s *system) []float64 {
	y := make([]float64, 2*o.n+o.nb)
	for ei, pts := range o.points {
		e := &o.elements[ei]
		pc := &o.m.Pieces[e.piece]
		for i, a := range pts {
			if a >= 0 {
				x := e.s0 + e.h*(e.ref.x[i]+1)/2
				if pc.Start != nil {
					y[a] = pc.Start(x)
				}
				if pc.StartRate != nil {
					y[o.n+a] = pc.StartRate(x)
				}
			}
		}
	}
	b := 0
	for i := range o.m.Nodes {
		if u := o.node[i]; u >= 0 {
			y[u] = o.m.Nodes[i].Start
			y[o.n+u] = o.m.Nodes[i].StartRate
			for _, k := range o.m.Nodes[i].Brackets {
				y[2*o.n+b] = k.Start
				b++
			}
		}
	}
	return y
}

// mixed is a line with everything: unequal viscous loss, masses, spring, dashpot,
// a bracket, a tie to a hung mass with spring and dashpot, a start shape and
// velocity, and a push that is a polynomial in time.
func mixed(every float64, rows int) (*mesh.Mesh, []float64) {
	m := chain(every, rows, seg{7, 1.1, 9000, 3}, seg{4, 2, 9000, 0.5}, seg{9, 0.7, 7000, 0})
	m.Nodes[1].Mass, m.Nodes[1].Spring = 2, 800
	m.Nodes[2].Dashpot = 90
	m.Nodes[2].Brackets = []mesh.Maxwell{{K: 30000, C: 400}, {K: 900, C: 5000, Start: 0.001}}
	m.Nodes = append(m.Nodes, mesh.Node{Name: "hung", Line: -1, Mass: 3, Start: 0.004})
	m.Links = []mesh.Link{{Name: "hanger", A: 1, B: 4, Spring: 2500, Dashpot: 30}}
	for i := range m.Pieces {
		x0 := m.Pieces[i].X0
		m.Pieces[i].Start = func(s float64) float64 { return 0.01 * math.Sin(math.Pi*(x0+s)/20) }
		m.Pieces[i].StartRate = func(s float64) float64 { return -0.2 * math.Sin(2*math.Pi*(x0+s)/20) }
	}
	for _, i := range []int{1, 2} {
		x := m.Pieces[i].X0
		m.Nodes[i].Start, m.Nodes[i].StartRate = 0.01*math.Sin(math.Pi*x/20), -0.2*math.Sin(2*math.Pi*x/20)
	}
	force := []float64{12, -500, 20000, 3e5} // N, N/s, ...
	t := formula.Arg(formula.ArgT)
	p := formula.Const(0)
	fact := 1.0
	for j := len(force) - 1; j >= 0; j-- {
		fact = 1
		for k := 2; k <= j; k++ {
			fact *= float64(k)
		}
		p = formula.Add(formula.Const(force[j]/fact), formula.Mul(t, p))
	}
	m.Pushes = []mesh.Push{{At: atNode(1), Force: program(p)}}
	return m, force
}

// The whole chain against a dense matrix exponential of a separate nodal
// assembly. The two share the element's stiffness and weights (checked in
// TestReferenceElement) and nothing else. Tolerance 1e-9 of the record's scale:
// rounding of about a hundred steps in the dense exponential; 2e-11 seen in
// displacements, 2e-10 in velocities.
func TestAgainstDenseExponential(t *testing.T) {
	m, force := mixed(0.004, 120)
	watch(m, scenario.Displacement, 0, atNode(1), atNode(2), atNode(4), inside(2, 3))
	watch(m, scenario.Velocity, 0, atNode(1), atNode(2), atNode(4), inside(2, 3))
	watch(m, scenario.Acceleration, 0, atNode(1), atNode(2), atNode(4), inside(2, 3))
	lay := coarse(m, 9)
	res, err := New().Solve(context.Background(), m, solver.Request{Freeze: lay}, nil)
	if err != nil {
		t.Fatal(err)
	}
	if !res.Frozen || res.Layout.(*layout).modal {
		t.Fatal("layout or method not as meant")
	}
	j, err := newJob(m, solver.Request{Freeze: lay})
	if err != nil {
		t.Fatal(err)
	}
	o := newOracle(m, j.sys)
	states := o.propagate(o.start(j.sys), o.node[1], force, nil, 0.004, 120)
	e, x := j.sys.find(2, 3)
	l := e.ref.shape(make([]float64, e.ref.p+1), x)
	inner := func(y []float64, off int) float64 {
		s := 0.0
		for q, a := range o.points[indexOf(j.sys, e)] {
			if a >= 0 {
				s += l[q] * y[off+a]
			}
		}
		return s
	}
	for c := 0; c < 2; c++ {
		for k := 0; k < 4; k++ {
			want := make([]float64, 120)
			for r, y := range states {
				if k == 3 {
					want[r] = inner(y, c*o.n)
				} else {
					want[r] = y[c*o.n+o.node[[]int{1, 2, 4}[k]]]
				}
			}
			t.Logf("%.2g", apart(res.Series[c][k], want))
			if d := apart(res.Series[c][k], want); d > 1e-9 {
				t.Errorf("channel %d spot %d: apart by %g", c, k, d)
			}
		}
	}
	// Acceleration from the equation of motion of the oracle's states.
	want := make([]float64, 120)
	hung := o.node[4]
	for r, y := range states {
		a := o.node[1]
		want[r] = (2500*(y[a]-y[hung]) + 30*(y[o.n+a]-y[o.n+hung])) / 3
	}
	t.Logf("%.2g", apart(res.Series[2][2], want))
	if d := apart(res.Series[2][2], want); d > 1e-9 {
		t.Errorf("acceleration of the hung mass: apart by %g", d)
	}
	if gap := math.Abs(res.Energy.Unaccounted()) / res.Energy.Most; gap > 1e-6 {
		t.Errorf("energy gap %g", gap) // 8th-order quadrature; 7e-12 seen
	} else {
		t.Logf("energy gap %g", gap)
	}
}

func indexOf(s *system, e *element) int {
	for i := range s.elements {
		if &s.elements[i] == e {
			return i
		}
	}
	return -1
}

// A prescribed displacement that is a polynomial in time, with a link dashpot to
// the moved node, against the same oracle.
func TestPrescribedMotionAgainstDense(t *testing.T) {
	m, _ := mixed(0.004, 120)
	m.Pushes = nil
	moved := []float64{0, 0, 3, -40, 600}
	poly := func(shift int) func(float64) float64 {
		return func(t float64) float64 {
			s, c := 0.0, 1.0
			for j := shift; j < len(moved); j++ {
				s += moved[j] * c
				c *= t / float64(j-shift+1)
			}
			return s
		}
	}
	m.Nodes[0].Motion = &mesh.Motion{Displacement: poly(0), Velocity: poly(1)}
	m.Links = append(m.Links, mesh.Link{Name: "lead", A: 0, B: 2, Spring: 300, Dashpot: 60})
	watch(m, scenario.Displacement, 0, atNode(1), atNode(2), atNode(4))
	watch(m, scenario.Force, 0, atNode(0))
	lay := coarse(m, 9)
	res, err := New().Solve(context.Background(), m, solver.Request{Freeze: lay}, nil)
	if err != nil {
		t.Fatal(err)
	}
	j, err := newJob(m, solver.Request{Freeze: lay})
	if err != nil {
		t.Fatal(err)
	}
	o := newOracle(m, j.sys)
	// The oracle's link to a held node is to ground; add the moved end by hand.
	a := o.node[2]
	o.K.Set(a, o.n, o.K.At(a, o.n)-300)
	o.C.Set(a, o.n, o.C.At(a, o.n)-60)
	states := o.propagate(o.start(j.sys), -1, nil, moved, 0.004, 120)
	for k, node := range []int{1, 2, 4} {
		want := make([]float64, 120)
		for r, y := range states {
			want[r] = y[o.node[node]]
		}
		t.Logf("%.2g", apart(res.Series[0][k], want))
		if d := apart(res.Series[0][k], want); d > 1e-9 {
			t.Errorf("node %d: apart by %g", node, d)
		}
	}
	// The line's force on the support, from the oracle's states.
	e := &j.sys.elements[0]
	want := make([]float64, 120)
	for r, y := range states {
		tm := 0.004 * float64(r)
		s := -e.mass * e.ref.w[0] * (poly(2)(tm) + e.rate*poly(1)(tm))
		for q, u := range o.points[0] {
			v := poly(0)(tm)
			if u >= 0 {
				v = y[u]
			}
			s -= 2 * e.tension / e.h * e.ref.k[0][q] * v
		}
		want[r] = s
	}
	t.Logf("force %.2g", apart(res.Series[1][0], want))
	if d := apart(res.Series[1][0], want); d > 1e-8 {
		t.Errorf("force: apart by %g", d)
	}
	if gap := math.Abs(res.Energy.Unaccounted()) / res.Energy.Most; gap > 1e-6 {
		t.Errorf("energy gap %g", gap)
	} else {
		t.Logf("energy gap %g", gap)
	}
}
