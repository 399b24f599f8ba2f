package modal

import (
	"math"
	"math/cmplx"
	"sort"

	"gonum.org/v1/gonum/mat"
)

// Largest state for which eigenvalues are worth their time: the work grows with
// the third power, that of the search by counting (winding.go) about linearly.
const mostStates = 260

// starts gives approximate roots with imaginary part up to omega from a coarse
// mesh of Gauss-Lobatto-Legendre elements with free nodes as in the network:
// M u” + C u' + K u = 0 written as y' = A y for y = (sqrt(M) u, its rate), with
// the far ends of brackets as first-order states. They only need to lie nearer
// to their root than to another one; nothing if the state is too large.
//
// Degree by p >= 0.57 k h + 4 (k the wave number at omega): good to some parts
// in a thousand at omega.
// Source: Patera, A spectral element method for fluid dynamics, J. Comput. Phys.
// 54 (1984), for the elements; Foss, Co-ordinates which uncouple the equations
// of motion of damped linear dynamic systems, J. Appl. Mech. 25 (1958), for the
// state form.
func (w *network) starts(omega float64) []complex128 {
	if w.sys != nil {
		return w.generalStarts(omega)
	}
	n := len(w.nodes)
	degree := make([][]int, len(w.elements))
	for i := range w.elements {
		el := &w.elements[i]
		gamma := el.c / (2 * el.m)
		p := 0.57*math.Hypot(omega, gamma)*el.tau + 4
		if p > mostStates {
			return nil
		}
		parts := int(math.Ceil(p / 40))
		for k := 0; k < parts; k++ {
			degree[i] = append(degree[i], int(math.Ceil(p/float64(parts))))
		}
		for _, d := range degree[i] {
			n += d
		}
		n--
	}
	if 2*n+len(w.brackets) > mostStates || n == 0 {
		return nil
	}
	g := newCoarse(n)
	for i := range w.nodes {
		g.mass[i] = w.mass[i]
		g.add(i, i, w.spring[i], w.dashpot[i])
	}
	for _, l := range w.links {
		g.join(l.a, l.b, l.k, l.c)
	}
	next := len(w.nodes)
	for i := range w.elements {
		next = g.piece(&w.elements[i], degree[i], next)
	}
	return g.eigenvalues(w.brackets, omega)
}

// coarse holds the matrices of the mesh, row by row.
type coarse struct {
	n       int
	mass    []float64
	k, c    []float64
	degrees map[int]*legendre
}

func newCoarse(n int) *coarse {
	return &coarse{n: n, mass: make([]float64, n), k: make([]float64, n*n), c: make([]float64, n*n), degrees: map[int]*legendre{}}
}

func (g *coarse) add(i, j int, k, c float64) {
	if i >= 0 && j >= 0 {
		g.k[i*g.n+j] += k
		g.c[i*g.n+j] += c
	}
}

func (g *coarse) join(a, b int, k, c float64) {
	g.add(a, a, k, c)
	g.add(b, b, k, c)
	g.add(a, b, -k, -c)
	g.add(b, a, -k, -c)
}

// piece adds the elements of a piece; its inner nodes are numbered from next on.
func (g *coarse) piece(el *element, degree []int, next int) int {
	left := el.i
	for part, p := range degree {
		rule := g.degrees[p]
		if rule == nil {
			rule = newLegendre(p)
			g.degrees[p] = rule
		}
		at := make([]int, p+1)
		at[0] = left
		for q := 1; q <= p; q++ {
			if q == p && part == len(degree)-1 {
				at[q] = el.j
				break
			}
			at[q] = next
			next++
		}
		left = at[p]
		h := el.len / float64(len(degree))
		for q, i := range at {
			if i >= 0 {
				g.mass[i] += el.m * h / 2 * rule.w[q]
				g.add(i, i, 0, el.c*h/2*rule.w[q])
			}
			for r, j := range at {
				g.add(i, j, el.t*2/h*rule.k[q*(p+1)+r], 0)
			}
		}
	}
	return next
}

