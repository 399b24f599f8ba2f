package modal

import (
	"fmt"
	"math"
	"slices"
	"sort"

	"github.com/tautspan/tautspan/engine/mesh"
)

// network is one group of the mesh with its unknowns numbered: first the nodes
// that can move, then the far ends of brackets.
type network struct {
	m        *mesh.Mesh
	line     int
	elements []element
	nodes    []int // mesh node of each unknown
	mass     []float64
	spring   []float64
	dashpot  []float64
	brackets []bracket
	links    []link

	travel  float64 // s, sum of the travel times of all pieces
	longest float64 // s, largest of them
	briefst float64 // s, smallest of them
	damped  bool
	rigid   int // motions without restoring force
	zeros   int // order of the zero of Delta at s = 0
	notes   []string
	order   []int   // of the unknowns, for a narrow band
	sys     *system // not nil: more than uniform strings
	loss    float64 // s, largest internal loss
	lossy   bool    // loss factors: Delta is another function below the real axis than above
}

// element is a uniform piece between unknowns i and j; -1 is held.
type element struct {
	piece, i, j  int
	t, m, c, len float64 // N, kg/m, N s/m^2, m
	tau, z       float64 // s, N s/m
}

type bracket struct {
	at   int
	k, c float64
}

type link struct {
	a, b int
	k, c float64
}

func held(n *mesh.Node) bool { return n.Fixed || n.Motion != nil }

// sets is a partition of 0 .. n-1 by union and find.
type sets []int

func newSets(n int) sets {
	s := make(sets, n)
	for i := range s {
		s[i] = i
	}
	return s
}

func (s sets) find(i int) int {
	for s[i] != i {
		s[i] = s[s[i]]
		i = s[i]
	}
	return i
}

// join merges two sets; the smaller index stays the name.
func (s sets) join(i, j int) {
	i, j = s.find(i), s.find(j)
	if i < j {
		s[j] = i
	} else {
		s[i] = j
	}
}

// split finds the groups, in the order of their first nodes. Pieces join what
// they meet, supports included, so that a line stays one group though a held
// joint may part it; a link to a held place joins nothing.
func split(m *mesh.Mesh) []*network {
	s := newSets(len(m.Nodes))
	for _, p := range m.Pieces {
		s.join(p.From, p.To)
	}
	for _, l := range m.Links {
		if !held(&m.Nodes[l.A]) && !held(&m.Nodes[l.B]) && (l.Spring > 0 || l.Dashpot > 0) {
			s.join(l.A, l.B)
		}
	}
	var out []*network
	for i := range m.Nodes {
		if s.find(i) != i {
			continue
		}
		w := newNetwork(m, func(n int) bool { return s.find(n) == i })
		if len(w.elements) > 0 || len(w.nodes) > 0 {
			out = append(out, w)
		}
	}
	return out
}

func newNetwork(m *mesh.Mesh, in func(node int) bool) *network {
	w := &network{m: m, line: -1, briefst: math.Inf(1)}
	unknown := make([]int, len(m.Nodes))
	pieces := make([]int, len(m.Nodes))
	springy := make([]bool, len(m.Nodes))
	for _, p := range m.Pieces {
		pieces[p.From]++
		pieces[p.To]++
	}
	for _, l := range m.Links {
		springy[l.A] = springy[l.A] || l.Spring > 0 || l.Dashpot > 0
		springy[l.B] = springy[l.B] || l.Spring > 0 || l.Dashpot > 0
	}
	lines := map[int]bool{}
	for i := range m.Nodes {
		n := &m.Nodes[i]
		unknown[i] = -1
		if !in(i) {
			continue
		}
		if n.Line >= 0 && pieces[i] > 0 {
			lines[n.Line] = true
			w.line = n.Line
		}
		nothing := pieces[i] == 0 && n.Mass == 0 && !springy[i]
		if held(n) || nothing {
			continue
		}
		w.addNode(i, n)
		unknown[i] = len(w.nodes) - 1
	}
	if len(lines) != 1 {
		w.line = -1
	}
	for i, p := range m.Pieces {
		if in(p.From) {
			w.addPiece(i, &m.Pieces[i], unknown[p.From], unknown[p.To])
		}
	}
	for _, l := range m.Links {
		a, b := unknown[l.A], unknown[l.B]
		if (a >= 0 || b >= 0) && a != b && (l.Spring > 0 || l.Dashpot > 0) {
			w.links = append(w.links, link{a, b, l.Spring, l.Dashpot})
			w.damped = w.damped || l.Dashpot > 0
		}
	}
	w.lossy = w.factors(in)
	w.damped = w.damped || w.lossy
	w.freedom()
	if w.general(in) {
		w.sys = newSystem(m, in)
		w.remarks()
		return w
	}
	w.matched()
	w.arrange()
	return w
}

