package scatter

import "math/cmplx"

// system is a sparse set of linear equations whose unknowns are numbered so that
// neighbours lie near each other.
type system struct {
	rows  [][]entry
	right []complex128
}

type entry struct {
	col   int
	value complex128
}

func newSystem(n int) *system {
	return &system{rows: make([][]entry, n), right: make([]complex128, n)}
}

func (s *system) add(row, col int, value complex128) {
	s.rows[row] = append(s.rows[row], entry{col, value})
}

// solve finds the unknowns by Gaussian elimination with partial pivoting inside
// the band, each equation first divided by its largest coefficient because
// displacements, slopes and forces stand side by side. ok is false where the
// equations have no single answer.
//
// Shapes: n equations; about 4 n w^2 complex operations for half bandwidth w.
// Accuracy: rounding times the condition of the scaled matrix.
// Source: Golub, Van Loan, Matrix Computations, on banded systems (from memory).
func (s *system) solve() (x []complex128, ok bool) {
	n, w := len(s.rows), s.halfWidth()
	width := 3*w + 1 // row i holds columns i-w .. i+2w
	a := make([]complex128, n*width)
	x = make([]complex128, n)
	for i, row := range s.rows {
		largest := 0.0
		for _, e := range row {
			largest = max(largest, cmplx.Abs(e.value))
		}
		if !(largest > 0) || cmplx.IsInf(complex(largest, 0)) {
			return nil, false
		}
		scale := complex(1/largest, 0)
		for _, e := range row {
			a[i*width+e.col-i+w] += e.value * scale
		}
		x[i] = s.right[i] * scale
	}
	at := func(i, j int) *complex128 { return &a[i*width+j-i+w] }
	for k := 0; k < n; k++ {
		pivot, size := k, 0.0
		last := min(n-1, k+w)
		for i := k; i <= last; i++ {
			if v := cmplx.Abs(*at(i, k)); v > size {
				pivot, size = i, v
			}
		}
		if !(size > 1e-300) {
			return nil, false
		}
		end := min(n-1, k+2*w)
		if pivot != k {
			for j := k; j <= end; j++ {
				p, q := at(k, j), at(pivot, j)
				*p, *q = *q, *p
			}
			x[k], x[pivot] = x[pivot], x[k]
		}
		for i := k + 1; i <= last; i++ {
			f := *at(i, k) / *at(k, k)
			if f == 0 {
				continue
			}
			for j := k; j <= end; j++ {
				*at(i, j) -= f * *at(k, j)
			}
			x[i] -= f * x[k]
		}
	}
	for k := n - 1; k >= 0; k-- {
		for j := k + 1; j <= min(n-1, k+2*w); j++ {
			x[k] -= *at(k, j) * x[j]
		}
		x[k] /= *at(k, k)
		if cmplx.IsNaN(x[k]) || cmplx.IsInf(x[k]) {
			return nil, false
		}
	}
	return x, true
}

func (s *system) halfWidth() int {
	w := 0
	for i, row := range s.rows {
		for _, e := range row {
			w = max(w, e.col-i, i-e.col)
		}
	}
	return w
}