// eigenvalues of the state matrix with 0 <= Im s, by imaginary, then real part.
func (g *coarse) eigenvalues(brackets []bracket, omega float64) []complex128 {
	n, q := g.n, len(brackets)
	root := make([]float64, n)
	for i := range root {
		m := g.mass[i]
		if m == 0 { // a place between ties without mass: any mass that moves fast
			m = 1e-6*g.k[i*n+i]/(omega*omega) + 1e-3*g.c[i*n+i]/omega
		}
		if m == 0 {
			m = 1
		}
		root[i] = 1 / math.Sqrt(m)
	}
	size := 2*n + q
	a := mat.NewDense(size, size, nil)
	for i := 0; i < n; i++ {
		a.Set(i, n+i, omega)
		for j := 0; j < n; j++ {
			f := root[i] * root[j]
			a.Set(n+i, j, -g.k[i*n+j]*f/omega)
			a.Set(n+i, n+j, -g.c[i*n+j]*f)
		}
	}
	for b, br := range brackets {
		r, at := 2*n+b, br.at
		a.Set(n+at, at, a.At(n+at, at)-br.k*root[at]*root[at]/omega)
		a.Set(n+at, r, br.k*root[at]/omega)
		a.Set(r, at, br.k/br.c*root[at])
		a.Set(r, r, -br.k/br.c)
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
	sort.Slice(out, func(i, j int) bool {
		if imag(out[i]) != imag(out[j]) {
			return imag(out[i]) < imag(out[j])
		}
		return real(out[i]) > real(out[j])
	})
	return out
}

// legendre is the Gauss-Lobatto-Legendre rule of degree p on [-1, 1]: p+1 nodes
// x, weights w, and the stiffness k[i*(p+1)+j] = sum_q w_q D_qi D_qj of the
// Lagrange polynomials on the nodes.
type legendre struct {
	x, w, k []float64
}

// newLegendre computes the rule: nodes by Newton's method on (1-x^2) P_p'(x)
// from the Chebyshev ones, weights 2/(p(p+1)P_p^2), derivative matrix
// D_ij = P_p(x_i)/(P_p(x_j)(x_i-x_j)), corners -+p(p+1)/4.
// Source: Canuto, Hussaini, Quarteroni, Zang, Spectral Methods (from memory).
func newLegendre(p int) *legendre {
	n := p + 1
	r := &legendre{x: make([]float64, n), w: make([]float64, n), k: make([]float64, n*n)}
	top := make([]float64, n) // P_p at the nodes
	fp := float64(p)
	for i := range r.x {
		x := -math.Cos(math.Pi * float64(i) / fp)
		for step := 0; ; step++ {
			before, now := 1.0, x
			for k := 2; k <= p; k++ {
				fk := float64(k)
				before, now = now, ((2*fk-1)*x*now-(fk-1)*before)/fk
			}
			top[i] = now
			if step == 50 || i == 0 || i == p {
				break
			}
			// (1-x^2)P' = p(P_{p-1} - x P_p), and its derivative is -p(p+1)P_p.
			d := (before - x*now) / ((fp + 1) * now)
			x += d
			if math.Abs(d) < 1e-16 {
				step = 49
			}
		}
		r.x[i] = x
		r.w[i] = 2 / (fp * (fp + 1) * top[i] * top[i])
	}
	d := make([]float64, n*n)
	for i := 0; i < n; i++ {
		for j := 0; j < n; j++ {
			if i != j {
				d[i*n+j] = top[i] / (top[j] * (r.x[i] - r.x[j]))
			}
		}
	}
	d[0], d[n*n-1] = -fp*(fp+1)/4, fp*(fp+1)/4
	for q := 0; q < n; q++ {
		for i := 0; i < n; i++ {
			for j := 0; j < n; j++ {
				r.k[i*n+j] += r.w[q] * d[q*n+i] * d[q*n+j]
			}
		}
	}
	return r
}
