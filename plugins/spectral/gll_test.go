package spectral

import (
	"math"
	"testing"
)

// Points and weights against Abramowitz and Stegun, table 25.6 / closed forms of
// the five-, four- and six-point rules (from memory).
func TestLobattoClosedForms(t *testing.T) {
	s := math.Sqrt
	cases := []struct {
		p    int
		x, w []float64 // positive half, from the middle out
	}{
		{1, []float64{1}, []float64{1}},
		{2, []float64{0, 1}, []float64{4. / 3, 1. / 3}},
		{3, []float64{s(1. / 5), 1}, []float64{5. / 6, 1. / 6}},
		{4, []float64{0, s(3. / 7), 1}, []float64{32. / 45, 49. / 90, 1. / 10}},
		{5, []float64{s(1./3 - 2*s(7)/21), s(1./3 + 2*s(7)/21), 1},
			[]float64{(14 + s(7)) / 30, (14 - s(7)) / 30, 1. / 15}},
	}
	for _, c := range cases {
		x, w := lobatto(c.p)
		for i := range c.x {
			k := c.p - len(c.x) + 1 + i
			if math.Abs(x[k]-c.x[i]) > 4e-16 || math.Abs(w[k]-c.w[i]) > 1e-15 {
				t.Errorf("p=%d: %.17g %.17g, want %.17g %.17g", c.p, x[k], w[k], c.x[i], c.w[i])
			}
		}
	}
}

// Both rules integrate every monomial of their degree: 2p-1 and 2n-1.
func TestQuadratureDegrees(t *testing.T) {
	check := func(what string, x, w []float64, degree int) {
		for d := 0; d <= degree; d++ {
			sum := 0.0
			for i := range x {
				sum += w[i] * math.Pow(x[i], float64(d))
			}
			want := 0.0
			if d%2 == 0 {
				want = 2 / float64(d+1)
			}
			// Rounding of at most 60 terms of size 1: 1e-13 chosen.
			if math.Abs(sum-want) > 1e-13 {
				t.Errorf("%s with %d points, x^%d: error %g", what, len(x), d, sum-want)
			}
		}
	}
	for n := 2; n <= 60; n += 7 {
		x, w := lobatto(n)
		check("Lobatto", x, w, 2*n-1)
		x, w = gauss(n)
		check("Gauss", x, w, 2*n-1)
	}
}

// An element interpolates and differentiates polynomials of its degree exactly,
// its stiffness is int u'^2, and its inner modes solve k v = mu w v.
func TestReferenceElement(t *testing.T) {
	for _, p := range []int{1, 2, 3, 8, 31} {
		r, ok := newReference(p)
		if !ok {
			t.Fatal("eigenvalues")
		}
		d := p
		l, ls, work := make([]float64, p+1), make([]float64, p+1), make([]float64, p+1)
		for _, x := range []float64{-1, -0.7, 0.123, r.x[p/2], 1} {
			r.shape(l, x)
			r.slope(ls, work, x)
			u, du := 0.0, 0.0
			for i := range l {
				u += l[i] * math.Pow(r.x[i], float64(d))
				du += ls[i] * math.Pow(r.x[i], float64(d))
			}
			// Chosen: rounding grows as p^2 in the slope.
			if math.Abs(u-math.Pow(x, float64(d))) > 1e-13 || math.Abs(du-float64(d)*math.Pow(x, float64(d-1))) > 1e-11 {
				t.Errorf("p=%d x=%g: %g, %g", p, x, u, du)
			}
		}
		energy := 0.0
		for i := range r.k {
			for j := range r.k {
				energy += r.k[i][j] * math.Pow(r.x[i], float64(d)) * math.Pow(r.x[j], float64(d))
			}
		}
		want := 2 * float64(d*d) / float64(2*d-1)
		if math.Abs(energy/want-1) > 1e-12 {
			t.Errorf("p=%d: int u'^2 = %g, want %g", p, energy, want)
		}
		testInner(t, r)
	}
}

func testInner(t *testing.T, r *reference) {
	m := r.p - 1
	for k := 0; k < m; k++ {
		ends := [2]float64{}
		for i := 0; i < m; i++ {
			s := 0.0
			for j := 0; j < m; j++ {
				s += r.k[i+1][j+1] * r.v[j*m+k]
			}
			if e := s - r.mu[k]*r.w[i+1]*r.v[i*m+k]; math.Abs(e) > 1e-12*r.top {
				t.Errorf("p=%d mode %d: residual %g", r.p, k, e)
			}
			ends[0] += r.v[i*m+k] * r.k[i+1][0]
			ends[1] += r.v[i*m+k] * r.k[i+1][r.p]
		}
		sign := 1.0
		if k >= r.even {
			sign = -1
		}
		if math.Abs(ends[0]-r.kappa[k]) > 1e-11*r.top || math.Abs(ends[1]-sign*r.kappa[k]) > 1e-11*r.top {
			t.Errorf("p=%d mode %d: pulls %g %g, kept %g with sign %g", r.p, k, ends[0], ends[1], r.kappa[k], sign)
		}
	}
}
