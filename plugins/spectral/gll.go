package spectral

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// legendre is P_p(x) and P_{p-1}(x) by the three-term recurrence.
func legendre(p int, x float64) (pp, pm float64) {
	pm, pp = 1, x
	if p == 0 {
		return 1, 0
	}
	for n := 2; n <= p; n++ {
		pm, pp = pp, ((2*float64(n)-1)*x*pp-(float64(n)-1)*pm)/float64(n)
	}
	return pp, pm
}

// lobatto returns the p+1 Gauss-Lobatto-Legendre points on [-1, 1], ascending,
// and their weights w = 2/(p(p+1)P_p^2). Quadrature with them is exact to degree
// 2p-1. The roots of P_p' come from Newton's iteration on
// (1-x^2)P_p' = p(P_{p-1} - x P_p), started at the Chebyshev-Lobatto points;
// both halves are computed together so that they mirror exactly. p >= 1.
// Source: Abramowitz and Stegun 1964, 25.4.32 (from memory).
func lobatto(p int) (x, w []float64) {
	x, w = make([]float64, p+1), make([]float64, p+1)
	fp := float64(p)
	for i := 0; i <= p/2; i++ {
		t := -math.Cos(math.Pi * float64(i) / fp)
		if i == 0 {
			t = -1
		} else if 2*i == p {
			t = 0
		} else {
			for k := 0; k < 50; k++ {
				pp, pm := legendre(p, t)
				// q = (1-x^2)P_p' has q' = -p(p+1) P_p.
				step := (pm - t*pp) * fp / (fp * (fp + 1) * pp)
				t += step
				if math.Abs(step) < 1e-16 {
					break
				}
			}
		}
		pp, _ := legendre(p, t)
		x[i], w[i] = t, 2/(fp*(fp+1)*pp*pp)
		x[p-i], w[p-i] = -t, w[i]
	}
	return x, w
}

// gauss returns the n Gauss-Legendre points on [-1, 1] and their weights,
// exact to degree 2n-1. n >= 1.
// Source: Abramowitz and Stegun 1964, 25.4.29 (from memory).
func gauss(n int) (x, w []float64) {
	x, w = make([]float64, n), make([]float64, n)
	for i := 0; i < (n+1)/2; i++ {
		t := -math.Cos(math.Pi * (float64(i) + 0.75) / (float64(n) + 0.5))
		if 2*i+1 == n {
			t = 0
		}
		var dp float64
		for k := 0; k < 50; k++ {
			pp, pm := legendre(n, t)
			dp = float64(n) * (pm - t*pp) / (1 - t*t)
			step := pp / dp
			t -= step
			if math.Abs(step) < 1e-16 {
				break
			}
		}
		x[i], w[i] = t, 2/((1-t*t)*dp*dp)
		x[n-1-i], w[n-1-i] = -t, w[i]
	}
	return x, w
}

// reference is an element of degree p on [-1, 1] for T = 1 and m = 1.
type reference struct {
	p      int
	x, w   []float64   // p+1 points and weights
	bary   []float64   // barycentric weights of the points
	d      [][]float64 // d[i][j] = l_j'(x_i)
	k      [][]float64 // k = d' diag(w) d
	mu     []float64   // p-1 eigenvalues of the fixed-ended problem, k v = mu w v
	top    float64     // largest eigenvalue with free ends
	v      []float64   // v[i*(p-1)+k]: value at inner point i+1 of mode k; v' diag(w) v = 1
	gx, gw []float64   // p+2 Gauss points and weights, for loads along the element
	gl     []float64   // gl[g*(p+1)+j]: l_j there
	// kappa[k] = sum_i v[i][k] k[i][0] is the pull of mode k on the first end. The
	// modes are symmetric or antisymmetric about the middle; the first even of them
	// are symmetric, with the same pull on the other end, the rest pull it the other way.
	kappa []float64
	even  int
}

