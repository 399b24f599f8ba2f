package numeric

import (
	"math"
	"math/cmplx"
)

// LogDet computes log det A and its derivative along B, that is for A(s) with
// A' = B
//
//	log det A,   (log det A)' = tr(A^{-1} B)   (Jacobi's formula),
//
// by Gauss elimination with partial pivoting of A + eps B with eps^2 = 0. The
// imaginary part of the logarithm is one of its values, in (-pi, pi]. It reports
// false where a pivot is zero: A is then singular in the arithmetic.
//
// Shapes: a and b hold A and B row by row, length n*n, and are overwritten; last
// has length n and is scratch. Work is done within the rows' last entries only: about 6 n w^2 complex operations for bandwidth w.
// Accuracy: rounding times the condition of A, relative to the slope.
// Source: Golub, Van Loan, Matrix Computations, on elimination with pivoting and
// on banded systems (from memory); the rest is the product rule.
func LogDet(a, b []complex128, last []int, n int) (log, slope complex128, ok bool) {
	if len(a) < n*n || len(b) < n*n || len(last) < n {
		panic("numeric: LogDet: shapes do not fit")
	}
	for i := 0; i < n; i++ {
		last[i] = n - 1
		for last[i] > 0 && a[i*n+last[i]] == 0 && b[i*n+last[i]] == 0 {
			last[i]--
		}
	}
	sum, phase := 0.0, complex(1, 0)
	for k := 0; k < n; k++ {
		best, at := 0.0, k
		for i := k; i < n; i++ {
			v := a[i*n+k]
			if m := math.Abs(real(v)) + math.Abs(imag(v)); m > best {
				best, at = m, i
			}
		}
		if !(best > 0) {
			return 0, 0, false
		}
		if at != k {
			end := max(last[k], last[at])
			for j := k; j <= end; j++ {
				a[k*n+j], a[at*n+j] = a[at*n+j], a[k*n+j]
				b[k*n+j], b[at*n+j] = b[at*n+j], b[k*n+j]
			}
			last[k], last[at] = last[at], last[k]
			phase = -phase
		}
		pivot := a[k*n+k]
		inv := 1 / pivot
		size := cmplx.Abs(pivot)
		sum += math.Log(size)
		phase *= pivot * complex(1/size, 0)
		slope += b[k*n+k] * inv
		end := last[k] + 1
		row, drow := a[k*n:k*n+end], b[k*n:k*n+end]
		for i := k + 1; i < n; i++ {
			if a[i*n+k] == 0 && b[i*n+k] == 0 {
				continue
			}
			to, dto := a[i*n:i*n+end], b[i*n:i*n+end]
			l := to[k] * inv
			dl := (dto[k] - l*drow[k]) * inv
			for j := k + 1; j < end; j++ {
				to[j] -= l * row[j]
				dto[j] -= dl*row[j] + l*drow[j]
			}
			last[i] = max(last[i], last[k])
		}
	}
	return complex(sum, cmplx.Phase(phase)), slope, true
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
