package characteristic

import "math"

// matrix is a dense square or oblong matrix, a[i*cols+j].
type matrix struct {
	rows, cols int
	a          []float64
}

func newMatrix(rows, cols int) matrix { return matrix{rows, cols, make([]float64, rows*cols)} }

func (m matrix) at(i, j int) float64     { return m.a[i*m.cols+j] }
func (m matrix) set(i, j int, v float64) { m.a[i*m.cols+j] = v }
func (m matrix) add(i, j int, v float64) { m.a[i*m.cols+j] += v }

// addTo adds m x to y.
func (m matrix) addTo(y, x []float64) {
	for i := 0; i < m.rows; i++ {
		row := m.a[i*m.cols : (i+1)*m.cols]
		s := 0.0
		for j, v := range row {
			s += v * x[j]
		}
		y[i] += s
	}
}

func mul(dst, a, b matrix) {
	for i := range dst.a {
		dst.a[i] = 0
	}
	for i := 0; i < a.rows; i++ {
		out := dst.a[i*b.cols : (i+1)*b.cols]
		for k := 0; k < a.cols; k++ {
			v := a.a[i*a.cols+k]
			if v == 0 {
				continue
			}
			for j, w := range b.a[k*b.cols : (k+1)*b.cols] {
				out[j] += v * w
			}
		}
	}
}

func (m matrix) norm() float64 {
	most := 0.0
	for i := 0; i < m.rows; i++ {
		s := 0.0
		for _, v := range m.a[i*m.cols : (i+1)*m.cols] {
			s += math.Abs(v)
		}
		most = math.Max(most, s)
	}
	return most
}

// exponential is e^m for a square m: Taylor polynomial of degree 16 of m/2^s
// with norm at most 1/2 (remainder below 1e-19), squared s times.
func exponential(m matrix) matrix {
	n := m.rows
	s := 0
	for norm := m.norm(); norm > 0.5 && s < 200; norm /= 2 {
		s++
	}
	scaled := newMatrix(n, n)
	for i, v := range m.a {
		scaled.a[i] = math.Ldexp(v, -s)
	}
	e, t, u := newMatrix(n, n), newMatrix(n, n), newMatrix(n, n)
	for i := 0; i < n; i++ {
		e.set(i, i, 1)
		t.set(i, i, 1)
	}
	for k := 1; k <= 16; k++ {
		mul(u, t, scaled)
		for i := range u.a {
			u.a[i] /= float64(k)
			e.a[i] += u.a[i]
		}
		t, u = u, t
	}
	for ; s > 0; s-- {
		mul(u, e, e)
		e, u = u, e
	}
	return e
}

// invert is the inverse of a small matrix by elimination with row exchange;
// false where it has none.
func invert(m matrix) (matrix, bool) {
	n := m.rows
	a, inv := newMatrix(n, n), newMatrix(n, n)
	copy(a.a, m.a)
	for i := 0; i < n; i++ {
		inv.set(i, i, 1)
	}
	for c := 0; c < n; c++ {
		p := c
		for i := c + 1; i < n; i++ {
			if math.Abs(a.at(i, c)) > math.Abs(a.at(p, c)) {
				p = i
			}
		}
		if !(math.Abs(a.at(p, c)) > 0) {
			return inv, false
		}
		for j := 0; j < n; j++ {
			a.a[c*n+j], a.a[p*n+j] = a.a[p*n+j], a.a[c*n+j]
			inv.a[c*n+j], inv.a[p*n+j] = inv.a[p*n+j], inv.a[c*n+j]
		}
		d := 1 / a.at(c, c)
		for j := 0; j < n; j++ {
			a.a[c*n+j] *= d
			inv.a[c*n+j] *= d
		}
		for i := 0; i < n; i++ {
			if f := a.at(i, c); i != c && f != 0 {
				for j := 0; j < n; j++ {
					a.a[i*n+j] -= f * a.a[c*n+j]
					inv.a[i*n+j] -= f * inv.a[c*n+j]
				}
			}
		}
	}
	return inv, true
}

// propagator advances x' = A x + B (c0 + c1 s + c2 s^2), s = share of the step.
type propagator struct {
	e matrix    // n x n
	g [3]matrix // n x m, columns of 1, s, s^2
}

// propagate prepares a step of length h by one exponential of the system with
// its inputs appended (Van Loan 1978).
func propagate(a, b matrix, h float64) propagator {
	n, m := a.rows, b.cols
	size := n + 3*m
	big := newMatrix(size, size)
	for i := 0; i < n; i++ {
		for j := 0; j < n; j++ {
			big.set(i, j, a.at(i, j)*h)
		}
		for j := 0; j < m; j++ {
			big.set(i, n+j, b.at(i, j)*h)
		}
	}
	// The appended states are c0 + c1 s + c2 s^2 and its scaled derivatives.
	for j := 0; j < m; j++ {
		big.set(n+j, n+m+j, 1)
		big.set(n+m+j, n+2*m+j, 1)
	}
	x := exponential(big)
	p := propagator{e: newMatrix(n, n)}
	for k := range p.g {
		p.g[k] = newMatrix(n, m)
	}
	scale := [3]float64{1, 1, 2}
	for i := 0; i < n; i++ {
		for j := 0; j < n; j++ {
			p.e.set(i, j, x.at(i, j))
		}
		for k := range p.g {
			for j := 0; j < m; j++ {
				p.g[k].set(i, j, scale[k]*x.at(i, n+k*m+j))
			}
		}
	}
	return p
}

// taylor advances x by h with inputs c[0] + c[1] s + c[2] s^2 (each B-weighted
// already, length n) without preparing a propagator: the series of the solution
// on parts short enough that it converges at once. work holds 2n numbers.
func taylor(a matrix, norm, h float64, x []float64, c *[3][]float64, work []float64) {
	n := a.rows
	parts := math.Ceil(norm * h)
	if parts < 1 {
		parts = 1
	}
	d := 1 / parts
	t, u := work[:n], work[n:2*n]
	for p := 0.0; p < parts; p++ {
		s := p * d
		copy(t, x)
		for k := 1; k <= 24; k++ {
			for i := range u {
				u[i] = 0
			}
			a.addTo(u, t)
			for i := range u {
				switch k {
				case 1:
					u[i] += c[0][i] + s*(c[1][i]+s*c[2][i])
				case 2:
					u[i] += d * (c[1][i] + 2*s*c[2][i])
				case 3:
					u[i] += d * d * c[2][i]
				}
				t[i] = u[i] * h * d / float64(k)
				x[i] += t[i]
			}
		}
	}
}
