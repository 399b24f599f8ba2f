package modal

import (
	"fmt"
	"math"

	"github.com/tautspan/tautspan/engine/numeric"
)

// counter evaluates the undamped matrix of a group; it owns the buffers.
type counter struct {
	w    *network
	keep []kept
	a    []float64
}

func newCounter(w *network) *counter {
	if w.sys != nil {
		return &counter{w: w}
	}
	n := len(w.nodes) + len(w.elements)
	return &counter{w: w, keep: make([]kept, len(w.elements)), a: make([]float64, n*n)}
}

// choose fixes the hidden unknowns for omega and gives the number of
// vibrations with all nodes held that lie below, less those that the hidden
// unknowns count.
func (c *counter) choose(omega float64) (inner int) {
	for i := range c.w.elements {
		k, n := c.w.elements[i].keepAt(omega)
		c.keep[i] = k
		inner += n
	}
	return inner
}

// negative is the number of negative eigenvalues of the real symmetric matrix
// at omega with the hidden unknowns chosen last, and log|det|.
func (c *counter) negative(omega float64) (int, float64) {
	w := c.w
	u := len(w.nodes)
	n := u
	for _, k := range c.keep {
		if k != keepNone {
			n++
		}
	}
	a := c.a[:n*n]
	clear(a)
	add := func(i, j int, v float64) {
		if i >= 0 && j >= 0 {
			if i < j {
				i, j = j, i
			}
			a[i*n+j] += v
		}
	}
	for i := range w.nodes {
		a[i*n+i] = w.spring[i] - omega*omega*w.mass[i]
	}
	for _, l := range w.links {
		add(l.a, l.a, l.k)
		add(l.b, l.b, l.k)
		add(l.a, l.b, -l.k)
	}
	h := u
	for i := range w.elements {
		el := &w.elements[i]
		diag, off, b, d := el.realBlock(omega, c.keep[i])
		add(el.i, el.i, diag)
		add(el.j, el.j, diag)
		if el.i == el.j { // a loop of one piece: both halves meet on the diagonal
			add(el.i, el.i, 2*off)
		} else {
			add(el.i, el.j, off)
		}
		if c.keep[i] == keepNone {
			continue
		}
		near := b
		if c.keep[i] == keepOdd {
			near = -b
		}
		add(h, el.i, near)
		add(h, el.j, b)
		a[h*n+h] = d
		h++
	}
	return numeric.Inertia(a, n)
}

// below is the number of undamped natural vibrations with angular frequency
// below omega, rigid motions included, each with its multiplicity:
//
//	J = sum over pieces of floor(omega tau/pi) + number of negative eigenvalues of D.
//
// Where a hidden unknown is kept the two shares are counted together, which by
// Sylvester's law gives the same J without passing a pole.
// Source: Wittrick, Williams, A general algorithm for computing natural
// frequencies of elastic structures, Q. J. Mech. Appl. Math. 24 (1971).
func (c *counter) below(omega float64) int {
	if c.w.sys != nil {
		n, _ := c.w.sys.below(omega)
		return n
	}
	inner := c.choose(omega)
	neg, _ := c.negative(omega)
	return inner + neg
}

// span is an interval of frequency with the counts at its ends.
type span struct {
	lo, hi float64
	jlo    int
	jhi    int
}

// undampedModes finds the lowest roots of an undamped group, one more than
// asked so that it is known where the list ends.
func (w *network) undampedModes(want Want) (found, error) {
	if l, ok := w.lone(); ok {
		return l.modes(want, w.notes), nil
	}
	c := newCounter(w)
	f := found{notes: w.notes, complete: math.Inf(1)}
	most := want.Count + 1
	if len(w.elements) == 0 {
		most = min(most, w.massive()-w.rigid)
	}
	if most <= 0 {
		return f, nil
	}
	lo, hi, jhi, err := c.reach(most, 2*math.Pi*want.Below)
	if err != nil {
		return f, err
	}
	if jhi-w.rigid > 2*mostModes {
		return f, fmt.Errorf("modal: more than %d modes below %g Hz", mostModes, want.Below)
	}
	for _, omega := range c.roots(span{lo, hi, w.rigid, jhi}) {
		f.osc = append(f.osc, complex(0, omega))
	}
	if len(w.elements) > 0 || len(f.osc) < w.massive()-w.rigid {
		f.complete = hi
	}
	return f, nil
}

