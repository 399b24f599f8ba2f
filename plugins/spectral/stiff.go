package spectral

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// stiff holds the directions in which damping is stiff: a dashpot at a light end point forgets its velocity within
// M/C, perhaps a thousandth of a window. What is left of that motion in a state is
// rounding, but every time derivative multiplies it by C/M. For the energy account
// the derivatives along such directions are therefore taken from the balance that
// holds there, one order up,
//
//	lambda a = f' - K v - j,   lambda j = f'' - K a - i,   lambda i = f''' - K j,
//
// per unit mass, with lambda an eigenvalue of M^-1 C among the end points. It
// neglects (omega/lambda)^2.
type stiff struct {
	sys    *system
	rate   []float64   // lambda, 1/s, descending
	shape  [][]float64 // [.][ends] direction, unit modal mass
	dual   [][]float64 // [.][ends] M times it
	near   [][]int     // elements at each end point
	fast   []bool      // of each bracket: it follows at once and counts as a dashpot
	kv     []float64
	window float64 // s, longest window
}

// stiffLimit is lambda h from which on a direction counts as stiff. Chosen: the
// account of a pulse over a dashpot at lambda h = 43 closes to 1e-5 without this and
// to 3e-4 with it; from about a thousand on rounding makes it meaningless without.
const stiffLimit = 60.0

// newStiff finds the stiff directions for windows of length h; nil if there are none.
func newStiff(s *system, h float64) *stiff {
	n := s.ends
	c := mat.NewSymDense(max(n, 1), nil)
	st := &stiff{sys: s, fast: make([]bool, len(s.brackets)), window: h}
	worst := 0.0
	for i := range s.rows {
		for _, t := range s.rows[i] {
			c.SetSym(i, t.col, t.c/math.Sqrt(s.mass[i]*s.mass[t.col]))
		}
	}
	for b, k := range s.brackets {
		if k.k/k.c*h > stiffLimit {
			st.fast[b] = true
			c.SetSym(k.end, k.end, c.At(k.end, k.end)+k.c/s.mass[k.end])
			if o := k.other; o >= 0 {
				c.SetSym(o, o, c.At(o, o)+k.c/s.mass[o])
				c.SetSym(k.end, o, c.At(k.end, o)-k.c/math.Sqrt(s.mass[k.end]*s.mass[o]))
			}
		}
	}
	for i := 0; i < n; i++ {
		worst = math.Max(worst, c.At(i, i))
	}
	if 2*worst*h < stiffLimit { // no eigenvalue of such a matrix exceeds twice its diagonal
		return nil
	}
	var eig mat.EigenSym
	if !eig.Factorize(c, true) {
		return nil
	}
	var vec mat.Dense
	eig.VectorsTo(&vec)
	for k := n - 1; k >= 0; k-- {
		if l := eig.Values(nil)[k]; l*h > stiffLimit {
			y, d := make([]float64, n), make([]float64, n)
			for i := range y {
				root := math.Sqrt(s.mass[i])
				y[i], d[i] = vec.At(i, k)/root, vec.At(i, k)*root
			}
			st.rate, st.shape, st.dual = append(st.rate, l), append(st.shape, y), append(st.dual, d)
		}
	}
	if len(st.rate) == 0 {
		return nil
	}
	st.near = make([][]int, n)
	for e := range s.elements {
		for _, end := range s.elements[e].end {
			if end >= 0 {
				st.near[end] = append(st.near[end], e)
			}
		}
	}
	st.kv = make([]float64, n)
	return st
}

// pull is row i of K x.
func (st *stiff) pull(i int, x []float64) float64 {
	s := st.sys
	sum := 0.0
	for _, t := range s.rows[i] {
		sum += t.k * x[s.inner+t.col]
	}
	for _, e := range st.near[i] {
		el := &s.elements[e]
		for _, half := range el.halves() {
			part := 0.0
			for k := half.lo; k < half.hi; k++ {
				part += s.kappa[k] * x[k]
			}
			if el.end[0] == i {
				sum += part
			}
			if el.end[1] == i {
				sum += half.sign * part
			}
		}
	}
	return sum
}

// settle replaces the components of dst (a derivative of the velocity) along the
// stiff directions by (f - K x)/lambda, where x and f are the derivatives of
// displacement and load that balance it. f may be nil.
func (st *stiff) settle(dst, x, f []float64, h float64) {
	in := st.sys.inner
	for q, l := range st.rate {
		if l*h <= stiffLimit {
			return
		}
		now, want := 0.0, 0.0
		for i, y := range st.shape[q] {
			if y == 0 {
				continue
			}
			now += st.dual[q][i] * dst[in+i]
			// Far from the dashpot a direction has only traces.
			if math.Abs(y*st.dual[q][i]) > 1e-12 {
				g := -st.pull(i, x)
				if f != nil {
					g += f[in+i]
				}
				want += y * g
			}
		}
		st.shift(dst, q, want/l-now)
	}
}

// correct adds the inertia that settle left out: dst -= next/lambda.
func (st *stiff) correct(dst, next []float64, h float64) {
	in := st.sys.inner
	for q, l := range st.rate {
		if l*h <= stiffLimit {
			return
		}
		sum := 0.0
		for i, d := range st.dual[q] {
			sum += d * next[in+i]
		}
		st.shift(dst, q, -sum/l)
	}
}

func (st *stiff) shift(dst []float64, q int, by float64) {
	in := st.sys.inner
	for i, y := range st.shape[q] {
		dst[in+i] += by * y
	}
}