// factors tells whether something in the group has a loss factor.
func (w *network) factors(in func(node int) bool) bool {
	for _, e := range w.elements {
		if p := &w.m.Pieces[e.piece]; p.TensionLoss > 0 || p.Bending*p.BendingLoss > 0 {
			return true
		}
	}
	for _, i := range w.nodes {
		if n := &w.m.Nodes[i]; n.Spring*n.SpringLoss > 0 {
			return true
		}
	}
	for i := range w.m.Links {
		if l := &w.m.Links[i]; l.Spring*l.SpringLoss > 0 && (in(l.A) || in(l.B)) {
			return true
		}
	}
	return false
}

// slow is an angular frequency below all vibrations of the group, rad/s.
func (w *network) slow(omega float64) float64 {
	if w.travel > 0 {
		return 1e-6 * math.Pi / w.travel
	}
	return 1e-6 * omega
}

// general tells whether the group has more than uniform strings.
func (w *network) general(in func(node int) bool) bool {
	if w.lossy {
		return true
	}
	for i := range w.m.Links {
		if l := &w.m.Links[i]; l.Through > 0 && (in(l.A) || in(l.B)) {
			return true
		}
	}
	for _, e := range w.elements {
		p := &w.m.Pieces[e.piece]
		if p.Bending > 0 || p.TensionRise != 0 {
			return true
		}
	}
	for i := range w.m.Lines {
		l := &w.m.Lines[i]
		if l.Sag != nil && len(l.Pieces) > 0 && in(w.m.Pieces[l.Pieces[0]].From) {
			return true
		}
	}
	return false
}

func (w *network) addNode(i int, n *mesh.Node) {
	at := len(w.nodes)
	w.nodes = append(w.nodes, i)
	w.mass = append(w.mass, n.Mass)
	w.spring = append(w.spring, n.Spring)
	w.dashpot = append(w.dashpot, n.Dashpot)
	w.damped = w.damped || n.Dashpot > 0
	for _, b := range n.Brackets {
		if b.K > 0 && b.C > 0 { // else it exerts no force at all
			w.brackets = append(w.brackets, bracket{at, b.K, b.C})
			w.damped = true
		}
	}
}

func (w *network) addPiece(i int, p *mesh.Piece, a, b int) {
	e := element{piece: i, i: a, j: b, t: p.Tension, m: p.MassPerLength, c: p.Viscous,
		len: p.Length, tau: p.TravelTime(), z: p.Impedance()}
	if p.Bending > 0 || p.TensionRise != 0 {
		e.tau = slowest(p)
		w.damped = w.damped || p.Bending*p.Internal > 0
		w.loss = math.Max(w.loss, p.Internal)
	}
	w.elements = append(w.elements, e)
	w.travel += e.tau
	w.longest = math.Max(w.longest, e.tau)
	w.briefst = math.Min(w.briefst, e.tau)
	w.damped = w.damped || e.c > 0
}

// slowest is the travel time that spaces the slowest vibrations of a piece: pi
// over the first frequency with hinged ends, where tension varies with that of
// each place, L = integral of sqrt(m/(T + EI pi^2/L^2)) dx.
func slowest(p *mesh.Piece) float64 {
	stiff := p.Bending * math.Pi * math.Pi / (p.Length * p.Length)
	t0, t1 := p.Tension+stiff, p.Tension+stiff+p.TensionRise*p.Length
	return 2 * p.Length * math.Sqrt(p.MassPerLength) / (math.Sqrt(math.Max(t0, 0)) + math.Sqrt(math.Max(t1, 0)))
}