// massive is the number of unknowns with mass.
func (w *network) massive() int {
	n := 0
	for _, m := range w.mass {
		if m > 0 {
			n++
		}
	}
	return n
}

// reach gives bounds of frequency: none but rigid motions below lo, at least
// `most` vibrations or all those below the limit (rad/s, 0: none) under hi.
func (c *counter) reach(most int, limit float64) (lo, hi float64, jhi int, err error) {
	w := c.w
	unit := math.Pi / w.travel
	if w.travel == 0 {
		unit = w.swing()
	}
	hi = unit
	if w.travel > 0 {
		hi = unit * float64(most)
	}
	if limit > 0 && limit < hi {
		hi = limit
	}
	for step := 0; ; step++ {
		jhi = c.below(hi)
		if jhi-w.rigid >= most || (limit > 0 && hi >= limit) {
			break
		}
		if step == 400 {
			return 0, 0, 0, fmt.Errorf("modal: no %d modes below %g Hz", most, hi/2/math.Pi)
		}
		hi *= 1.2
		if limit > 0 {
			hi = math.Min(hi, limit)
		}
	}
	lo = math.Min(unit, hi) * 1e-6
	for step := 0; step < 30 && c.below(lo) > w.rigid; step++ {
		lo *= 1e-2
	}
	return lo, hi, jhi, nil
}

// swing is a frequency of the size of the slowest single mass on its springs.
func (w *network) swing() float64 {
	k := append([]float64(nil), w.spring...)
	for _, l := range w.links {
		if l.a >= 0 {
			k[l.a] += l.k
		}
		if l.b >= 0 {
			k[l.b] += l.k
		}
	}
	unit := math.Inf(1)
	for i, m := range w.mass {
		if m > 0 && k[i] > 0 {
			unit = math.Min(unit, math.Sqrt(k[i]/m))
		}
	}
	if math.IsInf(unit, 1) {
		return 1
	}
	return unit
}

// roots finds every root in a span: halving until each is alone in an interval
// over which the hidden unknowns need not change, then a bracketed root of the
// determinant. Roots that rounding cannot part are given as equal.
func (c *counter) roots(all span) []float64 {
	var out []float64
	stack := []span{all}
	for len(stack) > 0 {
		s := stack[len(stack)-1]
		stack = stack[:len(stack)-1]
		if s.jhi <= s.jlo {
			continue
		}
		mid := 0.5 * (s.lo + s.hi)
		if s.jhi == s.jlo+1 && (s.hi-s.lo)*c.w.longest < 0.4 && s.hi < 2*s.lo {
			if root, ok := c.alone(s); ok {
				out = append(out, root)
				continue
			}
		}
		// 8 rounding errors: what the counts themselves can tell apart.
		if s.hi-s.lo <= 8*0x1p-52*s.hi || mid <= s.lo || mid >= s.hi {
			for k := s.jlo; k < s.jhi; k++ {
				out = append(out, mid)
			}
			continue
		}
		j := min(max(c.below(mid), s.jlo), s.jhi)
		stack = append(stack, span{mid, s.hi, j, s.jhi}, span{s.lo, mid, s.jlo, j})
	}
	return out
}

// alone finds the one root in a span from the change of sign of det; false where
// rounding at an end hides the change.
func (c *counter) alone(s span) (float64, bool) {
	value := c.negative
	if c.w.sys != nil {
		value = c.w.sys.below // the sign of Delta is that of (-1)^J
	} else {
		c.choose(0.5 * (s.lo + s.hi))
	}
	ref := math.Inf(-1)
	det := func(omega float64) float64 {
		n, log := value(omega)
		if math.IsInf(ref, -1) {
			ref = log
		}
		v := math.Exp(log - ref)
		if n&1 == 1 {
			return -v
		}
		return v
	}
	flo := det(s.lo)
	fhi := det(s.hi)
	if flo == 0 || fhi == 0 || (flo > 0) == (fhi > 0) || math.IsInf(fhi, 0) {
		return 0, false
	}
	return numeric.Root(det, s.lo, s.hi, flo, fhi, 0), true
}
