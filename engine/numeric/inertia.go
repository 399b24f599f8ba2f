package numeric

import "math"

// Inertia factors a real symmetric matrix as P A Pᵀ = L D Lᵀ, D with blocks of
// order 1 and 2, and returns how many eigenvalues of A are negative (by
// Sylvester's law of inertia those of D), and the logarithm of |det A|
// (-Inf where A is singular in the arithmetic; the zero pivots count as not
// negative).
//
// Shapes: a holds A row by row, length n*n; only the lower triangle is read and
// all of a is overwritten. Units: those of a.
// Validity: any symmetric matrix; complete pivoting bounds the growth of the
// factors, so the counts are those of a matrix within a few rounding errors of A.
// Cost n^3/3 operations and n^3/6 comparisons.
// Source: Bunch, Parlett, Direct methods for solving symmetric indefinite
// systems of linear equations, SIAM J. Numer. Anal. 8 (1971) 639-655.
func Inertia(a []float64, n int) (negative int, logAbsDet float64) {
	if len(a) < n*n {
		panic("numeric: Inertia: matrix too short")
	}
	// The share below which a diagonal pivot gives way to a block of order 2;
	// it minimises the bound on growth (same source).
	const alpha = 0.6403882032022076 // (1+sqrt(17))/8
	for k := 0; k < n; {
		diag, off := math.Abs(a[k*n+k]), 0.0
		d, r, c := k, k, k
		for i := k; i < n; i++ {
			if v := math.Abs(a[i*n+i]); v > diag {
				diag, d = v, i
			}
			for j := k; j < i; j++ {
				if v := math.Abs(a[i*n+j]); v > off {
					off, r, c = v, i, j
				}
			}
		}
		if diag == 0 && off == 0 {
			return negative, math.Inf(-1)
		}
		if diag >= alpha*off {
			swapSymmetric(a, n, k, d)
			p := a[k*n+k]
			if p < 0 {
				negative++
			}
			logAbsDet += math.Log(math.Abs(p))
			eliminateOne(a, n, k)
			k++
			continue
		}
		swapSymmetric(a, n, k, c) // c < r, so r keeps its place unless it is k
		swapSymmetric(a, n, k+1, r)
		det := a[k*n+k]*a[(k+1)*n+k+1] - a[(k+1)*n+k]*a[(k+1)*n+k]
		negative++ // det < 0 by the choice of the block: one eigenvalue of each sign
		logAbsDet += math.Log(math.Abs(det))
		eliminateTwo(a, n, k, det)
		k += 2
	}
	return negative, logAbsDet
}

// swapSymmetric exchanges rows and columns p <= q in the lower triangle.
func swapSymmetric(a []float64, n, p, q int) {
	if p == q {
		return
	}
	for j := 0; j < p; j++ {
		a[p*n+j], a[q*n+j] = a[q*n+j], a[p*n+j]
	}
	for i := p + 1; i < q; i++ {
		a[i*n+p], a[q*n+i] = a[q*n+i], a[i*n+p]
	}
	for i := q + 1; i < n; i++ {
		a[i*n+p], a[i*n+q] = a[i*n+q], a[i*n+p]
	}
	a[p*n+p], a[q*n+q] = a[q*n+q], a[p*n+p]
}

func eliminateOne(a []float64, n, k int) {
	inv := 1 / a[k*n+k]
	for i := k + 1; i < n; i++ {
		l := a[i*n+k] * inv
		if l == 0 {
			continue
		}
		for j := k + 1; j <= i; j++ {
			a[i*n+j] -= l * a[j*n+k]
		}
	}
}

func eliminateTwo(a []float64, n, k int, det float64) {
	p, q, s := a[k*n+k], a[(k+1)*n+k], a[(k+1)*n+k+1]
	for i := k + 2; i < n; i++ {
		x, y := a[i*n+k], a[i*n+k+1]
		l, m := (x*s-y*q)/det, (y*p-x*q)/det
		for j := k + 2; j <= i; j++ {
			a[i*n+j] -= l*a[j*n+k] + m*a[j*n+k+1]
		}
	}
}
