package modal

import (
	"math"
	"math/cmplx"

	"github.com/tautspan/tautspan/engine/numeric"
)

// evaluator evaluates Delta(s) of a group and its logarithmic derivative; it
// owns the buffers.
type evaluator struct {
	w      *network
	n      int
	blocks []block
	// row of each unknown: nodes, far ends of brackets, hidden unknowns of the
	// elements; -1 where a hidden unknown is not kept.
	row   []int
	a, da []complex128
	last  []int
}

func newEvaluator(w *network) *evaluator {
	if w.sys != nil {
		return &evaluator{w: w}
	}
	n := w.unknowns()
	return &evaluator{w: w, blocks: make([]block, len(w.elements)), row: make([]int, n),
		a: make([]complex128, n*n), da: make([]complex128, n*n), last: make([]int, n)}
}

// hidden is the row of an element's hidden unknown, -1 where it keeps none.
func (e *evaluator) hidden(element int) int {
	return e.row[len(e.w.nodes)+len(e.w.brackets)+element]
}

// number gives the rows in the network's order, hidden unknowns only where kept.
func (e *evaluator) number() {
	w := e.w
	first := len(w.nodes) + len(w.brackets)
	e.n = 0
	for _, u := range w.order {
		if u >= first && e.blocks[u-first].keep == keepNone {
			e.row[u] = -1
			continue
		}
		e.row[u] = e.n
		e.n++
	}
}

// assemble builds the matrix at s and its derivative. A bracket's far end q is
// an unknown with the row -K u + (K + sC) q = 0, so that it adds no pole.
func (e *evaluator) assemble(s complex128) {
	w := e.w
	for i := range w.elements {
		e.blocks[i] = w.elements[i].at(s)
	}
	e.number()
	n := e.n
	a, da := e.a[:n*n], e.da[:n*n]
	clear(a)
	clear(da)
	add := func(i, j int, v, v1 complex128) {
		if i < 0 || j < 0 {
			return
		}
		a[i*n+j] += v
		da[i*n+j] += v1
		if i != j {
			a[j*n+i] += v
			da[j*n+i] += v1
		}
	}
	at := func(node int) int {
		if node < 0 {
			return -1
		}
		return e.row[node]
	}
	for i := range w.nodes {
		m, c := complex(w.mass[i], 0), complex(w.dashpot[i], 0)
		add(e.row[i], e.row[i], (m*s+c)*s+complex(w.spring[i], 0), 2*m*s+c)
	}
	for i, b := range w.brackets {
		u, q, k, c := e.row[b.at], e.row[len(w.nodes)+i], complex(b.k, 0), complex(b.c, 0)
		add(u, u, k, 0)
		add(u, q, -k, 0)
		add(q, q, k+s*c, c)
	}
	for _, l := range w.links {
		c := complex(l.c, 0)
		v := complex(l.k, 0) + s*c
		x, y := at(l.a), at(l.b)
		add(x, x, v, c)
		add(y, y, v, c)
		add(x, y, -v, -c)
	}
	for i := range w.elements {
		b := &e.blocks[i]
		x, y := at(w.elements[i].i), at(w.elements[i].j)
		add(x, x, b.diag, b.diag1)
		add(y, y, b.diag, b.diag1)
		if x == y { // a loop of one piece
			add(x, x, 2*b.off, 2*b.off1)
		} else {
			add(x, y, b.off, b.off1)
		}
		if h := e.hidden(i); h >= 0 {
			f, f1 := b.b, b.b1
			if b.keep == keepOdd {
				f, f1 = -f, -f1
			}
			add(h, x, f, f1)
			add(h, y, b.b, b.b1)
			add(h, h, b.d, b.d1)
		}
	}
}

// delta is log Delta(s), its imaginary part up to multiples of 2 pi, and
//
//	slope = Delta'/Delta = tr(A^{-1} A') + slopes of the factors.
//
// It reports false where the matrix is singular in the arithmetic.
func (e *evaluator) delta(s complex128) (log, slope complex128, ok bool) {
	if e.w.sys != nil {
		return e.w.sys.delta(s)
	}
	e.assemble(s)
	log, slope, ok = numeric.LogDet(e.a, e.da, e.last, e.n)
	if !ok {
		return 0, 0, false
	}
	for i := range e.blocks {
		log += e.blocks[i].log
		slope += e.blocks[i].logSlope
	}
	return log, slope, !cmplx.IsNaN(log) && !cmplx.IsInf(log) && !cmplx.IsNaN(slope) && !cmplx.IsInf(slope)
}

