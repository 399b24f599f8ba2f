package numeric

import (
	"math"
	"math/cmplx"
	"math/rand"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// symmetric makes a random symmetric matrix; with hollow its diagonal is zero,
// so that every pivot is a block of order 2 at first.
func symmetric(r *rand.Rand, n int, hollow bool) []float64 {
	a := make([]float64, n*n)
	for i := 0; i < n; i++ {
		for j := 0; j <= i; j++ {
			v := r.NormFloat64() * math.Pow(10, 2*r.NormFloat64())
			if i == j && hollow {
				v = 0
			}
			a[i*n+j], a[j*n+i] = v, v
		}
	}
	return a
}

func TestInertiaAgainstEigenvalues(t *testing.T) {
	r := rand.New(rand.NewSource(1))
	for trial := 0; trial < 500; trial++ {
		n := 1 + r.Intn(9)
		a := symmetric(r, n, trial%3 == 0 && n > 1)
		var eig mat.EigenSym
		if !eig.Factorize(mat.NewSymDense(n, append([]float64(nil), a...)), false) {
			t.Fatal("no eigenvalues")
		}
		want, log, least, most := 0, 0.0, math.Inf(1), 0.0
		for _, v := range eig.Values(nil) {
			if v < 0 {
				want++
			}
			log += math.Log(math.Abs(v))
			least, most = math.Min(least, math.Abs(v)), math.Max(most, math.Abs(v))
		}
		if least < 1e-12*most {
			continue // rounding decides the sign
		}
		got, logDet := Inertia(a, n)
		if got != want {
			t.Errorf("trial %d: %d negative, want %d", trial, got, want)
		}
		// The smallest eigenvalue is known to rounding of the largest.
		if math.Abs(logDet-log) > 1e-13*float64(n)*most/least+1e-12 {
			t.Errorf("trial %d: log|det| %g, want %g", trial, logDet, log)
		}
	}
}

func TestInertiaSingular(t *testing.T) {
	if n, log := Inertia([]float64{0, 0, 0, 0}, 2); n != 0 || !math.IsInf(log, -1) {
		t.Errorf("zero matrix: %d, %g", n, log)
	}
	if n, log := Inertia([]float64{-1, 1, 1, -1}, 2); n != 1 || !math.IsInf(log, -1) {
		t.Errorf("rank one: %d, %g", n, log)
	}
}

func complexMatrix(r *rand.Rand, n int) []complex128 {
	a := make([]complex128, n*n)
	for i := range a {
		a[i] = complex(r.NormFloat64(), r.NormFloat64())
	}
	return a
}

// det by expansion along the first row.
func det(a []complex128, n int) complex128 {
	if n == 0 {
		return 1
	}
	var sum complex128
	for c := 0; c < n; c++ {
		var minor []complex128
		for i := 1; i < n; i++ {
			for j := 0; j < n; j++ {
				if j != c {
					minor = append(minor, a[i*n+j])
				}
			}
		}
		f := a[c]
		if c%2 == 1 {
			f = -f
		}
		sum += f * det(minor, n-1)
	}
	return sum
}

func TestLogDet(t *testing.T) {
	r := rand.New(rand.NewSource(2))
	last := make([]int, 8)
	for trial := 0; trial < 200; trial++ {
		n := 1 + r.Intn(6)
		a, b := complexMatrix(r, n), complexMatrix(r, n)
		if trial%2 == 1 { // few entries, so that rows end early
			for i := 0; i < n; i++ {
				for j := 0; j < n; j++ {
					if i-j > 1 || j-i > 1 {
						a[i*n+j], b[i*n+j] = 0, 0
					}
				}
			}
		}
		if trial%5 == 2 { // zeros that do not stay zero
			a[r.Intn(n*n)], a[r.Intn(n*n)] = 0, 0
		}
		want := det(a, n)
		if want == 0 {
			continue
		}
		const h = 1e-5
		at := func(h float64) complex128 {
			c := make([]complex128, n*n)
			for i := range c {
				c[i] = a[i] + complex(h, 0)*b[i]
			}
			return det(c, n)
		}
		// A symmetric difference of the determinant: order h^2 for entries of
		// size 1.
		diff := (at(h) - at(-h)) / (2 * h)
		log, slope, ok := LogDet(append([]complex128(nil), a...), append([]complex128(nil), b...), last, n)
		if got := cmplx.Exp(log); !ok || cmplx.Abs(got-want) > 1e-11*cmplx.Abs(want)+1e-13 {
			t.Errorf("trial %d: det %v, want %v", trial, got, want)
		}
		if got := slope * want; cmplx.Abs(got-diff) > 1e-6*(cmplx.Abs(diff)+1) {
			t.Errorf("trial %d: slope gives %v, difference %v", trial, got, diff)
		}
	}
	if _, _, ok := LogDet([]complex128{1, 2, 2, 4}, make([]complex128, 4), last, 2); ok {
		t.Error("a singular matrix has a logarithm")
	}
}

func TestNullVectors(t *testing.T) {
	r := rand.New(rand.NewSource(3))
	for trial := 0; trial < 100; trial++ {
		n := 2 + r.Intn(6)
		rank := r.Intn(n)
		a := make([]complex128, n*n)
		for k := 0; k < rank; k++ {
			x, y := complexMatrix(r, n), complexMatrix(r, n)
			for i := 0; i < n; i++ {
				for j := 0; j < n; j++ {
					a[i*n+j] += x[i] * y[j]
				}
			}
		}
		vectors, pivots := NullVectors(append([]complex128(nil), a...), n, n-rank)
		for _, v := range vectors {
			size := 0.0
			for _, x := range v {
				size = math.Max(size, cmplx.Abs(x))
			}
			for i := 0; i < n; i++ {
				var s complex128
				for j := 0; j < n; j++ {
					s += a[i*n+j] * v[j]
				}
				// Rounding of products of size 10 over a small pivot.
				if cmplx.Abs(s) > 1e-10*size {
					t.Errorf("trial %d: A v = %v", trial, s)
				}
			}
		}
		if len(vectors) != n-rank || len(pivots) != n {
			t.Errorf("trial %d: %d vectors, %d pivots", trial, len(vectors), len(pivots))
		}
		if rank > 0 && pivots[rank] > 1e-9*pivots[0] {
			t.Errorf("trial %d: pivots %v for rank %d", trial, pivots, rank)
		}
	}
}

func TestRoot(t *testing.T) {
	for name, c := range map[string]struct {
		f            func(float64) float64
		lo, hi, want float64
	}{
		"cosine": {math.Cos, 1, 2, math.Pi / 2},
		"cube":   {func(x float64) float64 { return x*x*x - 2 }, 0, 5, math.Cbrt(2)},
		"steep":  {func(x float64) float64 { return math.Exp(40*x) - math.Exp(30) }, -1, 1, 0.75},
		"flat":   {func(x float64) float64 { return math.Pow(x-1, 9) }, 0, 1.7, 1},
		"step":   {func(x float64) float64 { return math.Copysign(1, x-0.3) }, 0, 1, 0.3},
	} {
		calls := 0
		f := func(x float64) float64 {
			calls++
			if x < c.lo || x > c.hi {
				t.Errorf("%s: called at %g outside the bracket", name, x)
			}
			return c.f(x)
		}
		got := Root(f, c.lo, c.hi, c.f(c.lo), c.f(c.hi), 0)
		// Rounding of f: the nine-fold zero is hidden in (1e-308)^(1/9) only by
		// underflow, 1e-34; all are met to a few roundings of their size.
		if math.Abs(got-c.want) > 8*0x1p-52*math.Abs(c.want) {
			t.Errorf("%s: %.17g, want %.17g after %d calls", name, got, c.want, calls)
		}
		if calls > 200 { // what the method promises at the most
			t.Errorf("%s: %d calls", name, calls)
		}
	}
}

// Random systems: the residual is a few rounding errors of the terms.
func TestSolve(t *testing.T) {
	r := rand.New(rand.NewSource(6))
	for trial := 0; trial < 50; trial++ {
		n, k := 1+r.Intn(12), 1+r.Intn(3)
		a, b := make([]complex128, n*n), make([]complex128, n*k)
		for i := range a {
			a[i] = complex(r.NormFloat64(), r.NormFloat64())
		}
		for i := range b {
			b[i] = complex(r.NormFloat64(), r.NormFloat64())
		}
		x := append([]complex128(nil), b...)
		if !Solve(append([]complex128(nil), a...), x, n, k) {
			t.Fatal("singular")
		}
		for i := 0; i < n; i++ {
			for j := 0; j < k; j++ {
				rest, size := b[i*k+j], 1.0
				for c := 0; c < n; c++ {
					rest -= a[i*n+c] * x[c*k+j]
					size += cmplx.Abs(a[i*n+c] * x[c*k+j])
				}
				if cmplx.Abs(rest) > 1e-13*size { // n^2 rounding errors
					t.Errorf("residual %.2g of %.2g", cmplx.Abs(rest), size)
				}
			}
		}
	}
	if Solve(make([]complex128, 4), make([]complex128, 2), 2, 1) {
		t.Error("a matrix of zeros was solved")
	}
}