// freedom finds the motions that nothing holds back and the order of the zero
// that they give Delta at s = 0. A part without tie to ground moves as a whole
// with force s^2 M + s C; the order is the number of such parts plus the number
// of independent motions of them that no dashpot resists.
func (w *network) freedom() {
	n := len(w.nodes)
	ground := n
	stiff := newSets(n + 1)
	at := func(i int) int {
		if i < 0 {
			return ground
		}
		return i
	}
	for _, e := range w.elements {
		stiff.join(at(e.i), at(e.j))
	}
	for i, k := range w.spring {
		if k > 0 {
			stiff.join(i, ground)
		}
	}
	for _, l := range w.links {
		if l.k > 0 {
			stiff.join(at(l.a), at(l.b))
		}
	}
	slow := append(sets(nil), stiff...)
	for i, c := range w.dashpot {
		if c > 0 {
			slow.join(i, ground)
		}
	}
	for _, b := range w.brackets {
		slow.join(b.at, ground)
	}
	for _, e := range w.elements {
		if e.c > 0 {
			slow.join(at(e.i), ground)
		}
	}
	for _, l := range w.links {
		slow.join(at(l.a), at(l.b))
	}
	parts := func(s sets) int {
		count := 0
		for i := 0; i < n; i++ {
			if s.find(i) == i && s.find(ground) != i {
				count++
			}
		}
		return count
	}
	w.rigid = parts(stiff)
	w.zeros = w.rigid + parts(slow)
	if w.rigid > 0 {
		w.notes = append(w.notes, fmt.Sprintf("%s can move without any restoring force; that is no vibration and is not listed.", w.name()))
	}
}

// matched notes dashpots that take the whole of some wave: with C equal to the
// sum of the impedances that meet at a node without mass and spring, no wave
// that reaches it from all sides alike comes back, and the family of modes that
// lived on it has died out (its damping grew beyond all bounds).
func (w *network) matched() {
	sum := make([]float64, len(w.nodes))
	for _, e := range w.elements {
		for _, i := range []int{e.i, e.j} {
			if i >= 0 {
				sum[i] += e.z
			}
		}
	}
	for i, z := range sum {
		// 1e-6: chosen; nearer than any dashpot's coefficient is known.
		if z > 0 && w.dashpot[i] > 0 && math.Abs(w.dashpot[i]-z) <= 1e-6*z {
			w.notes = append(w.notes, fmt.Sprintf(
				"the dashpot at %s equals the impedance of the line that meets there: modes that it damped ever more up to this value have died out, and above it modes are numbered anew.",
				w.m.Nodes[w.nodes[i]].Name))
		}
	}
}

func (w *network) name() string {
	switch {
	case w.line >= 0 && w.line < len(w.m.Lines):
		return w.m.Lines[w.line].Name
	case len(w.elements) > 0:
		if first := w.m.Pieces[w.elements[0].piece].Line; first >= 0 && first < len(w.m.Lines) {
			return w.m.Lines[first].Name + " with the lines tied to it"
		}
	case len(w.nodes) > 0:
		return w.m.Nodes[w.nodes[0]].Name
	}
	return "the network"
}

// unknowns is the largest number of unknowns: nodes, far ends of brackets, one
// hidden one an element.
func (w *network) unknowns() int { return len(w.nodes) + len(w.brackets) + len(w.elements) }

// arrange orders the unknowns so that neighbours get numbers near each other:
// breadth first from an end, those with fewer neighbours first, then turned
// round.
// Source: Cuthill, McKee, Reducing the bandwidth of sparse symmetric matrices,
// Proc. 24th Nat. Conf. ACM (1969) (from memory).
func (w *network) arrange() {
	n := w.unknowns()
	next := make([][]int, n)
	meet := func(i, j int) {
		if i >= 0 && j >= 0 && i != j {
			next[i] = append(next[i], j)
			next[j] = append(next[j], i)
		}
	}
	for i, b := range w.brackets {
		meet(b.at, len(w.nodes)+i)
	}
	for i, el := range w.elements {
		h := len(w.nodes) + len(w.brackets) + i
		meet(el.i, h)
		meet(el.j, h)
		meet(el.i, el.j)
	}
	for _, l := range w.links {
		meet(l.a, l.b)
	}
	seen := make([]bool, n)
	// walk lists what hangs together with u, marking it.
	walk := func(u int) []int {
		seen[u] = true
		list := []int{u}
		for k := 0; k < len(list); k++ {
			from := len(list)
			for _, v := range next[list[k]] {
				if !seen[v] {
					seen[v] = true
					list = append(list, v)
				}
			}
			level := list[from:]
			sort.SliceStable(level, func(i, j int) bool { return len(next[level[i]]) < len(next[level[j]]) })
		}
		return list
	}
	for u := 0; u < n; u++ {
		if seen[u] {
			continue
		}
		part := walk(u)
		for _, v := range part { // again, from the far end
			seen[v] = false
		}
		w.order = append(w.order, walk(part[len(part)-1])...)
	}
	slices.Reverse(w.order)
}