// newton polishes a start value with Newton's method on log Delta, dividing out
// the zeros in known (with their conjugates) and the one at s = 0. It reports
// false where it does not settle.
//
// Order 2 at simple zeros; the last step is below 1e-13 |s|, or the smallest
// that rounding allows if that is below 1e-7 |s|.
func (e *evaluator) newton(s complex128, known []complex128) (complex128, bool) {
	best := math.Inf(1)
	unit := 1 / (e.w.travel + math.SmallestNonzeroFloat64)
	for step := 0; step < 60; step++ {
		_, slope, ok := e.delta(s)
		if !ok {
			return s, best < 1e-7*cmplx.Abs(s)
		}
		slope -= deflation(s, known, !e.w.lossy)
		if e.w.zeros > 0 {
			slope -= complex(float64(e.w.zeros), 0) / s
		}
		d := -1 / slope
		size := cmplx.Abs(d)
		if math.IsNaN(size) {
			return s, false
		}
		abs := cmplx.Abs(s)
		if size >= best && best < 1e-7*abs {
			return s, true // rounding rules: at a multiple zero from 1e-8 on
		}
		if limit := 0.5 * math.Max(abs, math.Min(unit, 1e300)); size > limit {
			d *= complex(limit/size, 0)
		}
		best = size
		s += d
		if size < 1e-13*abs {
			return s, true
		}
	}
	return s, false
}

// deflation is the sum of 1/(s-z) over the known zeros and, where they are zeros
// too, their conjugates.
func deflation(s complex128, known []complex128, both bool) complex128 {
	var sum complex128
	for _, z := range known {
		if z != s {
			sum += 1 / (s - z)
		}
		if both && imag(z) > 0 {
			sum += 1 / (s - cmplx.Conj(z))
		}
	}
	return sum
}

// upper gives a root the form in which it is listed: imaginary part positive, or
// exactly zero where it is zero to rounding.
func upper(s complex128) complex128 {
	if math.Abs(imag(s)) < 1e-10*cmplx.Abs(s) {
		return complex(real(s), 0)
	}
	if imag(s) < 0 {
		return cmplx.Conj(s)
	}
	return s
}

// list of roots with multiplicity, as it grows.
type list struct {
	e     *evaluator
	roots []complex128
	tried []complex128 // where merge has looked already
	work  int          // regions that complete may still count
	// floor, above zero with loss factors, is the angular frequency down to which
	// roots are sought; what lies below is none.
	floor float64
}

// same says when two roots are taken for one. Coinciding roots are known to
// 1e-8; roots of real lines this near are looked into by merge.
const same = 1e-6

// offer adds a polished root; where it is near one that is known it finds out
// how many there are. It reports whether the list grew.
func (l *list) offer(s complex128) bool {
	if l.floor > 0 && imag(s) <= l.floor {
		return false
	}
	s = upper(s)
	abs := cmplx.Abs(s)
	// Passive networks have no zeros to the right of the imaginary axis.
	if !(abs > 0) || real(s) > 1e-9*abs {
		return false
	}
	if real(s) > 0 {
		s = complex(0, imag(s))
	}
	for _, z := range l.roots {
		if cmplx.Abs(s-z) < same*abs {
			return l.merge(z, false)
		}
	}
	l.roots = append(l.roots, s)
	if imag(s) > 0 && imag(s) < same*abs {
		l.merge(s, true) // a pair across the real axis, or two real roots
	}
	return true
}

