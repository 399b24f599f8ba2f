package numeric

import "math"

// Solve solves A X = B by Gauss elimination with partial pivoting. It reports
// false where a pivot is zero: A is then singular in the arithmetic.
//
// Shapes: a holds A row by row, length n*n, and is overwritten; b holds B row by
// row, length n*k, and is overwritten with X. Cost about n^3/3 + k n^2 complex
// operations, less where entries below the diagonal are zero.
// Accuracy: backward stable in practice.
// Source: Golub, Van Loan, Matrix Computations (from memory).
func Solve(a, b []complex128, n, k int) bool {
	if len(a) < n*n || len(b) < n*k {
		panic("numeric: Solve: shapes do not fit")
	}
	for c := 0; c < n; c++ {
		best, at := 0.0, c
		for i := c; i < n; i++ {
			v := a[i*n+c]
			if m := math.Abs(real(v)) + math.Abs(imag(v)); m > best {
				best, at = m, i
			}
		}
		if !(best > 0) {
			return false
		}
		if at != c {
			for j := c; j < n; j++ {
				a[c*n+j], a[at*n+j] = a[at*n+j], a[c*n+j]
			}
			for j := 0; j < k; j++ {
				b[c*k+j], b[at*k+j] = b[at*k+j], b[c*k+j]
			}
		}
		inv := 1 / a[c*n+c]
		for i := c + 1; i < n; i++ {
			if a[i*n+c] == 0 {
				continue
			}
			l := a[i*n+c] * inv
			for j := c + 1; j < n; j++ {
				a[i*n+j] -= l * a[c*n+j]
			}
			for j := 0; j < k; j++ {
				b[i*k+j] -= l * b[c*k+j]
			}
		}
	}
	for i := n - 1; i >= 0; i-- {
		inv := 1 / a[i*n+i]
		for j := 0; j < k; j++ {
			v := b[i*k+j]
			for c := i + 1; c < n; c++ {
				v -= a[i*n+c] * b[c*k+j]
			}
			b[i*k+j] = v * inv
		}
	}
	return true
}
