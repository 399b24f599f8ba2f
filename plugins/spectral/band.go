package spectral

import (
	"math"
	"sort"
)

type number interface{ float64 | complex128 }

// band is a symmetric matrix of half width w, its lower half row by row; after
// factor its unit lower triangle and the diagonal of L D L'. No rows are
// exchanged: the mass matrix is positive definite, and K/s + C + s M has a
// positive definite real part for every s to the right of the imaginary axis,
// for which elimination in the given order is stable (Higham 1998, Math. Comp.
// 67, from memory).
type band[T number] struct {
	n, w int
	a    []T
}

func newBand[T number](n, w int) *band[T] {
	return &band[T]{n: n, w: w, a: make([]T, n*(w+1))}
}

// add adds to the element (i, j) and with it to (j, i); |i-j| <= w. Called once
// for each pair.
func (b *band[T]) add(i, j int, v T) {
	if i < j {
		i, j = j, i
	}
	b.a[i*(b.w+1)+b.w-i+j] += v
}

func (b *band[T]) factor() {
	w := b.w
	for i := 0; i < b.n; i++ {
		row := b.a[i*(w+1) : (i+1)*(w+1)]
		lo := max(0, i-w)
		for j := lo; j < i; j++ {
			other := b.a[j*(w+1) : (j+1)*(w+1)]
			sum := row[w-i+j]
			for k := max(lo, j-w); k < j; k++ {
				sum -= row[w-i+k] * other[w-j+k]
			}
			row[w-i+j] = sum
		}
		d := row[w]
		for j := lo; j < i; j++ {
			l := row[w-i+j] / b.a[j*(w+1)+w]
			d -= l * row[w-i+j]
			row[w-i+j] = l
		}
		row[w] = d
	}
}

// solve replaces x by the solution; the matrix has been factored.
func (b *band[T]) solve(x []T) {
	w := b.w
	for i := 0; i < b.n; i++ {
		sum := x[i]
		row := b.a[i*(w+1) : (i+1)*(w+1)]
		for k := max(0, i-w); k < i; k++ {
			sum -= row[w-i+k] * x[k]
		}
		x[i] = sum
	}
	for i := 0; i < b.n; i++ {
		x[i] /= b.a[i*(w+1)+w]
	}
	for i := b.n - 1; i > 0; i-- {
		row := b.a[i*(w+1) : (i+1)*(w+1)]
		for k := max(0, i-w); k < i; k++ {
			x[k] -= row[w-i+k] * x[i]
		}
	}
}

// narrow orders the nodes of a graph so that neighbours come close together
// (reverse Cuthill and McKee 1969): the place of each node, and the half width.
func narrow(near [][]int) (place []int, width int) {
	n := len(near)
	place = make([]int, n)
	seen := make([]bool, n)
	var order []int
	starts := make([]int, n)
	for i := range starts {
		starts[i] = i
	}
	sort.SliceStable(starts, func(a, b int) bool { return len(near[starts[a]]) < len(near[starts[b]]) })
	for _, s := range starts {
		if seen[s] {
			continue
		}
		seen[s] = true
		order = append(order, s)
		for at := len(order) - 1; at < len(order); at++ {
			first := len(order)
			for _, k := range near[order[at]] {
				if !seen[k] {
					seen[k] = true
					order = append(order, k)
				}
			}
			tail := order[first:]
			sort.SliceStable(tail, func(a, b int) bool { return len(near[tail[a]]) < len(near[tail[b]]) })
		}
	}
	for i, k := range order {
		place[k] = n - 1 - i
	}
	for i := range near {
		for _, k := range near[i] {
			width = max(width, int(math.Abs(float64(place[i]-place[k]))))
		}
	}
	return place, width
}