// merge counts the zeros within a small circle around a root and takes the
// known ones there for what the circle's moments say, where there are more, or as
// many and afresh is set. Reports growth.
//
// With c the centre and r the radius, sums over the zeros inside,
// sum (z-c)^k = (1/2 pi i) * integral of (s-c)^k Delta'/Delta ds, by the
// trapezoidal rule, which converges geometrically on a circle. Two zeros follow
// from the sums for k = 1, 2.
// Source: Delves, Lyness, A numerical method for locating the zeros of an
// analytic function, Math. Comp. 21 (1967).
func (l *list) merge(c complex128, afresh bool) bool {
	if math.Abs(imag(c)) < same*cmplx.Abs(c) {
		c = complex(real(c), 0)
	}
	for _, z := range l.tried {
		if cmplx.Abs(z-c) < same*cmplx.Abs(c) {
			return false
		}
	}
	abs := cmplx.Abs(c)
	// The circle shrinks until it holds two, or as many as coincide.
	for r := 1e-2 * abs; r > 3e-9*abs; r /= 3 {
		near, sum, clear := l.known(c, r)
		if !clear {
			continue
		}
		n, m, ok := l.moments(c, r)
		if !ok { // a zero near the circle
			continue
		}
		if n < near || n == near && !afresh {
			break
		}
		spread := cmplx.Abs(m[2]/complex(float64(n), 0) - m[1]*m[1]/complex(float64(n*n), 0))
		if n <= 2 || spread < 1e-16*abs*abs {
			return l.replace(c, r, n, m)
		}
		if n == near+1 && cmplx.Abs(m[0]-complex(float64(n), 0)) < 1e-10 { // the one that is missing makes up the sum
			l.add(c + m[1] - sum)
			return true
		}
	}
	l.tried = append(l.tried, c)
	return false
}

// add appends a root, made equal to one it cannot be told from.
func (l *list) add(s complex128) {
	s = upper(s)
	for _, z := range l.roots {
		if cmplx.Abs(z-s) < 1e-9*cmplx.Abs(s) {
			s = z
			break
		}
	}
	l.roots = append(l.roots, s)
}

// known counts the known zeros within r of c and sums their distances from it;
// clear says that none is so near the circle that the sums along it would not
// settle.
func (l *list) known(c complex128, r float64) (n int, sum complex128, clear bool) {
	for _, z := range l.roots {
		both := []complex128{z, cmplx.Conj(z)}
		if imag(z) == 0 || l.floor > 0 {
			both = both[:1]
		}
		for _, y := range both {
			d := cmplx.Abs(y - c)
			if d > 0.5*r && d < 2*r {
				return 0, 0, false
			}
			if d < r {
				n++
				sum += y - c
			}
		}
	}
	return n, sum, true
}

// moments are the sums of (z-c)^k, k = 0, 1, 2, over the zeros within r of c. The
// first is an integer n; by how much it is not tells the error of all, and 1e-8
// (of r^k) is refused: a zero is then too near the circle.
func (l *list) moments(c complex128, r float64) (n int, m [3]complex128, ok bool) {
	const points = 48 // 0.5^48 is below rounding
	for k := 0; k < points; k++ {
		sin, cos := math.Sincos(2 * math.Pi * (float64(k) + 0.5) / points)
		d := complex(r*cos, r*sin)
		_, slope, ok := l.e.delta(c + d)
		if !ok {
			return 0, m, false
		}
		f := slope * d / points
		m[0] += f
		m[1] += f * d
		m[2] += f * d * d
	}
	n = int(math.Round(real(m[0])))
	return n, m, cmplx.Abs(m[0]-complex(float64(n), 0)) < 1e-8
}

// replace puts the n zeros that the moments around c tell in the place of the
// known ones within r.
func (l *list) replace(c complex128, r float64, n int, m [3]complex128) bool {
	rest := l.roots[:0:0]
	for _, z := range l.roots {
		if cmplx.Abs(z-c) >= r && (l.floor > 0 || cmplx.Abs(cmplx.Conj(z)-c) >= r) {
			rest = append(rest, z)
		}
	}
	if imag(c) == 0 { // by symmetry
		m[1], m[2] = complex(real(m[1]), 0), complex(real(m[2]), 0)
	}
	mean := m[1] / complex(float64(n), 0)
	centre := c + mean
	half := complex128(0)
	if n == 2 {
		half = cmplx.Sqrt(m[2]/2 - mean*mean)
		// Below what rounding leaves: it parts a pair with one shape by the root
		// of itself, a pair with two shapes by r times that.
		size := cmplx.Abs(half) / cmplx.Abs(c)
		if size < 1e-7 {
			if _, rank := l.e.w.shapes(centre, 2); size < 1e-9 || rank < 2 {
				half = 0
			}
		}
	}
	for k := 0; k < n; k++ {
		z := upper(centre + half)
		half = -half
		if imag(c) == 0 && imag(centre+half) < -1e-10*cmplx.Abs(c) && imag(z) > 0 {
			rest = append(rest, z) // a pair across the real axis is one entry
			break
		}
		rest = append(rest, z)
	}
	l.roots = rest
	return true
}
