package numeric

import (
	"math"
	"math/cmplx"
)

// ComplexLU holds the factors P A = L U of a square complex matrix.
type ComplexLU struct {
	n     int
	lu    []complex128 // row by row, L below the diagonal (ones left out), U on and above
	pivot []int        // row i was exchanged with row pivot[i]
	inv   []complex128 // reciprocals of the diagonal of U
	col   []complex128
}

// Factor computes the factors with partial pivoting and keeps its buffers for
// the next matrix. It reports false where a pivot is zero: A is then singular in
// the arithmetic.
//
// Shapes: a holds A row by row, length n*n; it is copied.
// Cost 2n^3/3 complex operations. Source: Golub, Van Loan, Matrix Computations,
// the chapter on general linear systems (from memory).
func (f *ComplexLU) Factor(a []complex128, n int) bool {
	if len(a) < n*n {
		panic("numeric: ComplexLU: matrix too short")
	}
	f.n = n
	f.lu = append(f.lu[:0], a[:n*n]...)
	f.pivot = f.pivot[:0]
	f.inv = f.inv[:0]
	for len(f.col) < n {
		f.col = append(f.col, 0)
	}
	lu := f.lu
	for k := 0; k < n; k++ {
		best, at := 0.0, k
		for i := k; i < n; i++ {
			v := lu[i*n+k]
			if m := math.Abs(real(v)) + math.Abs(imag(v)); m > best {
				best, at = m, i
			}
		}
		if !(best > 0) {
			return false
		}
		f.pivot = append(f.pivot, at)
		if at != k {
			for j := 0; j < n; j++ {
				lu[k*n+j], lu[at*n+j] = lu[at*n+j], lu[k*n+j]
			}
		}
		inv := 1 / lu[k*n+k]
		f.inv = append(f.inv, inv)
		row := lu[k*n : k*n+n]
		for i := k + 1; i < n; i++ {
			to := lu[i*n : i*n+n]
			if to[k] == 0 {
				continue
			}
			l := to[k] * inv
			to[k] = l
			for j := k + 1; j < n; j++ {
				to[j] -= l * row[j]
			}
		}
	}
	return true
}

// LogDet is a logarithm of det A: the real part is log|det A|, the imaginary
// part one of its phases, in (-pi, pi].
func (f *ComplexLU) LogDet() complex128 {
	re, phase := 0.0, complex(1, 0)
	for k := 0; k < f.n; k++ {
		d := f.lu[k*f.n+k]
		m := cmplx.Abs(d)
		re += math.Log(m)
		phase *= d / complex(m, 0)
		if f.pivot[k] != k {
			phase = -phase
		}
	}
	return complex(re, cmplx.Phase(phase))
}

// Trace is the trace of A^{-1} B for a square matrix B of the same order, row by
// row: the logarithmic derivative of det A where B is the derivative of A
// (Jacobi's formula). Cost 2n^3 complex operations at most.
func (f *ComplexLU) Trace(b []complex128) complex128 {
	n := f.n
	var sum complex128
	for c := 0; c < n; c++ {
		zero := true
		for i := 0; i < n; i++ {
			f.col[i] = b[i*n+c]
			zero = zero && f.col[i] == 0
		}
		if !zero {
			f.solve(f.col[:n])
			sum += f.col[c]
		}
	}
	return sum
}

// solve overwrites x with A^{-1} x.
func (f *ComplexLU) solve(x []complex128) {
	n := f.n
	for k := 0; k < n; k++ {
		if p := f.pivot[k]; p != k {
			x[k], x[p] = x[p], x[k]
		}
	}
	for i := 1; i < n; i++ {
		s := x[i]
		for j, l := range f.lu[i*n : i*n+i] {
			s -= l * x[j]
		}
		x[i] = s
	}
	for i := n - 1; i >= 0; i-- {
		s := x[i]
		row := f.lu[i*n : i*n+n]
		for j := i + 1; j < n; j++ {
			s -= row[j] * x[j]
		}
		x[i] = s * f.inv[i]
	}
}

// NullVectors gives `want` independent vectors that A maps closest to zero in
// the sense of Gauss elimination with complete pivoting: the last `want` pivots
// are taken as zero, their unknowns set to one in turn. Pivots are the moduli of
// the pivots in the order they were taken, by which a caller can judge the rank.
//
// Shapes: a holds A row by row, length n*n, and is overwritten; each vector has
// length n. Cost n^3 comparisons and operations.
// Source: Golub, Van Loan, Matrix Computations, on complete pivoting (from memory).
func NullVectors(a []complex128, n, want int) (vectors [][]complex128, pivots []float64) {
	if len(a) < n*n || want > n || want < 0 {
		panic("numeric: NullVectors: shapes do not fit")
	}
	cols := make([]int, n)
	for i := range cols {
		cols[i] = i
	}
	for k := 0; k < n; k++ {
		best, r, c := -1.0, k, k
		for i := k; i < n; i++ {
			for j := k; j < n; j++ {
				if m := cmplx.Abs(a[i*n+j]); m > best {
					best, r, c = m, i, j
				}
			}
		}
		pivots = append(pivots, best)
		for j := 0; j < n; j++ {
			a[k*n+j], a[r*n+j] = a[r*n+j], a[k*n+j]
		}
		for i := 0; i < n; i++ {
			a[i*n+k], a[i*n+c] = a[i*n+c], a[i*n+k]
		}
		cols[k], cols[c] = cols[c], cols[k]
		if k >= n-want || best == 0 {
			continue
		}
		for i := k + 1; i < n; i++ {
			l := a[i*n+k] / a[k*n+k]
			for j := k; j < n; j++ {
				a[i*n+j] -= l * a[k*n+j]
			}
		}
	}
	for w := 0; w < want; w++ {
		x := make([]complex128, n)
		x[n-want+w] = 1
		for i := n - want - 1; i >= 0; i-- {
			var s complex128
			for j := i + 1; j < n; j++ {
				s += a[i*n+j] * x[j]
			}
			if a[i*n+i] != 0 {
				x[i] = -s / a[i*n+i]
			}
		}
		out := make([]complex128, n)
		for i, c := range cols {
			out[c] = x[i]
		}
		vectors = append(vectors, out)
	}
	return vectors, pivots
}