// newReference builds the element of degree p >= 1. It reports false when the
// symmetric eigenvalue problem does not converge.
func newReference(p int) (*reference, bool) {
	r := &reference{p: p}
	r.x, r.w = lobatto(p)
	r.gx, r.gw = gauss(p + 2)
	n := p + 1
	r.bary = make([]float64, n)
	for i := range r.bary {
		// For these points the barycentric weights are (-1)^i sqrt(w_i) up to a factor.
		r.bary[i] = math.Sqrt(r.w[i])
		if i%2 == 1 {
			r.bary[i] = -r.bary[i]
		}
	}
	r.d = square(n)
	for i := 0; i < n; i++ {
		sum := 0.0
		for j := 0; j < n; j++ {
			if i != j {
				r.d[i][j] = r.bary[j] / r.bary[i] / (r.x[i] - r.x[j])
				sum += r.d[i][j]
			}
		}
		r.d[i][i] = -sum // a constant has no slope, exactly
	}
	r.gl = make([]float64, len(r.gx)*n)
	for g, x := range r.gx {
		r.shape(r.gl[g*n:(g+1)*n], x)
	}
	r.k = square(n)
	for i := 0; i < n; i++ {
		for j := 0; j <= i; j++ {
			s := 0.0
			for q := 0; q < n; q++ {
				s += r.w[q] * r.d[q][i] * r.d[q][j]
			}
			r.k[i][j], r.k[j][i] = s, s
		}
	}
	free := mat.NewSymDense(n, nil)
	for i := 0; i < n; i++ {
		for j := i; j < n; j++ {
			free.SetSym(i, j, r.k[i][j]/math.Sqrt(r.w[i]*r.w[j]))
		}
	}
	var eig mat.EigenSym
	if !eig.Factorize(free, false) {
		return nil, false
	}
	r.top = eig.Values(nil)[n-1]
	return r, r.inner()
}

// inner diagonalises the fixed-ended problem.
func (r *reference) inner() bool {
	m := r.p - 1
	r.kappa = make([]float64, m)
	if m == 0 {
		return true
	}
	r.even = (m + 1) / 2
	r.mu, r.v = make([]float64, m), make([]float64, m*m)
	return r.half(1, 0, r.even) && r.half(-1, r.even, m)
}

// half diagonalises the symmetric (sign 1) or antisymmetric (sign -1) half of the
// fixed-ended problem, on combinations of mirrored points, into modes lo .. hi-1.
func (r *reference) half(sign float64, lo, hi int) bool {
	n, m := hi-lo, r.p-1
	if n == 0 {
		return true
	}
	// Combination i is (e_i + sign e_(m-1-i))/sqrt 2, or the middle point alone.
	norm := func(i int) float64 {
		if 2*i == m-1 {
			return 0.5
		}
		return math.Sqrt(0.5)
	}
	a := mat.NewSymDense(n, nil)
	for i := 0; i < n; i++ {
		for j := i; j < n; j++ {
			direct := r.k[i+1][j+1] / math.Sqrt(r.w[i+1]*r.w[j+1])
			mirror := r.k[i+1][m-j] / math.Sqrt(r.w[i+1]*r.w[j+1])
			a.SetSym(i, j, 2*norm(i)*norm(j)*(direct+sign*mirror))
		}
	}
	var eig mat.EigenSym
	if !eig.Factorize(a, true) {
		return false
	}
	copy(r.mu[lo:hi], eig.Values(nil))
	var vec mat.Dense
	eig.VectorsTo(&vec)
	for i := 0; i < n; i++ {
		for k := 0; k < n; k++ {
			v := vec.At(i, k) * norm(i) / math.Sqrt(r.w[i+1])
			if 2*i == m-1 {
				v *= 2
				r.v[i*m+lo+k] = v
			} else {
				r.v[i*m+lo+k] = v
				r.v[(m-1-i)*m+lo+k] = sign * v
			}
		}
	}
	for i := 0; i < m; i++ {
		for k := lo; k < hi; k++ {
			r.kappa[k] += r.v[i*m+k] * r.k[i+1][0]
		}
	}
	return true
}

// shape writes the p+1 basis values l_j(x) into dst, x in [-1, 1], by the
// barycentric formula. Source: Berrut and Trefethen 2004, SIAM Review 46.
func (r *reference) shape(dst []float64, x float64) []float64 {
	sum := 0.0
	for j := range r.x {
		d := x - r.x[j]
		if d == 0 {
			clear(dst)
			dst[j] = 1
			return dst
		}
		dst[j] = r.bary[j] / d
		sum += dst[j]
	}
	for j := range dst {
		dst[j] /= sum
	}
	return dst
}

// slope writes the p+1 derivatives l_j'(x) into dst: the interpolant of the
// derivative, which has one degree less, is exact.
func (r *reference) slope(dst, work []float64, x float64) []float64 {
	r.shape(work, x)
	clear(dst)
	for i, l := range work {
		if l == 0 {
			continue
		}
		for j, d := range r.d[i] {
			dst[j] += l * d
		}
	}
	return dst
}

func square(n int) [][]float64 { return rectangle(n, n) }

func rectangle(rows, n int) [][]float64 {
	flat := make([]float64, rows*n)
	out := make([][]float64, rows)
	for i := range out {
		out[i] = flat[i*n : (i+1)*n]
	}
	return out
}
