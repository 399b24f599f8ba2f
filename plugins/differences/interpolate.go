package differences

import "math"

// maxPoints is the largest number of points of an interpolation.
const maxPoints = 6

// lagrange sets w[k], k = 0 .. points-1, so that the sum of w[k] f(k) is the
// deriv-th derivative (0, 1 or 2) at x of the polynomial through f(0), f(1), ...
// It is exact for polynomials of degree points-1.
// Source: the recursion of Fornberg, Math. Comp. 51 (1988) 699-706.
func lagrange(w *[maxPoints]float64, points int, x float64, deriv int) {
	var c [3][maxPoints]float64
	c[0][0] = 1
	c1, c4 := 1.0, -x
	for i := 1; i < points; i++ {
		top := min(i, deriv)
		c2, c5 := 1.0, c4
		c4 = float64(i) - x
		for j := 0; j < i; j++ {
			c3 := float64(i - j)
			c2 *= c3
			if j == i-1 {
				for k := top; k >= 1; k-- {
					c[k][i] = c1 * (float64(k)*c[k-1][i-1] - c5*c[k][i-1]) / c2
				}
				c[0][i] = -c1 * c5 * c[0][i-1] / c2
			}
			for k := top; k >= 1; k-- {
				c[k][j] = (c4*c[k][j] - float64(k)*c[k-1][j]) / c3
			}
			c[0][j] = c4 * c[0][j] / c3
		}
		c1 = c2
	}
	*w = c[deriv]
}

// stencil is a weighted sum of consecutive points.
type stencil struct {
	at int // first point
	n  int
	w  [maxPoints]float64
}

// newStencil reads the deriv-th derivative with respect to the point index at
// index x of points first .. last; point 0 lies at base. It uses up to points of
// them, around x where the ends allow. Just outside the ends it extrapolates.
func newStencil(base, first, last int, x float64, points, deriv int) stencil {
	if r := math.Round(x); math.Abs(x-r) < 1e-9 {
		x = r
	}
	all := last - first + 1
	points = min(points, all)
	from := int(math.Floor(x)) - points/2 + 1
	if deriv > 0 && x == math.Floor(x) && points%2 == 0 && points < all && points < maxPoints {
		points++ // centred on a point of the grid: one more makes it symmetric
		from = int(x) - points/2
	}
	from = min(max(from, first), last+1-points)
	s := stencil{at: base + from, n: points}
	if deriv < points { // a single point has no slope
		lagrange(&s.w, points, x-float64(from), deriv)
	}
	return s
}

func (s *stencil) read(u []float64) float64 {
	sum := 0.0
	for k, v := range u[s.at : s.at+s.n] {
		sum += s.w[k] * v
	}
	return sum
}

// times multiplies all weights.
func (s *stencil) times(f float64) {
	for k := range s.w {
		s.w[k] *= f
	}
}
